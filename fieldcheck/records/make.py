"""Make the signed record of a job: check what was signed, collect, set, seal, keep, and say so in the journal."""

from __future__ import annotations

import fcntl
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from typing import Any

from fieldcheck.engine import chain, texts
from fieldcheck.engine.errors import FieldcheckError, NotFound, ProofError
from fieldcheck.journal import projections
from fieldcheck.journal.hashing import sha256
from fieldcheck.journal.journal import Journal
from fieldcheck.keys.devices import load_device_key
from fieldcheck.keys.devices import verify as verify_signature
from fieldcheck.keys.sealing import SealingKeys, create_sealing_keys, has_sealing_keys, load_sealing_keys
from fieldcheck.records import data as record_data
from fieldcheck.records import document, html, pdf, proof, replay
from fieldcheck.records.seal import seal

Data = dict[str, Any]  # JSON of many kinds
LOCK = "records.lock"
FOLDER = "records"
KEYS = "keys"
DESK_KEY = "desk.pem"


@dataclass(frozen=True)
class RecordFile:
    """number: R-2026-0001; sha256: of the PDF, its name as a blob; fresh: False when it had been made before."""

    number: str
    pdf: bytes
    sha256: str
    fresh: bool


def make(journal: Journal, job_id: str, keys: SealingKeys, now: datetime) -> RecordFile:
    """The record of a job as it is signed; the same file again when one was made of this signing.

    now: time of issue, with time zone. Refuses (FieldcheckError) a job that no signing covers whole, (ProofError) a
    signature or root that does not hold. A job signed anew gets a new record that names the one it replaces.
    """
    with _alone(journal.folder):
        _, job = record_data.fold_all(journal, job_id)
        check_signing(journal, job)
        known = _made_before(journal, job)
        return known or _make(journal, job, keys, now)


def _make(journal: Journal, job: Any, keys: SealingKeys, now: datetime) -> RecordFile:
    issued = projections.rows(journal, "record")
    number = next_number(issued, now)
    old = job.records[-1].data if job.records else None
    supersedes = None if old is None else {"number": old["number"], "sha256": old["sha256"]}
    earlier = earlier_records(journal, job.opened.data["customer"], issued)
    head = journal.issue_tree_head(now)
    data = record_data.collect(journal, job.id, number, now, head, earlier, supersedes)
    overrated = replay.overrated(data["verdicts"])
    if overrated:
        raise FieldcheckError(overrated, f"job {job.opened.data['number']}",
                              "give its outcome again on the phone, then sign")
    finished = seal(unsealed(data, journal, now), keys, now)
    digest = sha256(finished)
    journal.put_blob(digest, finished, now)
    said: Data = {"number": number, "sha256": digest, "of_root": job.signing().data["root"],
                  "tree_size": head.size, "tree_root": head.root}
    if old is not None:
        said["supersedes"] = old["number"]
    journal.append_own("record.issued", said, job.id, "", now)
    return RecordFile(number, finished, digest, fresh=True)


def unsealed(data: Data, journal: Journal, now: datetime) -> bytes:
    """The PDF/A-3b of a record's data before it is sealed, with the data attached."""
    attached = record_data.dumps(data)
    doc = document.build(data, sha256(attached))
    blobs = {}
    for name in doc.blobs():
        try:
            blobs[name] = journal.blob(name)
        except NotFound:
            continue  # the photograph has not come in yet: the page says so, its digest stands in the data
    page = html.page(doc, blobs)
    attachment = (record_data.NAME, attached, "The record's data: events, rulebook, verdicts, proofs",
                  "application/json")
    return pdf.render(page.html, page.css, [attachment], now, page.assets)


def check_signing(journal: Journal, job: Any) -> None:
    """The signing that covers a job is signed by its device, over the root of the events that are here."""
    signing = job.signing()
    where = f"job {job.opened.data['number']}"
    if signing is None:
        raise FieldcheckError("the job is not signed as it stands", where,
                              "sign it on the phone: what was done after a signing is not covered by it")
    key = texts.read(journal.enrolment(signing.device).text)["data"]["public_key"]
    message = chain.signing_message(signing.text).encode()
    if not verify_signature(key, message, journal.signature(signing.hash)):
        raise ProofError("the signature under this job is not that of the device that signed it", where)
    events = [(texts.read(event.text), event.text) for event in job.events]
    if proof.root_signed(texts.read(signing.text), events) != signing.data["root"]:
        raise ProofError("the events of this job are not those that were signed", where,
                         "let every phone hand over what it holds, then sign again")


