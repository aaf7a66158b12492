"""Persons: who works here and what they may do."""

from __future__ import annotations

from typing import Any

from fieldcheck.desk import forms
from fieldcheck.desk.forms import Field
from fieldcheck.desk.lists import Column
from fieldcheck.desk.nouns import Data, Noun, blueprint
from fieldcheck.desk.workshop import Workshop

COMPETENCES = (("technician", "technician"), ("reviewer", "reviewer"), ("mains-competent", "mains-competent"))

SHEET: forms.Sheet = (
    Field("name", "Name", required=True, longest=80),
    Field("competences", "Competences", "ticks", choices=COMPETENCES,
          hint="Steps on mains parts open only to a person marked mains-competent."),
    Field("active", "Works here now", "tick"),
)


def _taken(shop: Workshop, state: Any, filled: forms.Filled, data: Data) -> tuple[Data, dict[str, str]]:
    name = filled.text("name")
    same = [one for one in state.workshop.all("person")
            if one["name"].casefold() == name.casefold() and one["person"] != data.get("person")]
    wrong = {"name": "there is a person of that name: add an initial or a number"} if same else {}
    return {"name": name, "competences": filled.several("competences"), "active": filled.text("active") == "yes"}, wrong


NOUN = Noun(
    name="person", plural="persons", title="Persons", new="New person",
    about="Everyone who works on equipment or writes at this desk. Each entry in the journal names one.",
    columns=(Column("name", "Name"), Column("competences", "Competences"), Column("active", "Here now")),
    cells=lambda state, data: {"name": data["name"], "competences": ", ".join(data["competences"]),
                               "active": "yes" if data["active"] else "no"},
    sheet=lambda shop, state, data: SHEET,
    known=lambda data: ({"name": data.get("name", ""), "competences": "\n".join(data.get("competences", ())),
                         "active": "yes" if data.get("active", True) else ""}, {}),
    taken=_taken,
    past=lambda data: not data["active"],
)
bp = blueprint(NOUN)
