"""An invented workshop with two customers and one job each, written through the journal as desk and phone write.

The compiled procedure is hand-made, so that these tests stand without the rulebook's texts.
"""

from __future__ import annotations

import hashlib
import io
import json
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Any

from PIL import Image

from fieldcheck.engine import chain, events, texts
from fieldcheck.journal.forms import Head, new_id
from fieldcheck.journal.hashing import run, sha256
from fieldcheck.journal.journal import Journal
from fieldcheck.keys.devices import DeviceKey, make_device_key
from fieldcheck.keys.sealing import create_sealing_keys

START = datetime(2026, 12, 1, 8, 0, tzinfo=UTC)
KEYS_SINCE = datetime(2026, 1, 1, tzinfo=UTC)
MILLIVOLTS = {"quantity": "voltage", "unit": "mV", "meter": "DC voltage"}
PRACTICE = {"source": "practice", "clause": "", "edition": ""}


def step(name: str, kind: str, phase: str, supply: str, title: str, **more: Any) -> dict[str, Any]:
    return {"id": name, "kind": kind, "phase": phase, "supply": supply, "title": title, "text": title + ".", "why": "",
            "depth": "both", "hold": False, "when": None, **more}


def limit(name: str, label: str, value: str, unit: str, entry: dict[str, Any], **more: Any) -> dict[str, Any]:
    full = {"since": "2026-01-01", "at_least": None, "at_most": None, "cite": PRACTICE, "tag": "PRACTICE", "note": "",
            **entry}
    return {"id": name, "label": label, "value": value, "unit": unit, "each": False, "rule": "guarded", "guard": "1",
            "coverage": "95 %", "safety": False, "depth": "both", "when": None, "corrective": [], "entries": [full],
            **more}


PART: dict[str, Any] = {
    "format": 1, "id": "trial-contacts", "title": "Trial of contacts", "kind": "contact-set",
    "trade": ["millivolt-drop test"], "purpose": "Find contacts that heat, and clean them.",
    "minutes": {"routine": {"work": "20", "wait": "0"}, "full": {"work": "40", "wait": "0"}},
    "supply": {"isolated": "Unplug the item and keep the plug in sight.",
               "low voltage live": "Feed from the workshop's isolated, current-limited, fused supply."},
    "cautions": [{"id": "unplugged-first", "signal": "warning", "title": "Unplug first",
                  "text": "Pull the plug and keep it in sight before you touch a contact.", "when": []}],
    "nameplate": [
        {"id": "n_contacts", "label": "Number of contacts", "quantity": "count", "unit": "", "choices": None,
         "unknown": {"then": "not judged"}, "count": True},
        {"id": "rated", "label": "Rated current", "quantity": "current", "unit": "A", "choices": None,
         "unknown": {"then": "default", "text": "1", "unit": "A", "tag": "PRACTICE", "note": ""}},
    ],
    "steps": [
        step("cover_off", "action", "prepare", "isolated", "Take the cover off",
             opens={"id": "cover", "text": "cover off"}),
        step("surface", "choice", "as found", "isolated", "Look at the surfaces",
             choices=[{"id": "clean", "label": "Clean"}, {"id": "tarnished", "label": "Tarnished, whole"}]),
        step("force", "measure", "as found", "isolated", "Contact force", quantity="force", unit="N", meter=None),
        step("untouched", "table", "as found", "low voltage live", "Drop, untouched", rows={"from": "n_contacts"},
             columns=[dict(MILLIVOLTS, id="v_plus", title="V, forward"),
                      dict(MILLIVOLTS, id="v_minus", title="V, reversed"),
                      {"id": "i", "title": "Current", "quantity": "current", "unit": "A", "meter": "DC current"}]),
        step("picture", "photograph", "as found", "isolated", "Photograph the contacts", optional=True),
        step("burnish", "action", "service", "isolated", "Burnish the contacts", corrective=True, tries=2,
             repeats_steps=["untouched"]),
        step("insulation", "measure", "as left", "isolated", "Insulation to the frame", quantity="resistance",
             unit="Mohm", meter="insulation", safety=True),
        step("cover_on", "action", "close", "isolated", "Put the cover on", restores="cover"),
        step("run", "confirm", "close", "low voltage live", "Run with the cover on"),
    ],
    "values": [{"id": "r", "label": "Contact resistance", "quantity": "resistance", "unit": "mohm", "each": "untouched",
                "formula": ["call", "four_wire_resistance", [
                    ["name", "untouched.v_plus"], ["name", "untouched.v_minus"], ["name", "untouched.i"]], {}],
                "formula_text": "four_wire_resistance(untouched.v_plus, untouched.v_minus, untouched.i)"}],
    "limits": [
        limit("resistance", "Contact resistance", "r", "mohm", {"at_most": ["num", "0.05"]}, each=True,
              corrective=["burnish"]),
        limit("force_limit", "Contact force", "force", "N", {"at_least": ["num", "0.2"]}),
        limit("insulation_limit", "Insulation to the frame", "insulation", "Mohm",
              {"at_least": ["num", "1000000"], "cite": {"source": "iec-62638", "clause": "5.3.3", "edition": "2020"},
               "tag": "MEM?"}, safety=True),
    ],
    "cases": [],
}


