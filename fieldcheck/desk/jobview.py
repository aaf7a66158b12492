"""What a job looks like now: each item with its verdicts drawn, what is open, left out, found or in dispute."""

from __future__ import annotations

from dataclasses import dataclass, field
from datetime import date
from typing import Any

from markupsafe import Markup

from fieldcheck.desk import checks, joblist, meters
from fieldcheck.desk.equipment import number_of
from fieldcheck.desk.workshop import Workshop
from fieldcheck.engine import judging, outcomes, readings, scale, verdicts, work
from fieldcheck.engine.errors import FieldcheckError

SUPPLY = {"isolated": "off", "low voltage live": "low", "mains live": "mains"}


@dataclass(frozen=True)
class Statement:
    """A statement as a cell: its word, its sign, the class of its colour."""

    word: str
    sign: Markup
    css: str


@dataclass(frozen=True)
class VerdictRow:
    """One limit of an item: as found and as left on one scale."""

    label: str
    found: str
    found_statement: Statement | None
    left: str
    left_statement: Statement | None
    scale: Markup
    reason: str


@dataclass(frozen=True)
class ItemView:
    """One item of a job, all texts ready."""

    id: str
    title: str
    equipment: str
    number: str
    depth: str
    trouble: str = ""
    taken: int = 0
    steps: int = 0
    current: str = ""
    supply: str = ""
    supply_css: str = ""
    open_entries: list[str] = field(default_factory=list)
    rows: list[VerdictRow] = field(default_factory=list)
    left_out: list[str] = field(default_factory=list)
    corrected: list[str] = field(default_factory=list)
    defects: list[str] = field(default_factory=list)
    parts: list[str] = field(default_factory=list)
    best: str = ""
    reasons: list[str] = field(default_factory=list)
    outcome: str = ""
    outcome_reason: str = ""


@dataclass(frozen=True)
class Rival:
    """One of the answers in dispute."""

    hash: str
    said: str
    device: str
    at: str


@dataclass(frozen=True)
class Conflict:
    """Two or more answers to one question, none of which knew the other."""

    question: str
    rivals: list[Rival]


def items_of(shop: Workshop, state: Any, job: Any) -> list[ItemView]:
    """Every item of a job."""
    return [_item(shop, state, job, item) for item in job.items_in_order()]


def _item(shop: Workshop, state: Any, job: Any, item: Any) -> ItemView:
    equipment = state.workshop.get("equipment", item.equipment)
    name = equipment["name"] if equipment else "not entered yet"
    number = number_of(equipment) if equipment else ""
    try:
        part = shop.procedure(item.procedure, job.opened.data["rulebook"])
        doing = work.of_item(state, job, item, part, _day_of(job))
        flow, judged, best, reasons, _ = outcomes.closing(doing)
    except FieldcheckError as error:
        return ItemView(item.id, item.procedure, name, number, item.depth, trouble=str(error))
    given = item.outcomes.event.data if item.outcomes.event is not None else {}
    now = flow.current
    return ItemView(
        item.id, part["title"], name, number, item.depth, "",
        sum(one.state != work.TO_DO for one in flow.instances), len(flow.instances),
        now.step["title"] if now else "", now.supply if now else "", SUPPLY[now.supply] if now else "",
        [one["text"] for one in flow.open_entries], [_row(doing, *one) for one in judged],
        [f"{one.step['title']}: {one.reason}" for one in flow.instances if one.state == work.LEFT],
        _corrections(item), [f"{one.data['what']} ({one.data['level']})" for one in item.defects],
        [f"{one.data['name']}, {one.data['amount']} {one.data.get('unit', '')}".strip() for one in item.parts],
        best, reasons, given.get("outcome", ""), given.get("reason", ""),
    )


def _day_of(job: Any) -> str:
    """The day whose limits hold: that of the job's last event, so that the page says what the phone said."""
    return str(max(event.at for event in job.events))[:10]


def _statement(judged: Any) -> Statement | None:
    if judged is None:
        return None
    word = judged.verdict.statement
    return Statement(word, Markup(scale.sign(word)), word.replace(" ", "-"))


