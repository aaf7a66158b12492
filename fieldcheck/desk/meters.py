"""Meters: specification by function and range, and whether the calibration still holds."""

from __future__ import annotations

from datetime import date
from typing import Any

from fieldcheck.desk import checks, forms
from fieldcheck.desk.forms import Field, Heading, Rows
from fieldcheck.desk.lists import Column
from fieldcheck.desk.nouns import Data, Noun, Tables, blueprint
from fieldcheck.desk.workshop import Workshop
from fieldcheck.engine import meters
from fieldcheck.engine.errors import FieldcheckError

CELLS = ("upto", "resolution", "gain", "counts", "class", "full_scale", "division")
PLAIN = ("tag", "name", "calibrated", "due", "certificate")
RATED = (("low", "Rated from", "°C"), ("high", "Rated to", "°C"), ("tempco", "Outside, for each kelvin", "of spec."))
IN_WORDS = {meters.IN_CALIBRATION: "in calibration", meters.OVERDUE: "overdue", meters.UNKNOWN: "not known",
            meters.UNCHECKED: "not checked today"}


def ranges(functions: dict[str, str]) -> Rows:
    """One row a range; a function's ranges are those of the rows that name it.  functions: name -> quantity."""
    return Rows("ranges", "Specification, one row a range", (
        Field("function", "Function", "select", choices=(("", "–"), *((one, one) for one in sorted(functions))),
              required=True),
        Field("upto", "Up to", hint="2 V", required=True),
        Field("resolution", "Resolution", hint="0.1 mV"),
        Field("gain", "Of reading", hint="0.05 %", check=checks.share),
        Field("counts", "Counts", hint="3", check=checks.count),
        Field("class", "Class", hint="1.5 %", check=checks.share),
        Field("full_scale", "Full scale", hint="10 V"),
        Field("division", "Reads to", hint="0.2 V"),
        Field("leads", "Leads", hint="0.02 ohm", check=checks.of_quantity("resistance", "ohm", True)),
    ), "range", "A digital range has its share of the reading and counts; a pointer's range its class of full scale "
                "and the smallest step that is read off it. Leads count for two-wire resistance.")


def _sheet(shop: Workshop, state: Any, data: Data) -> forms.Sheet:
    return (
        Field("tag", "Tag", required=True, longest=20, hint="As it stands on the meter: M1."),
        Field("name", "What it is", required=True, longest=120, hint="Bench multimeter, 4½ digits."),
        Field("calibrated", "Calibrated on", "date"),
        Field("due", "Calibration due", "date",
              hint="Empty means not known: a safety limit is then not judged with it."),
        Field("certificate", "Certificate", longest=120),
        Field("checked", "Its check at the start of the day is done and in order", "tick"),
        Heading("Rated temperature", "Outside it the specification grows by the share given for each kelvin."),
        *(Field(key, label, unit=unit, check=checks.count) for key, label, unit in RATED),
        ranges(shop.functions),
    )


def _known(data: Data) -> tuple[dict[str, str], Tables]:
    rows = [
        {**{key: str(one.get(key, "")) for key in CELLS}, "function": function["function"],
         "leads": str(function.get("leads", ""))}
        for function in data.get("functions", ()) for one in function["ranges"]
    ]
    rated = {"low": "18", "high": "28", "tempco": "0.1", **(data.get("rated") or {})}
    return ({**{key: str(data.get(key, "")) for key in PLAIN}, **rated,
             "checked": "yes" if data.get("checked", True) else ""}, {"ranges": rows})


def _taken(shop: Workshop, state: Any, filled: forms.Filled, data: Data) -> tuple[Data, dict[str, str]]:
    wrong: dict[str, str] = {}
    rows = ranges(shop.functions)
    functions: dict[str, Data] = {}
    for number, row in filled.table(rows):
        quantity = shop.functions[row["function"]]
        for key in ("upto", "resolution", "full_scale", "division"):
            fault = checks.of_quantity(quantity, "", True)(row[key]) if row[key] else ""
            if fault:
                wrong[f"ranges-{number}-{key}"] = fault
        one = functions.setdefault(row["function"], {"function": row["function"], "quantity": quantity, "ranges": []})
        if row["leads"]:
            one["leads"] = row["leads"]
        one["ranges"].append({"name": row["upto"], **{key: row[key] for key in CELLS if row[key]}})
    same = [one for one in state.workshop.all("meter")
            if one["tag"] == filled.text("tag") and one["meter"] != data.get("meter")]
    if same:
        wrong["tag"] = f"{same[0]['name']} has this tag"
    if filled.text("due") and filled.text("calibrated") > filled.text("due"):
        wrong["due"] = "before it was calibrated"
    entered = {**{key: filled.text(key) for key in PLAIN}, "checked": filled.text("checked") == "yes",
               "rated": {key: filled.text(key) for key, *_ in RATED if filled.text(key)},
               "functions": list(functions.values())}
    if not wrong:
        try:
            meters.meter({"id": "", **entered})
        except FieldcheckError as error:
            wrong["ranges"] = str(error)
    return entered, wrong


def state_on(data: Data, day: date) -> str:
    """in calibration, overdue, not known or not checked, on a day; or that its specification is not understood."""
    try:
        return IN_WORDS[meters.meter_state(meters.meter({"id": data["meter"], **data}), day.isoformat())]
    except (FieldcheckError, KeyError, TypeError, AttributeError):
        return "specification not understood"


def _cells(state: Any, data: Data) -> dict[str, str]:
    return {"tag": data["tag"], "name": data["name"], "state": state_on(data, date.today()),
            "due": str(data.get("due", "")), "calibrated": str(data.get("calibrated", "")),
            "functions": ", ".join(one["function"] for one in data["functions"])}


NOUN = Noun(
    name="meter", plural="meters", title="Meters", new="New meter",
    about="The instruments, with the specification from which every uncertainty is computed.",
    columns=(Column("tag", "Tag"), Column("name", "What it is"), Column("state", "Calibration"),
             Column("due", "Due", True), Column("calibrated", "Calibrated", True), Column("functions", "Functions")),
    cells=_cells,
    sheet=_sheet,
    known=_known,
    taken=_taken,
)
bp = blueprint(NOUN)
