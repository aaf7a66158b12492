"""The phone's API: enrol, push and pull events, blobs, rulebook parts, jobs.  Every body and answer is JSON."""

from __future__ import annotations

from datetime import datetime

from flask import Blueprint, Response, jsonify, make_response, request
from flask.typing import ResponseReturnValue

from fieldcheck.desk import batches, joblist
from fieldcheck.desk.shared import workshop
from fieldcheck.journal.forms import Ack

bp = Blueprint("api", __name__, url_prefix="/api")

EVENTS_AT_ONCE = 1000
PICTURES = {b"\xff\xd8\xff": "image/jpeg", b"\x89PNG\r\n\x1a\n": "image/png"}


def _now() -> datetime:
    return datetime.now().astimezone()


def _acknowledged(ack: Ack) -> Response:
    return jsonify({"ok": True, "stored": ack.stored, "duplicates": ack.duplicates, "ack": ack.ack})


@bp.get("/ping")
def ping() -> ResponseReturnValue:
    """Whether the desk is there, and which rulebook and epoch it has."""
    shop = workshop()
    return jsonify({"ok": True, "epoch": shop.journal.epoch(), "rulebook": shop.rulebook.digest})


@bp.get("/rulebook")
def rulebook() -> ResponseReturnValue:
    """The present index, as exact text."""
    return jsonify({"digest": workshop().rulebook.digest, "index": workshop().rulebook.index})


@bp.get("/rulebook/part/<digest>")
def part(digest: str) -> ResponseReturnValue:
    """The exact text of an index or part, present or earlier; it never changes under its name."""
    answer = make_response(workshop().journal.part(digest))
    answer.mimetype = "application/json"
    answer.headers["Cache-Control"] = "private, max-age=31536000, immutable"
    return answer


@bp.post("/enrol")
def enrol() -> ResponseReturnValue:
    """Take a device's first event.  On loopback no code is asked."""
    device, texts, head, signatures = batches.enrolment(batches.body(request))
    return _acknowledged(workshop().journal.append_batch(device, texts, head, signatures, _now()))


@bp.post("/events")
def push() -> ResponseReturnValue:
    """Store a device's events; the same events sent twice are stored once."""
    device, texts, head, signatures = batches.batch(batches.body(request))
    return _acknowledged(workshop().journal.append_batch(device, texts, head, signatures, _now()))


@bp.get("/events")
def pull() -> ResponseReturnValue:
    """Events after a cursor, of one job with the workshop's stream or of all.  "more": ask again from "cursor"."""
    after, job = batches.pull_of(request.args, workshop().journal.epoch())
    stored = workshop().journal.events(after, job, EVENTS_AT_ONCE)
    return jsonify({
        "epoch": workshop().journal.epoch(),
        "cursor": stored[-1].cursor if stored else after,
        "more": len(stored) == EVENTS_AT_ONCE,
        "events": [{"hash": one.hash, "text": one.text} for one in stored],
    })


@bp.put("/blobs/<digest>")
def put_blob(digest: str) -> ResponseReturnValue:
    """Keep a photograph or drawn signature under its SHA-256; twice is once."""
    workshop().journal.put_blob(digest, request.get_data(cache=False), _now())
    return jsonify({"ok": True, "sha256": digest})


@bp.get("/blobs/<digest>")
def blob(digest: str) -> ResponseReturnValue:
    """The bytes of a blob; only pictures are given a type that a browser shows."""
    data = workshop().journal.blob(digest)
    answer = make_response(data)
    answer.mimetype = next((t for start, t in PICTURES.items() if data.startswith(start)), "application/octet-stream")
    answer.headers["Cache-Control"] = "private, max-age=31536000, immutable"
    answer.headers["Content-Disposition"] = "inline" if answer.mimetype in PICTURES.values() else "attachment"
    return answer


@bp.get("/jobs")
def jobs() -> ResponseReturnValue:
    """The jobs that a phone may take: number, site, items, who has it, what state it is in."""
    with workshop().reading() as state:
        return jsonify({"ok": True, "jobs": [joblist.for_phone(state, job) for job in joblist.jobs_of(state)]})
