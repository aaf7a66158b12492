"""Builds the phone: translates its Python ahead of time and lays out the files that a server hands over.

Run by hatchling when the wheel is built (the result lands in fieldcheck/_data/phone), and by hand in a checkout:

    python webui/build.py [--out webui/dist] [--cache webui/.cache]

The result is index.html, manifest.json and the folder a/ of files whose names carry their content's hash.
Nothing in it runs text as code, stands inline, or needs more than `script-src 'self'; style-src 'self'`.
"""

from __future__ import annotations

import argparse
import ast
import json
import re
import shutil
import sys
from pathlib import Path
from typing import Any

try:
    from hatchling.builders.hooks.plugin.interface import BuildHookInterface
except ImportError:  # a checkout without hatchling can build the phone all the same
    BuildHookInterface = object  # type: ignore[assignment, misc]

sys.path.insert(0, str(Path(__file__).resolve().parent))
from layout import Folder, Manifest, build_number, icon_links, page, put_web_manifest, script_tags, stylesheet_links
from translate import Module, TranslationError, Translator

# Which module goes to which chunk: the longest name here that is the module's, or a package above it, decides;
# one with a point at its end speaks only of what lies below. The page loads "core" to start; the rest comes when it
# is idle or asked for.
CHUNKS = {
    "__main__": "core",
    "sys": "core",
    "app": "core",
    "app.parts": "screens",
    "app.screens": "core",
    "app.screens.": "screens",
    "app.screens.jobs": "core",
    "fieldcheck": "core",
    "fieldcheck.engine": "core",
    "fieldcheck.engine.": "engine",
    "fieldcheck.engine.chain": "core",
    "fieldcheck.engine.errors": "core",
    "fieldcheck.engine.frozen": "core",
    "fieldcheck.engine.texts": "core",
    "fieldcheck.engine.event": "core",
    "fieldcheck.engine.events": "core",
    "fieldcheck.engine.physics.": "physics",
    "fieldcheck.engine.physics.registry": "engine",
    "fieldcheck.engine.physics.function_table": "engine",
}
ONE_EACH = {"physics"}  # each module below gets a chunk of its own: physics.windings, physics.rectifiers, ...
STDLIB = ["math"]  # modules of Brython's standard library that ship with core
BUILT_IN = {"browser", "javascript", "sys"}  # inside brython.js, or SYS
NOT_BUILT_IN = {"timer", "ajax", "svg", "local_storage", "session_storage", "template", "websocket", "worker"}
# Brython prints what was not caught to sys.stderr of the module `sys`, of which the phone needs no more than this.
SYS = "from _sys import stderr, stdout\n"
MAIN = "from app.main import start\nstart()\n"

def chunk_of(name: str) -> str:
    """The chunk that a module belongs to, by the table CHUNKS."""
    above = [known for known in CHUNKS if f"{name}.".startswith(known.rstrip(".") + ".") and name + "." != known]
    if not above:
        raise TranslationError(f"{name}: the table CHUNKS in webui/build.py does not say to which chunk it goes")
    nearest = max(above, key=len)
    chunk = CHUNKS[nearest]
    if chunk in ONE_EACH:
        return f"{chunk}.{name[len(nearest) :].split('.')[0]}"
    return chunk


def modules_below(folder: Path, name: str, shown: str) -> list[Module]:
    """Every module of the package in `folder`, sorted by name. shown: the folder's path as tracebacks show it."""
    found: dict[str, Module] = {}
    for path in sorted(folder.rglob("*.py")):
        parts = path.relative_to(folder).with_suffix("").parts
        package = parts[-1] == "__init__"
        dotted = ".".join((name, *(parts[:-1] if package else parts)))
        file = f"{shown}/{path.relative_to(folder).as_posix()}"
        found[dotted] = Module(dotted, file, path.read_text(encoding="utf-8"), package)
    for dotted in list(found):
        while dotted != name:  # a folder without __init__.py is a package too
            dotted = dotted.rpartition(".")[0]
            file = shown + dotted[len(name) :].replace(".", "/") + "/__init__.py"
            found.setdefault(dotted, Module(dotted, file, "", True))
    return [found[dotted] for dotted in sorted(found)]


