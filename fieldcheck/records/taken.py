"""The readings of an item as they were typed, with who took them, when, and with what."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from fieldcheck.engine import readings
from fieldcheck.records.answers import NOT_STEPS, answer_text
from fieldcheck.records.hand import Hand
from fieldcheck.records.replay import ItemAgain


@dataclass(frozen=True)
class Taken:
    """One step's readings of one round: a line, or a table when columns are given. by: who, when, with what."""

    title: str
    phase: str
    columns: list[str]
    lines: list[list[str]]
    by: str


def taken_of(hand: Hand, one: ItemAgain) -> list[Taken]:
    """Every reading of an item, block by block in the order of the work."""
    found = []
    for instance in one.flow.instances:
        step = instance.step
        if step["id"] in NOT_STEPS or step["kind"] in ("confirm", "action", "photograph"):
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
        lines = [[answer_text(hand, step, step, answer.value)] for answer in taken.values()]
        return Taken(step["title"], phase, [], lines, by)
    columns = step["columns"]
    lines = []
    for row in readings.rows_of(one.work, step):
        cells = [taken.get(readings.index_of(row, column["id"])) for column in columns]
        lines.append([row, *["—" if cell is None else answer_text(hand, step, column, cell.value)
                             for column, cell in zip(columns, cells, strict=True)]])
    return Taken(step["title"], phase, ["", *[column["title"] for column in columns]], lines, by)


def _by(hand: Hand, taken: dict[str, Any]) -> str:
    """First and last time, persons, meters of a block of readings."""
    given = sorted([answer.event for answer in taken.values()], key=lambda event: event.at)
    people = list(dict.fromkeys(hand.who(event) for event in given))
    used = []
    for answer in taken.values():
        meter = hand.entry("meter", answer.value.get("meter") or "")
        if meter:
            used.append(" ".join([meter["tag"], answer.value.get("function") or "", answer.value.get("range") or ""]))
    meters = ", ".join(dict.fromkeys(text.strip() for text in used))
    return " · ".join([_span(hand, given), ", ".join(people), *([meters] if meters else [])])


def _span(hand: Hand, given: list[Any]) -> str:
    first, last = hand.when(given[0]), hand.when(given[-1])
    if _usual_day(hand) == (first[:10], first[20:]) == (last[:10], last[20:]):
        first, last = first[11:19], last[11:19]
    return first if first == last else f"{first} to {last}"


def _usual_day(hand: Hand) -> tuple[str, str]:
    """Day and offset of the signing; a reading of that day shows the time alone."""
    signed = hand.when(hand.again.signing)
    return signed[:10], signed[20:]


def usual_day(hand: Hand) -> str:
    """The day and offset that times without them have."""
    return " ".join(_usual_day(hand))
