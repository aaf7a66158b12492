"""A case of the rulebook as the events of a job, and record.json's data made from them without any journal."""

from __future__ import annotations

import hashlib
from functools import cache
from typing import Any

from fieldcheck import rulebook
from fieldcheck.engine import assess, events, texts
from fieldcheck.journal.hashing import sha256
from fieldcheck.records import replay

Data = dict[str, Any]
JOB, DEVICE, ITEM, PERSON, EQUIPMENT = ("j" * 26, "d" * 26, "m" * 26, "p" * 26, "e" * 26)


@cache
def book() -> Any:
    return rulebook.load(rulebook.rules_folder())


@cache
def index() -> Data:
    return dict(texts.read(book().index, None))


@cache
def part(procedure: str) -> Data:
    [digest] = [one["part"] for one in index()["procedures"] if one["id"] == procedure]
    return dict(texts.read(book().parts[digest], None))


@cache
def all_runs() -> dict[str, Data]:
    """"procedure: name of the case" -> filled-in run."""
    return {f"{one['id']}: {name}": run for one in index()["procedures"] for name, run, _ in rulebook.runs(one["id"])}


class Writer:
    """One device that writes the whole job."""

    def __init__(self, day: str) -> None:
        self.day, self.seq, self.prev, self.pairs = day, 0, "", list[tuple[str, str]]()
        self.signature = ""

    def write(self, job: str, kind: str, data: Data) -> None:
        self.seq += 1
        minute, second = divmod(self.seq, 60)
        at = f"{self.day}T{8 + minute // 60:02d}:{minute % 60:02d}:{second:02d}.000Z"
        text = events.make(DEVICE, self.seq, self.prev, at, 0, PERSON, job, {"job": {}, "workshop": {}}, kind, data)
        self.prev = hashlib.sha256(b"fieldcheck event 1\n" + text.encode()).hexdigest()
        self.pairs.append((self.prev, text))


def data_of(run: Data, mark: str = "point") -> Data:
    """record.json's data of a run: its answers as events in the order of the work, signed with an empty signature."""
    compiled = part(run["procedure"])
    work = assess.fill(compiled, run)
    assess._confirm(work)
    pen = Writer(run["on"])
    _enter(pen, run, mark)
    pen.write(JOB, "job.opened", {
        "number": "2026-0001", "customer": "c", "site": "s", "place": "bench", "reason": "season",
        "rulebook": book().digest, "items": [{"item": ITEM, "equipment": EQUIPMENT, "kind": compiled["kind"],
                                              "procedure": compiled["id"], "depth": run["depth"]}]})
    if work.conditions:
        pen.write(JOB, "conditions.taken", work.conditions)
    for name, value in work.nameplate.items():
        pen.write(JOB, "answer.given", {"item": ITEM, "step": "nameplate", "round": 0, "index": name,
                                        "kind": "nameplate", "value": value})
    for key, answer in sorted(work.answers.items(), key=lambda pair: pair[1].order):
        step, number, place = key.split("|", 2)
        slot = {"item": ITEM, "step": step, "round": int(number), "index": place}
        if answer.left:
            pen.write(JOB, "step.left", {**slot, "reason": answer.left})
        else:
            pen.write(JOB, "answer.given", {**slot, "kind": answer.kind, "value": answer.value})
    for defect in work.defects:
        pen.write(JOB, "defect.found", {"item": ITEM, **defect})
    pen.write(JOB, "job.signed", {"person": PERSON, "meaning": "performed", "name": "Ada Quill", "rulebook": "",
                                  "summary_sha256": "", "root": "0" * 64, "heads": {}})
    return _data(pen, compiled)


def _enter(pen: Writer, run: Data, mark: str) -> None:
    pen.write("", "device.enrolled", {"device": DEVICE, "name": "Phone 1", "public_key": ""})
    pen.write("", "workshop.named", {"name": "Lantern Lane Bench", "address": "3 Lantern Lane"})
    pen.write("", "person.entered", {"person": PERSON, "name": "Ada Quill", "competences": [], "active": True})
    pen.write("", "customer.entered", {"customer": "c", "name": "Tidewater Model Club", "address": "Inventown",
                                       "decimal_mark": mark})
    pen.write("", "site.entered", {"site": "s", "customer": "c", "name": "Layout room", "address": ""})
    pen.write("", "equipment.entered", {"equipment": EQUIPMENT, "kind": "", "name": "Thing under care",
                                        "identities": [{"scheme": "workshop tag", "value": "LL-1"}]})
    for data in run["meters"]:
        pen.write("", "meter.entered", {"meter": data.get("id") or data["tag"], "name": "", **data})


def _data(pen: Writer, compiled: Data) -> Data:
    [digest] = [one["part"] for one in index()["procedures"] if one["id"] == compiled["id"]]
    listed = [({"hash": given, "text": text}, texts.read(text)["job"]) for given, text in pen.pairs]
    data: Data = {
        "format": 1, "number": "R-2026-0001", "issued": "2026-12-01T10:00:00.000Z", "offset": 60, "supersedes": None,
        "software": {"name": "fieldcheck", "version": "0"}, "job": JOB,
        "events": [one for one, job in listed if job], "workshop_events": [one for one, job in listed if not job],
        "signatures": {}, "rulebook": {"digest": sha256(book().index.encode()), "index": book().index,
                                       "parts": {digest: book().parts[digest]}},
        "earlier": [], "tree": {"size": 1, "root": "0" * 64, "nodes": [], "inclusion": {}, "consistency": []},
    }
    data["verdicts"] = replay.verdicts(replay.replay(data))
    return data