def _row(doing: Any, key: str, found: Any, left: Any) -> VerdictRow:
    judged = left or found
    unit, convert = judging.display(doing, judged)
    before = found.verdict.value if left is not None and found is not None and not found.verdict.bound else None
    drawn = scale.of_verdict(judged.verdict, convert, unit, as_found=before)
    label = judged.limit["label"] + (f", {judged.row}" if judged.row not in ("", "?") else "")
    said = verdicts.as_found_word(found.verdict.statement) if found is not None and left is None else ""
    reason = judged.verdict.reason or said
    return VerdictRow(label, _printed(doing, found), _statement(found), _printed(doing, left), _statement(left),
                      Markup(drawn), reason)


def _printed(doing: Any, judged: Any) -> str:
    return str(judging.printed(doing, judged)) if judged is not None else ""


def _corrections(item: Any) -> list[str]:
    found = []
    for slot in item.slots.values():
        for event in slot.history:
            if event.type == "answer.corrected":
                found.append(f"{event.data['step']} {event.data['index']}: now {said(event)} ({event.data['reason']})")
    return found


def said(event: Any) -> str:
    """What an answer says, in one line."""
    data = event.data
    if event.type == "step.left":
        return f"not done: {data['reason']}"
    if event.type == "outcome.given":
        return str(data["outcome"])
    value = data.get("value") or {}
    if value.get("unknown"):
        return "not marked"
    if "text" in value:
        return f"{value['text']} {_unit(value.get('unit', ''))}".strip()
    if "choice" in value:
        return str(value["choice"])
    if value.get("done"):
        return "done"
    return ", ".join(f"{key} {value[key]}" for key in value) or event.type


def _unit(symbol: str) -> str:
    """A unit as people write it; as it was sent when it is no key of ours."""
    try:
        return checks.unit_text(symbol)
    except FieldcheckError:
        return symbol


def conflicts_of(shop: Workshop, state: Any, job: Any) -> list[Conflict]:
    """What a person must decide."""
    found = []
    for item, key, slot in job.conflicts():
        rivals = [Rival(one.hash, said(one), joblist.name_of(state, "device", one.device),
                        one.at[:16].replace("T", " ")) for one in slot.rivals]
        found.append(Conflict(_question(shop, state, job, job.items[item], key), rivals))
    return found


def _question(shop: Workshop, state: Any, job: Any, item: Any, key: str) -> str:
    """What the answers were given to, in the procedure's words: "Drum controller, Resistance, as found"."""
    name = joblist.name_of(state, "equipment", item.equipment)
    if key == "outcome":
        return f"{name}, outcome"
    step, number, index = key.split("|", 2)
    try:
        part = shop.procedure(item.procedure, job.opened.data["rulebook"])
        titles = {one["id"]: one["title"] for one in part["steps"]}
    except FieldcheckError:
        titles = {}
    when = "as found" if number == "0" else f"after service {number}"
    return ", ".join(word for word in (name, titles.get(step, step), index, when) if word)


# ---- the kit list


@dataclass(frozen=True)
class Kit:
    """What to take along.  meters: (function, those that have it with their state); cautions: (signal, title, text)."""

    meters: list[tuple[str, list[str]]]
    missing: list[str]
    cautions: list[tuple[str, str, str]]
    minutes: str


def kit_of(shop: Workshop, state: Any, job: Any, today: date) -> Kit:
    """The meters, cautions and minutes of a job's items."""
    functions: list[str] = []
    cautions: dict[str, tuple[str, str, str]] = {}
    at_work = waiting = 0
    for item in job.items_in_order():
        try:
            part = shop.procedure(item.procedure, job.opened.data["rulebook"])
        except FieldcheckError:
            continue            # the item itself says that it cannot be shown
        for step in part["steps"]:
            if step.get("depth", "both") in ("both", item.depth):
                functions += [one["meter"] for one in readings.columns_of(step) if one.get("meter")]
        for one in part["cautions"]:
            cautions[one["id"]] = (one["signal"].upper(), one["title"], one["text"])
        minutes = part["minutes"][item.depth]
        at_work, waiting = at_work + int(minutes["work"]), waiting + int(minutes["wait"])
    have = [(name, _meters_for(state, name, today)) for name in dict.fromkeys(functions)]
    return Kit([(name, found) for name, found in have if found], [name for name, found in have if not found],
               list(cautions.values()), f"{at_work} min at work, {waiting} min waiting")


def _meters_for(state: Any, function: str, today: date) -> list[str]:
    return [f"{one['tag']} {one['name']}: {meters.state_on(one, today)}" for one in state.workshop.all("meter")
            if any(each["function"] == function for each in one["functions"])]


