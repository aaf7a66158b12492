"""Reads what a phone sends: shapes and types are checked here, contents by the journal."""

from __future__ import annotations

import json
from collections.abc import Mapping
from typing import Any

from flask import Request
from werkzeug.exceptions import UnsupportedMediaType

from fieldcheck.engine import texts as event_texts
from fieldcheck.engine.errors import EventError
from fieldcheck.engine.event import check_kind
from fieldcheck.journal import quick
from fieldcheck.journal.forms import Head

Json = dict[str, Any]   # a body may hold anything; each function below says what it takes out of it
Batch = tuple[str, list[str], Head, dict[str, str]]

EVENTS_IN_A_BATCH = 1000
AS_SENT = "send the body that the phone's program sends"


def body(request: Request) -> Json:
    """The body of a request as an object; refuses another content type, bad JSON, and anything but an object."""
    if request.mimetype != "application/json":
        raise UnsupportedMediaType
    try:
        found = json.loads(request.get_data(cache=False).decode("utf-8"))
    except (ValueError, RecursionError) as error:
        raise EventError("the body is not JSON", "body", AS_SENT) from error
    if not isinstance(found, dict):
        raise EventError("the body must be an object", "body", AS_SENT)
    return found


def _text(found: Json, key: str, where: str) -> str:
    value = found.get(key)
    if not isinstance(value, str):
        raise EventError(f'"{key}" must be a text', where, AS_SENT)
    return value


def head_of(found: Json) -> Head:
    """The signed head of a body."""
    head = found.get("head")
    if not isinstance(head, dict):
        raise EventError('"head" must be an object', "body", AS_SENT)
    seq = head.get("seq")
    if not isinstance(seq, int) or isinstance(seq, bool) or not 0 < seq < 2**53:
        raise EventError('"seq" must be a whole number from 1', "head", AS_SENT)
    return Head(seq, _text(head, "hash", "head"), _text(head, "signature", "head"))


def batch(found: Json) -> Batch:
    """(device, event texts, head, signatures by event hash) of a push."""
    sent = found.get("events")
    if not isinstance(sent, list) or not all(isinstance(one, str) for one in sent):
        raise EventError('"events" must be a list of texts', "body", AS_SENT)
    if not 0 < len(sent) <= EVENTS_IN_A_BATCH:
        raise EventError(f"a batch holds 1 to {EVENTS_IN_A_BATCH} events, not {len(sent)}", "events",
                         "send them in several batches")
    for place, text in enumerate(sent):
        _known_kind(text, f"events[{place}]")
    signatures = found.get("signatures", {})
    if not isinstance(signatures, dict) or not all(isinstance(one, str) for one in signatures.values()):
        raise EventError('"signatures" must be texts by event hash', "body", AS_SENT)
    return _text(found, "device", "body"), sent, head_of(found), signatures


def _known_kind(text: str, where: str) -> None:
    """Refuses (EventError) at the door what no fold could read; malformed texts are the journal's to refuse."""
    try:
        event = quick.read(text)
    except EventError:
        return
    if not isinstance(event, dict) or not isinstance(event.get("data"), dict) or not isinstance(event.get("type"), str):
        return
    try:
        check_kind({"job": "", **event})
    except EventError as error:
        raise EventError(error.what, where, AS_SENT) from error


def enrolment(found: Json) -> Batch:
    """The same of an enrolment, which sends one event: the device's first."""
    text = _text(found, "text", "body")
    event = event_texts.read(text)
    if not isinstance(event, dict) or event.get("type") != "device.enrolled" or event.get("seq") != 1:
        raise EventError("an enrolment is a device's first event, device.enrolled", "text")
    return _text(event, "device", "text"), [text], head_of(found), {}


def pull_of(args: Mapping[str, str], epoch: str) -> tuple[int, str]:
    """(cursor, job) that a pull asks for; a cursor of another epoch means nothing and starts from zero."""
    after = args.get("after") or "0"
    if not (after.isascii() and after.isdigit() and len(after) <= 15):
        raise EventError('"after" must be a whole number', "after", "send the cursor of the last answer, or 0")
    same = args.get("epoch", epoch) == epoch
    return int(after) if same else 0, args.get("job") or "all"
