"""The bench log of a record: one section an item, as found over as left, every reading, what was done and left out."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from fieldcheck.engine import events, judging, procedures, readings, scale, verdicts
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.engine.explain import GLOSSES
from fieldcheck.records.hand import NOT_NOTED, Hand, identities_text, spaced
from fieldcheck.records.replay import ItemAgain
from fieldcheck.records.words import marked_figures

Data = dict[str, Any]  # JSON of many kinds
UNCERTAIN_TAGS = ("PRACTICE", "MEM?")


@dataclass(frozen=True)
class Cell:
    """A verdict in a row. statement: one of the engine's, for its sign; word: as printed; value: with U and unit."""

    statement: str
    word: str
    value: str
    reason: str


@dataclass(frozen=True)
class Row:
    """One limit: as found over as left. scale: SVG; margin: lines beside it (citation, tag, gloss)."""

    key: str
    label: str
    accepted: str
    found: Cell | None
    left: Cell
    scale: str
    margin: list[str]
    safety: bool


@dataclass(frozen=True)
class Taken:
    """One step's readings of one round: a line, or a table when columns are given. by: who, when, with what."""

    title: str
    phase: str
    columns: list[str]
    lines: list[list[str]]
    by: str


@dataclass(frozen=True)
class Section:
    """One item. facts: [(label, text)]; service, left_out, defects, parts: lines."""

    number: int
    title: str
    identities: str
    facts: list[tuple[str, str]]
    condition: str
    outcome: str
    outcome_reason: str
    restrictions: str
    next_due: str
    best: str
    bounds: list[str]
    rows: list[Row]
    taken: list[Taken]
    service: list[str]
    left_out: list[str]
    defects: list[str]
    parts: list[str]


def section(hand: Hand, one: ItemAgain, number: int) -> Section:
    """The section of one item; number: its place in the job, from 1."""
    equipment = hand.entry("equipment", one.item.equipment)
    given = one.item.outcomes.event
    outcome = given.data if given is not None else {}
    return Section(
        number=number, title=str(equipment.get("name") or "Equipment without a name"),
        identities=identities_text(equipment) or "no identity noted", facts=_facts(hand, one, equipment),
        condition=_condition(hand, one), outcome=outcome.get("outcome") or "no outcome given",
        outcome_reason=outcome.get("reason") or "", restrictions=outcome.get("restrictions") or "",
        next_due=outcome.get("next_due") or "", best=one.best,
        bounds=[] if untouched(one) else [hand.number(text) for text in one.reasons], rows=_rows(hand, one),
        taken=_taken(hand, one), service=_service(hand, one), left_out=left_out(hand, one),
        defects=[_defect(hand, event) for event in one.item.defects],
        parts=[_part(hand, event) for event in one.item.parts],
    )


def _facts(hand: Hand, one: ItemAgain, equipment: Data) -> list[tuple[str, str]]:
    kind = hand.again.index.get("kinds", {}).get(one.item.kind, {})
    facts = [("Kind", kind.get("title") or one.item.kind),
             ("Method", f"{one.part['title']} ({one.part['id']}), {one.item.depth} depth"),
             ("Method version", f"part {one.part_digest[:16]}… of rulebook {hand.data['rulebook']['digest'][:16]}…")]
    for field in one.part["nameplate"]:
        given = one.work.nameplate.get(field["id"])
        facts.append((field["label"], _plate(hand, field, given)))
    if equipment.get("remarks"):
        facts.append(("Remarks", equipment["remarks"]))
    return facts


def _plate(hand: Hand, field: Data, given: Data | None) -> str:
    if given is None:
        return "not asked"
    if given.get("unknown"):
        unknown = field["unknown"]
        if unknown["then"] == "not judged":
            return "not marked; what depends on it is not judged"
        assumed = unknown.get("choice") or hand.amount(unknown)
        return f"not marked; {_choice(field, assumed)} assumed ({unknown.get('tag', 'PRACTICE')})"
    if given.get("choice"):
        return _choice(field, given["choice"])
    return hand.amount({"unit": field.get("unit"), **{key: value for key, value in given.items() if value}})


def _choice(where: Data, chosen: str) -> str:
    for one in where.get("choices") or []:
        if one["id"] == chosen:
            return str(one["label"])
    return chosen


def _condition(hand: Hand, one: ItemAgain) -> str:
    """The condition in which the item was found, in one sentence."""
    if untouched(one):
        return "Not examined; its condition is not known."
    counts = {"within limit": 0, "outside limit": 0, "not judged": 0}
    for _, found, _ in one.rows:
        if found is not None:
            counts[verdicts.as_found_word(found.verdict.statement).split(",")[0]] += 1
    told = [f"{number} {word}" for word, number in counts.items() if number]
    looks = [f"{step['title']}: {_choice(step, answer.value['choice'])}" for step, answer in _choices(one)]
    limits = "Of the limits judged as found: " + ", ".join(told) + "." if told else "No limit was judged as found."
    return " ".join([limits, *[hand.number(text) + "." for text in looks]])


