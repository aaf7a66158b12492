"""The small values that the journal takes and gives."""

from __future__ import annotations

import secrets
from dataclasses import dataclass
from datetime import UTC, datetime
from typing import Any, Protocol

from fieldcheck.engine.chain import ALPHABET
from fieldcheck.engine.errors import EventError

Event = dict[str, Any]  # what engine.texts reads: its values are of every kind that an event may hold


class Signer(Protocol):
    """A device's own key: what it signs with and how others check it."""

    @property
    def public_hex(self) -> str:
        """The uncompressed P-256 point, in hexadecimal."""

    def sign(self, data: bytes) -> str:
        """ECDSA P-256 with SHA-256 over data: r and s, 128 hexadecimal digits."""


@dataclass(frozen=True)
class Head:
    """The end of a device's chain: the last sequence, its event's hash, and the device's signature over both."""

    seq: int
    hash: str
    signature: str


@dataclass(frozen=True)
class Ack:
    """What is on disk after a batch: events stored by it, events that were there before, last sequence held."""

    stored: int
    duplicates: int
    ack: int


@dataclass(frozen=True)
class Stored:
    """One event of the journal. received: when this journal accepted it (UTC). text: exactly as its device wrote it."""

    cursor: int
    hash: str
    device: str
    seq: int
    job: str
    type: str
    received: str
    text: str


@dataclass(frozen=True)
class TreeHead:
    """The Merkle root (RFC 6962) over the texts of the journal's first `size` events."""

    size: int
    root: str


class Refused(EventError):
    """A batch was not accepted, and nothing of it was stored.

    code: gap, fork, altered, unknown device or signature. ack: last sequence of the device that is on disk.
    """

    def __init__(self, code: str, ack: int, what: str, where: str = "", mend: str = "") -> None:
        EventError.__init__(self, what, where, mend)
        self.code = code
        self.ack = ack


def new_id() -> str:
    """128 random bits as 26 characters of the house's base 32."""
    bits = secrets.randbits(128)
    return "".join(ALPHABET[bits >> shift & 31] for shift in range(125, -1, -5))


def stamp(now: datetime) -> str:
    """A moment as events write it: UTC with milliseconds, 2026-12-01T10:00:00.000Z."""
    return now.astimezone(UTC).isoformat(timespec="milliseconds").replace("+00:00", "Z")


def offset_minutes(now: datetime) -> int:
    """How many minutes local time is ahead of UTC."""
    offset = now.astimezone().utcoffset() if now.tzinfo is None else now.utcoffset()
    return 0 if offset is None else int(offset.total_seconds()) // 60
