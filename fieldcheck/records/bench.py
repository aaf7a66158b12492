"""The bench log of a record: one section an item, as found over as left, every reading, what was done and left out."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from fieldcheck.engine import judging, scale, verdicts
from fieldcheck.engine.explain import GLOSSES
from fieldcheck.engine.work import limit_names
from fieldcheck.records.answers import choice_text, left_out, untouched
from fieldcheck.records.hand import Hand, identities_text, spaced
from fieldcheck.records.replay import ItemAgain
from fieldcheck.records.taken import Taken, taken_of, usual_day
from fieldcheck.records.words import marked_figures

Data = dict[str, Any]  # JSON of many kinds
OWN_GLOSSES = {"WORKSHOP": "the workshop's own limit, in place of ours"}


@dataclass(frozen=True)
class Cell:
    """A verdict in a row. statement: one of the engine's, for its sign; word: as printed; value: with U and unit."""

    statement: str
    word: str
    value: str
    reason: str


@dataclass(frozen=True)
class Row:
    """One limit: as found over as left. scale: SVG; margin: lines beside it (citation, tag, gloss);
    stands: it was not taken again after service, so that as found stands as the final value."""

    key: str
    label: str
    accepted: str
    found: Cell | None
    left: Cell
    scale: str
    margin: list[str]
    safety: bool
    stands: bool


@dataclass(frozen=True)
class Section:
    """One item. facts: [(label, text)]; day: of times that show none; service, left_out, defects, parts: lines;
    examined: something was answered."""

    number: int
    examined: bool
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
    day: str
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
        number=number, examined=not untouched(one), title=str(equipment.get("name") or "Equipment without a name"),
        identities=identities_text(equipment) or "no identity noted", facts=_facts(hand, one, equipment),
        condition=_condition(hand, one), outcome=outcome.get("outcome") or "no outcome given",
        outcome_reason=outcome.get("reason") or "", restrictions=outcome.get("restrictions") or "",
        next_due=outcome.get("next_due") or "", best=one.best,
        bounds=[] if untouched(one) else [hand.number(text) for text in one.reasons], rows=_rows(hand, one),
        taken=taken_of(hand, one), day=usual_day(hand), service=_service(hand, one), left_out=left_out(hand, one),
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
        return f"not marked; {choice_text(field, assumed)} assumed ({unknown.get('tag', 'PRACTICE')})"
    if given.get("choice"):
        return choice_text(field, given["choice"])
    return hand.amount({"unit": field.get("unit"), **{key: value for key, value in given.items() if value}})


def _condition(hand: Hand, one: ItemAgain) -> str:
    """The condition in which the item was found, in one sentence."""
    if untouched(one):
        return "Not examined; its condition is not known."
    counts = {"within limit": 0, "outside limit": 0, "not judged": 0}
    for _, found, _ in one.rows:
        if found is not None:
            counts[verdicts.as_found_word(found.verdict.statement).split(",")[0]] += 1
    told = [f"{number} {word}" for word, number in counts.items() if number]
    looks = [f"{step['title']}: {choice_text(step, answer.value['choice'])}" for step, answer in _choices(one)]
    limits = "Of the limits judged as found: " + ", ".join(told) + "." if told else "No limit was judged as found."
    return " ".join([limits, *[hand.number(text) + "." for text in looks]])


def _choices(one: ItemAgain) -> list[tuple[Data, Any]]:
    found = []
    for step in one.part["steps"]:
        looked = step["kind"] == "choice" and step["phase"] in ("prepare", "as found")
        answer = one.work.at(step["id"], 0, "") if looked else None
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
        key=key, label=label, accepted=_accepted(hand, one, last, explained),
        found=_cell(hand, one, found, as_found=True) if found is not None else None,
        left=_cell(hand, one, last, as_found=False), scale=_scale(hand, one, found, left),
        margin=margin_of(hand, explained), safety=bool(last.limit.get("safety")),
        stands=left is None and one.flow.last_round > 0,
    )


def _accepted(hand: Hand, one: ItemAgain, judged: Any, explained: Data) -> str:
    if looked_at(one, judged):
        return "by what was seen"
    return hand.number(explained["limit"]) or "no limit: what it needs is missing"


def _cell(hand: Hand, one: ItemAgain, judged: Any, as_found: bool) -> Cell:
    statement = judged.verdict.statement
    word = verdicts.as_found_word(statement) if as_found else statement
    value = looked_at(one, judged) or hand.number(judging.printed(one.work, judged))
    return Cell(statement, word, value, hand.number(judged.verdict.reason))


def looked_at(one: ItemAgain, judged: Any) -> str:
    """What was seen, where a limit rests on choices alone and its value is only a number for them; else ""."""
    labels = []
    for name in limit_names(one.part, judged.limit):
        step = one.work.steps.get(name)
        if name in one.work.values:
            continue
        if step is None or step["kind"] != "choice":
            return ""
        found = one.work.newest(name, judged.round, "")
        if found is not None:
            labels.append(choice_text(step, found[1].value.get("choice") or ""))
    return "; ".join(labels)


def _scale(hand: Hand, one: ItemAgain, found: Any, left: Any) -> str:
    last = left or found
    if looked_at(one, last):
        return ""
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
    meaning = gloss or GLOSSES.get(tag) or OWN_GLOSSES.get(tag, "")
    return [*lines, f"{tag}: {meaning}".rstrip(": ")]


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


def _defect(hand: Hand, event: Any) -> str:
    return f"{event.data['level']}: {event.data['what']} ({hand.who(event)}, {hand.when(event)})"


def _part(hand: Hand, event: Any) -> str:
    return f"{event.data['name']}, {hand.number(str(event.data['amount']))}{spaced(event.data.get('unit') or '')}"
