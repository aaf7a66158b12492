"""Lists that are searched by ?q= and sorted by ?sort=, on the server, without a script."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from urllib.parse import urlencode

_DIGITS = re.compile(r"(\d+)", re.ASCII)


@dataclass(frozen=True)
class Column:
    """One column: its key in ?sort=, its heading, and whether figures stand in it."""

    key: str
    heading: str
    figures: bool = False


@dataclass(frozen=True)
class Row:
    """One thing: where it leads, its texts by column, and whether it is past (shown in iron)."""

    link: str
    cells: Mapping[str, str]
    past: bool = False
    fresh: bool = False


@dataclass(frozen=True)
class Head:
    """A drawn heading: where a click leads, and how the list is sorted by it now (aria-sort)."""

    heading: str
    link: str
    sorted: str
    figures: bool


@dataclass(frozen=True)
class Listing:
    """A drawn list."""

    heads: list[Head]
    rows: list[tuple[Row, list[tuple[str, bool]]]]
    q: str
    sort: str
    total: int
    hidden: int = field(default=0)


def listing(columns: Sequence[Column], rows: Sequence[Row], args: Mapping[str, str]) -> Listing:
    """The rows in which every word of ?q= stands, sorted by ?sort= (a column's key, with - before it: downwards)."""
    q = args.get("q", "").strip()
    wanted = args.get("sort", "")
    keys = [column.key for column in columns]
    by = wanted.lstrip("-") if wanted.lstrip("-") in keys else keys[0]
    down = wanted.startswith("-")
    words = q.casefold().split()
    found = [row for row in rows if all(word in " ".join(row.cells.values()).casefold() for word in words)]
    found.sort(key=lambda row: natural(row.cells.get(by, "")), reverse=down)
    heads = []
    for column in columns:
        is_it = column.key == by
        way = column.key if not is_it or down else f"-{column.key}"
        query = urlencode({**({"q": q} if q else {}), "sort": way})
        heads.append(Head(column.heading, f"?{query}", ("descending" if down else "ascending") if is_it else "none",
                          column.figures))
    drawn = [(row, [(row.cells.get(column.key, ""), column.figures) for column in columns]) for row in found]
    return Listing(heads, drawn, q, wanted, len(rows), len(rows) - len(found))


def natural(text: str) -> list[tuple[int, int, str]]:
    """Sort key: J-9 before J-10, capital and small letters alike; what is empty comes last."""
    parts = [part for part in _DIGITS.split(text.casefold()) if part]
    return [(1, 0, "")] if not parts else [
        (0, int(part), "") if part.isdecimal() and part.isascii() else (0, 0, part) for part in parts
    ]
