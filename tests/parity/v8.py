"""Cases run through the shipped phone code in an embedded V8: no browser, no document, under a second to start."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

from runner_modules import PARITY, runner_chunk
from translate import open_v8

REPO = PARITY.parent.parent


def run_in_v8(cases: list[Any], runner_module: str, phone: Path, folder: Path = PARITY) -> list[str]:
    """What runner_module.run answers to each case, under the brython.js, loader, core and physics of `phone`.

    cases: [[op, [arguments]], ...] of texts, whole numbers, booleans and lists. folder: where the runner lies.
    """
    v8 = open_v8(shipped(phone, "brython"))
    try:
        # Without a document Brython takes `window` away from its browser module; the driver's needs it.
        v8.eval('__BRYTHON__.module_setattr(__BRYTHON__.imported["browser"], "window", globalThis); 0')
        v8.eval(shipped(phone, "loader") + "\n;0")
        for name in chunk_names(phone):
            v8.eval(shipped(phone, name) + "\n;0")
        v8.eval(runner_chunk(runner_module, REPO, folder) + "\n;0")
        v8.eval(
            "var faults = []; __BRYTHON__.handle_error = e => faults.push(__BRYTHON__.error_trace(e));"
            'fieldcheckChunks.begin("parity_driver"); 0'
        )
        fault = v8.eval("faults.join('\\n')")
        if fault:
            raise RuntimeError(fault)
        return list(json.loads(v8.call("fieldcheckRunCases", json.dumps(cases))))
    finally:
        v8.close()


def chunk_names(phone: Path) -> list[str]:
    """core first, then the engine and its physics; not the screens, which need a document."""
    named = json.loads((phone / "manifest.json").read_text())["chunks"]
    return ["core", *sorted(name for name in named if name.split(".")[0] in ("engine", "physics"))]


def shipped(phone: Path, name: str) -> str:
    """Text of the one shipped script a/<name>.<hash>.js."""
    found = list((phone / "a").glob(f"{name}.{'[0-9a-f]' * 12}.js"))
    if len(found) != 1:
        raise FileNotFoundError(f"{len(found)} files, not one, are called {name} in {phone}")
    return found[0].read_text(encoding="utf-8")