def _choices(one: ItemAgain) -> list[tuple[Data, Any]]:
    found = []
    for step in one.part["steps"]:
        answer = one.work.at(step["id"], 0, "") if step["kind"] == "choice" else None
        if answer is not None and not answer.left:
            found.append((step, answer))
    return found


# ---- rows

def _rows(hand: Hand, one: ItemAgain) -> list[Row]:
    if untouched(one):
        return []
    return [_row(hand, one, key, found, left) for key, found, left in one.rows]


def _row(hand: Hand, one: ItemAgain, key: str, found: Any, left: Any) -> Row:
    last = left or found
    explained = judging.explained(one.work, last)
    label = last.limit["label"] + (f" {last.row}" if last.row not in ("", "?") else "")
    return Row(
        key=key, label=label, accepted=hand.number(explained["limit"]) or "no limit: what it needs is missing",
        found=_cell(hand, one, found, as_found=True) if found is not None else None,
        left=_cell(hand, one, last, as_found=False), scale=_scale(hand, one, found, left),
        margin=margin_of(hand, explained), safety=bool(last.limit.get("safety")),
    )


def _cell(hand: Hand, one: ItemAgain, judged: Any, as_found: bool) -> Cell:
    statement = judged.verdict.statement
    word = verdicts.as_found_word(statement) if as_found else statement
    return Cell(statement, word, hand.number(judging.printed(one.work, judged)), hand.number(judged.verdict.reason))


def _scale(hand: Hand, one: ItemAgain, found: Any, left: Any) -> str:
    last = left or found
    earlier = found if left is not None else None
    if last.verdict.value is None and (earlier is None or earlier.verdict.value is None):
        return ""
    unit, convert = judging.display(one.work, last)
    before = None if earlier is None or earlier.verdict.bound else earlier.verdict.value
    return marked_figures(scale.of_verdict(last.verdict, convert, unit, as_found=before), hand.mark)


def margin_of(hand: Hand, explained: Data) -> list[str]:
    """What stands beside a limit: its source in words, and what its provenance tag means."""
    source, _, rest = explained["citation"].partition(", ")
    known = hand.again.index.get("sources", {}).get(source, {})
    lines = [] if source == "practice" else [", ".join([known.get("title") or source, *([rest] if rest else [])])]
    tag, gloss = explained["tag"], explained["gloss"]
    lines.append(f"{tag}: {gloss or GLOSSES.get(tag, '')}".rstrip(": "))
    return [line for line in [*lines, explained["note"]] if line]


# ---- readings

def _taken(hand: Hand, one: ItemAgain) -> list[Taken]:
    found = []
    for instance in one.flow.instances:
        step = instance.step
        if step["id"] in (procedures.SUPPLY, "nameplate") or step["kind"] in ("confirm", "action", "photograph"):
            continue
        answers = [(index, one.work.at(step["id"], instance.round, index)) for index in instance.indexes]
        taken = {index: answer for index, answer in answers if answer is not None and not answer.left}
        if taken:
            found.append(_block(hand, one, instance, taken))
    return found


def _block(hand: Hand, one: ItemAgain, instance: Any, taken: dict[str, Any]) -> Taken:
    step = instance.step
    phase = step["phase"] if instance.round == 0 else f"after service {instance.round}"
    by = _by(hand, taken)
    if step["kind"] != "table":
        lines = [[_answer(hand, step, step, answer.value)] for answer in taken.values()]
        return Taken(step["title"], phase, [], lines, by)
    columns = step["columns"]
    lines = []
    for row in readings.rows_of(one.work, step):
        cells = [taken.get(readings.index_of(row, column["id"])) for column in columns]
        lines.append([row, *["—" if cell is None else _answer(hand, step, column, cell.value)
                             for column, cell in zip(columns, cells, strict=True)]])
    return Taken(step["title"], phase, ["", *[column["title"] for column in columns]], lines, by)


def _answer(hand: Hand, step: Data, column: Data, value: Data) -> str:
    kind = step["kind"]
    if kind == "choice":
        return _choice(step, value["choice"])
    if kind == "note":
        return str(value["text"])
    if kind == "sequence":
        shown = f"from {value['start']}: " + " ".join(value["seen"])
        pulses = f", {value['pulses']} pulses" if value.get("pulses") else ""
        return shown + pulses + (f", ended on {value['end']}" if value.get("end") else "")
    text = hand.amount({"unit": column.get("unit"), **{key: part for key, part in value.items() if part}})
    laps = [hand.amount({"unit": "s", **lap}) for lap in value.get("laps") or []]
    return text + (" (laps " + ", ".join(laps) + ")" if laps else "")


