"""An invented workshop on a real desk with the rules that ship: one job with one item of one procedure."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from contextlib import contextmanager
from functools import cache
from pathlib import Path
from typing import Any

from desk_at_hand import Desk
from door import opened

from fieldcheck import rulebook
from fieldcheck.desk.app import create_app
from fieldcheck.desk.shared import KEY
from fieldcheck.engine import texts
from fieldcheck.journal.forms import new_id

DEMO = Path(__file__).resolve().parents[2] / "demo"
if str(DEMO) not in sys.path:
    sys.path.append(str(DEMO))

import invented  # noqa: E402

TECHNICIAN = "R. Example"
CUSTOMER = "Example Museum"
NUMBER = "2026-0007"
TITLES = {"contact-cleaning": "Finger set, drawer 1", "gear-lubrication": "Gear case, drawer 2",
          "breaker-reclose": "Breaker, drawer 3", "sequencer-step": "Drum, drawer 4",
          "rectifier-ratio": "Plate stack, drawer 5"}


@cache
def shipped() -> Any:
    """The rules that ship, compiled once."""
    return rulebook.load(rulebook.rules_folder())


@cache
def part_of(procedure: str) -> dict[str, Any]:
    """The compiled part of a procedure, as the phone reads it."""
    book = shipped()
    digest = next(one["part"] for one in texts.read(book.index, None)["procedures"] if one["id"] == procedure)
    return dict(texts.read(book.parts[digest], None))


def meters() -> dict[str, dict[str, Any]]:
    """The demo's invented meters, in calibration whenever the tests run."""
    return {key: {**given, "due": "2099-01-01"} for key, given in invented.METERS.items()}


@contextmanager
def bench(data: Path, phone: Path, jobs: list[tuple[str, str, str]]) -> Iterator[Desk]:
    """A running desk.  jobs: (job number, procedure, depth); each job has one item."""
    app = create_app(data, shipped(), phone)
    with opened(app) as port:
        desk = Desk(f"http://127.0.0.1:{port}/phone/", app.extensions[KEY], {})
        furnish(desk)
        for number, procedure, depth in jobs:
            open_job(desk, number, procedure, depth)
        yield desk


def furnish(desk: Desk) -> None:
    """Workshop, person, customer, site, meters."""
    ids = desk.ids
    for name in ("person", "customer", "site", *meters()):
        ids[name] = new_id()
    desk.write("workshop.named", {"name": "Bench One", "address": "1 Sample Lane"})
    desk.write("person.entered", {"person": ids["person"], "name": TECHNICIAN, "competences": ["low voltage"],
                                  "active": True})
    desk.write("customer.entered", {"customer": ids["customer"], "name": CUSTOMER, "address": "2 Sample Lane",
                                    "decimal_mark": "point"})
    desk.write("site.entered", {"site": ids["site"], "customer": ids["customer"], "name": "Hall 2", "address": ""})
    for name, given in meters().items():
        desk.write("meter.entered", {"meter": ids[name], **given})


def open_job(desk: Desk, number: str, procedure: str, depth: str) -> None:
    """One job with one item; its ids are kept as "job NUMBER" and "item NUMBER"."""
    ids = desk.ids
    kind = part_of(procedure)["kind"]
    equipment, ids["item " + number], ids["job " + number] = new_id(), new_id(), new_id()
    desk.write("equipment.entered", {
        "equipment": equipment, "kind": kind, "name": TITLES[procedure],
        "identities": [{"scheme": "workshop tag", "value": "T-" + number}], "site": ids["site"],
        "customer": ids["customer"], "nameplate": {}, "remarks": ""})
    desk.write("job.opened", {
        "number": number, "customer": ids["customer"], "site": ids["site"], "place": "bench", "reason": "season",
        "rulebook": shipped().digest, "items": [{"item": ids["item " + number], "equipment": equipment, "kind": kind,
                                                 "procedure": procedure, "depth": depth}]}, ids["job " + number])