def _made_before(journal: Journal, job: Any) -> RecordFile | None:
    last = job.records[-1].data if job.records else None
    if last is None or last.get("of_root") != job.signing().data["root"]:
        return None
    return RecordFile(last["number"], journal.blob(last["sha256"]), last["sha256"], fresh=False)


def next_number(issued: list[Data], now: datetime) -> str:
    """R-2026-0001, counted within the year of issue. issued: rows of the list of records."""
    year = f"R-{now.year}-"
    used = [int(row["id"][len(year):]) for row in issued if row["id"].startswith(year)]
    return f"{year}{max(used, default=0) + 1:04d}"


def earlier_records(journal: Journal, customer: str, issued: list[Data]) -> list[Data]:
    """The records that this customer has, with the tree heads that went out with them, oldest first."""
    theirs = {row["id"] for row in projections.rows(journal, "job") if row["customer"] == customer}
    found = []
    for row in issued:
        if row["job"] in theirs and row["data"].get("tree_size"):
            said = row["data"]
            event = next(one for one in _issuing(journal, row["job"]) if one["data"]["number"] == row["id"])
            found.append({"number": row["id"], "job": row["job"], "sha256": said["sha256"], "size": said["tree_size"],
                          "root": said["tree_root"], "issued": event["at"], "offset": event["offset"]})
    return sorted(found, key=lambda one: one["size"])


def _issuing(journal: Journal, job: str) -> list[Data]:
    read = [texts.read(text) for _, text in journal.texts_of(job, workshop=False)]
    return [event for event in read if event["type"] == "record.issued"]


@contextmanager
def _alone(folder: Path) -> Iterator[None]:
    """One record at a time in this workshop: numbers are given out in order, none twice."""
    with open(folder / LOCK, "w") as lock:
        fcntl.flock(lock, fcntl.LOCK_EX)
        yield


def sealing_keys(folder: Path, workshop: str, now: datetime) -> SealingKeys:
    """The records root and seal of a workshop's folder, made when it has none. workshop: its name."""
    if has_sealing_keys(folder / KEYS):
        return load_sealing_keys(folder / KEYS)
    return create_sealing_keys(folder / KEYS, workshop, now)


def for_job(journal: Journal, job_id: str, now: datetime) -> RecordFile:
    """`make` with the workshop's own sealing keys, made at its first record."""
    names = projections.rows(journal, "workshop")
    return make(journal, job_id, sealing_keys(journal.folder, names[-1]["name"] if names else "Workshop", now), now)


def for_job_number(folder: Path, number: str, now: datetime, out: Path | None = None) -> Path:
    """Make the record of the job with this number in a workshop's folder, write it, and return its path.

    out: file or folder to write to; else records/ in the workshop's folder. The records root stands beside it there
    as records-root.pem, for those who are to trust the seal.
    """
    key = folder / KEYS / DESK_KEY
    if not key.is_file():
        raise NotFound("there is no workshop here", str(folder), "name the workshop's folder with --data")
    journal = Journal.open(folder, signer=load_device_key(key))
    found = [row for row in projections.rows(journal, "job") if row["number"] == number]
    if not found:
        known = ", ".join(row["number"] for row in projections.rows(journal, "job"))
        raise NotFound(f'there is no job "{number}"', "", f"there are: {known or 'none yet'}")
    made = for_job(journal, found[-1]["id"], now)
    target = out or folder / FOLDER
    if out is None or out.is_dir():
        target.mkdir(parents=True, exist_ok=True)
        target = target / f"{made.number}.pdf"
    target.write_bytes(made.pdf)
    if out is None:
        (folder / FOLDER / "records-root.pem").write_bytes(load_sealing_keys(folder / KEYS).root_pem)
    return target


