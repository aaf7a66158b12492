"""record.json: all that a record says and rests on, from the journal; whoever holds it needs no workshop.

It carries what concerns this job and nothing else: of the workshop's entries only those that the job names, each as
it stood at the signing, so that no word of another customer gets in.
"""

from __future__ import annotations

from collections.abc import Iterator
from datetime import datetime
from typing import Any

import rfc8785

from fieldcheck import __version__
from fieldcheck.engine import events, texts
from fieldcheck.engine.errors import FieldcheckError, NotFound
from fieldcheck.journal.forms import TreeHead, offset_minutes, stamp
from fieldcheck.journal.journal import Journal
from fieldcheck.records import replay
from fieldcheck.records.proof import tree_proofs

Data = dict[str, Any]  # JSON of many kinds
FORMAT = 1
NAME = "record.json"
NAMED_BY_JOB = ("person", "equipment", "meter", "lubricant")


def dumps(data: Data) -> bytes:
    """The bytes of record.json: RFC 8785, so that whoever writes the same data again gets the same digest."""
    return bytes(rfc8785.dumps(data))


def fold_all(journal: Journal, job_id: str) -> tuple[Any, Any]:
    """(State, Job) of the engine with the workshop's stream and one job; refuses (NotFound) an unknown job."""
    state = events.fold(journal.texts_of(job_id))
    job = state.jobs.get(job_id) if job_id else None
    if job is None or job.opened is None:
        raise NotFound("there is no such job", f"job {job_id}")
    return state, job


def collect(
    journal: Journal, job_id: str, number: str, now: datetime, head: TreeHead, earlier: list[Data],
    supersedes: Data | None,
) -> Data:
    """record.json as data, numbers as texts.

    number: of the record. head: the journal's tree head that goes out with it. earlier: [{"number", "size", "root",
    "sha256"}] of the records that this customer has. supersedes: {"number", "sha256"} or None.
    Refuses (FieldcheckError) a job that no signing covers whole.
    """
    state, job = fold_all(journal, job_id)
    signing = job.signing()
    if signing is None:
        raise FieldcheckError("the job is not signed as it stands", f"job {job.opened.data['number']}",
                              "sign it on the phone: what was done after a signing is not covered by it")
    own = sorted(job.events, key=_place)
    workshop = workshop_events(state, job, signing)
    index_digest = job.opened.data["rulebook"]
    index = journal.part(index_digest)
    parts = _parts(journal, texts.read(index, None), job)
    data: Data = {
        "format": FORMAT, "number": number, "issued": stamp(now), "offset": offset_minutes(now),
        "supersedes": supersedes, "software": {"name": "fieldcheck", "version": __version__}, "job": job_id,
        "events": [_event(one) for one in own], "workshop_events": [_event(one) for one in workshop],
        "signatures": {one.hash: journal.signature(one.hash) for one in job.signings},
        "rulebook": {"digest": index_digest, "index": index, "parts": parts},
        "earlier": earlier,
        "tree": tree_proofs(journal, head.size, head.root, [one.hash for one in [*own, *workshop]],
                            [{key: one[key] for key in ("number", "size", "root")} for one in earlier]),
    }
    data["verdicts"] = replay.verdicts(replay.replay(data))
    return data


def _place(event: Any) -> tuple[str, int]:
    return event.device, event.seq


def _event(event: Any) -> Data:
    return {"hash": event.hash, "text": event.text}


def _parts(journal: Journal, index: Data, job: Any) -> dict[str, str]:
    used = {replay.part_digest_of(index, item.procedure) for item in job.items_in_order()}
    return {digest: journal.part(digest) for digest in sorted(used)}


def workshop_events(state: Any, job: Any, signing: Any) -> list[Any]:
    """The entries that a job names, each once as known at the signing, and the enrolment of every device involved."""
    named = set()
    for event in job.events:
        named |= {event.person, *_texts_in(event.data)}
    entries = state.workshop.entries
    chosen = [_as_signed(state.workshop.named.history, signing)] if state.workshop.named.history else []
    for noun, key in (("customer", job.opened.data["customer"]), ("site", job.opened.data["site"])):
        if key in entries[noun]:
            chosen.append(_as_signed(entries[noun][key].history, signing))
    for noun in NAMED_BY_JOB:
        chosen += [_as_signed(slot.history, signing) for key, slot in entries[noun].items() if key in named]
    devices = {event.device for event in [*chosen, *job.events]} | (named & entries["device"].keys())
    chosen += [entries["device"][device].history[0] for device in devices if device in entries["device"]]
    return sorted({event.hash: event for event in chosen}.values(), key=_place)


def _as_signed(history: list[Any], signing: Any) -> Any:
    """The entry that counted for whoever signed; one made only later stands in where none was there before."""
    known = [event for event in history if events.precedes(event, signing)] or history
    return events.latest(known)[-1]


def _texts_in(value: Any) -> Iterator[str]:
    """Every text in an event's data, where an identity may stand."""
    if isinstance(value, str):
        yield value
    elif isinstance(value, dict):
        for one in value.values():
            yield from _texts_in(one)
    elif isinstance(value, list):
        for one in value:
            yield from _texts_in(one)
