"""Where a key stands in a TOML file of the house style: one key a line, [table] and [[table]] headers.

For messages only, never for meaning: what is not found falls back to the nearest parent.
"""

from __future__ import annotations

from typing import Any

Path = tuple[str | int, ...]


def index(text: str) -> dict[Path, int]:
    """Path of each key and table -> line number from 1, as ("limit", 1, "entry", 0, "at_most") -> 42."""
    lines: dict[Path, int] = {(): 1}
    counts: dict[Path, int] = {}
    table: Path = ()
    inside = ""
    for number, raw in enumerate(text.split("\n"), 1):
        line = raw.strip()
        if inside:
            inside = "" if inside in line else inside
        elif line.startswith("[[") and "]]" in line:
            table = _element(_keys(line[2 : line.index("]]")]), counts)
            lines[table] = number
        elif line.startswith("[") and "]" in line:
            table = _resolved(_keys(line[1 : line.index("]")]), counts)
            lines.setdefault(table, number)
        elif "=" in line and not line.startswith("#"):
            key, _, value = line.partition("=")
            lines.setdefault(table + _keys(key), number)
            for quotes in ('"' * 3, "'" * 3):
                if value.count(quotes) == 1:
                    inside = quotes
    return lines


def line_of(lines: dict[Path, int], path: Path) -> int:
    """The line of a path, or of its nearest parent that has one."""
    while path not in lines and path:
        path = path[:-1]
    return lines.get(path, 1)


def at(data: Any, path: Path) -> Any:
    """What stands at a path of parsed data, or None."""
    for one in path:
        if isinstance(data, dict) and one in data:
            data = data[one]
        elif isinstance(data, list) and isinstance(one, int) and one < len(data):
            data = data[one]
        else:
            return None
    return data


def _resolved(keys: Path, counts: dict[Path, int]) -> Path:
    """Path of a [table] below arrays of tables: each array means its last element."""
    path: Path = ()
    for key in keys:
        path += (key,)
        if path in counts:
            path += (counts[path] - 1,)
    return path


def _element(keys: Path, counts: dict[Path, int]) -> Path:
    """Path of the next element of an array of tables."""
    path = _resolved(keys[:-1], counts) + (keys[-1],)
    counts[path] = counts.get(path, 0) + 1
    return path + (counts[path] - 1,)


def _keys(text: str) -> Path:
    """The parts of a dotted key; quotes taken off."""
    parts: list[str | int] = []
    word = quote = ""
    for sign in text.strip():
        if quote:
            if sign == quote:
                quote = ""
            else:
                word += sign
        elif sign in "\"'":
            quote = sign
        elif sign == ".":
            parts.append(word.strip())
            word = ""
        else:
            word += sign
    return (*parts, word.strip())
