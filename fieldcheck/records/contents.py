"""What the attached data of a record must show, one check each. Each returns a sentence of what it found and raises
Wrong with the sentence that names what is wrong."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from fieldcheck import __version__
from fieldcheck.engine import chain, texts
from fieldcheck.engine.errors import ProofError
from fieldcheck.journal.hashing import run, sha256
from fieldcheck.keys.devices import verify as verify_signature
from fieldcheck.records import document, proof, replay
from fieldcheck.records.pagetext import pages_text, squeezed
from fieldcheck.records.typefaces import printable

Data = dict[str, Any]  # JSON of many kinds
OTHER_VERSION = "Verdicts: recorded by another version of the program"


class Wrong(Exception):
    """Carries the sentence."""


def _events(data: Data) -> str:
    given = [*data["workshop_events"], *data["events"]]
    last: dict[str, tuple[int, str]] = {}
    for one in sorted(given, key=lambda each: _place(each["text"])):
        event = chain.read_event(one["text"])
        where = f"Event {event['seq']} of device {event['device']}"
        if run(chain.event_digest(one["text"])) != one["hash"]:
            raise Wrong(f"{where} was altered: its text no longer has the hash it is given under.")
        seq, digest = last.get(event["device"], (0, ""))
        if event["seq"] == seq:
            raise Wrong(f"{where} stands twice.")
        if event["seq"] == seq + 1 and event["prev"] != digest:
            raise Wrong(f"{where} does not follow the event before it.")
        last[event["device"]] = (event["seq"], one["hash"])
    if any(chain.read_event(one["text"])["job"] != data["job"] for one in data["events"]):
        raise Wrong("An event of another job stands among those of this job.")
    return f"Events: {len(given)}, each as it was hashed, in unbroken order wherever two of a device follow each other."


def _place(text: str) -> tuple[str, int]:
    event = texts.read(text)
    return event["device"], event["seq"]


def _signatures(data: Data) -> str:
    keys = {}
    for one in data["workshop_events"]:
        event = texts.read(one["text"])
        if event["type"] == "device.enrolled" and event["seq"] == 1 and event["data"]["device"] == event["device"]:
            keys[event["device"]] = event["data"]["public_key"]
    job_events = [(texts.read(one["text"]), one["text"]) for one in data["events"]]
    count = 0
    for one in data["events"]:
        event = texts.read(one["text"])
        if event["type"] != "job.signed":
            continue
        count += 1
        where = f"The signing by {event['data']['name']} (event {event['seq']} of device {event['device']})"
        message = chain.signing_message(one["text"]).encode()
        if not verify_signature(keys.get(event["device"], ""), message, data["signatures"].get(one["hash"], "")):
            raise Wrong(f"{where} is not signed by that device.")
        if proof.root_signed(event, job_events) != event["data"]["root"]:
            raise Wrong(f"{where} covers other events than those that are attached.")
    if not count:
        raise Wrong("No one has signed this job.")
    if replay.replay(data).signing is None:
        raise Wrong("Something was done after the last signing, which does not cover it.")
    return f"Signatures: {count}, made by the enrolled device over the root of the job's events."


def _rulebook(data: Data) -> str:
    book = data["rulebook"]
    if sha256(book["index"].encode()) != book["digest"]:
        raise Wrong("The rulebook's index was altered.")
    for digest, text in book["parts"].items():
        if sha256(text.encode()) != digest:
            raise Wrong(f"The rulebook part {digest[:16]}… was altered.")
    opened = [texts.read(one["text"]) for one in data["events"]]
    named = [event["data"]["rulebook"] for event in opened if event["type"] in ("job.opened", "job.signed")]
    if any(digest != book["digest"] for digest in named):
        raise Wrong("The rulebook attached is not the one that the job names.")
    return f"Rulebook: index and {len(book['parts'])} part(s) as the job names them."


def _tree(data: Data) -> str:
    events = {one["hash"]: one["text"] for one in [*data["workshop_events"], *data["events"]]}
    try:
        proof.check_tree(data["tree"], events)
    except ProofError as error:
        raise Wrong(f"The journal's proofs do not hold: {error.where[:16]}…: {error.what}.") from error
    earlier = len(data["tree"]["consistency"])
    more = f"; it only grew since {earlier} earlier record(s) of this customer" if earlier else ""
    return f"Journal: every event stands in the tree of {data['tree']['size']} events{more}."


def _verdicts(data: Data) -> str:
    again = replay.verdicts(replay.replay(data))
    first = "" if again == data["verdicts"] else _first_difference(data["verdicts"], again)
    if first and by_this_version(data):
        raise Wrong(f"Computed anew, {first} is not as recorded.")
    overrated = replay.overrated(data["verdicts"])
    if overrated:
        raise Wrong(f"The outcome does not follow from the readings: {overrated}.")
    if first:
        return f"{OTHER_VERSION}, computed with {__version__}: {first} is not the same word for word."
    count = sum(len(one["verdicts"]) for one in again)
    return f"Verdicts: {count}, each computed anew from the events and the same word for word."


def by_this_version(data: Data) -> bool:
    """Whether the record was made by the version of the program that now verifies it."""
    return bool(data["software"]["version"] == __version__)


def _first_difference(recorded: Any, again: list[Data]) -> str:
    for number, one in enumerate(again):
        old = recorded[number] if number < len(recorded) else {}
        for place, row in enumerate(one["verdicts"]):
            rows = old.get("verdicts", [])
            if place >= len(rows) or rows[place] != row:
                return f"the verdict on {row['label']}{' ' + row['row'] if row['row'] else ''} of item {number + 1}"
        if old != one:
            return f"the outcome of item {number + 1}"
    return "the number of items"


CHECKS: tuple[Callable[[Data], str], ...] = (_events, _signatures, _rulebook, _tree, _verdicts)


def check_pages(pdf: bytes, data: Data, digest: str) -> str:
    """Number on every page, digest on one, and every text on which a reader relies as the data give it."""
    pages = pages_text(pdf)
    footers = [squeezed(f"Record {data['number']} · page {place} of {len(pages)}")
               for place in range(1, len(pages) + 1)]
    for place, (page, footer) in enumerate(zip(pages, footers, strict=True), 1):
        if footer not in page:
            raise Wrong(f"Page {place} does not carry the record's number as page {place} of {len(pages)}.")
    built = document.build(data, digest)
    house = squeezed(printable(built.letter.workshop))
    whole = "".join(page.replace(house + footer, "").replace(footer, "")
                    for page, footer in zip(pages, footers, strict=True))
    missing = [text for text in document.claims(built) if squeezed(printable(text)) not in whole]
    if missing and by_this_version(data):
        raise Wrong(f"The pages do not say what the attached data say: \"{missing[0]}\" is missing.")
    if missing:
        return f"Pages: {len(pages)}, each with the record's number; another version set them in other words."
    return f"Pages: {len(pages)}, each with the record's number; they say what the attached data say."
