"""The demo's story: an invented workshop and one job on five kinds of equipment, played through the phone's API."""

import json
import sys
from datetime import UTC, datetime
from pathlib import Path

import invented
from phone import Hands, Phone, drawn_signature
from scripts import CORRECTION, ORDER, SCRIPTS

from fieldcheck import rulebook
from fieldcheck.desk.workshop import open_journal
from fieldcheck.engine.texts import read
from fieldcheck.journal.forms import new_id
from fieldcheck.journal.journal import Journal
from fieldcheck.keys.sealing import create_sealing_keys, has_sealing_keys

CLOCK = datetime(2026, 12, 1, 8, 0, tzinfo=UTC)
IDS = "demo-ids.json"


def say(text: str) -> None:
    """Talk goes to standard error."""
    print(text, file=sys.stderr, flush=True)


def create_workshop(data: Path) -> None:
    """Enters the invented workshop at the desk, once."""
    if (data / IDS).exists():
        return
    say("entering the invented workshop")
    journal = open_journal(data)
    if not has_sealing_keys(data / "keys"):
        create_sealing_keys(data / "keys", invented.WORKSHOP["name"])
    ids = {noun: {key: new_id() for key in table} for noun, table in (
        ("person", invented.PERSONS), ("customer", invented.CUSTOMERS), ("site", invented.SITES),
        ("equipment", invented.EQUIPMENT), ("meter", invented.METERS), ("lubricant", invented.LUBRICANTS))}
    journal.append_own("workshop.named", dict(invented.WORKSHOP))
    _enter(journal, ids, "person", invented.PERSONS, {"active": True})
    _enter(journal, ids, "customer", invented.CUSTOMERS, {})
    for key, given in invented.SITES.items():
        journal.append_own("site.entered", {"site": ids["site"][key], **given,
                                            "customer": ids["customer"][given["customer"]]})
    for key, given in invented.EQUIPMENT.items():
        journal.append_own("equipment.entered", {
            "equipment": ids["equipment"][key], "kind": given["kind"], "name": given["name"],
            "identities": [{"scheme": "workshop tag", "value": given["tag"]},
                           {"scheme": "owner's object number", "value": given["object"]}],
            "site": ids["site"]["gallery"], "customer": ids["customer"]["museum"], "nameplate": {}, "remarks": ""})
    _enter(journal, ids, "meter", invented.METERS, {})
    _enter(journal, ids, "lubricant", invented.LUBRICANTS, {})
    _open_job(journal, ids)
    (data / IDS).write_text(json.dumps(ids, indent=1))
    journal.close()


def _enter(journal: Journal, ids: dict, noun: str, table: dict, more: dict) -> None:
    for key, given in table.items():
        journal.append_own(f"{noun}.entered", {noun: ids[noun][key], **given, **more})


def _open_job(journal: Journal, ids: dict) -> None:
    book = rulebook.load(rulebook.rules_folder())
    by_kind = {one["kind"]: one["id"] for one in read(book.index, None)["procedures"]}
    items = [{"item": new_id(), "equipment": ids["equipment"][key], "kind": invented.EQUIPMENT[key]["kind"],
              "procedure": by_kind[invented.EQUIPMENT[key]["kind"]], "depth": "routine"} for key in ORDER]
    job = new_id()
    ids["job"] = job
    ids["item"] = {key: item["item"] for key, item in zip(ORDER, items, strict=True)}
    journal.append_own("job.opened", {
        "number": "2026-0001", "customer": ids["customer"]["museum"], "site": ids["site"]["gallery"], "place": "bench",
        "reason": "seasonal check before the winter display", "due": "2026-12-15", "rulebook": book.digest,
        "items": items, "received": "2026-11-28"}, job)
    journal.append_own("job.handed", {"device": "", "person": ids["person"]["tobin"]}, job)


def play(data: Path, address: str) -> Path:
    """Plays the job from the first reading to the signature, then makes the record; its path."""
    ids = json.loads((data / IDS).read_text())
    phone = Phone(address, "Demo phone", CLOCK)
    phone.pull()
    phone.enrol()
    phone.person = ids["person"]["tobin"]
    phone.write(ids["job"], "conditions.taken", {
        "ambient": {"text": "19.5", "unit": "degC"}, "humidity": {"text": "48", "unit": "%RH"},
        "voltage": {"text": "231", "unit": "V"}, "frequency": {"text": "50.0", "unit": "Hz"}})
    meters = _meters(ids)
    for key in ORDER:
        say(f"  working on: {invented.EQUIPMENT[key]['name']}")
        hands = Hands(phone, ids["job"], ids["item"][key], SCRIPTS[key], meters)
        hands.play()
        if key == CORRECTION["item"]:
            _correct(phone, ids)
        say(f"    {hands.outcome('')}")
        phone.push()
    _close(phone, ids)
    return _record(data, ids)


def _meters(ids: dict) -> dict[str, str]:
    """Function -> the meter that has it."""
    return {function["function"]: ids["meter"][key] for key, meter in invented.METERS.items()
            for function in meter["functions"]}


def _correct(phone: Phone, ids: dict) -> None:
    """A slip of the thumb, put right without erasing it."""
    item = phone.state.jobs[ids["job"]].items[ids["item"][CORRECTION["item"]]]
    key = CORRECTION["slot"]
    wrong = item.slots[key].event
    step, number, index = key.split("|")
    value = dict(wrong.data["value"])
    value["text"] = CORRECTION["text"]
    phone.write(ids["job"], "answer.corrected", {
        "item": item.id, "step": step, "round": int(number), "index": index, "kind": wrong.data["kind"], "value": value,
        "corrects": wrong.hash, "reason": CORRECTION["reason"]})


def _close(phone: Phone, ids: dict) -> None:
    """The customer was there and drew a name; then the technician signs."""
    drawn = phone.blob(drawn_signature([(30, 120), (90, 40), (140, 150), (220, 60), (300, 130), (420, 70), (560, 110)]))
    phone.write(ids["job"], "customer.acknowledged", {"state": "signed", "name": "Orla Penhallow", "blob": drawn})
    name = invented.PERSONS["tobin"]["name"]
    drawn = phone.blob(drawn_signature([(40, 60), (120, 140), (180, 50), (260, 150), (380, 60), (540, 120)]))
    phone.sign(ids["job"], name, "Job 2026-0001, five items, seasonal check", drawn)
    phone.push()


def _record(data: Path, ids: dict) -> Path:
    from fieldcheck.records import make

    say("making the record")
    return make.for_job_number(data, "2026-0001", datetime.now(UTC), None)


def record_of(data: Path) -> Path | None:
    """The record made by an earlier run, or None."""
    found = sorted((data / "records").glob("*.pdf"))
    return found[-1] if found else None


def verify(data: Path, record: Path) -> str:
    """What the record's verification says, from the file and the workshop's root alone."""
    from fieldcheck.records import verify as verifying

    root = (data / "keys" / "records" / "root.pem").read_bytes()
    said = verifying.verify(record.read_bytes(), root, None)
    if not said.intact:
        raise SystemExit(f"the record does not verify: {said.sentence}")
    return str(said.sentence)


def summary(data: Path) -> list[str]:
    """A line an item: what it is and its outcome."""
    from fieldcheck.engine import events

    ids = json.loads((data / IDS).read_text())
    state = events.fold(Journal.open(data).texts_of(ids["job"]))
    job = state.jobs[ids["job"]]
    lines = []
    for item in job.items_in_order():
        name = state.workshop.get("equipment", item.equipment)["name"]
        lines.append(f"{name}: {item.outcomes.event.data['outcome']}")
    return lines
