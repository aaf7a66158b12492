"""A real desk on a free port with an invented workshop, and a phone-sized page on it."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from door import opened
from trial_rules import METERS, TrialRulebook, rulebook

from fieldcheck.desk.app import create_app
from fieldcheck.desk.shared import KEY
from fieldcheck.desk.workshop import Rulebook, Workshop
from fieldcheck.engine import events, texts
from fieldcheck.journal.forms import new_id

PHONE_SIZE = {"width": 390, "height": 844}


@dataclass
class Desk:
    """A running desk.  address: of the phone's page; shop: the workshop; ids: what setting up made."""

    address: str
    shop: Workshop
    ids: dict[str, str]

    def write(self, kind: str, data: dict[str, Any], job: str = "") -> str:
        """One event of the desk's own device."""
        return str(self.shop.journal.append_own(kind, data, job=job, person="", now=datetime.now(UTC)))

    def state(self) -> Any:
        """The fold of all that the desk holds."""
        return events.fold([(one.hash, one.text) for one in self.shop.journal.events(limit=100000)])

    def events(self, kind: str) -> list[dict[str, Any]]:
        """Every event of a kind, in the order received, as read."""
        found = [texts.read(one.text) for one in self.shop.journal.events(limit=100000) if one.type == kind]
        return [dict(one) for one in found]


@contextmanager
def running(data: Path, phone: Path, rules: Rulebook | None = None, procedure: str = "") -> Iterator[Desk]:
    """A desk with one person, customer, site, two meters and one open job with two items of one procedure."""
    book: Rulebook = rules or rulebook()
    app = create_app(data, book, phone)
    with opened(app) as port:
        desk = Desk(f"http://127.0.0.1:{port}/phone/", app.extensions[KEY], {})
        furnish(desk, book, procedure)
        yield desk


def furnish(desk: Desk, book: Rulebook, name_of_procedure: str) -> None:
    """The invented workshop: one job with two items of one kind."""
    for name in ("person", "customer", "site", "m1", "m2", "first", "second", "job", "item1", "item2"):
        desk.ids[name] = new_id()
    ids = desk.ids
    index = texts.read(book.index, None)
    wanted = [one for one in index["procedures"] if one["id"] == name_of_procedure]
    procedure = (wanted or index["procedures"])[0]
    desk.write("workshop.named", {"name": "Bench One", "address": "1 Sample Lane"})
    desk.write("person.entered", {"person": ids["person"], "name": "R. Example", "competences": ["bench"],
                                  "active": True})
    desk.write("customer.entered", {"customer": ids["customer"], "name": "Example Museum", "address": "2 Sample Lane",
                                    "decimal_mark": "point"})
    desk.write("site.entered", {"site": ids["site"], "customer": ids["customer"], "name": "Hall 2", "address": ""})
    for name, meter in zip(("m1", "m2"), METERS, strict=True):
        desk.write("meter.entered", {"meter": ids[name], **meter})
    for name, title in (("first", "Contact set, drawer 1"), ("second", "Contact set, drawer 2")):
        desk.write("equipment.entered", {
            "equipment": ids[name], "kind": procedure["kind"], "name": title,
            "identities": [{"scheme": "workshop tag", "value": name}], "site": ids["site"],
            "customer": ids["customer"], "nameplate": {}, "remarks": ""})
    desk.write("job.opened", {
        "number": "2026-001", "customer": ids["customer"], "site": ids["site"], "place": "bench", "reason": "season",
        "rulebook": book.digest, "items": [
            {"item": ids["item1"], "equipment": ids["first"], "kind": procedure["kind"],
             "procedure": procedure["id"], "depth": "routine"},
            {"item": ids["item2"], "equipment": ids["second"], "kind": procedure["kind"],
             "procedure": procedure["id"], "depth": "routine"}]}, ids["job"])


__all__ = ["PHONE_SIZE", "Desk", "TrialRulebook", "furnish", "running"]
