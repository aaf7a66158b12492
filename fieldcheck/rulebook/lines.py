"""Where each key of a TOML file stands: path -> line.

Only for messages, never for meaning. The house style (one key a line) is what it follows; a key inside an inline table
or a list over several lines resolves to the line on which that begins.
"""

import re
from typing import Any

Path = tuple[str | int, ...]

_HEADER = re.compile(r"^\s*(\[\[?)\s*([^\[\]]+?)\s*\]\]?\s*(?:#.*)?$")
_NAME = r"""(?:[A-Za-z0-9_-]+|"[^"]*"|'[^']*')"""
_KEY = re.compile(rf"^\s*({_NAME}(?:\s*\.\s*{_NAME})*)\s*=(.*)$")
_PART = re.compile(_NAME)
_TEXTS = re.compile(r'"(?:[^"\\]|\\.)*"|\'[^\']*\'|#.*$')


def index(text: str) -> dict[Path, int]:
    """path -> line (from 1) of every header and key of a TOML text."""
    found: dict[Path, int] = {(): 1}
    counts: dict[Path, int] = {}
    table: Path = ()
    waiting_for = ""
    depth = 0
    for number, line in enumerate(text.splitlines(), start=1):
        if waiting_for:
            waiting_for = "" if waiting_for in line else waiting_for
            continue
        if depth > 0:
            depth += _open_brackets(line)
            continue
        header = _HEADER.match(line)
        if header:
            table = _table(header.group(1) == "[[", _parts(header.group(2)), counts)
            for length in range(1, len(table) + 1):
                found.setdefault(table[:length], number)
            continue
        key = _KEY.match(line)
        if key:
            parts = _parts(key.group(1))
            for length in range(1, len(parts) + 1):
                found.setdefault((*table, *parts[:length]), number)
            waiting_for = _unfinished(key.group(2))
            depth = 0 if waiting_for else max(0, _open_brackets(key.group(2)))
    return found


def line_of(lines: dict[Path, int], path: Path) -> int:
    """The line of a path, or of its nearest parent that has one."""
    for length in range(len(path), -1, -1):
        if path[:length] in lines:
            return lines[path[:length]]
    return 1


def at(data: Any, path: Path) -> Any:
    """What stands at a path of the parsed data, or None."""
    for one in path:
        try:
            data = data[one]
        except (KeyError, IndexError, TypeError):
            return None
    return data


def _parts(text: str) -> list[str]:
    return [one.strip("\"'") for one in _PART.findall(text)]


def _table(many: bool, parts: list[str], counts: dict[Path, int]) -> Path:
    """The path of a header: the last of each list of tables on its way, a new one for [[...]]."""
    path: Path = ()
    for place, part in enumerate(parts):
        path = (*path, part)
        if many and place == len(parts) - 1:
            counts[path] = counts.get(path, -1) + 1
        if path in counts:
            path = (*path, counts[path])
    return path


def _unfinished(value: str) -> str:
    """The quotes for which a text over several lines waits, or ""."""
    for quotes in ('"""', "'''"):
        if value.count(quotes) == 1:
            return quotes
    return ""


def _open_brackets(value: str) -> int:
    bare = _TEXTS.sub("", value)
    return bare.count("[") + bare.count("{") - bare.count("]") - bare.count("}")
