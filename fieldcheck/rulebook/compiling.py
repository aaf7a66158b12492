"""A checked procedure -> the JSON part that phone, desk and record read; and the index that names the parts.

Numbers are texts, formulas are trees.  The keys are those that the engine reads (work.py, procedures.py, judging.py).
"""

import json
from typing import Any

from fieldcheck.engine import units
from fieldcheck.rulebook.amounts import number_and_unit
from fieldcheck.rulebook.formula import Tree
from fieldcheck.rulebook.shapes import Column, Limit, Plate, Procedure, Step, Unknown, Value, When
from fieldcheck.rulebook.shelf import Shelf

FORMAT = 1
Bounds = dict[tuple[str, int], dict[str, Tree | None]]
Json = dict[str, Any]


def part(procedure: Procedure, trees: dict[str, Tree], bounds: Bounds, shelf: Shelf) -> Json:
    """The compiled part of one procedure."""
    return {
        "format": FORMAT, "id": procedure.id, "title": procedure.title, "kind": procedure.kind,
        "trade": procedure.trade, "purpose": procedure.purpose, "minutes": minutes(procedure),
        "supply": dict(procedure.supply),
        "cautions": [_caution(shelf, one) for one in procedure.cautions],
        "nameplate": [plate(one) for one in procedure.nameplate],
        "steps": [_step(one) for one in procedure.step],
        "values": [_value(one, trees) for one in procedure.value],
        "limits": [_limit(one, bounds) for one in procedure.limit],
    }


def text_of(compiled: Json) -> str:
    """The exact text of a part or index; its SHA-256 is its name.

    In the form of event texts (engine/texts.py reads it), but longer than an event may be.
    """
    return json.dumps(compiled, ensure_ascii=False, separators=(",", ":"), allow_nan=False)


def minutes(procedure: Procedure) -> Json:
    """Minutes at work and waiting of each depth."""
    of = procedure.minutes
    return {"routine": {"work": of.routine.work, "wait": of.routine.wait},
            "full": {"work": of.full.work, "wait": of.full.wait}}


def _caution(shelf: Shelf, name: str) -> Json:
    one = shelf.cautions[name]
    return {"id": one.id, "signal": one.signal, "title": one.title, "text": one.text, "when": list(one.supply)}


def plate(field: Plate) -> Json:
    """One nameplate question."""
    return {
        "id": field.id, "label": field.label, "text": field.text, "quantity": field.quantity, "unit": field.unit,
        "choices": [{"id": one.id, "label": one.label} for one in field.choices] or None,
        "unknown": _unknown(field, field.unknown), "count": field.quantity == "count",
    }


def _unknown(field: Plate, unknown: Unknown) -> Json:
    text, unit = unknown.value, ""
    if text and not field.choices and field.quantity != "count":
        text, unit = number_and_unit(text)
    return {"then": unknown.then, "text": text, "unit": unit, "tag": unknown.tag, "note": unknown.note}


def _when(when: When | None) -> Json | None:
    return None if when is None else {"field": when.field, "is": when.is_}


def _units(quantity: str) -> list[str]:
    return list(units.quantity(quantity).units) if quantity else []


def _step(step: Step) -> Json:
    quantity = "time" if step.kind == "timing" else step.quantity
    unit = step.unit or ("s" if step.kind == "timing" else "")
    return {
        "id": step.id, "kind": step.kind, "phase": step.phase, "supply": step.supply, "title": step.title,
        "text": step.text, "why": step.why, "drawing": step.drawing or None, "depth": step.depth, "hold": step.hold,
        "safety": step.safety, "optional": step.optional, "when": _when(step.when), "cautions": step.cautions,
        "quantity": quantity, "unit": unit, "units": _units(quantity), "meter": step.meter or None,
        "two_wire": step.two_wire, "repeats": step.repeats if isinstance(step.repeats, int) else 1,
        "abort": [_abort(one.text, one.quantity, one.at_most) for one in step.abort],
        "opens": None if step.opens is None else {"id": step.opens.id, "text": step.opens.text},
        "restores": step.restores or None,
        "choices": [{"id": one.id, "label": one.label} for one in step.choices],
        "rows": _rows(step), "columns": [_column(one) for one in step.columns], "layout": _layout(step),
        "pulses": step.pulses, "corrective": step.corrective, "tries": step.tries or 1,
        "always": step.phase == "service" and not step.corrective,
        "repeats_steps": step.repeats if isinstance(step.repeats, list) else [],
    }


