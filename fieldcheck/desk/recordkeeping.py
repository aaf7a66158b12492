"""Makes, finds and verifies records for the desk's pages.

What sets and seals pages is imported when it is first needed: it takes longer to load than all the rest of the desk.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any

from fieldcheck.desk import joblist
from fieldcheck.desk.workshop import Workshop
from fieldcheck.engine.errors import FieldcheckError, NotFound
from fieldcheck.keys.sealing import SealingKeys, create_sealing_keys, has_sealing_keys, load_sealing_keys

if TYPE_CHECKING:
    from fieldcheck.records.verify import Verification

KEYS = "keys"


@dataclass(frozen=True)
class Issued:
    """One record that was issued.  superseded: by which later one, or ""."""

    number: str
    sha256: str
    job: Any
    at: str
    superseded: str


def issued(state: Any) -> list[Issued]:
    """Every record, in the order of its number."""
    events = [(event, job) for job in state.jobs.values() for event in job.records]
    later = {event.data["supersedes"]: event.data["number"] for event, _ in events if event.data.get("supersedes")}
    found = [Issued(event.data["number"], event.data["sha256"], job, event.at, later.get(event.data["number"], ""))
             for event, job in events]
    return sorted(found, key=lambda one: one.number)


def find(state: Any, number: str) -> Issued:
    """The record of a number; NotFound when none was issued under it."""
    for one in issued(state):
        if one.number == number:
            return one
    raise NotFound("no record was issued under this number", number, "go back to the list")


def sealing_keys(data: Path, state: Any) -> SealingKeys:
    """The workshop's seal; made with its name at the first record."""
    if has_sealing_keys(data / KEYS):
        return load_sealing_keys(data / KEYS)
    slot = state.workshop.named
    if slot.event is None:
        raise FieldcheckError("the workshop has no name yet, and a record is sealed in its name", "workshop",
                              "name the workshop, then make the record")
    return create_sealing_keys(data / KEYS, slot.event.data["name"])


def may_make(job: Any) -> None:
    """Refuses a job whose record is made and that nothing changed since; the rest the maker itself looks at."""
    if joblist.stage(job) == joblist.RECORDED:
        raise FieldcheckError("this job's record is made and nothing came since", job.opened.data["number"],
                              "download it from the list of records")


def make(shop: Workshop, job_id: str, keys: SealingKeys) -> str:
    """Makes the record of a signed job; its number.  Takes seconds: call it while nobody waits for the state."""
    from fieldcheck.records import make as making

    return making.make(shop.journal, job_id, keys, datetime.now().astimezone()).number


def verify(shop: Workshop, pdf: bytes, later: bytes | None = None) -> Verification:
    """Verifies a record's file, against this workshop's own root when it has one, and a later record of the job."""
    from fieldcheck.records import verify as verifying

    data = shop.journal.folder
    root = load_sealing_keys(data / KEYS).root_pem if has_sealing_keys(data / KEYS) else None
    return verifying.verify(pdf, root, later)
