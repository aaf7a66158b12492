"""Equipment: what it is, whose, where it stands, its several identities and its nameplate."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from flask import make_response, redirect, render_template, request, url_for
from flask.typing import ResponseReturnValue

from fieldcheck.desk import checks, entries, forms
from fieldcheck.desk.forms import Field, Heading, Rows
from fieldcheck.desk.joblist import jobs_of, name_of
from fieldcheck.desk.lists import Column
from fieldcheck.desk.nouns import Data, Links, Noun, Tables, blueprint
from fieldcheck.desk.shared import workshop
from fieldcheck.desk.workshop import Workshop
from fieldcheck.engine.errors import NotFound

TAG = "workshop tag"
UNKNOWN = "unknown"
SCHEMES = (TAG, "owner's object number", "serial number", "other")
IDENTITIES = Rows("identities", "Identities", (
    Field("scheme", "Whose number", "select", choices=(("", "–"), *((one, one) for one in SCHEMES)), required=True),
    Field("value", "Number", required=True, longest=60),
), "identity", "The workshop's tag, the owner's object number, the serial number: as many as it has.")


def gone(state: Any) -> set[str]:
    """Entries that were joined into another."""
    return {one.data["other"] for one in state.workshop.joined}


def places(state: Any) -> tuple[forms.Choice, ...]:
    """Every site with its customer, to choose from."""
    found = [(one["site"], f"{one['name']} ({name_of(state, 'customer', one['customer'])})")
             for one in state.workshop.all("site")]
    return (("", "choose"), *sorted(found, key=lambda one: one[1].casefold()))


def _plate_field(plate: Data) -> Field:
    name = f"plate-{plate['id']}"
    hint = str(plate.get("text") or "")
    if plate.get("choices"):
        choices = (("", "not asked yet"), *((one["id"], one["label"]) for one in plate["choices"]),
                   (UNKNOWN, "not marked, unknown"))
        return Field(name, plate["label"], "select", hint, choices=choices)
    if plate["quantity"] == "count":
        return Field(name, plate["label"], "plate", hint, check=checks.count)
    check = checks.of_quantity(plate["quantity"], plate["unit"]) if plate.get("quantity") else None
    return Field(name, plate["label"], "plate", hint, checks.unit_text(plate.get("unit") or ""), check=check)


def _sheet(shop: Workshop, state: Any, data: Data) -> forms.Sheet:
    plates = shop.plates(data["kind"])
    about = "As the plate says it. What is left empty here the phone asks for." if plates else \
        "The rulebook asks for nothing here."
    return (
        Field("name", "What it is", required=True, longest=120, hint="In the owner's words."),
        Field("site", "Where it stands", "select", choices=places(state), required=True,
              hint="" if len(places(state)) > 1 else "Enter the site first."),
        IDENTITIES,
        Heading("Nameplate", about),
        *(_plate_field(plate) for plate in plates),
        Field("remarks", "Remarks", "lines", longest=1000),
    )


def _known(data: Data) -> tuple[Mapping[str, str], Tables]:
    texts = {key: str(data.get(key, "")) for key in ("name", "site", "remarks")}
    for id, given in (data.get("nameplate") or {}).items():
        if given.get("unknown"):
            texts[f"plate-{id}"] = UNKNOWN          # chosen in a list; a typed field shows its tick instead
            texts[f"plate-{id}-unknown"] = "yes"
        else:
            texts[f"plate-{id}"] = given.get("choice") or given["text"]
    return texts, {"identities": data.get("identities", ())}


def _taken(shop: Workshop, state: Any, filled: forms.Filled, data: Data) -> tuple[Data, dict[str, str]]:
    wrong: dict[str, str] = {}
    identities = []
    for number, row in filled.table(IDENTITIES):
        identities.append(row)
        owner = _owner(state, row, data.get("equipment", ""))
        if owner:
            wrong[f"identities-{number}-value"] = f"this is the number of {owner}"
    site = state.workshop.get("site", filled.text("site"))
    return {"kind": data["kind"], "name": filled.text("name"), "identities": identities, "site": filled.text("site"),
            "customer": site["customer"], "nameplate": _nameplate(shop, filled, data),
            "remarks": filled.text("remarks")}, wrong


def _owner(state: Any, row: Mapping[str, str], own: str) -> str:
    """The name of other equipment with this workshop tag, which must be unique."""
    for one in state.workshop.all("equipment"):
        if row["scheme"] == TAG and one["equipment"] != own and dict(row) in one["identities"]:
            return str(one["name"])
    return ""


def _nameplate(shop: Workshop, filled: forms.Filled, data: Data) -> Data:
    """What was said of each field; what an earlier rulebook asked and this one does not is kept."""
    plates = {plate["id"]: plate for plate in shop.plates(data["kind"])}
    entered = {id: given for id, given in (data.get("nameplate") or {}).items() if id not in plates}
    for id, plate in plates.items():
        text = filled.text(f"plate-{id}")
        if (text == UNKNOWN and plate.get("choices")) or filled.text(f"plate-{id}-unknown"):
            entered[id] = {"unknown": True}
        elif text:
            entered[id] = {"choice": text, "text": text} if plate.get("choices") else {
                "text": text, "unit": plate.get("unit") or ""}
    return entered


def number_of(data: Data) -> str:
    """The number by which people here know it: the workshop's tag, else the first one it has."""
    numbers = data["identities"]
    return next((one["value"] for one in numbers if one["scheme"] == TAG), numbers[0]["value"] if numbers else "")


