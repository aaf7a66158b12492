"""Customers: whose equipment it is, and how their records are written."""

from __future__ import annotations

from fieldcheck.desk import forms
from fieldcheck.desk.forms import Field
from fieldcheck.desk.lists import Column
from fieldcheck.desk.nouns import Noun, blueprint

MARKS = (("point", "point: 1.5"), ("comma", "comma: 1,5"))

SHEET: forms.Sheet = (
    Field("name", "Name", required=True, longest=120),
    Field("address", "Address", "lines", longest=400),
    Field("decimal_mark", "Decimal mark in their records", "select", choices=MARKS, required=True),
)

NOUN = Noun(
    name="customer", plural="customers", title="Customers", new="New customer",
    about="Owners of equipment. A record is addressed to one of them and speaks of nobody else.",
    columns=(Column("name", "Name"), Column("address", "Address")),
    cells=lambda state, data: {"name": data["name"], "address": data["address"].replace("\n", ", ")},
    sheet=lambda shop, state, data: SHEET,
    known=lambda data: ({"name": data.get("name", ""), "address": data.get("address", ""),
                         "decimal_mark": data.get("decimal_mark", "point")}, {}),
    taken=lambda shop, state, filled, data: ({key: filled.text(key) for key in ("name", "address", "decimal_mark")},
                                             {}),
)
bp = blueprint(NOUN)