def phone_modules(repo: Path) -> tuple[list[Module], str]:
    """All Python of the phone, and the version: the engine, webui/app, a bare `fieldcheck`, and the program."""
    found = re.search(r'^__version__ = "(.+)"$', (repo / "fieldcheck" / "__init__.py").read_text(), re.M)
    version = found.group(1) if found else "0"
    modules = [
        Module("__main__", "app/__main__.py", MAIN),
        Module("sys", "stdlib/sys.py", SYS),
        Module("fieldcheck", "fieldcheck/__init__.py", f'__version__ = "{version}"\n', True),
        *modules_below(repo / "fieldcheck" / "engine", "fieldcheck.engine", "fieldcheck/engine"),
        *modules_below(repo / "webui" / "app", "app", "app"),
    ]
    for module in modules[3:]:
        check_imports(module, {m.name for m in modules})
        check_start(module, {m.name for m in modules})
    return modules, version


def check_imports(module: Module, shipped: set[str]) -> None:
    """TranslationError naming file and line of an import that the phone could not carry out."""
    for node in ast.walk(ast.parse(module.source, module.file)):
        if isinstance(node, ast.Import):
            names = [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            names = [absolute(node, module)]
        else:
            continue
        for name in names:
            parts = [*name.split("."), *(a.name for a in node.names if name == "browser")]
            known = name in shipped or name in STDLIB or parts[0] in BUILT_IN
            if not known or (parts[0] == "browser" and NOT_BUILT_IN.intersection(parts)):
                raise TranslationError(
                    f"{module.file}:{node.lineno}: the phone has no module {'.'.join(parts)}\n"
                    f"    it has the engine, app, {', '.join(sorted([*BUILT_IN, *STDLIB]))}"
                )


def check_start(module: Module, shipped: set[str]) -> None:
    """TranslationError when a module of core imports, while it starts, one whose chunk is not there yet."""
    if chunk_of(module.name) != "core":
        return
    waiting: list[ast.AST] = [ast.parse(module.source, module.file)]
    while waiting:
        node = waiting.pop()
        if isinstance(node, (ast.FunctionDef, ast.AsyncFunctionDef, ast.Lambda)):
            continue  # imported when called
        waiting.extend(ast.iter_child_nodes(node))
        names = [alias.name for alias in node.names] if isinstance(node, ast.Import) else []
        if isinstance(node, ast.ImportFrom):
            above = absolute(node, module)
            names = [above, *(f"{above}.{alias.name}" for alias in node.names)]
        for name in names:
            if name in shipped and chunk_of(name) != "core":
                raise TranslationError(
                    f"{module.file}:{node.lineno}: the start would need {name}, of the chunk {chunk_of(name)}\n"  # type: ignore[attr-defined]
                    "    import it inside a function, after platform.loadChunk, or move it to core in CHUNKS"
                )


def absolute(node: ast.ImportFrom, module: Module) -> str:
    """The dotted name that `from ... import` means, dots in front resolved."""
    if node.level == 0:
        return node.module or ""
    above = module.name.split(".") if module.package else module.name.split(".")[:-1]
    above = above[: len(above) - (node.level - 1)]
    return ".".join([*above, node.module] if node.module else above)


def chunk_texts(modules: list[Module], translator: Translator) -> dict[str, str]:
    """Chunk name -> JavaScript text that registers its modules, core with the standard library's."""
    entries: dict[str, list[str]] = {"core": []}
    for name in STDLIB:
        entries["core"].append(entry(name, f"stdlib/{name}.js", False, True, translator.stdlib(name)))
    for module in modules:
        line = entry(module.name, module.file, module.package, False, translator.function(module))
        entries.setdefault(chunk_of(module.name), []).append(line)
    return {name: register(name, lines) for name, lines in sorted(entries.items())}


def entry(name: str, file: str, package: bool, javascript: bool, function: str) -> str:
    """One line of a chunk's table."""
    facts = json.dumps({"pkg": package, "js": javascript, "file": file})[:-1]
    return f"{json.dumps(name)}: {facts}, \"run\": {function}}}"


def register(chunk: str, entries: list[str]) -> str:
    """The text of a chunk: one call that hands its modules to the loader, in runtime/loader.js."""
    return f"fieldcheckChunks.register({json.dumps(chunk)}, {{\n" + ",\n".join(entries) + "\n})\n"


def build(out: Path, repo: Path, cache: Path | None = None, base: str = "") -> Manifest:
    """Builds the phone of the checkout `repo` into the folder `out`, which is emptied first.

    cache: where translations are kept (beside `out` when left out). base: put before every address in
    index.html, as "/phone/"; empty for addresses relative to it.
    Raises TranslationError when some Python cannot be shipped.
    """
    modules, version = phone_modules(repo)
    with Translator(cache or out.parent / ".cache") as translator:
        chunks = chunk_texts(modules, translator)
        runtime = translator.runtime()
        translated = translator.translated
    if out.exists() and any(out.iterdir()) and not (out / "manifest.json").exists():
        raise TranslationError(f"{out} holds something else than a phone: name another folder, or empty it yourself")
    shutil.rmtree(out, ignore_errors=True)
    folder = Folder(out)
    webui = repo / "webui"
    styles = [folder.put_hashed(p.name, p.read_bytes()) for p in sorted((webui / "css").glob("*.css"))]
    pictures = {p.name: folder.put_hashed(p.name, p.read_bytes()) for p in sorted((webui / "pictures").glob("*.svg"))}
    icons = {p.name: folder.put_hashed(p.name, p.read_bytes()) for p in sorted((webui / "icons").glob("*.*"))}
    scripts = [folder.put_hashed("brython.js", runtime.encode())]
    for script in (webui / "runtime" / "loader.js", webui / "platform.js"):
        scripts.append(folder.put_hashed(script.name, script.read_bytes()))
    table = {}
    for name, text in chunks.items():
        if name != "core":
            path = folder.put_hashed(f"{name}.js", text.encode())
            table[name] = {"url": path.removeprefix("a/"), "integrity": folder.files[path]["integrity"]}
    boot = folder.put_hashed("boot.js", (webui / "runtime" / "boot.js").read_bytes())
    web_manifest = put_web_manifest(folder, webui / "manifest.webmanifest", icons)
    links = stylesheet_links(folder, styles, base) + icon_links(icons, web_manifest, base)
    number = build_number(folder, chunks["core"])
    head = {"version": version, "build": number, "pictures": {name: base + path for name, path in pictures.items()}}
    core = f"fieldcheckChunks.table({json.dumps(head)}, {json.dumps(table)})\n{chunks['core']}"
    scripts += [folder.put_hashed("core.js", core.encode()), boot]
    folder.put("index.html", page(webui / "index.html", links, script_tags(folder, scripts, base)).encode())
    lines = {c: sum(m.source.count("\n") for m in modules if chunk_of(m.name) == c) for c in chunks}
    listed = {c: {"python_lines": lines[c], **table.get(c, {})} for c in chunks}
    made = Manifest(version, number, listed, folder.files, translated)
    shown = {"version": version, "build": number, "chunks": listed, "files": made.files}
    (out / "manifest.json").write_text(json.dumps(shown, indent=1, sort_keys=True) + "\n")
    return made


class CustomBuildHook(BuildHookInterface):  # type: ignore[type-arg]
    """Puts the phone into the wheel; an editable install only gets it built in the checkout."""

    def initialize(self, version: str, build_data: dict[str, Any]) -> None:
        repo = Path(self.root)
        out = repo / "webui" / "dist"
        build(out, repo)
        if version != "editable":
            build_data["force_include"][str(out)] = "fieldcheck/_data/phone"


def main() -> int:
    repo = Path(__file__).resolve().parent.parent
    options = argparse.ArgumentParser(description="Build the phone's files.")
    options.add_argument("--out", type=Path, default=repo / "webui" / "dist", help="folder to fill (emptied first)")
    options.add_argument("--cache", type=Path, default=None, help="where translations are kept")
    options.add_argument("--base", default="", help="put before every address in index.html, as /phone/")
    given = options.parse_args()
    try:
        made = build(given.out, repo, given.cache, given.base)
    except TranslationError as error:
        print(error, file=sys.stderr)
        return 1
    size = sum(facts["bytes"] for facts in made.files.values())
    core = made.chunks["core"]["python_lines"]
    print(
        f"phone {made.version} build {made.build}: {len(made.files)} files, {size} bytes, "
        f"{made.translated} modules translated, {core} lines of Python to start"
    )
    return 0


if __name__ == "__main__":
    sys.exit(main())
