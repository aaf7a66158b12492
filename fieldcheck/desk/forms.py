"""Forms as data: what a page asks for, reading what was typed, and giving it back with the error beside the field.

A `Sheet` lists `Field`s and `Rows` (a table of like fields, with a key for one more row).  `filled` reads a posted
form: nothing typed is ever lost, whatever was wrong with it.  `controls` makes what the templates draw.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from datetime import date

from werkzeug.datastructures import MultiDict

Choice = tuple[str, str]                # value sent, words shown
Check = Callable[[str], str]            # what is wrong with a text, as a sentence; "" when nothing
MOST_ROWS = 80
BLANK_ROWS = 2
FEW = 4                 # columns of a table that is set as narrow as a field


@dataclass(frozen=True)
class Field:
    """One thing asked for.

    kind: text, lines, select, date, tick, ticks (several), plate (text or "not marked").  unit: shown inside the
    field's end.  choices: for select and ticks.  check: looks at what was typed, when something was.
    """

    name: str
    label: str
    kind: str = "text"
    hint: str = ""
    unit: str = ""
    choices: tuple[Choice, ...] = ()
    required: bool = False
    longest: int = 200
    check: Check | None = None


@dataclass(frozen=True)
class Rows:
    """A table of like fields.  word: what one row is called."""

    name: str
    label: str
    fields: tuple[Field, ...]
    word: str = "row"
    hint: str = ""


@dataclass(frozen=True)
class Heading:
    """A title between fields."""

    label: str
    hint: str = ""


Part = Field | Rows | Heading
Sheet = tuple[Part, ...]


@dataclass
class Filled:
    """What was typed.  typed: HTML name -> text; rows: name of a table -> rows shown; errors: HTML name -> sentence."""

    typed: dict[str, str] = field(default_factory=dict)
    rows: dict[str, int] = field(default_factory=dict)
    errors: dict[str, str] = field(default_factory=dict)

    def text(self, name: str) -> str:
        """What stands in a field, "" when nothing does."""
        return self.typed.get(name, "")

    def several(self, name: str) -> list[str]:
        """The lines of a field, or the ticked ones of several."""
        return [line.strip() for line in self.text(name).split("\n") if line.strip()]

    def table(self, rows: Rows) -> list[tuple[int, dict[str, str]]]:
        """(row number, field -> text) of the rows in which anything was typed."""
        found = []
        for number in range(self.rows.get(rows.name, 0)):
            one = {f.name: self.text(row_name(rows, number, f)) for f in rows.fields}
            if any(one.values()):
                found.append((number, one))
        return found


def row_name(rows: Rows, number: int, of: Field) -> str:
    """The HTML name of one cell."""
    return f"{rows.name}-{number}-{of.name}"


def start(sheet: Sheet, texts: Mapping[str, str], tables: Mapping[str, Sequence[Mapping[str, str]]]) -> Filled:
    """A form not yet posted: what is known already, and some empty rows."""
    shown = Filled(dict(texts))
    for part in sheet:
        if isinstance(part, Rows):
            known = tables.get(part.name, ())
            shown.rows[part.name] = len(known) + BLANK_ROWS
            for number, one in enumerate(known):
                for of in part.fields:
                    shown.typed[row_name(part, number, of)] = one.get(of.name, "")
    return shown


def filled(sheet: Sheet, posted: MultiDict[str, str]) -> Filled:
    """What was posted, with an error for every field that does not do."""
    found = Filled()
    for part in sheet:
        if isinstance(part, Field):
            _take(found, part, part.name, posted, part.required)
        elif isinstance(part, Rows):
            _take_rows(found, part, posted)
    return found


def with_one_more(sheet: Sheet, shown: Filled, name: str) -> Filled:
    """The same form with one more empty row in a table, and no complaints yet."""
    known = [part.name for part in sheet if isinstance(part, Rows)]
    rows = {one: min(count + (one == name), MOST_ROWS) for one, count in shown.rows.items() if one in known}
    return replace(shown, rows=rows, errors={})


def _take_rows(found: Filled, rows: Rows, posted: MultiDict[str, str]) -> None:
    count = 0
    for number in range(MOST_ROWS):
        if any(posted.get(row_name(rows, number, of), "") for of in rows.fields):
            count = number + 1
        elif posted.get(f"{rows.name}-{number}-here", ""):
            count = max(count, number + 1)
    found.rows[rows.name] = count
    for number in range(count):
        names = [row_name(rows, number, of) for of in rows.fields]
        anything = any(posted.get(name, "").strip() for name in names)
        for of, name in zip(rows.fields, names, strict=True):
            _take(found, of, name, posted, of.required and anything)


def _take(found: Filled, of: Field, name: str, posted: MultiDict[str, str], required: bool) -> None:
    typed = "\n".join(posted.getlist(name)) if of.kind == "ticks" else posted.get(name, "")
    text = typed.replace("\r\n", "\n").strip()
    found.typed[name] = text
    if of.kind == "plate":
        found.typed[f"{name}-unknown"] = posted.get(f"{name}-unknown", "")
    wrong = _fault(of, text, required)
    if not wrong and of.kind == "plate" and text and found.typed[f"{name}-unknown"]:
        wrong = "either type it, or say that it is not marked"
    if wrong:
        found.errors[name] = wrong


def _fault(of: Field, text: str, required: bool) -> str:
    if not text:
        return "this is needed" if required else ""
    if len(text) > of.longest:
        return f"at most {of.longest} characters, these are {len(text)}"
    if any((ord(one) < 32 and one != "\n") or 0xD800 <= ord(one) < 0xE000 for one in text):
        return "control characters cannot stand here"
    if of.kind in ("select", "ticks"):
        known = [value for value, _ in of.choices]
        if any(one not in known for one in text.split("\n")):
            return "choose one of the list"
    if of.kind == "date" and not is_date(text):
        return "write the date as 2026-12-31"
    if of.kind in ("text", "plate") and "\n" in text:
        return "one line only"
    return of.check(text) if of.check is not None else ""


def is_date(text: str) -> bool:
    """Whether a text is a day as 2026-12-31."""
    try:
        return date.fromisoformat(text).isoformat() == text
    except ValueError:
        return False


# ---- what templates draw


@dataclass(frozen=True)
class Control:
    """One drawn field.  shape: its kind, or heading or table.  rows: of a table, each a list of controls."""

    shape: str
    name: str
    label: str
    value: str = ""
    error: str = ""
    hint: str = ""
    unit: str = ""
    choices: tuple[tuple[str, str, bool], ...] = ()
    required: bool = False
    unknown: bool = False
    word: str = ""
    heads: tuple[str, ...] = ()
    few: bool = False
    rows: tuple[tuple[Control, ...], ...] = ()


def controls(sheet: Sheet, shown: Filled) -> list[Control]:
    """Everything that a form's template needs, in order."""
    return [_control(part, shown) for part in sheet]


def _control(part: Part, shown: Filled) -> Control:
    if isinstance(part, Heading):
        return Control("heading", "", part.label, hint=part.hint)
    if isinstance(part, Field):
        return _drawn(part, part.name, part.label, shown)
    rows = []
    for number in range(shown.rows.get(part.name, BLANK_ROWS)):
        rows.append(tuple(
            _drawn(of, row_name(part, number, of), f"{of.label}, {part.word} {number + 1}", shown)
            for of in part.fields
        ))
    heads = tuple(of.label + (f" ({of.hint})" if of.hint else "") for of in part.fields)
    return Control("table", part.name, part.label, error=shown.errors.get(part.name, ""), hint=part.hint,
                   word=part.word, heads=heads, few=len(heads) < FEW, rows=tuple(rows))


def _drawn(of: Field, name: str, label: str, shown: Filled) -> Control:
    value = shown.text(name)
    chosen = value.split("\n")
    if of.kind == "plate" and shown.text(f"{name}-unknown") and name not in shown.errors:
        value = ""
    return Control(of.kind, name, label, value, shown.errors.get(name, ""), of.hint, of.unit,
                   tuple((key, words, key in chosen) for key, words in of.choices), of.required,
                   bool(shown.text(f"{name}-unknown")))