def _first(shop: Workshop, state: Any, args: Mapping[str, str]) -> Links:
    kinds: Data = shop.index["kinds"]
    if args.get("kind") in kinds:
        return []
    return [(url_for("equipment.new", kind=id), kinds[id]["title"]) for id in sorted(kinds)]


def _cells(state: Any, data: Data) -> dict[str, str]:
    return {"tag": number_of(data), "name": data["name"], "kind": data["kind"].replace("-", " "),
            "site": name_of(state, "site", data.get("site", "")),
            "customer": name_of(state, "customer", data.get("customer", "")),
            "others": ", ".join(one["value"] for one in data["identities"] if one["value"] != number_of(data))}


def _links(state: Any, data: Data) -> Links:
    """The jobs on this equipment, the last first, and what to do when it was entered twice."""
    jobs = [job for job in jobs_of(state) if any(item.equipment == data["equipment"] for item in job.items.values())]
    return [*((url_for("jobs.one", id=job.id), str(job.opened.data["number"])) for job in jobs),
            (url_for("equipment.same", id=data["equipment"]), "Entered twice?")]


NOUN = Noun(
    name="equipment", plural="equipment", title="Equipment", new="New equipment",
    about="Everything under care. One thing may bear several numbers.",
    columns=(Column("tag", "Number"), Column("name", "What it is"), Column("kind", "Kind"), Column("site", "Site"),
             Column("customer", "Customer"), Column("others", "Other numbers")),
    cells=_cells,
    sheet=_sheet,
    known=_known,
    taken=_taken,
    hidden=lambda state, data: data["equipment"] in gone(state),
    links=_links,
    first=_first,
)
bp = blueprint(NOUN)


@bp.route("/<id>/same", methods=("GET", "POST"))
def same(id: str) -> ResponseReturnValue:
    """Says that this and another entry are one thing."""
    shop = workshop()
    with shop.reading() as state:
        data = state.workshop.get("equipment", id)
        if data is None:
            raise NotFound("there is no such equipment", id, "go back to the list")
        others = tuple((one["equipment"], f"{number_of(one)} {one['name']}".strip())
                       for one in state.workshop.all("equipment")
                       if one["kind"] == data["kind"] and one["equipment"] not in {id, *gone(state)})
        sheet = (Field("keep", "The entry to keep", "select", choices=(("", "choose"), *others), required=True),
                 Field("reason", "How you know", required=True, longest=400), *entries.writer_field(state))
        filled = forms.start(sheet, entries.known_writer(state), {}) if request.method == "GET" else \
            forms.filled(sheet, request.form)
        if request.method == "GET" or filled.errors:
            page = render_template("nouns/same.html", id=id, name=data["name"], controls=forms.controls(sheet, filled),
                                   errors=len(filled.errors))
            return make_response(page, 422 if filled.errors else 200)
        entries.write(shop, filled, "equipment.joined",
                      {"keep": filled.text("keep"), "other": id, "reason": filled.text("reason")})
        return entries.remember(make_response(redirect(url_for("equipment.every", fresh=filled.text("keep")), 303)),
                                filled)
