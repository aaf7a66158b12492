"""Digests for the engine's generators, by hashlib."""

from __future__ import annotations

import hashlib
from collections.abc import Generator
from typing import TypeVar

Result = TypeVar("Result")
Request = tuple[str, str]


def digest_of(request: Request) -> str:
    """SHA-256, in hexadecimal, of `("text", text)` as UTF-8 or of the bytes that `("hex", digits)` names."""
    form, content = request
    return hashlib.sha256(bytes.fromhex(content) if form == "hex" else content.encode()).hexdigest()


def run(steps: Generator[Request, str, Result]) -> Result:
    """Drive a generator of fieldcheck.engine.chain to its end and return its result."""
    try:
        request = next(steps)
        while True:
            request = steps.send(digest_of(request))
    except StopIteration as end:
        result: Result = end.value
        return result


def sha256(data: bytes) -> str:
    """SHA-256 in hexadecimal: the name of a blob or of a rulebook part."""
    return hashlib.sha256(data).hexdigest()
