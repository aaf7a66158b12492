"""Checks of a procedure's head, words, ids and nameplate."""

import re
from collections.abc import Iterable
from typing import Any

from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.rulebook.amounts import of_quantity
from fieldcheck.rulebook.findings import Findings, Source, did_you_mean
from fieldcheck.rulebook.formula import Wrong, check_quantity, check_unit
from fieldcheck.rulebook.lines import Path
from fieldcheck.rulebook.shapes import Plate, Procedure
from fieldcheck.rulebook.shelf import Shelf

NAME = re.compile(r"[a-z][a-z0-9_]*\Z")
WORD = re.compile(r"[a-z][a-z0-9]*(-[a-z0-9]+)*\Z")
RESERVED = ("ambient", "humidity", "supply_voltage", "supply_frequency", "supply", "nameplate", "and", "or", "not",
            "if", "else", "in", "is", "for", "lambda", "each")
CLAIM = re.compile(r"\b(complies|compliant|in compliance|conforms (to|with)|in conformity)\b", re.IGNORECASE)


def check_head(source: Source, procedure: Procedure, shelf: Shelf, findings: Findings) -> None:
    """Id against file name, kind, cautions, minutes, supply texts."""
    wanted = source.file.name.removesuffix(".toml").replace("_", "-")
    if procedure.id != wanted:
        findings.add(source, ("id",), f'id "{procedure.id}" does not go with the file\'s name',
                     f'write id = "{wanted}", or rename the file')
    if procedure.kind not in shelf.kinds and "kind" not in shelf.broken:
        findings.add(source, ("kind",), f'there is no kind "{procedure.kind}"',
                     did_you_mean(procedure.kind, shelf.kinds, "add it to rules/kinds"))
    known_cautions(source, ("cautions",), procedure.cautions, shelf, findings)
    for depth in ("routine", "full"):
        minutes = getattr(procedure.minutes, depth)
        if minutes.work < 1 or minutes.wait < 0:
            findings.add(source, ("minutes", depth), f"{minutes.work} minutes at work and {minutes.wait} waiting",
                         "at least 1 at work, 0 or more waiting", where=f"minutes, {depth}")
    if procedure.minutes.full.work < procedure.minutes.routine.work:
        findings.add(source, ("minutes", "full", "work"), "full depth takes less work than routine",
                     "full does all that routine does, and more", where="minutes, full")
    _supply(source, procedure, shelf, findings)
    if not any(step.phase == "as found" for step in procedure.step):
        findings.add(source, ("step", 0), "there is no step as found",
                     "the first readings are taken before any service", where="")


def _supply(source: Source, procedure: Procedure, shelf: Shelf, findings: Findings) -> None:
    used = {step.supply for step in procedure.step}
    if procedure.nameplate:
        used.add("isolated")
    for place, step in enumerate(procedure.step):
        if step.supply not in procedure.supply:
            findings.add(source, ("step", place, "supply"), f'[supply] does not say how to reach "{step.supply}"',
                         f'add "{step.supply}" = "..." to [supply]: the change is a hold point')
    for state in procedure.supply:
        if state not in used:
            findings.add(source, ("supply", state), f'no step uses the supply state "{state}"', "leave its text out",
                         where="supply")
    if "mains live" in used:
        strong = [one for one in procedure.cautions if one in shelf.cautions
                  and shelf.cautions[one].signal in ("danger", "warning")
                  and (not shelf.cautions[one].supply or "mains live" in shelf.cautions[one].supply)]
        if not strong:
            findings.add(source, ("cautions",), "a step works with mains live and no danger or warning says so",
                         "name a caution of that supply state", where="")


def known_cautions(source: Source, path: Path, given: list[str], shelf: Shelf, findings: Findings) -> None:
    """Each named caution is there, and named once."""
    for place, one in enumerate(given):
        if one not in shelf.cautions and "caution" not in shelf.broken:
            findings.add(source, (*path, place), f'there is no caution "{one}"',
                         did_you_mean(one, shelf.cautions, "add it to rules/cautions.toml"))
    for one in doubles(given):
        findings.add(source, path, f'caution "{one}" is named twice', "name it once")


def doubles(names: Iterable[str]) -> list[str]:
    """What stands more than once, each once."""
    seen: set[str] = set()
    found: list[str] = []
    for one in names:
        if one in seen and one not in found:
            found.append(one)
        seen.add(one)
    return found


def check_ids(source: Source, procedure: Procedure, findings: Findings) -> None:
    """Ids are well formed, not reserved, and unique in their name space."""
    taken: dict[str, str] = {}
    for word in ("nameplate", "step", "value"):
        for place, thing in enumerate(getattr(procedure, word)):
            path = (word, place, "id")
            _well_formed(source, path, thing.id, findings)
            if thing.id in RESERVED:
                findings.add(source, path, f'"{thing.id}" is a word of the formulas', "choose another id")
            if thing.id in taken:
                findings.add(source, path, f'"{thing.id}" is already the id of a {taken[thing.id]}',
                             "nameplate fields, steps and values share one name space: choose another id")
            taken[thing.id] = word if word != "nameplate" else "nameplate field"
    limits: set[str] = set()
    for place, limit in enumerate(procedure.limit):
        _well_formed(source, ("limit", place, "id"), limit.id, findings)
        if limit.id in limits:
            findings.add(source, ("limit", place, "id"), f'a second limit "{limit.id}"',
                         "a change is a new [[limit.entry]] of the first; another limit needs another id")
        limits.add(limit.id)