def rulebook() -> tuple[str, dict[str, str]]:
    """(index text, parts) of a rulebook that holds PART alone."""
    part = json.dumps(PART, ensure_ascii=False, separators=(",", ":"))
    index = {"format": 1, "procedures": [{"id": PART["id"], "title": PART["title"], "kind": PART["kind"],
                                          "part": sha256(part.encode()), "minutes": PART["minutes"], "trade": []}],
             "cautions": {}, "sources": {
                 "practice": {"title": "Common practice, no source", "note": ""},
                 "iec-62638": {"title": "IEC 62638, recurrent test and test after repair", "note": ""}},
             "materials": {}, "kinds": {"contact-set": {"title": "Contact set", "trade": ["contacts"]}}}
    return json.dumps(index, ensure_ascii=False, separators=(",", ":")), {sha256(part.encode()): part}


METERS: list[dict[str, Any]] = [
    {"tag": "M1", "name": "bench multimeter", "calibrated": "2026-03-01", "due": "2027-03-01", "certificate": "K-0412",
     "checked": True, "functions": [
         {"function": "DC voltage", "quantity": "voltage", "ranges": [
             {"name": "200 mV", "upto": "200 mV", "resolution": "0.01 mV", "gain": "0.05 %", "counts": "3"}]},
         {"function": "DC current", "quantity": "current", "ranges": [
             {"name": "10 A", "upto": "10 A", "resolution": "0.001 A", "gain": "0.2 %", "counts": "3"}]}]},
    {"tag": "M3", "name": "insulation tester", "calibrated": "2026-02-01", "due": "2027-02-01", "certificate": "K-0377",
     "checked": True, "functions": [{"function": "insulation", "quantity": "resistance", "ranges": [
         {"name": "20 MΩ", "upto": "20 Mohm", "resolution": "0.01 Mohm", "gain": "2 %", "counts": "2"}]}]},
    {"tag": "M9", "name": "meter that stayed in the drawer", "calibrated": "2024-01-01", "due": "2025-01-01",
     "certificate": "K-0009", "checked": True, "functions": []},
]


