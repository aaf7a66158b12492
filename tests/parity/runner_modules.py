"""Runner modules as the phone would run them: translated like its own code, and registered as one more chunk.

A runner is a pure-Python module with `run(case) -> str`, where case is [op, [arguments]]. Floats travel as the
16 hex digits of their bits, because JSON numbers lose their type between the runtimes; results are texts.
An exception becomes "E:" + its class + ":" + its text, by `answers` below, which runs in both runtimes.
"""

from __future__ import annotations

import ast
from pathlib import Path

import build
from translate import Module, Translator

PARITY = Path(__file__).resolve().parent

# Cases arrive as JSON text and leave as JSON text. The browser's own JSON reads them, into plain lists:
# what arrives from JavaScript as a list is turned into Python's own here. Numbers must be whole.
DRIVER = '''
from browser import window
from javascript import JSON
import {runner}
from parity_answers import answers


def plain(value):
    if hasattr(value, "length") and not isinstance(value, str):
        return [plain(value[i]) for i in range(value.length)]
    return value


def run(text):
    cases = plain(JSON.parse(text))
    return JSON.stringify(answers({runner}.run, cases))


window.fieldcheckRunCases = run
'''


def runner_chunk(runner: str, repo: Path, folder: Path = PARITY) -> str:
    """JavaScript text of a chunk with the runner module `runner` from `folder`, what it imports from there, its
    driver and the answers module."""
    own = [Module(name, f"{name}.py", text) for name, text in needed(["parity_answers", runner], folder).items()]
    modules = [*own, Module("parity_driver", "parity_driver.py", DRIVER.format(runner=runner))]
    with Translator(repo / "webui" / ".cache") as translator:
        lines = [build.entry(m.name, m.file, False, False, translator.function(m)) for m in modules]
    return build.register("parity", lines)


def needed(names: list[str], folder: Path) -> dict[str, str]:
    """Name -> source of these modules and of all that they import from `folder` or from here."""
    found: dict[str, str] = {}
    waiting = list(names)
    while waiting:
        name = waiting.pop()
        paths = [place / f"{name}.py" for place in (folder, PARITY) if (place / f"{name}.py").is_file()]
        if name in found or not paths:
            continue
        found[name] = paths[0].read_text(encoding="utf-8")
        for node in ast.walk(ast.parse(found[name])):
            if isinstance(node, ast.ImportFrom):
                waiting.append(node.module or "")
            elif isinstance(node, ast.Import):
                waiting += [one.name for one in node.names]
    return found
