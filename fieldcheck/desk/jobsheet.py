"""The forms of a job: opening one, handing it out, deciding between two answers."""

from __future__ import annotations

from collections.abc import Mapping
from datetime import date
from typing import Any

from fieldcheck.desk import forms
from fieldcheck.desk.equipment import gone, number_of
from fieldcheck.desk.forms import Field, Filled, Heading
from fieldcheck.desk.workshop import Workshop
from fieldcheck.journal.forms import new_id

Data = dict[str, Any]
DEPTHS = (("", "not in this job"), ("routine", "routine"), ("full", "full"))
PLACES = (("bench", "at the bench"), ("site", "on site"))
ITEM = "item"


def next_number(state: Any, year: int) -> str:
    """The job number that comes next: J-2026-0001 and on."""
    start = f"J-{year}-"
    used = [job.opened.data["number"] for job in state.jobs.values() if job.opened is not None]
    counts = [int(one[len(start):]) for one in used if one.startswith(start) and one[len(start):].isdecimal()]
    return f"{start}{max(counts, default=0) + 1:04d}"


def offered(shop: Workshop, state: Any, site: str) -> list[tuple[Data, Data]]:
    """(equipment, procedure of the index) that can be worked on at a site."""
    joined = gone(state)
    found = []
    for equipment in state.workshop.all("equipment"):
        if equipment.get("site") == site and equipment["equipment"] not in joined:
            found += [(equipment, one) for one in shop.index["procedures"] if one["kind"] == equipment["kind"]]
    return found


def opening(shop: Workshop, state: Any, site: str) -> forms.Sheet:
    """The form that opens a job at a site: its equipment, each with the procedures of its kind."""
    items = offered(shop, state, site)
    about = "" if items else "Nothing that the rulebook knows stands here yet: enter equipment at this site first."
    return (
        Field("number", "Number", required=True, longest=40),
        Field("reason", "Reason", required=True, longest=200, hint="What is wanted, in the customer's words."),
        Field("place", "Where the work is done", "select", choices=PLACES, required=True),
        Field("received", "Received on", "date", hint="When it came to the bench."),
        Field("due", "Wanted by", "date"),
        Heading("Items", about),
        *(Field(f"{ITEM}-{equipment['equipment']}-{one['id']}", f"{number_of(equipment)} {equipment['name']}".strip()
                + f": {one['title']}", "select", _minutes(one["minutes"]), choices=DEPTHS) for equipment, one in items),
    )


def _minutes(minutes: Mapping[str, Mapping[str, int]]) -> str:
    said = [f"{depth}: {one['work']} min at work" + (f", {one['wait']} min waiting" if one["wait"] else "")
            for depth, one in minutes.items()]
    return "; ".join(said)


def known(state: Any, today: date) -> dict[str, str]:
    """What the opening form starts with."""
    return {"number": next_number(state, today.year), "place": "site"}


def opened(shop: Workshop, state: Any, filled: Filled, site: Data) -> tuple[Data, dict[str, str]]:
    """(data of job.opened, errors): at least one item, and a number that no job has."""
    wrong: dict[str, str] = {}
    number = filled.text("number")
    if any(job.opened is not None and job.opened.data["number"] == number for job in state.jobs.values()):
        wrong["number"] = "there is a job of this number"
    items = []
    pairs = offered(shop, state, site["site"])
    for equipment, one in pairs:
        depth = filled.text(f"{ITEM}-{equipment['equipment']}-{one['id']}")
        if depth:
            items.append({"item": new_id(), "equipment": equipment["equipment"], "kind": equipment["kind"],
                          "procedure": one["id"], "depth": depth})
    if not items:
        first = f"{ITEM}-{pairs[0][0]['equipment']}-{pairs[0][1]['id']}" if pairs else "reason"
        wrong[first] = "choose a depth for at least one item" if pairs else "there is no equipment to work on here"
    dates = {key: filled.text(key) for key in ("received", "due") if filled.text(key)}
    return {"number": number, "customer": site["customer"], "site": site["site"], "place": filled.text("place"),
            "reason": filled.text("reason"), **dates, "rulebook": shop.rulebook.digest, "items": items}, wrong


def handing(state: Any, own_device: str) -> forms.Sheet:
    """The form that hands a job out."""
    devices = tuple((one["device"], one["name"]) for one in state.workshop.all("device")
                    if one["device"] != own_device)
    people = tuple((one["person"], one["name"]) for one in state.workshop.all("person") if one["active"])
    return (
        Field("device", "Phone", "select", choices=(("", "any phone"), *devices)),
        Field("person", "Technician", "select", choices=(("", "choose"), *people), required=True),
    )


def deciding() -> forms.Sheet:
    """The form that decides between two answers to one question."""
    return (Field("keep", "Which holds", required=True, longest=64),
            Field("reason", "Why", required=True, longest=400))
