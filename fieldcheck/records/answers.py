"""What was answered to one question, in words."""

from __future__ import annotations

from typing import Any

from fieldcheck.engine import events, procedures, readings
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.engine.work import TO_DO
from fieldcheck.records.hand import NOT_NOTED, Hand
from fieldcheck.records.replay import ItemAgain

Data = dict[str, Any]  # JSON of many kinds
NOT_STEPS = (procedures.SUPPLY, "nameplate")


def untouched(one: ItemAgain) -> bool:
    """True when nothing at all was answered for an item."""
    return not any(slot.event is not None for slot in one.item.slots.values())


def choice_text(where: Data, chosen: str) -> str:
    """The label of a choice of a step or nameplate field."""
    for one in where.get("choices") or []:
        if one["id"] == chosen:
            return str(one["label"])
    return chosen


def answer_text(hand: Hand, step: Data, column: Data, value: Data) -> str:
    """An answer of a step; column: the table's column, or the step itself."""
    kind = step["kind"]
    if kind == "choice":
        return choice_text(step, value["choice"])
    if kind == "note":
        return str(value.get("text") or "done")
    if kind == "sequence":
        shown = f"from {value['start']}: " + " ".join(value["seen"])
        pulses = f", {value['pulses']} pulses" if value.get("pulses") else ""
        return str(shown + pulses) + (f", ended on {value['end']}" if value.get("end") else "")
    text = hand.amount({"unit": column.get("unit"), **{key: part for key, part in value.items() if part}})
    laps = [hand.amount({"unit": "s", **lap}) for lap in value.get("laps") or []]
    return text + (" (laps " + ", ".join(laps) + ")" if laps else "")


def title_of(hand: Hand, one: ItemAgain, slot: str) -> str:
    """The step of a slot key in words."""
    step, number, index = slot.split("|", 2)
    titles: dict[str, str] = {each["id"]: each["title"] for each in one.part["steps"]}
    field = readings.nameplate_field(one.work, index) if step == "nameplate" else None
    if step == procedures.SUPPLY:
        return "Supply state before " + titles.get(index, index)
    name = str(field["label"]) if field is not None else titles.get(step, step) + _cell_name(one, step, index)
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
    if kind == "photograph" and value.get("blob"):
        return "photograph " + str(value["blob"])[:16] + "…"
    if value.get("unknown"):
        return "not marked"
    if kind in ("confirm", "action", "photograph"):
        return "done"
    try:
        step = one.work.step(event.data["step"]) if event.data["step"] != "nameplate" else {"kind": "measure"}
        return answer_text(hand, {**step, "kind": "measure" if kind in ("table", "timing", "nameplate") else kind},
                       {}, value)
    except (FieldcheckError, KeyError):
        return str(value.get("text") or value.get("choice") or NOT_NOTED)


def slot_key(event: Any) -> str:
    """The slot that an answering event belongs to."""
    return str(events.slot_key(event.data["step"], event.data["round"], event.data["index"]))


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
        if instance.state == TO_DO and instance.step["id"] not in NOT_STEPS:
            lines.append(f"{instance.step['title']}: not taken")
    return list(dict.fromkeys(hand.number(line) for line in lines))
