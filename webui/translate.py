"""Turns Python source into the JavaScript that the phone runs, with Brython's own translator in an embedded V8.

Three things live here, and only here, because they depend on Brython's insides: the patches to brython.js,
the few globals that it wants when there is no browser, and the call of its translator. The version is pinned,
and every patch asserts that the text which it changes occurs exactly once, so an update cannot slip through.
"""

from __future__ import annotations

import ast
import hashlib
import importlib.metadata
import importlib.resources
import json
from dataclasses import dataclass
from pathlib import Path
from types import TracebackType
from typing import Any

PINNED = "3.15.0"

# Brython asks for these when it is not in a browser. `process` makes it leave the document alone.
NO_BROWSER = """
globalThis.self = globalThis; globalThis.window = globalThis; globalThis.global = globalThis
globalThis.addEventListener = () => {}
globalThis.Node = class Node {}; globalThis.Event = globalThis.Event || class Event {}
globalThis.module = {exports: {}}; globalThis.process = {release: {name: "node"}}
globalThis.console = {log() {}, warn() {}, error() {}, info() {}, debug() {}}
globalThis.URL = class URL { constructor(text) { this.pathname = text; this.search = ""; this.hash = "" } }
0"""

# Generated names come from counters and chance: set back each time, so that equal source gives equal text.
STEADY = """
let dice = 1
Math.random = () => (dice = dice * 48271 % 2147483647) / 2147483647
0"""
NAME_COUNTER = "var uuid=Math.floor(Math.random()*1000000)"
STEADY_COUNTER = "var uuid=100000;$B.reset_names=function(){uuid=100000}"
TRANSLATOR = """
__BRYTHON__.$options = {js_tab: 1}
globalThis.translate = (name, file, source) => {
  const B = __BRYTHON__
  B.$py_UUID = dice = 1
  B.reset_names()
  B.url2name[file] = name
  const js = B.py2js({src: source, filename: file, imported: true}, name, name, B.builtins_scope).to_js()
  return js + "\\nreturn locals_" + B.scope_name(name)
}
0"""

# (what it is for, text that stands in brython.js exactly once, text that takes its place)
PATCHES = [
    ("a feature test that the policy would log as a violation", 'eval("async function* f(){}")', ""),
    (
        "classes of the syntax tree, built from text when the file loads",
        "ast[kl]=Function(...arg_list,body)",
        "ast[kl]=(function(names,stars){return function(){for(var i=0;i<names.length;i++){var v=arguments[i];"
        "this[names[i]]=stars[i]?$B.$list(v===undefined?[]:v):v}}})(arg_list.slice(),"
        "arg_list.length?args.split(',').map(a=>a.split(/\\s+/)[0].endsWith('*')):[])",
    ),
]
COMPILER_STARTS = "// >>> brython compiler chain\n"
COMPILER_ENDS = "// <<< brython compiler chain\n"
BUILTIN_DOCS = "var docs={ArithmeticError:"
BUILTIN_DOCS_END = "__doc__=docs[key]}}}\n"


class TranslationError(Exception):
    """Some Python cannot be shipped to the phone. The text says which file and line, and what to do."""


@dataclass(frozen=True)
class Module:
    """One module to ship: dotted name, file name as tracebacks show it, source text, and whether it is a package."""

    name: str
    file: str
    source: str
    package: bool = False


def brython_file(name: str) -> str:
    """Text of a file that Brython's package carries; refuses any version but the pinned one."""
    version = importlib.metadata.version("brython")
    if version != PINNED:
        raise TranslationError(f"brython {version} is installed, but the patches were made for {PINNED}")
    return (importlib.resources.files("brython") / "data" / name).read_text(encoding="utf-8")


def replaced_once(text: str, old: str, new: str, purpose: str) -> str:
    """text with its one occurrence of old replaced; TranslationError when there is none, or more than one."""
    if text.count(old) != 1:
        raise TranslationError(f"brython.js holds {text.count(old)} times, not once, the place of: {purpose}")
    return text.replace(old, new)


def cut_once(text: str, start: str, end: str, purpose: str) -> str:
    """text without what stands from start to end, both included; both must occur exactly once, in this order."""
    replaced_once(text, start, "", purpose)
    replaced_once(text, end, "", purpose)
    head, rest = text.split(start)
    if end not in rest:
        raise TranslationError(f"brython.js has the end before the start of: {purpose}")
    return head + rest.split(end)[1]