def _abort(text: str, quantity: str, at_most: str) -> Json:
    number, unit = number_and_unit(at_most)
    return {"text": text, "quantity": quantity, "at_most": number, "unit": unit}


def _rows(step: Step) -> Json | None:
    if step.rows is None:
        return None
    return {"labels": step.rows.labels} if step.rows.labels else {"from": step.rows.from_}


def _column(column: Column) -> Json:
    unit = column.unit or ("s" if column.timing else "")
    return {"id": column.id, "title": column.title, "quantity": column.quantity, "unit": unit,
            "units": _units(column.quantity), "meter": column.meter or None, "timing": column.timing,
            "two_wire": column.two_wire}


def _layout(step: Step) -> Json | None:
    if step.layout is None:
        return None
    if step.layout.positions:
        return {"positions": step.layout.positions}
    return {"from": step.layout.from_,
            "layouts": {name: {"positions": positions} for name, positions in step.layout.layouts.items()}}


def _value(value: Value, trees: dict[str, Tree]) -> Json:
    return {"id": value.id, "label": value.label, "formula": trees[value.id], "formula_text": value.formula,
            "quantity": value.quantity, "unit": value.unit, "each": value.each or None}


def _limit(limit: Limit, bounds: Bounds) -> Json:
    entries = []
    for number, entry in enumerate(limit.entry):
        trees = bounds[(limit.id, number)]
        entries.append({
            "since": entry.since.isoformat(), "at_least": trees["at_least"], "at_most": trees["at_most"],
            "at_least_text": entry.at_least, "at_most_text": entry.at_most,
            "cite": {"source": entry.cite.source, "clause": entry.cite.clause, "edition": entry.cite.edition},
            "tag": entry.tag, "note": entry.note,
        })
    return {
        "id": limit.id, "label": limit.label, "value": limit.value, "unit": limit.unit, "each": limit.each,
        "rule": limit.rule, "guard": limit.guard, "probability": limit.probability, "coverage": limit.coverage,
        "safety": limit.safety, "bounds": "unserviceable" if limit.safety else limit.bounds or "restrictions",
        "depth": limit.depth, "when": _when(limit.when), "corrective": limit.corrective,
        "missing": limit.missing or limit.label, "entries": entries,
    }


def index(procedures: list[tuple[Procedure, str]], shelf: Shelf, overlay: list[Json]) -> Json:
    """The index: each procedure with the digest of its part, and what all share.

    procedures: (procedure, SHA-256 of its part's text); overlay: the workshop's own limits, [] for none.
    """
    return {
        "format": FORMAT,
        "procedures": [{"id": one.id, "title": one.title, "kind": one.kind, "part": digest, "minutes": minutes(one),
                        "trade": one.trade, "purpose": one.purpose} for one, digest in procedures],
        "cautions": {one.id: {"signal": one.signal, "title": one.title, "text": one.text}
                     for one in shelf.cautions.values()},
        "sources": {one.id: {"title": one.title, "note": one.note} for one in shelf.sources.values()},
        "materials": _materials(shelf),
        "kinds": {name: {"title": kind.title, "trade": kind.trade, "about": kind.about,
                         "nameplate": fields_of([one for one, _ in procedures if one.kind == name])}
                  for name, kind in shelf.kinds.items()},
        "meter_functions": dict(shelf.functions),
        "overlay": overlay,
    }


def fields_of(procedures: list[Procedure]) -> list[Json]:
    """The nameplate questions of several procedures of one kind, each once."""
    found: list[Json] = []
    for procedure in procedures:
        for field in procedure.nameplate:
            if field.id not in [one["id"] for one in found]:
                found.append(plate(field))
    return found


def _materials(shelf: Shelf) -> Json:
    if shelf.materials is None:
        return {"materials": [], "bases": [], "matrix": [], "agents": []}
    of = shelf.materials
    return {
        "materials": [{"id": one.id, "label": one.label, "note": one.note} for one in of.material],
        "bases": [{"id": one.id, "label": one.label, "note": one.note} for one in of.base],
        "matrix": [[one.base, one.material, one.goes] for one in of.pair],
        "agents": [{"id": one.id, "label": one.label, "never": one.never, "test_first": one.test_first,
                    "note": one.note, "tag": one.tag} for one in of.agent],
    }