class Trial:
    """The workshop: desk, phone, ids of what was entered. `key` of the phone; `folder` holds journal and keys."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        self.desk_key = make_device_key(folder / "keys" / "desk.pem")
        self.keys = create_sealing_keys(folder / "keys", "Lantern Lane Bench", KEYS_SINCE)
        self.journal = Journal.open(folder, create=True, signer=self.desk_key)
        self.now = START
        self.journal.enrol_own("Desk", "desk", "0", self.tick())
        self.key: DeviceKey = make_device_key(folder / "phone.pem")
        self.phone = new_id()
        self.seq, self.prev, self.sent = 0, "", 0
        self.written: list[str] = []
        self.signatures: dict[str, str] = {}
        self.index, self.parts = rulebook()
        for text in (self.index, *self.parts.values()):
            self.journal.put_part(text)
        self.person = new_id()
        self._enter()

    def tick(self) -> datetime:
        self.now += timedelta(seconds=20)
        return self.now

    # ---- desk

    def desk(self, type: str, data: dict[str, Any], job: str = "") -> str:
        return self.journal.append_own(type, data, job, "", self.tick()).hash

    def _enter(self) -> None:
        self.desk("workshop.named", {"name": "Lantern Lane Bench", "address": "3 Lantern Lane\nInventown 0001"})
        self.desk("person.entered", {"person": self.person, "name": "Ada Quill", "competences": ["low voltage"],
                                     "active": True})
        self.meters = {}
        for data in METERS:
            self.meters[data["tag"]] = new_id()
            self.desk("meter.entered", {"meter": self.meters[data["tag"]], **data})
        self.write("", "device.enrolled", {"device": self.phone, "name": "Phone 1", "public_key": self.key.public_hex,
                                           "platform": "trial", "app_version": "0"})
        self.push()

    def customer(self, name: str, mark: str = "point") -> tuple[str, str]:
        """(customer, site) entered."""
        customer, site = new_id(), new_id()
        self.desk("customer.entered", {"customer": customer, "name": name, "address": "1 Platform Road\nInventown",
                                       "decimal_mark": mark})
        self.desk("site.entered", {"site": site, "customer": customer, "name": name + " layout room",
                                   "address": "1 Platform Road"})
        return customer, site

    def equipment(self, name: str, tag: str, customer: str, site: str) -> str:
        identity = new_id()
        self.desk("equipment.entered", {
            "equipment": identity, "kind": "contact-set", "name": name,
            "identities": [{"scheme": "workshop tag", "value": tag}, {"scheme": "serial", "value": tag + "-7"}],
            "site": site, "customer": customer, "nameplate": {}, "remarks": ""})
        return identity

    def open_job(self, number: str, customer: str, site: str, equipment: list[str], place: str = "bench") -> str:
        self.job = new_id()
        self.items = [new_id() for _ in equipment]
        self.desk("job.opened", {
            "number": number, "customer": customer, "site": site, "place": place, "reason": "season",
            "rulebook": sha256(self.index.encode()), "received": "2026-11-30", "items": [
                {"item": item, "equipment": one, "kind": "contact-set", "procedure": PART["id"], "depth": "routine"}
                for item, one in zip(self.items, equipment, strict=True)]}, self.job)
        self.desk("job.handed", {"device": self.phone, "person": self.person}, self.job)
        return self.job

    # ---- phone

    def write(self, job: str, type: str, data: dict[str, Any]) -> str:
        """One event of the phone, which knows all that the journal holds."""
        self.seq += 1
        known = [events.Event(digest, text) for digest, text in self.journal.texts_of(job)]
        seen = events.seen_by(known, self.phone, job)
        at = self.tick().isoformat(timespec="milliseconds").replace("+00:00", "Z")
        text = events.make(self.phone, self.seq, self.prev, at, 60, self.person if job else "", job, seen, type, data)
        self.prev = run(chain.event_digest(text))
        self.written.append(text)
        if type == "job.signed":
            self.signatures[self.prev] = self.key.sign(chain.signing_message(text).encode())
        return self.prev

    def push(self) -> None:
        head = Head(self.seq, self.prev, self.key.sign(chain.head_message(self.phone, self.seq, self.prev).encode()))
        self.journal.append_batch(self.phone, self.written[self.sent:], head, self.signatures, self.now)
        self.sent = self.seq

    def answer(self, item: str, name: str, kind: str, value: dict[str, Any], number: int = 0, index: str = "") -> str:
        return self.write(self.job, "answer.given", {"item": item, "step": name, "round": number, "index": index,
                                                     "kind": kind, "value": value})

    def done(self, item: str, name: str, kind: str = "confirm", number: int = 0, index: str = "") -> str:
        return self.answer(item, name, kind, {"done": True}, number, index)

    def read(self, item: str, name: str, text: str, unit: str, meter: str, function: str, number: int = 0,
             index: str = "") -> str:
        return self.answer(item, name, "table" if index else "measure", {
            "text": text, "unit": unit, "meter": self.meters.get(meter, ""), "function": function, "range": "",
            "statement": "", "printed": ""}, number, index)

    def row(self, item: str, row: str, plus: str, minus: str, current: str, number: int = 0) -> str:
        first = self.read(item, "untouched", plus, "mV", "M1", "DC voltage", number, row + "/v_plus")
        self.read(item, "untouched", minus, "mV", "M1", "DC voltage", number, row + "/v_minus")
        self.read(item, "untouched", current, "A", "M1", "DC current", number, row + "/i")
        return first

    def blob(self, data: bytes) -> str:
        digest = hashlib.sha256(data).hexdigest()
        self.journal.put_blob(digest, data, self.now)
        return digest

    def sign(self) -> str:
        """Sign as the phone does: root over the job's events known, with each device's last sequence."""
        self.push()
        known = [(texts.read(text), text) for _, text in self.journal.texts_of(self.job, workshop=False)]
        heads: dict[str, int] = {}
        for event, _ in known:
            heads[event["device"]] = max(heads.get(event["device"], 0), event["seq"])
        signed = self.write(self.job, "job.signed", {
            "person": self.person, "meaning": "performed", "name": "Ada Quill",
            "rulebook": sha256(self.index.encode()), "summary_sha256": sha256(b"summary"),
            "root": run(chain.root(chain.job_order(known))), "heads": heads, "blob": self.blob(STROKES)})
        self.push()
        return signed


STROKES = (b'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 300 100"><path d="M10 60L40 20L70 80L110 30" '
           b'fill="none" stroke="#1B1D1F" stroke-width="2"/><path d="M120 70L200 40L280 66" fill="none" '
           b'stroke="#1B1D1F" stroke-width="2"/></svg>')


def photograph() -> bytes:
    picture = Image.linear_gradient("L").resize((640, 480)).convert("RGB")
    held = io.BytesIO()
    picture.save(held, "JPEG")
    return held.getvalue()


def worked_item(trial: Trial, item: str) -> None:
    """Nameplate, cautions, as found with one contact outside, a correction, a step left out, service, as left."""
    trial.write(trial.job, "caution.acknowledged", {"item": item, "supply": "isolated",
                                                    "cautions": ["unplugged-first"]})
    trial.answer(item, "nameplate", "nameplate", {"text": "2", "unit": ""}, index="n_contacts")
    trial.answer(item, "nameplate", "nameplate", {"unknown": True}, index="rated")
    trial.done(item, "supply", index="cover_off")
    trial.done(item, "cover_off", "action")
    trial.answer(item, "surface", "choice", {"choice": "tarnished"})
    trial.write(trial.job, "step.left", {"item": item, "step": "force", "round": 0, "index": "",
                                         "reason": "no gauge on the bench"})
    trial.done(item, "supply", index="untouched")
    wrong = trial.row(item, "1", "112.4", "-111.8", "1.002")
    trial.write(trial.job, "answer.corrected", {
        "item": item, "step": "untouched", "round": 0, "index": "1/v_plus", "corrects": wrong, "kind": "table",
        "value": {"text": "12.40", "unit": "mV", "meter": trial.meters["M1"], "function": "DC voltage", "range": "",
                  "statement": "", "printed": ""}, "reason": "typed one digit too many"})
    trial.read(item, "untouched", "-11.80", "mV", "M1", "DC voltage", 0, "1/v_minus")
    trial.row(item, "2", "88.20", "-87.60", "1.001")
    trial.done(item, "supply", index="picture")
    trial.answer(item, "picture", "photograph", {"blob": trial.blob(photograph()), "caption": "Contacts as found"})
    trial.answer(item, "burnish", "action", {"done": True, "consumables": [{"name": "burnishing strip", "amount": "1"}],
                                             "remark": ""}, 1)
    trial.done(item, "supply", number=1, index="untouched")
    trial.row(item, "1", "9.91", "-9.40", "1.002", 1)
    trial.row(item, "2", "14.02", "-13.55", "1.001", 1)
    trial.done(item, "supply", index="insulation")
    trial.read(item, "insulation", "12.5", "MΩ", "M3", "insulation")
    trial.done(item, "cover_on", "action")
    trial.done(item, "supply", index="run")
    trial.done(item, "run")
    trial.write(trial.job, "defect.found", {"item": item, "what": "strain relief of the cord is worn",
                                            "level": "watch"})
    trial.write(trial.job, "part.used", {"item": item, "name": "contact spring", "amount": "1", "unit": "piece"})
    trial.write(trial.job, "outcome.given", {
        "item": item, "outcome": "serviceable with restrictions", "reason": "contact force was not measured",
        "restrictions": "supervised running only", "next_due": "2027-12-01"})


def full_job(folder: Path, mark: str = "point", customer: str = "Tidewater Model Club") -> Trial:
    """A journal with two customers; the job at hand is the second's, signed, with two items, one not examined."""
    trial = Trial(folder)
    other, elsewhere = trial.customer("Quarrymen Society")
    secret = trial.equipment("Quarry winch contacts", "ZZ-9", other, elsewhere)
    trial.open_job("2026-0001", other, elsewhere, [secret])
    trial.write(trial.job, "outcome.given", {"item": trial.items[0], "outcome": "not examined", "reason": "no access",
                                             "restrictions": "", "next_due": ""})
    trial.sign()
    trial.other_job = trial.job  # type: ignore[attr-defined]
    owner, site = trial.customer(customer, mark)
    first = trial.equipment("Reversing unit contacts", "LL-014", owner, site)
    second = trial.equipment("Signal <lamp> contacts", "LL-015", owner, site)
    trial.open_job("2026-0002", owner, site, [first, second])
    trial.write(trial.job, "conditions.taken", {
        "ambient": {"text": "21.5", "unit": "°C"}, "humidity": {"text": "48", "unit": "%"},
        "voltage": {"text": "229.4", "unit": "V"}, "frequency": {"text": "50.0", "unit": "Hz"}, "meter": ""})
    worked_item(trial, trial.items[0])
    trial.write(trial.job, "outcome.given", {"item": trial.items[1], "outcome": "not examined", "reason": "no access",
                                             "restrictions": "", "next_due": ""})
    trial.write(trial.job, "customer.acknowledged", {"state": "signed", "name": "Bo Ferry",
                                                     "blob": trial.blob(STROKES)})
    trial.sign()
    return trial