def runtime_js() -> str:
    """brython.js as the phone gets it: no eval and no Function at load, no translator, no built-in help texts."""
    text = brython_file("brython.js")
    for purpose, old, new in PATCHES:
        text = replaced_once(text, old, new, purpose)
    text = cut_once(text, COMPILER_STARTS, COMPILER_ENDS, "the translator")
    return cut_once(text, BUILTIN_DOCS, BUILTIN_DOCS_END, "help texts of built-ins")


def stdlib_js(name: str) -> str:
    """Source of one module of the standard library that Brython keeps as JavaScript, such as math."""
    text = brython_file("brython_stdlib.js")
    table: dict[str, Any] = json.JSONDecoder().raw_decode(text[text.index('{"$timestamp"') :])[0]
    if name not in table or table[name][0] != ".js":
        raise TranslationError(f'"{name}" is not a JavaScript module of Brython\'s standard library')
    return str(table[name][1])


def without_docstrings(source: str) -> str:
    """The same program without docstrings, every other statement on the line where it was."""
    lines = source.encode().split(b"\n")
    for node in ast.walk(ast.parse(source)):
        if not isinstance(node, (ast.Module, ast.ClassDef, ast.FunctionDef, ast.AsyncFunctionDef)):
            continue
        doc = node.body[0] if node.body else None
        if not (isinstance(doc, ast.Expr) and isinstance(doc.value, ast.Constant) and isinstance(doc.value.value, str)):
            continue
        first, last = doc.lineno - 1, (doc.end_lineno or doc.lineno) - 1
        tail = lines[last][doc.end_col_offset :]
        if tail.strip() and not tail.strip().startswith(b"#"):
            continue  # something follows on the same line: leave it
        lines[first] = lines[first][: doc.col_offset] + (b"pass" if len(node.body) == 1 else b"")
        for i in range(first + 1, last + 1):
            lines[i] = b""
    return b"\n".join(lines).decode()


class Translator:
    """Translates modules; keeps what it did under `cache`, so that only changed ones cost anything.

    V8 starts with the first module that is not in the cache. Use as a context manager: an open V8 keeps
    the process from ending.
    """

    def __init__(self, cache: Path) -> None:
        self.cache = cache
        self.translated = 0
        self._v8: Any = None
        here = Path(__file__).read_bytes()
        self._salt = hashlib.sha256(here + importlib.metadata.version("brython").encode()).hexdigest()

    def __enter__(self) -> Translator:
        self.cache.mkdir(parents=True, exist_ok=True)
        (self.cache / ".gitignore").write_text("*\n")
        return self

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None, tb: TracebackType | None) -> None:
        if self._v8 is not None:
            self._v8.close()
            self._v8 = None

    def function(self, module: Module) -> str:
        """A JavaScript function expression that runs the module's code and returns its names."""
        return self._kept(json.dumps([module.name, module.file, module.source]), lambda: self._translate(module))

    def runtime(self) -> str:
        """runtime_js(), from the cache."""
        return self._kept("brython.js", runtime_js)

    def stdlib(self, name: str) -> str:
        """A JavaScript function expression around one JavaScript module of Brython's standard library."""
        return self._kept("stdlib " + name, lambda: "function(){" + stdlib_js(name) + "\n}")

    def _kept(self, what: str, make: Any) -> str:
        kept = self.cache / (hashlib.sha256((self._salt + what).encode()).hexdigest() + ".js")
        if kept.exists():
            return kept.read_text(encoding="utf-8")
        text: str = make()
        fresh = kept.with_suffix(f".{id(self)}.new")
        fresh.write_text(text, encoding="utf-8")
        fresh.replace(kept)
        return text

    def _translate(self, module: Module) -> str:
        if self._v8 is None:
            whole = replaced_once(brython_file("brython.js"), NAME_COUNTER, STEADY_COUNTER, "the counter of names")
            self._v8 = open_v8(STEADY[:-1] + whole)
            self._v8.eval(TRANSLATOR)
        try:
            js = self._v8.call("translate", module.name, module.file, without_docstrings(module.source))
        except Exception as error:
            raise TranslationError(f"{module.file}: Brython cannot translate it: {error}") from error
        self.translated += 1
        lines = js.split("\n")
        # Indentation is a fifth of the text. It goes unless a literal might span lines.
        if "`" not in js and not any(line.endswith("\\") for line in lines):
            lines = [line.lstrip(" ") for line in lines]
        return "function(){" + "\n".join(lines) + "}"


def open_v8(brython: str) -> Any:
    """An embedded V8 in which this text of brython.js was run. The caller must close() it."""
    from py_mini_racer import MiniRacer

    v8 = MiniRacer()
    v8.eval(NO_BROWSER)
    v8.eval(brython + "\n;0")
    v8.eval("__BRYTHON__.$options = {}; 0")
    return v8
