"""The lubricant shelf: what stands there, with the data by which one is chosen."""

from __future__ import annotations

from typing import Any

from fieldcheck.desk import checks, forms
from fieldcheck.desk.forms import Field
from fieldcheck.desk.lists import Column
from fieldcheck.desk.nouns import Data, Noun, blueprint
from fieldcheck.desk.workshop import Workshop

TYPES = (("oil", "oil"), ("grease", "grease"))
THICKENERS = (("", "none, or not known"), *((one, one) for one in (
    "lithium", "lithium complex", "calcium", "calcium sulfonate", "aluminium complex", "polyurea", "bentonite", "PTFE",
    "silica")))
KEYS = ("name", "type", "base", "grade", "v40", "v100", "nlgi", "thickener", "remarks")

def _sheet(shop: Workshop, state: Any, data: Data) -> forms.Sheet:
    bases = tuple(shop.bases) if any(key == "unknown" for key, _ in shop.bases) else (
        *shop.bases, ("unknown", "not known"))
    return (
        Field("name", "Name on the tin", required=True, longest=80, hint="As the shelf label says it."),
        Field("type", "Oil or grease", "select", choices=TYPES, required=True),
        Field("base", "Base oil", "select", choices=bases, required=True,
              hint="Unknown is an answer: it is then held to be compatible with nothing that matters."),
        Field("grade", "Viscosity grade (ISO VG)", check=checks.count),
        Field("v40", "Viscosity at 40 °C", unit="mm²/s", check=checks.of_quantity("viscosity", "mm2/s"),
              hint="For a grease: of its base oil."),
        Field("v100", "Viscosity at 100 °C", unit="mm²/s", check=checks.of_quantity("viscosity", "mm2/s")),
        Field("nlgi", "Consistency (NLGI number)", hint="Grease only: 000, 00, 0, 1 to 6.",
              check=lambda text: "" if text in ("000", "00", "0", "1", "2", "3", "4", "5", "6")
              else "one of 000, 00, 0, 1, 2, 3, 4, 5, 6"),
        Field("thickener", "Thickener", "select", choices=THICKENERS),
        Field("remarks", "Remarks", "lines", longest=400),
    )


NOUN = Noun(
    name="lubricant", plural="lubricants", title="Lubricant shelf", new="New lubricant",
    about="What stands on the shelf. A procedure that needs oil or grease chooses from here.",
    columns=(Column("name", "Name"), Column("type", "Type"), Column("base", "Base"), Column("grade", "ISO VG", True),
             Column("v40", "mm²/s at 40 °C", True), Column("nlgi", "NLGI", True), Column("thickener", "Thickener")),
    cells=lambda state, data: {key: str(data.get(key, "")) for key in KEYS},
    sheet=_sheet,
    known=lambda data: ({"base": "unknown", **{key: str(data.get(key, "")) for key in KEYS if key in data}}, {}),
    taken=lambda shop, state, filled, data: ({key: filled.text(key) for key in KEYS}, {}),
)
bp = blueprint(NOUN)
