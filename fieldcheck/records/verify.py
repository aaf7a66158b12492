"""Verify a record from the file alone, offline: seal, attached data, pages, and every verdict computed anew.

The seal shows that nothing was changed since the workshop sealed the file. The rest shows that what was sealed hangs
together: a workshop that altered an event and sealed again is found out by the device's signature.
"""

from __future__ import annotations

import json
from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Any, Literal

from fieldcheck.engine import texts
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.journal.hashing import sha256
from fieldcheck.journal.journal import Journal
from fieldcheck.records import data as record_data
from fieldcheck.records import sealcheck
from fieldcheck.records.contents import CHECKS, OTHER_VERSION, Wrong, check_pages

Data = dict[str, Any]  # JSON of many kinds
State = Literal["intact and trusted", "intact but unknown signer", "altered", "superseded"]
TRUSTED: State = "intact and trusted"
UNKNOWN: State = "intact but unknown signer"
ALTERED: State = "altered"
SUPERSEDED: State = "superseded"


@dataclass(frozen=True)
class Verification:
    """state; sentence: one, plain, naming what is wrong where something is; details: what was checked and found.

    intact: the file and its data are as they were sealed; a superseded record is intact too. replaces: SHA-256 of the
    files of the same job that this one replaces.
    """

    state: State
    sentence: str
    details: list[str]
    number: str = ""
    sha256: str = ""
    signer_fingerprint: str = ""
    replaces: tuple[str, ...] = ()

    @property
    def intact(self) -> bool:
        """Whether nothing was changed; says nothing about who sealed it, nor whether a later record replaces it."""
        return self.state != ALTERED

    def as_dict(self) -> dict[str, Any]:
        """For JSON."""
        return {"state": self.state, "intact": self.intact, "sentence": self.sentence, "details": self.details,
                "number": self.number, "sha256": self.sha256, "signer_fingerprint": self.signer_fingerprint,
                "replaces": list(self.replaces)}


def verify(pdf: bytes, trust_root: bytes | None = None, against: bytes | None = None) -> Verification:
    """Judge a record. trust_root: the workshop's records root as PEM, None when not at hand. against: a later record.

    Never raises for what a file holds: what cannot be read is altered. Raises FieldcheckError when `trust_root` is no
    certificate.
    """
    said = _alone(pdf, trust_root)
    if against is None or not said.intact:
        return said
    return _compared(said, _alone(against, trust_root))


def in_workshop(journal: Journal, pdf: bytes, trust_root: bytes | None) -> Verification:
    """`verify`, and whether this workshop's journal knows the file and has replaced it."""
    said = _alone(pdf, trust_root)
    if not said.intact:
        return said
    issued = [texts.read(one.text)["data"] for one in _issued(journal)]
    known = any(one["number"] == said.number and one["sha256"] == said.sha256 for one in issued)
    detail = "This workshop's journal knows the file by number and SHA-256." if known else \
        "This workshop's journal does not know this file."
    said = replace(said, details=[*said.details, detail])
    later = [one["number"] for one in issued if one.get("supersedes") == said.number]
    return _superseded(said, later[-1]) if known and later else said


def _issued(journal: Journal) -> Iterator[Any]:
    after = 0
    while stored := journal.events(after):
        yield from [one for one in stored if one.type == "record.issued"]
        after = stored[-1].cursor


def _compared(said: Verification, later: Verification) -> Verification:
    if not later.intact:
        return replace(said, details=[*said.details, f"The other file does not verify: {later.sentence}"])
    if later.signer_fingerprint != said.signer_fingerprint:
        return replace(said, details=[*said.details, "The other file was sealed by another signer."])
    if said.sha256 not in later.replaces:
        told = f"The other file, record {later.number}, does not replace this one."
        return replace(said, details=[*said.details, told])
    return _superseded(said, later.number)


def _superseded(said: Verification, number: str) -> Verification:
    sentence = f"Record {said.number} is as it was sealed, but record {number} has replaced it."
    return replace(said, state=SUPERSEDED, sentence=sentence, details=[said.sentence, *said.details])


def _alone(pdf: bytes, trust_root: bytes | None) -> Verification:
    try:
        seal = sealcheck.check(pdf, trust_root)
    except ValueError as error:
        raise FieldcheckError(str(error), "root", "give the workshop's records root as a PEM file") from error
    if not seal.intact:
        return Verification(ALTERED, seal.sentence, [], sha256=sha256(pdf))
    signed_at = seal.signed_at.isoformat() if seal.signed_at else "no time"
    details = [f"Seal: {seal.signer}, {signed_at}; fingerprint of its certificate {seal.signer_fingerprint}."]
    number, replaces = "", ()
    try:
        attached = _attachment(seal)
        data = _read(attached)
        number = data["number"]
        replaces = tuple(one["sha256"] for one in data["earlier"] if one["job"] == data["job"])
        for check in CHECKS:
            details.append(check(data))
        details.append(check_pages(pdf, data, sha256(attached)))
    except Wrong as wrong:
        return Verification(ALTERED, str(wrong), details, number, sha256(pdf), seal.signer_fingerprint, replaces)
    except FieldcheckError as error:
        sentence = f"The attached data do not fit together: {error.where + ': ' if error.where else ''}{error.what}."
        return Verification(ALTERED, sentence, details, number, sha256(pdf), seal.signer_fingerprint, replaces)
    except Exception:  # the data may have any shape; whatever cannot be followed is no record of ours
        sentence = "The attached data cannot be read as a record's."
        return Verification(ALTERED, sentence, details, number, sha256(pdf), seal.signer_fingerprint, replaces)
    state = TRUSTED if seal.state == "intact_trusted" else UNKNOWN
    sentence = f"Record {number}: {seal.sentence[0].lower()}{seal.sentence[1:]}"
    if any(line.startswith(OTHER_VERSION) for line in details):
        sentence += " Its verdicts were computed by another version of the program, and this one words or finds some " \
                    "otherwise."
    return Verification(state, sentence, details, number, sha256(pdf), seal.signer_fingerprint, replaces)


def _attachment(seal: sealcheck.SealReport) -> bytes:
    if list(seal.attachments) != [record_data.NAME]:
        raise Wrong(f"The file does not carry {record_data.NAME} and nothing else, as a record does.")
    return bytes(seal.attachments[record_data.NAME])


def _read(attached: bytes) -> Data:
    data: Data = json.loads(attached)
    if data["format"] != record_data.FORMAT:
        raise Wrong(f"The attached data are of format {data['format']}, which this version cannot read.")
    if record_data.dumps(data) != attached:
        raise Wrong("The attached data are not written as a record's are (RFC 8785).")
    return data
