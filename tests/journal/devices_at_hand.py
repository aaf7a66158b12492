"""Devices for tests: real P-256 keys and chains of events, signed as a phone signs them."""

from __future__ import annotations

import hashlib
from datetime import UTC, datetime
from typing import Any

from cryptography.exceptions import InvalidSignature
from cryptography.hazmat.primitives import hashes, serialization
from cryptography.hazmat.primitives.asymmetric import ec
from cryptography.hazmat.primitives.asymmetric.utils import decode_dss_signature, encode_dss_signature

from fieldcheck.engine.texts import write
from fieldcheck.journal.forms import Head, new_id

NOW = datetime(2026, 12, 1, 10, 0, tzinfo=UTC)
JOB = "j" * 26


class Key:
    """A device's key, made anew for each test."""

    def __init__(self) -> None:
        self._key = ec.generate_private_key(ec.SECP256R1())

    @property
    def public_hex(self) -> str:
        point = self._key.public_key().public_bytes(
            serialization.Encoding.X962, serialization.PublicFormat.UncompressedPoint
        )
        return point.hex()

    def sign(self, data: bytes) -> str:
        r, s = decode_dss_signature(self._key.sign(data, ec.ECDSA(hashes.SHA256())))
        return (r.to_bytes(32, "big") + s.to_bytes(32, "big")).hex()


def verify(public_key: str, data: bytes, signature: str) -> bool:
    """ECDSA P-256 with SHA-256, by the library; False for anything malformed."""
    try:
        raw = bytes.fromhex(signature)
        der = encode_dss_signature(int.from_bytes(raw[:32], "big"), int.from_bytes(raw[32:], "big"))
        key = ec.EllipticCurvePublicKey.from_encoded_point(ec.SECP256R1(), bytes.fromhex(public_key))
        key.verify(der, data, ec.ECDSA(hashes.SHA256()))
    except (InvalidSignature, ValueError):
        return False
    return True


def identity(text: str) -> str:
    return hashlib.sha256(b"fieldcheck event 1\n" + text.encode()).hexdigest()


class Phone:
    """A device that writes its chain in memory and signs heads as the contract says."""

    def __init__(self, key: Key | None = None) -> None:
        self.key = key or Key()
        self.device = new_id()
        self.texts: list[str] = []
        self.hashes: list[str] = []
        self.signatures: dict[str, str] = {}
        self.write("device.enrolled", {"device": self.device, "name": "Phone", "public_key": self.key.public_hex,
                                       "platform": "test", "app_version": "0"})

    def write(self, type: str, data: dict[str, Any], job: str = "", seen: dict[str, int] | None = None) -> str:
        text = write({"v": 1, "device": self.device, "seq": len(self.texts) + 1,
                      "prev": self.hashes[-1] if self.hashes else "", "at": "2026-12-01T10:00:00.000Z", "offset": 60,
                      "person": "", "job": job, "seen": {"job": seen or {}, "workshop": {}}, "type": type,
                      "data": data})
        self.texts.append(text)
        self.hashes.append(identity(text))
        if type == "job.signed":
            self.signatures[self.hashes[-1]] = self.key.sign(b"fieldcheck signing 1\n" + text.encode())
        return self.hashes[-1]

    def note(self, text: str) -> str:
        return self.write("answer.given", {"item": "i" * 26, "step": "look", "round": 0, "index": "", "kind": "note",
                                           "value": {"text": text}}, job=JOB)

    def head(self, seq: int | None = None) -> Head:
        seq = len(self.texts) if seq is None else seq
        digest = self.hashes[seq - 1]
        message = f"fieldcheck head 1\n{self.device}\n{seq}\n{digest}"
        return Head(seq, digest, self.key.sign(message.encode()))

    def batch(self, first: int = 1, last: int | None = None) -> tuple[str, list[str], Head, dict[str, str]]:
        """Arguments of Journal.append_batch but the time: events first..last, both counted from 1."""
        last = len(self.texts) if last is None else last
        return self.device, self.texts[first - 1: last], self.head(last), self.signatures