def _by(hand: Hand, taken: dict[str, Any]) -> str:
    """Persons, first and last time, meters of a block of readings."""
    given = sorted([answer.event for answer in taken.values()], key=lambda event: event.at)
    people = list(dict.fromkeys(hand.who(event) for event in given))
    spans = [hand.when(given[0])] + ([f"to {hand.when(given[-1])[11:19]}"] if given[-1] is not given[0] else [])
    used = []
    for answer in taken.values():
        meter = hand.entry("meter", answer.value.get("meter") or "")
        if meter:
            used.append(" ".join([meter["tag"], answer.value.get("function") or "", answer.value.get("range") or ""]))
    meters = ", ".join(dict.fromkeys(text.strip() for text in used))
    return " · ".join([" ".join(spans), ", ".join(people), *([meters] if meters else [])])


# ---- what was done and left out

def _service(hand: Hand, one: ItemAgain) -> list[str]:
    lines = []
    for instance in one.flow.instances:
        answer = one.work.at(instance.step["id"], instance.round, "")
        if instance.step["kind"] != "action" or answer is None or answer.left:
            continue
        used = [f"{thing['name']}, {hand.number(str(thing['amount']))}"
                for thing in answer.value.get("consumables") or []]
        more = [("used: " + "; ".join(used)) if used else "", answer.value.get("remark") or ""]
        called = " (called for)" if instance.step.get("corrective") else ""
        tail = "; ".join([text for text in more if text])
        lines.append(instance.step["title"] + called + (f": {tail}" if tail else ""))
    return lines


def untouched(one: ItemAgain) -> bool:
    """True when nothing at all was answered for an item."""
    return not any(slot.event is not None for slot in one.item.slots.values())


def left_out(hand: Hand, one: ItemAgain) -> list[str]:
    """Every step or cell not done, with its reason, in the order in which it was left; one line for a whole item."""
    if untouched(one):
        return ["every step of the method"]
    left = [slot.event for slot in one.item.slots.values() if slot.event is not None and slot.event.type == "step.left"]
    lines = [f"{title_of(hand, one, slot_key(event))}: {event.data['reason'] or 'no reason given'}"
             for event in sorted(left, key=lambda event: event.order)]
    reached = {instance.step["id"] for instance in one.flow.instances}
    for step in one.part["steps"]:
        needed = procedures.included(one.work, step) and not step.get("corrective")
        if needed and step["id"] not in reached:
            lines.append(f"{step['title']}: not reached")
    for instance in one.flow.instances:
        if instance.state == procedures.TO_DO and instance.step["id"] not in (procedures.SUPPLY, "nameplate"):
            lines.append(f"{instance.step['title']}: not taken")
    return list(dict.fromkeys(hand.number(line) for line in lines))


def _defect(hand: Hand, event: Any) -> str:
    return f"{event.data['level']}: {event.data['what']} ({hand.who(event)}, {hand.when(event)})"


def _part(hand: Hand, event: Any) -> str:
    return f"{event.data['name']}, {hand.number(str(event.data['amount']))}{spaced(event.data.get('unit') or '')}"


def title_of(hand: Hand, one: ItemAgain, slot: str) -> str:
    """The step of a slot key in words."""
    step, number, index = slot.split("|", 2)
    titles = {each["id"]: each["title"] for each in one.part["steps"]}
    field = readings.nameplate_field(one.work, index) if step == "nameplate" else None
    if step == procedures.SUPPLY:
        return "Supply state before " + titles.get(index, index)
    name = field["label"] if field is not None else titles.get(step, step) + _cell_name(one, step, index)
    return name + (f", after service {number}" if number != "0" else "")


def _cell_name(one: ItemAgain, step: str, index: str) -> str:
    """A table's cell in words: ", row 1, V forward"."""
    if not index:
        return ""
    row, _, column = index.partition("/")
    columns = {each["id"]: each["title"] for each in (one.work.steps.get(step) or {}).get("columns") or []}
    return f", row {row}" + (f", {columns.get(column, column)}" if column else "")


def value_text(hand: Hand, one: ItemAgain, event: Any) -> str:
    """What an answering event says, as one text."""
    if event.type == "step.left":
        return "not done: " + (event.data["reason"] or "no reason given")
    kind, value = event.data["kind"], event.data["value"]
    if kind == "photograph":
        return f"photograph {value['blob'][:16]}…"
    if value.get("unknown"):
        return "not marked"
    if kind in ("confirm", "action"):
        return "done"
    try:
        step = one.work.step(event.data["step"]) if event.data["step"] != "nameplate" else {"kind": "measure"}
        return _answer(hand, {**step, "kind": "measure" if kind in ("table", "timing", "nameplate") else kind},
                       {}, value)
    except (FieldcheckError, KeyError):
        return str(value.get("text") or value.get("choice") or NOT_NOTED)


def slot_key(event: Any) -> str:
    """The slot that an answering event belongs to."""
    return str(events.slot_key(event.data["step"], event.data["round"], event.data["index"]))
