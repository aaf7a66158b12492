"""What a batch must show before it may enter the journal; nothing here writes."""

from __future__ import annotations

import hashlib
import sqlite3
from collections.abc import Callable, Mapping, Sequence
from typing import NamedTuple

from fieldcheck.engine.chain import EVENT_PREFIX, checked, head_message, signing_message
from fieldcheck.engine.errors import EventError
from fieldcheck.journal import quick
from fieldcheck.journal.forms import Event, Head, Refused

Verifier = Callable[[str, bytes, str], bool]    # (public key, data, signature), all but the data in hexadecimal

PREFIX = EVENT_PREFIX.encode()


class Link(NamedTuple):
    """One event of a batch, read and hashed."""

    hash: str
    event: Event
    text: str


def read_batch(device: str, texts: Sequence[str]) -> list[Link]:
    """Read and hash a batch; refuse what is malformed, of another device, or not one unbroken chain."""
    links: list[Link] = []
    for number, text in enumerate(texts):
        try:
            event = checked(quick.read(text))
        except EventError as error:
            where = f"event {number + 1} of the batch" + (f", {error.where}" if error.where else "")
            raise Refused("altered", 0, error.what, where, error.mend) from error
        if event["device"] != device:
            raise Refused("altered", 0, f"it is of another device, {event['device']}", _where(event))
        if (event["type"] == "device.enrolled") != (event["seq"] == 1):
            raise Refused("altered", 0, "a device's first event enrols it, and no later one does", _where(event))
        if links:
            _check_follows(links[-1], event)
        digest = hashlib.sha256(PREFIX + text.encode()).hexdigest()
        links.append(Link(digest, event, text))
    return links


def _where(event: Event) -> str:
    return f"event {event['seq']} of device {event['device']}"


def _check_follows(before: Link, event: Event) -> None:
    if event["seq"] != before.event["seq"] + 1:
        raise Refused("gap", 0, f"event {before.event['seq'] + 1} was expected here", _where(event))
    if event["prev"] != before.hash:
        raise Refused("altered", 0, "it does not follow the event before it", _where(event))


def check_head(device: str, links: Sequence[Link], head: Head, public_key: str, verify: Verifier) -> None:
    """Refuse a batch whose last event is not the one that the device signed as its head."""
    where = f"head of device {device}"
    last = links[-1]
    if head.seq != last.event["seq"] or head.hash != last.hash:
        raise Refused("altered", 0, "the signed head is not the last event of the batch", where)
    if not verify(public_key, head_message(device, head.seq, head.hash).encode(), head.signature):
        raise Refused("signature", 0, "the signature is not of this device", where)


def check_signings(links: Sequence[Link], signatures: Mapping[str, str], key: str, verify: Verifier) -> None:
    """Refuse a batch in which a signing event lacks its signature or carries a wrong one."""
    for link in links:
        if link.event["type"] != "job.signed":
            continue
        where = _where(link.event)
        signature = signatures.get(link.hash)
        if signature is None:
            raise Refused("signature", 0, "a signing came without its signature", where)
        if not verify(key, signing_message(link.text).encode(), signature):
            raise Refused("signature", 0, "the signature is not over this signing", where)


def public_key_of(enrolment: Event) -> str:
    """The key that a device's first event names; refuses one that enrols another device or none."""
    data = enrolment["data"]
    key = data.get("public_key")
    if data.get("device") != enrolment["device"] or not isinstance(key, str) or enrolment["job"] != "":
        raise Refused("unknown device", 0, "its first event does not enrol it", f"device {enrolment['device']}")
    return key


def new_links(connection: sqlite3.Connection, device: str, links: Sequence[Link]) -> tuple[list[Link], int]:
    """(events of the batch that are not held yet, last sequence held); call it inside the transaction.

    Refuses a gap, and a second event in a place already taken: the device's chain has forked.
    """
    row = connection.execute(
        "select seq, hash from events where device = ? order by seq desc limit 1", (device,)
    ).fetchone()
    last, last_hash = (0, "") if row is None else row
    fresh = [link for link in links if link.event["seq"] > last]
    if len(fresh) < len(links):
        _check_held(connection, device, links[: len(links) - len(fresh)], last)
    if fresh:
        first = fresh[0].event
        where = _where(first)
        if first["seq"] != last + 1:
            raise Refused("gap", last, f"event {last + 1} is missing", where, f"send from event {last + 1} on")
        if first["prev"] != last_hash:
            raise Refused("fork", last, "it follows another event than the one held here", where)
    return fresh, last


def _check_held(connection: sqlite3.Connection, device: str, links: Sequence[Link], last: int) -> None:
    held = dict(connection.execute(
        "select seq, hash from events where device = ? and seq between ? and ?",
        (device, links[0].event["seq"], links[-1].event["seq"]),
    ))
    for link in links:
        seq = link.event["seq"]
        if held.get(seq) != link.hash:
            raise Refused("fork", last, "another event stands in its place here", _where(link.event),
                          "the device must enrol anew and write these events again")
