"""Values that a procedure computes without judging them: shown as information, on screens and in the record."""

from fieldcheck.engine import figures, formulas, readings, units
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.engine.measured import Measured, expanded, value_of
from fieldcheck.engine.work import limit_names


def free_values(part):
    """The values of a compiled procedure that no limit depends on, in the order of the file."""
    judged = []
    for limit in part["limits"]:
        judged += limit_names(part, limit)
    return [value for value in part["values"] if value["id"] not in judged]


def calculated(work, number):
    """[{"id", "label", "row", "text"}] of the free values at a round; what cannot be computed is left out.

    text: "12.3 ± 0.4 V" with U at 95 % where the value carries one.
    """
    found = []
    for value in free_values(work.part):
        for row in _rows(work, value):
            lookup = readings.Lookup(work, number, row, value.get("each") or "") if row else \
                readings.Lookup(work, number)
            try:
                result = lookup(value["id"])
            except FieldcheckError:
                continue
            text = value_text(result, value.get("unit") or "")
            if text:
                found.append({"id": value["id"], "label": value["label"], "row": row, "text": text})
    return found


def _rows(work, value):
    if not value.get("each"):
        return [""]
    try:
        return readings.rows_of(work, work.step(value["each"]))
    except FieldcheckError:
        return []


def value_text(result, unit_name):
    """A value in its display unit with U, or "" where it is no number."""
    if isinstance(result, (list, str, bool, formulas.Bound)):
        return ""
    unit = units.unit(unit_name) if unit_name and unit_name != "1" else None

    def shown(x):
        return x if unit is None else units.from_base(x, unit)

    behind = "" if unit is None else "\u202f" + units.symbol_text(unit)
    width = 0.0
    if isinstance(result, Measured):
        width = shown(expanded(result, "95 %").U) - shown(0.0)
    if width <= 0.0:
        return figures.decimal_text(figures.parse_decimal(figures.significant(shown(value_of(result)), 4))) + behind
    text, spread = figures.value_with_uncertainty(shown(value_of(result)), width)
    return text + " ± " + spread + behind