def _well_formed(source: Source, path: Path, name: str, findings: Findings) -> None:
    if not NAME.match(name):
        findings.add(source, path, f'"{name}" is no id', "use small letters, digits and _, a letter first")


def check_choices(source: Source, path: Path, choices: list[Any], findings: Findings) -> None:
    """At least two, well formed, each once."""
    if len(choices) < 2:
        findings.add(source, path, "one choice is no choice", "offer at least two [[...choices]]")
    for place, one in enumerate(choices):
        if not WORD.match(one.id.replace("_", "-")):
            findings.add(source, (*path, place, "id"), f'"{one.id}" is no id of a choice',
                         "use small letters, digits and -, a letter first")
    for one in doubles(choice.id for choice in choices):
        findings.add(source, path, f'choice "{one}" stands twice', "give each its own id")


def check_nameplate(source: Source, procedure: Procedure, findings: Findings) -> None:
    """Each question has a quantity or choices, and says what unknown means."""
    for place, field in enumerate(procedure.nameplate):
        path = ("nameplate", place)
        if field.choices:
            _choice_field(source, path, field, findings)
        elif not field.quantity:
            findings.add(source, path, "has neither quantity nor choices", "say what is asked for")
        else:
            _quantity_field(source, path, field, findings)
        if field.unknown.then == "not judged" and field.unknown.value:
            findings.add(source, (*path, "unknown", "value"), "unknown means not judged and gives a value",
                         "leave the value out, or write then = \"default\"")
        if field.unknown.then != "not judged" and not field.unknown.value:
            findings.add(source, (*path, "unknown"), f"unknown means {field.unknown.then} and gives no value",
                         "add value = \"...\", or write then = \"not judged\"")


def _choice_field(source: Source, path: Path, field: Plate, findings: Findings) -> None:
    check_choices(source, (*path, "choices"), field.choices, findings)
    if field.quantity or field.unit:
        findings.add(source, (*path, "quantity" if field.quantity else "unit"), "has choices and a quantity or unit",
                     "ask for one of them")
    known = [one.id for one in field.choices]
    if "unknown" in known:
        findings.add(source, (*path, "choices"), 'offers "unknown" as a choice',
                     "leave it out: unknown is always offered")
    if field.unknown.value and field.unknown.value not in known:
        findings.add(source, (*path, "unknown", "value"), f'"{field.unknown.value}" is none of its choices',
                     did_you_mean(field.unknown.value, known))


def _quantity_field(source: Source, path: Path, field: Plate, findings: Findings) -> None:
    if not quantity_and_unit(source, path, field.quantity, field.unit, findings) or not field.unknown.value:
        return
    value = field.unknown.value
    if field.quantity == "count":
        if not value.isdigit() or int(value) < 1:
            findings.add(source, (*path, "unknown", "value"), f'"{value}" is no whole number', "write one, as \"4\"")
        return
    try:
        of_quantity(value, field.quantity)
    except FieldcheckError as error:
        findings.add(source, (*path, "unknown", "value"), error.what, error.mend)


def quantity_and_unit(source: Source, path: Path, quantity: str, unit: str, findings: Findings) -> bool:
    """True when a quantity is known and has a fitting unit (count has none)."""
    try:
        check_quantity(quantity)
    except Wrong as wrong:
        findings.add(source, (*path, "quantity"), wrong.what, wrong.mend)
        return False
    if quantity == "count":
        if unit:
            findings.add(source, (*path, "unit"), "a count has no unit", "leave unit out")
        return not unit
    if not unit:
        findings.add(source, (*path, "quantity"), f"{quantity} without a unit", "add unit = \"...\": it stands beside "
                     "the field, and is meant when none is typed")
        return False
    try:
        check_unit(unit, quantity)
    except Wrong as wrong:
        findings.add(source, (*path, "unit"), wrong.what, wrong.mend)
        return False
    return True


def check_words(source: Source, findings: Findings, data: Any = None, path: Path = ()) -> None:
    """No text is empty where one is wanted, and none claims conformity."""
    data = source.data if path == () else data
    if isinstance(data, dict):
        for key, one in data.items():
            check_words(source, findings, one, (*path, key))
    elif isinstance(data, list):
        for place, one in enumerate(data):
            check_words(source, findings, one, (*path, place))
    elif isinstance(data, str):
        if CLAIM.search(data):
            findings.add(source, path, f'claims conformity: "{_short(data)}"',
                         "say what was measured against what; never complies, conforms, compliant")
        if not data.strip() and path[-1] in ("title", "text", "label", "purpose", "name", "about", "id"):
            findings.add(source, path, f'"{path[-1]}" is empty', "a technician reads it: write it")


def _short(text: str) -> str:
    return text if len(text) <= 60 else text[:57] + "..."
