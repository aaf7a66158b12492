"""What is wrong in a rule file, where, and how to mend it; all findings of all files together."""

import difflib
import tomllib
from collections.abc import Iterable
from dataclasses import dataclass, field
from pathlib import Path as FilePath
from typing import Any

from fieldcheck.rulebook import lines
from fieldcheck.rulebook.lines import Path

NAMED = {
    "step": "step",
    "value": "value",
    "limit": "limit",
    "nameplate": "nameplate",
    "caution": "caution",
    "source": "source",
    "case": "case",
    "function": "meter function",
    "meter": "meter",
    "material": "material",
    "base": "base",
    "pair": "pair",
    "agent": "agent",
    "entry": "entry",
}


@dataclass(frozen=True, order=True)
class Finding:
    """file: path as given; line: from 1; where: which thing in it; what: one sentence; mend: how to put it right."""

    file: str
    line: int
    where: str
    what: str
    mend: str = ""

    def __str__(self) -> str:
        text = f"{self.file}:{self.line}: "
        if self.where:
            text += f"{self.where}: "
        return text + self.what + (f"; {self.mend}" if self.mend else "")


@dataclass
class Source:
    """One TOML file: its path, parsed data and line index."""

    file: FilePath
    data: dict[str, Any] = field(default_factory=dict)
    lines: dict[Path, int] = field(default_factory=dict)

    def named(self, path: Path) -> str:
        """The thing that a path is in, as a person calls it: step "drop", limit "drop", entry 2026-01-01."""
        names = []
        for place in range(1, len(path)):
            if not isinstance(path[place], int) or path[place - 1] not in NAMED:
                continue
            thing = lines.at(self.data, path[: place + 1])
            word = NAMED[str(path[place - 1])]
            names.append(f"{word} {_name(thing, int(path[place]))}")
        return ", ".join(names)


def _name(thing: Any, place: int) -> str:
    """What a thing of a list is called: its id, name, day, or its number."""
    if isinstance(thing, dict):
        for key in ("id", "name"):
            if key in thing:
                return f'"{thing[key]}"'
        if "since" in thing:
            return str(thing["since"])
    return f"number {place + 1}"


class Findings:
    """Gathers findings; `add` looks up the line."""

    def __init__(self) -> None:
        self.all: list[Finding] = []

    def add(self, source: Source, path: Path, what: str, mend: str = "", where: str | None = None) -> None:
        """A finding at a path of a file; where: instead of the name of the thing at that path."""
        place = source.named(path) if where is None else where
        one = Finding(str(source.file), lines.line_of(source.lines, path), place, what, mend)
        if one not in self.all:
            self.all.append(one)

    def of(self, file: FilePath) -> list[Finding]:
        """The findings of one file."""
        return [one for one in self.all if one.file == str(file)]


def read(file: FilePath, findings: Findings) -> Source | None:
    """The parsed file, or None with a finding where it cannot be read."""
    try:
        text = file.read_text(encoding="utf-8")
    except (OSError, UnicodeDecodeError) as error:
        findings.all.append(Finding(str(file), 1, "", f"cannot be read: {error}"))
        return None
    try:
        data = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        line, what = _toml_error(str(error), text)
        mend = "give each key once" if "overwrite" in what else "quote texts, close what is open"
        findings.all.append(Finding(str(file), line, "", f"not TOML: {what}", mend))
        return None
    return Source(file, data, lines.index(text))


def _toml_error(message: str, text: str) -> tuple[int, str]:
    """(line, message without its place) of what the TOML reader said."""
    head, _, tail = message.partition(" (at line ")
    if tail:
        return int(tail.split(",")[0]), head
    return text.count("\n") + 1, head.partition(" (at end")[0]


def did_you_mean(word: str, known: Iterable[str], otherwise: str = "") -> str:
    """A mending hint: the nearest known word, else all of them, else `otherwise`."""
    names = list(known)
    near = difflib.get_close_matches(word, names, n=1, cutoff=0.6)
    if near:
        return f'did you mean "{near[0]}"?'
    if otherwise:
        return otherwise
    return "use one of: " + ", ".join(names) if names else ""
