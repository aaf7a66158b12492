"""Page one of a record: a letter that a customer understands. Outcome first, then what to do, what was not tested,
who says so, how to verify."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from fieldcheck.engine import outcomes, verdicts
from fieldcheck.records.answers import title_of
from fieldcheck.records.bench import Section
from fieldcheck.records.hand import NOT_NOTED, Hand
from fieldcheck.records.words import counted, day_text, listed, time_text

Data = dict[str, Any]  # JSON of many kinds
IN_WORDS = {
    outcomes.SERVICEABLE: "serviceable", outcomes.RESTRICTED: "serviceable with restrictions",
    outcomes.UNSERVICEABLE: "unserviceable: do not use", outcomes.NOT_EXAMINED: "not examined",
}
CONDITION = "This is the condition at the time of test only."
RELATES = "The results relate only to the items tested, those listed here."
NOT_A_PROMISE = ("Nothing here speaks for later use, for other equipment, or for the installation on which an item "
                 "runs; local codes and licensed practice come first.")


@dataclass(frozen=True)
class Line:
    """One item on page one."""

    number: int
    name: str
    identities: str
    method: str
    outcome: str


@dataclass(frozen=True)
class Signature:
    """name, when, meaning of whoever signs; drawn: SHA-256 of the strokes or ""; device: on which it was made."""

    name: str
    when: str
    meaning: str
    device: str
    digits: str
    drawn: str


@dataclass(frozen=True)
class Letter:
    """aside: [(label, text)] for the margin column; sentence: the outcome in one; todo, untested: lines."""

    workshop: str
    workshop_address: list[str]
    customer: str
    customer_address: list[str]
    aside: list[tuple[str, str]]
    sentence: str
    supersedes: str
    lines: list[Line]
    todo: list[str]
    untested: list[str]
    statements: list[str]
    signature: Signature
    acknowledged: str
    acknowledged_drawn: str


def letter(hand: Hand, sections: list[Section], left: list[tuple[int, str]]) -> Letter:
    """Page one. left: (item number, text) of every step left out."""
    opened = hand.again.job.opened.data
    workshop = hand.again.state.workshop
    named = (workshop.named.event or workshop.named.history[-1]).data if workshop.named.history else {}
    customer = hand.entry("customer", opened["customer"])
    return Letter(
        workshop=named.get("name") or "Workshop without a name", workshop_address=_lines(named.get("address")),
        customer=hand.name("customer", opened["customer"]), customer_address=_lines(customer.get("address")),
        aside=_aside(hand, opened), sentence=_sentence(sections), supersedes=_supersedes(hand),
        lines=[_line(hand, section) for section in sections], todo=_todo(sections),
        untested=_untested(hand, sections, left), statements=[CONDITION, RELATES, NOT_A_PROMISE],
        signature=signature(hand, hand.again.signing), acknowledged=_acknowledged(hand),
        acknowledged_drawn=_drawn(hand.again.job.acknowledged.event),
    )


def _lines(address: str | None) -> list[str]:
    return [line.strip() for line in (address or "").split("\n") if line.strip()]


def _aside(hand: Hand, opened: Data) -> list[tuple[str, str]]:
    site = hand.entry("site", opened["site"])
    place = "at the workshop's bench" if opened["place"] == "bench" else "on site"
    where = ", ".join([site.get("name") or NOT_NOTED, *_lines(site.get("address"))])
    days = sorted({hand.day(event) for event in hand.again.job.events
                   if event.type in ("answer.given", "answer.corrected", "step.left", "outcome.given")})
    return [
        ("Record", hand.data["number"]), ("Job", str(opened["number"])),
        ("Reason", opened.get("reason") or NOT_NOTED), ("Received", opened.get("received") or NOT_NOTED),
        ("Performed", " to ".join(dict.fromkeys([days[0], days[-1]])) if days else NOT_NOTED),
        ("Issued", day_text(hand.data["issued"], hand.data["offset"])), ("Place of work", place), ("Site", where),
    ]


def _sentence(sections: list[Section]) -> str:
    """Of 3 items examined ..., the outcome in one sentence."""
    if len(sections) == 1:
        said = IN_WORDS.get(sections[0].outcome, "without an outcome")
        return f"{sections[0].title} ({sections[0].identities}) is {said}."
    parts = []
    for outcome in (*outcomes.OUTCOMES, "no outcome given"):
        number = sum(1 for section in sections if section.outcome == outcome)
        if number:
            parts.append(f"{number} {'is' if number == 1 else 'are'} {IN_WORDS.get(outcome, 'without an outcome')}")
    return f"Of {counted(len(sections), 'item')}, {listed(parts)}."


def _supersedes(hand: Hand) -> str:
    old = hand.data["supersedes"]
    return f"This record replaces record {old['number']}, which stays as it was issued." if old else ""


def _line(hand: Hand, section: Section) -> Line:
    facts = dict(section.facts)
    return Line(section.number, section.title, section.identities, facts["Method"], section.outcome)


def _todo(sections: list[Section]) -> list[str]:
    """One line an item with something to do; a next date that all share stands once."""
    dates = {section.next_due for section in sections if section.next_due}
    shared = len(dates) == 1 and len(sections) > 1 and all(section.next_due for section in sections)
    lines = []
    for section in sections:
        wanted = _wanted(section)
        if section.next_due and not shared:
            wanted.append(f"next service due by {section.next_due}")
        if wanted:
            lines.append(f"Item {section.number}, {section.title}: " + "; ".join(wanted))
    if shared:
        lines.append(f"All items: next service due by {dates.pop()}")
    return lines or ["Nothing is asked of you."]


def _wanted(section: Section) -> list[str]:
    wanted = []
    if section.outcome == outcomes.UNSERVICEABLE:
        why = section.outcome_reason or "; ".join(section.bounds)
        wanted.append("take it out of use" + (f" ({why})" if why else ""))
    if section.restrictions:
        wanted.append(section.restrictions)
    elif section.outcome == outcomes.RESTRICTED:
        wanted.append(section.outcome_reason or "restricted because of " + "; ".join(section.bounds))
    return wanted + [_defect(text) for text in section.defects]


def _defect(text: str) -> str:
    """A defect without its who and when, which stand in the bench log."""
    return text.rpartition(" (")[0]


def _untested(hand: Hand, sections: list[Section], left: list[tuple[int, str]]) -> list[str]:
    lines = [f"Item {section.number}, {section.title}, was not examined: {section.outcome_reason or 'no reason given'}"
             for section in sections if section.outcome == outcomes.NOT_EXAMINED]
    unexamined = {section.number for section in sections if section.outcome == outcomes.NOT_EXAMINED}
    lines += [f"Item {number}: {text}" for number, text in left if number not in unexamined]
    for number, one in enumerate(hand.again.items, 1):
        if number in unexamined:
            continue
        for _, found, left_as in one.rows:
            last = left_as or found
            if last.verdict.statement == verdicts.NOT_JUDGED and "(not done: " not in last.verdict.reason:
                row = f" {last.row}" if last.row not in ("", "?") else ""
                lines.append(f"Item {number}: {last.limit['label']}{row} was not judged: {last.verdict.reason}")
        lines += [f"Item {number}: two answers stand against each other, undecided: {title_of(hand, one, slot)}"
                  for slot in one.work.conflicts if "|" in slot]
    return [*lines, "Anything beyond the items and the steps of the methods named here."]


def signature(hand: Hand, event: Any) -> Signature:
    """A signing in words."""
    given = event.data
    return Signature(
        name=given["name"], when=time_text(event.at, event.offset), meaning=given["meaning"],
        device=hand.name("device", event.device), digits=hand.data["signatures"].get(event.hash, ""),
        drawn=given.get("blob") or "",
    )


def _acknowledged(hand: Hand) -> str:
    event = hand.again.job.acknowledged.event
    if event is None:
        return "The customer's acknowledgement was not asked for."
    name, state = event.data["name"], event.data["state"]
    if state == "signed":
        return f"Received and explained: {name}, {hand.when(event)}. This is no statement about safety."
    if state == "declined":
        return f"{name or 'The customer'} declined to acknowledge receipt, {hand.when(event)}."
    return f"The customer was not present, {hand.when(event)}."


def _drawn(event: Any) -> str:
    return (event.data.get("blob") or "") if event is not None else ""
