"""Writes the desk's events: one function, so that every one names who wrote it."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from flask import Response, request

from fieldcheck.desk.forms import Field, Filled
from fieldcheck.desk.workshop import Workshop
from fieldcheck.journal.forms import Stored

WRITER = "writer"
COOKIE = "fieldcheck_writer"
YEAR = 365 * 24 * 3600


def writer_field(state: Any) -> tuple[Field, ...]:
    """Who writes this: asked on every form once the workshop has persons (PINs come later)."""
    people = tuple((one["person"], one["name"]) for one in state.workshop.all("person") if one["active"])
    if not people:
        return ()
    return (Field(WRITER, "Written by", "select", choices=(("", "choose"), *people), required=True),)


def known_writer(state: Any) -> dict[str, str]:
    """The one who wrote last in this browser, while active."""
    last = request.cookies.get(COOKIE, "")
    data = state.workshop.get("person", last) if last else None
    return {WRITER: last} if data and data["active"] else {}


def write(shop: Workshop, filled: Filled, type: str, data: Mapping[str, Any], job: str = "") -> Stored:
    """One event as the desk's device, in the name of the one whom the form names."""
    return shop.journal.append_own(type, data, job, filled.text(WRITER))


def remember(answer: Response, filled: Filled) -> Response:
    """Keeps who wrote, for the next form in this browser."""
    if filled.text(WRITER):
        answer.set_cookie(COOKIE, filled.text(WRITER), max_age=YEAR, httponly=True, samesite="Strict")
    return answer
