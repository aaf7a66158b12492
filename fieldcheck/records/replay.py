"""A job seen again from the events that its record carries: fold, flow, verdicts. Maker and verifier share it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from fieldcheck.engine import events, judging, outcomes, texts, work
from fieldcheck.engine.errors import NotFound, ProofError
from fieldcheck.records.words import day_text

Data = dict[str, Any]  # JSON of many kinds


@dataclass(frozen=True)
class ItemAgain:
    """One item: its compiled part, engine Item and Work, Flow, rows [(key, found, left)], bounded outcome."""

    item: Any  # engine classes carry no types
    part: Data
    part_digest: str
    work: Any
    flow: Any
    rows: list[tuple[str, Any, Any]]
    best: str
    reasons: list[str]
    allowed: list[str]


@dataclass(frozen=True)
class Again:
    """state, job and signing as the engine has them; index: the rulebook's; on: the local day of the signing."""

    state: Any
    job: Any
    signing: Any
    index: Data
    on: str
    items: list[ItemAgain]


def replay(data: Data) -> Again:
    """Fold the events of a record's data and judge every item anew. Raises FieldcheckError when they do not fit."""
    pairs = [(one["hash"], one["text"]) for one in [*data["workshop_events"], *data["events"]]]
    state = events.fold(pairs)
    job = state.jobs.get(data["job"])
    if job is None or job.opened is None:
        raise NotFound("the record holds no opening of its job", "events")
    signing = job.signing()
    if signing is None:
        raise ProofError("no signing covers all that was done", f"job {job.opened.data['number']}")
    index = texts.read(data["rulebook"]["index"], None)
    on = day_text(signing.at, signing.offset)
    items = [_item(state, job, item, index, data["rulebook"]["parts"], on) for item in job.items_in_order()]
    return Again(state, job, signing, index, on, items)


def part_digest_of(index: Data, procedure: str) -> str:
    """SHA-256 of a procedure's part, as the index names it; refuses (NotFound) an unknown procedure."""
    for one in index["procedures"]:
        if one["id"] == procedure:
            return str(one["part"])
    raise NotFound(f'the rulebook of this job has no procedure "{procedure}"', "rulebook")


def _item(state: Any, job: Any, item: Any, index: Data, parts: dict[str, str], on: str) -> ItemAgain:
    digest = part_digest_of(index, item.procedure)
    if digest not in parts:
        raise NotFound(f'the record lacks the rulebook part of "{item.procedure}"', "rulebook")
    part = texts.read(parts[digest], None)
    again = work.of_item(state, job, item, part, on)
    flow, rows, best, reasons, allowed = outcomes.closing(again)
    return ItemAgain(item, part, digest, again, flow, rows, best, list(reasons), list(allowed))


def verdicts(again: Again) -> list[Data]:
    """Every verdict and bounded outcome as plain texts: what record.json keeps and a verifier computes anew."""
    said = []
    for one in again.items:
        rows = []
        for key, found, left in one.rows:
            rows.append({"key": key, "label": (left or found).limit["label"],
                         "row": (left or found).row, "found": _said(one, found), "left": _said(one, left)})
        given = one.item.outcomes.event
        said.append({"item": one.item.id, "verdicts": rows, "best_outcome": one.best, "reasons": one.reasons,
                     "outcome": given.data["outcome"] if given is not None else ""})
    return said


def _said(one: ItemAgain, judged: Any) -> Data | None:
    if judged is None:
        return None
    explained: Data = judging.explained(one.work, judged)
    return {**explained, "printed": judging.printed(one.work, judged), "round": str(judged.round)}


def overrated(said: list[Data]) -> str:
    """The first item that was given a better outcome than its readings allow, in a sentence; "" when none was."""
    order = outcomes.OUTCOMES
    for number, one in enumerate(said, 1):
        if one["outcome"] in order and order.index(one["outcome"]) < order.index(one["best_outcome"]):
            return (f'item {number} was called "{one["outcome"]}", its readings allow at best '
                    f'"{one["best_outcome"]}": {"; ".join(one["reasons"])}')
    return ""
