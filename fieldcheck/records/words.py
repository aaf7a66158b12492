"""How a record writes numbers and times."""

from __future__ import annotations

import re
from datetime import UTC, datetime, timedelta, timezone

POINT, COMMA = "point", "comma"
_POINT_IN_NUMBER = re.compile(r"(?<=\d)\.(?=\d)")
_COMMA_IN_NUMBER = re.compile(r"(?<=\d),(?=\d)")
_FIGURE = re.compile(r'(<text class="figure"[^>]*>)([^<]*)(</text>)')


def marked(text: str, mark: str) -> str:
    """`text` with the decimal mark of its reader; for numbers only, never for clauses, versions or identities."""
    if mark == COMMA:
        return _POINT_IN_NUMBER.sub(",", text)
    return _COMMA_IN_NUMBER.sub(".", text)


def marked_figures(svg: str, mark: str) -> str:
    """A drawing of engine.scale with the figures at its ticks written with the reader's decimal mark."""
    return _FIGURE.sub(lambda found: found[1] + marked(found[2], mark) + found[3], svg)


def moment(at: str) -> datetime:
    """The instant of an event's `at`."""
    return datetime.strptime(at, "%Y-%m-%dT%H:%M:%S.%fZ").replace(tzinfo=UTC)


def local(at: str, offset: int) -> datetime:
    """The same instant as the clock on the wall showed it; offset: minutes ahead of UTC."""
    return moment(at).astimezone(timezone(timedelta(minutes=offset)))


def offset_text(offset: int) -> str:
    """UTC+01:00"""
    sign = "−" if offset < 0 else "+"
    return f"UTC{sign}{abs(offset) // 60:02d}:{abs(offset) % 60:02d}"


def time_text(at: str, offset: int) -> str:
    """2026-12-01 11:00:05 UTC+01:00"""
    return f"{local(at, offset):%Y-%m-%d %H:%M:%S} {offset_text(offset)}"


def day_text(at: str, offset: int) -> str:
    """2026-12-01, the local day."""
    return f"{local(at, offset):%Y-%m-%d}"


def listed(parts: list[str]) -> str:
    """a; a and b; a, b and c."""
    if len(parts) < 2:
        return "".join(parts)
    return ", ".join(parts[:-1]) + " and " + parts[-1]


def counted(number: int, one: str, more: str = "") -> str:
    """1 item, 2 items."""
    return f"{number} {one if number == 1 else more or one + 's'}"
