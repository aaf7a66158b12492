"""Photographs and drawn signatures as files named by their SHA-256, written so that a name never lies."""

from __future__ import annotations

import os
import secrets
from pathlib import Path

from fieldcheck.engine.chain import is_digest
from fieldcheck.engine.errors import NotFound, ProofError
from fieldcheck.journal.hashing import sha256


def path_of(folder: Path, digest: str) -> Path:
    """Where a blob lies; refuses (NotFound) a name that is not a SHA-256."""
    if not is_digest(digest):
        raise NotFound(f'"{digest}" is not the name of a blob', "", "a name is 64 hexadecimal digits")
    return folder / "blobs" / digest[:2] / digest


def write(folder: Path, digest: str, data: bytes) -> None:
    """Put the bytes on disk under their name, whole or not at all."""
    if sha256(data) != digest:
        raise ProofError("the bytes do not have this SHA-256", f"blob {digest}", "send the file again")
    path = path_of(folder, digest)
    if path.exists():
        return
    path.parent.mkdir(parents=True, exist_ok=True)
    beside = path.with_name(f"{digest}.{secrets.token_hex(4)}.part")
    try:
        with open(beside, "xb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
        os.replace(beside, path)
    finally:
        beside.unlink(missing_ok=True)
    _sync_folder(path.parent)


def _sync_folder(folder: Path) -> None:
    if os.name != "posix":
        return                  # elsewhere a folder cannot be opened to be synced
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def read(folder: Path, digest: str) -> bytes:
    """The bytes of a blob; refuses (ProofError) bytes that no longer have their name."""
    path = path_of(folder, digest)
    if not path.is_file():
        raise NotFound("there is no such blob", f"blob {digest}")
    data = path.read_bytes()
    if sha256(data) != digest:
        raise ProofError("the bytes on disk were altered", f"blob {digest}")
    return data
