"""Sites: where equipment stands, and the supply there."""

from __future__ import annotations

from typing import Any

from fieldcheck.desk import checks, forms
from fieldcheck.desk.forms import Field
from fieldcheck.desk.joblist import name_of
from fieldcheck.desk.lists import Column
from fieldcheck.desk.nouns import Data, Noun, blueprint
from fieldcheck.desk.workshop import Workshop

SUPPLY = (("supply_voltage", "Supply voltage", "V", "voltage"),
          ("supply_frequency", "Supply frequency", "Hz", "frequency"))


def customers(state: Any) -> tuple[forms.Choice, ...]:
    """Every customer, to choose from."""
    found = sorted(((one["customer"], one["name"]) for one in state.workshop.all("customer")), key=lambda one: one[1])
    return (("", "choose"), *found)


def _sheet(shop: Workshop, state: Any, data: Data) -> forms.Sheet:
    return (
        Field("name", "Name", required=True, longest=120),
        Field("customer", "Customer", "select", choices=customers(state), required=True,
              hint="" if len(customers(state)) > 1 else "Enter the customer first."),
        Field("address", "Address", "lines", longest=400),
        *(Field(key, label, unit=unit, check=checks.of_quantity(quantity, unit)) for key, label, unit, quantity
          in SUPPLY),
    )


def _taken(shop: Workshop, state: Any, filled: forms.Filled, data: Data) -> tuple[Data, dict[str, str]]:
    entered = {key: filled.text(key) for key in ("customer", "name", "address")}
    supply = {key: filled.text(key) for key, *_ in SUPPLY if filled.text(key)}
    return {**entered, **supply}, {}


NOUN = Noun(
    name="site", plural="sites", title="Sites", new="New site",
    about="Places where equipment stands.",
    columns=(Column("name", "Name"), Column("customer", "Customer"), Column("address", "Address")),
    cells=lambda state, data: {"name": data["name"], "customer": name_of(state, "customer", data["customer"]),
                               "address": data["address"].replace("\n", ", ")},
    sheet=_sheet,
    known=lambda data: ({key: str(data.get(key, "")) for key in ("name", "customer", "address",
                                                                 "supply_voltage", "supply_frequency")}, {}),
    taken=_taken,
)
bp = blueprint(NOUN)
