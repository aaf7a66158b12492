"""What the number commands do: read values with uncertainty, call the engine, put the answer into words."""

import json
from typing import Any

from fieldcheck import rulebook
from fieldcheck.engine import budgets, entry, explain, figures, formulas, units
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.engine.measured import Measured, influence, value_of
from fieldcheck.engine.physics.registry import REGISTRY, Function, call

PLUS_MINUS = ("±", "+-", "+/-")
Value = Any  # float or Measured, in SI


# ---- functions -------------------------------------------------------------------------------------------------------


def signature(function: Function) -> str:
    """name(argument: unit, ...) -> unit"""
    arguments = []
    for one in function.parameters:
        kind = f"list of {one.unit}" if one.kind == "list" else one.unit or one.kind
        arguments.append(f"{one.name}: {kind}" + (" (may be left out)" if one.optional else ""))
    return f"{function.name}({', '.join(arguments)}) -> {function.unit or 'ratio'}"


def described(function: Function) -> dict[str, Any]:
    """One function as plain data."""
    return {
        "name": function.name, "summary": function.summary, "returns": function.returns, "unit": function.unit,
        "source": function.source, "tag": function.tag, "module": function.module,
        "parameters": [{"name": p.name, "quantity": p.quantity, "unit": p.unit, "kind": p.kind, "optional": p.optional}
                       for p in function.parameters],
    }


def function_list(as_json: bool) -> str:
    """All functions, one a line."""
    found = [REGISTRY[name] for name in sorted(REGISTRY.keys())]
    if as_json:
        return json.dumps([described(one) for one in found], indent=2, ensure_ascii=False)
    return "\n".join(f"{one.name}: {one.summary}" for one in found)


def description(function: Function, as_json: bool) -> str:
    """One function with its arguments, units and source."""
    if as_json:
        return json.dumps(described(function), indent=2, ensure_ascii=False)
    return f"{signature(function)}\n{function.summary}\nsource: {function.source} [{function.tag}]"


def computed(function: Function, arguments: tuple[str, ...], as_json: bool) -> str:
    """The function's answer for KEY=VALUE texts, with uncertainty when a value carries one."""
    given: dict[str, Any] = {}
    known = {p.name: p for p in function.parameters}
    for text in arguments:
        key, equals, value = text.partition("=")
        if not equals or key not in known:
            raise FieldcheckError(f'"{text}" is not an argument of {function.name}', "",
                                  "write KEY=VALUE; " + signature(function))
        given[key] = argument(known[key], value)
    result = call(function.name, given)
    unit = units.unit(function.unit) if function.unit else None
    if as_json:
        return json.dumps({"function": function.name, "unit": function.unit, **numbers(result)}, ensure_ascii=False)
    printed_unit = units.symbol_text(unit) if unit is not None and function.unit != "1" else ""
    return line(result, printed_unit)


def argument(parameter: Any, text: str) -> Any:
    """One argument from its text: a value, a list of values with commas, or words."""
    if parameter.kind == "text":
        return text
    if parameter.kind == "texts":
        return text.split(",") if "," in text else list(text)
    if parameter.kind == "list":
        pieces = text.split(",")
        return [value(one, parameter.quantity, f"{parameter.name}[{i}]") for i, one in enumerate(pieces)]
    return value(text, parameter.quantity, parameter.name)


def value(text: str, quantity: str, name: str) -> Value:
    """A value with its unit and perhaps ± its standard uncertainty; both parts may carry the unit, once is enough."""
    base = units.quantity(quantity).base_unit
    for sign in PLUS_MINUS:
        if sign in text:
            middle, _, width = text.partition(sign)
            spread = entry.read(width.strip(), _width_quantity(quantity), default_unit=None if _has_unit(width) else None)
            unit = _unit_in(width)
            if not _has_unit(middle) and unit:
                middle = middle.strip() + " " + unit
            centre = _one(middle, quantity, base, name)
            if not _has_unit(width) and _unit_in(middle):
                spread = entry.read(width.strip() + " " + _unit_in(middle), _width_quantity(quantity))
            elif not _has_unit(width):
                spread = entry.read(width.strip(), _width_quantity(quantity), default_unit=_width_base(quantity, base))
            return influence(centre, abs(float(spread.values[0].base)), name)
    return _one(text, quantity, base, name)


def _width_quantity(quantity: str) -> str:
    return "temperature difference" if quantity == "temperature" else quantity


def _width_base(quantity: str, base: str) -> str:
    return "K" if quantity == "temperature" else base


def _has_unit(text: str) -> bool:
    return bool(_unit_in(text))


def _unit_in(text: str) -> str:
    """The unit that stands behind the figures, or ""."""
    stripped = text.strip()
    cut = len(stripped)
    while cut > 0 and not stripped[cut - 1].isdigit() and stripped[cut - 1] != ".":
        cut -= 1
    return stripped[cut:].strip()


def _one(text: str, quantity: str, base: str, name: str) -> float:
    try:
        read = entry.read(text.strip(), quantity, default_unit=base, allow=("negative",))
    except FieldcheckError as error:
        raise FieldcheckError(error.what, name, error.mend) from error
    return float(read.values[0].base)


# ---- a value with its uncertainty as texts -----------------------------------------------------------------------------


def numbers(result: Value, correlations: Any = None, coverage: str = "95 %") -> dict[str, Any]:
    """value, u, degrees of freedom, k, U and budget of a result, as texts with every digit that is known."""
    if not isinstance(result, Measured):
        return {"value": figures.decimal_text(float(result))}
    wide = budgets.expanded(result, coverage, correlations)
    return {
        "value": repr(float(result.value)), "u": repr(float(wide.u)),
        "dof": "infinite" if wide.dof is None else repr(float(wide.dof)), "k": repr(float(wide.k)),
        "U": repr(float(wide.U)), "coverage": coverage,
        "budget": [{"name": name, "contribution": repr(float(part)), "share": explain.percent(share)}
                   for name, part, share in budgets.budget(result, correlations)],
    }


def line(result: Value, unit: str) -> str:
    """One line for a person: the value, or value ± U with k."""
    behind = " " + unit if unit else ""
    if not isinstance(result, Measured):
        return figures.decimal_text(figures.round12(float(result))) + behind
    wide = budgets.expanded(result, "95 %")
    if wide.U == 0.0:
        return figures.decimal_text(figures.round12(value_of(result))) + behind
    shown, spread = figures.value_with_uncertainty(result.value, wide.U)
    dof = "infinite" if wide.dof is None else str(int(wide.dof))
    k = figures.significant(wide.k, 3)
    return f"{shown} ± {spread}{behind}   (U = k·u, k = {k}, 95 %, degrees of freedom {dof})"


# ---- evaluate ----------------------------------------------------------------------------------------------------------


def evaluated(model: Any) -> dict[str, Any]:
    """Value, u, effective degrees of freedom, U and budget of a model (see `fieldcheck evaluate --help`)."""
    if not isinstance(model, dict) or not isinstance(model.get("formula"), str):
        raise FieldcheckError('a model needs a "formula"', "", "see fieldcheck evaluate --help")
    quantities = model.get("quantities")
    if not isinstance(quantities, dict):
        raise FieldcheckError('a model needs "quantities"', "", "see fieldcheck evaluate --help")
    for key in model:
        if key not in ("formula", "quantities", "correlations", "coverage"):
            raise FieldcheckError(f'unknown key "{key}"', "", "use formula, quantities, correlations, coverage")
    known = {name: quantity(name, data) for name, data in quantities.items()}
    tree = rulebook.formula(model["formula"])

    def lookup(name: str) -> Value:
        if name.startswith("each "):
            name = name[5:]
        if name not in known:
            raise FieldcheckError(f'the formula names "{name}", which is not among the quantities', "quantities",
                                  "known: " + ", ".join(known))
        return known[name]

    result = formulas.evaluate(tree, lookup)
    given = correlations(model.get("correlations") or [], known)
    return {"formula": formulas.text(tree), **numbers(result, given, model.get("coverage") or "95 %")}


def quantity(name: str, data: Any) -> Value:
    """One quantity: {"value", "u"?, "dof"?}; numbers as JSON numbers or texts."""
    if not isinstance(data, dict) or "value" not in data:
        raise FieldcheckError('a quantity needs a "value"', f"quantities.{name}", 'as {"value": "5.007", "u": "0.003"}')
    for key in data:
        if key not in ("value", "u", "dof"):
            raise FieldcheckError(f'unknown key "{key}"', f"quantities.{name}", "use value, u, dof")
    centre = number(data["value"], f"quantities.{name}.value")
    u = number(data.get("u", 0), f"quantities.{name}.u")
    if not u >= 0.0:
        raise FieldcheckError("a standard uncertainty is zero or more", f"quantities.{name}.u", "give it without sign")
    dof = data.get("dof")
    freedom = None if dof in (None, "", "infinite") else number(dof, f"quantities.{name}.dof")
    if freedom is not None and not freedom >= 1.0:
        raise FieldcheckError("degrees of freedom are 1 or more", f"quantities.{name}.dof", "leave it out for infinite")
    return influence(centre, u, name, freedom)


def number(given: Any, where: str) -> float:
    """A finite float from a JSON number or a plain decimal text."""
    if isinstance(given, bool) or not isinstance(given, int | float | str):
        raise FieldcheckError(f"{json.dumps(given)} is not a number", where, "as 5.007 or \"5.007\"")
    try:
        result = figures.parse_decimal(given) if isinstance(given, str) else float(given)
    except FieldcheckError as error:
        raise FieldcheckError(error.what, where, error.mend) from error
    except OverflowError:
        result = float("inf")
    if result != result or result in (float("inf"), float("-inf")):
        raise FieldcheckError("a quantity must be finite", where, "leave out what is not known")
    return result


def correlations(rows: Any, known: dict[str, Value]) -> dict[tuple[str, str], float]:
    """{(a, b): r} from [["a", "b", "r"], ...]."""
    result = {}
    if not isinstance(rows, list):
        raise FieldcheckError("correlations are a list", "correlations", 'as [["V", "I", "-0.36"]]')
    for i, row in enumerate(rows):
        where = f"correlations[{i}]"
        if not isinstance(row, list) or len(row) != 3:
            raise FieldcheckError("a correlation is two names and a number", where, 'as ["V", "I", "-0.36"]')
        for name in row[:2]:
            if name not in known:
                raise FieldcheckError(f'"{name}" is not among the quantities', where, "known: " + ", ".join(known))
        r = number(row[2], where)
        if not -1.0 <= r <= 1.0:
            raise FieldcheckError("a correlation lies between -1 and 1", where, "check its sign and point")
        result[(row[0], row[1])] = r
    return result


def evaluation_text(result: dict[str, Any]) -> str:
    """The result of `evaluate` for a person."""
    lines = [f"{result['formula']} = {result['value']}"]
    if "u" in result:
        lines += [f"u = {result['u']}", f"degrees of freedom = {result['dof']}",
                  f"U = {result['U']}  (k = {result['k']}, {result['coverage']})", "budget:"]
        lines += [f"  {row['name']}: {row['contribution']}  {row['share']}" for row in result["budget"]]
    return "\n".join(lines)


# ---- assess ------------------------------------------------------------------------------------------------------------

TEXT = {"type": "string"}


def run_schema() -> dict[str, Any]:
    """JSON Schema of a run; published by `fieldcheck assess --schema`."""
    answer = {"step": TEXT, "round": {"type": "integer", "minimum": 0}, "index": TEXT, "text": TEXT,
              "texts": {"type": "array", "items": TEXT}, "unit": TEXT, "meter": TEXT, "function": TEXT, "range": TEXT,
              "choice": TEXT, "start": TEXT, "seen": {"type": "array", "items": TEXT}, "end": TEXT,
              "pulses": {"type": "integer", "minimum": 1}, "mode": TEXT, "done": {"type": "boolean"}}
    left = {"step": TEXT, "round": {"type": "integer", "minimum": 0}, "index": TEXT, "reason": TEXT}
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema", "title": "fieldcheck run", "type": "object",
        "required": ["procedure"], "additionalProperties": False,
        "properties": {
            "procedure": TEXT, "depth": {"enum": ["routine", "full"]},
            "on": {"type": "string", "pattern": "^[0-9]{4}-[0-9]{2}-[0-9]{2}$"},
            "nameplate": {"type": "object", "additionalProperties": TEXT},
            "conditions": {"type": "object", "additionalProperties": False,
                           "properties": {k: TEXT for k in ("ambient", "humidity", "voltage", "frequency")}},
            "meters": {"type": "array", "items": {"type": "object", "required": ["tag", "functions"]}},
            "answers": {"type": "array", "items": {"type": "object", "required": ["step"], "properties": answer,
                                                   "additionalProperties": False}},
            "left": {"type": "array", "items": {"type": "object", "required": ["step", "reason"], "properties": left,
                                                "additionalProperties": False}},
            "defects": {"type": "array", "items": {"type": "object", "required": ["what", "level"]}},
        },
    }


def checked_run(data: Any) -> dict[str, Any]:
    """The run when it has the right form; FieldcheckError names the first place that has not."""
    schema = run_schema()
    _check(data, schema, "run")
    result: dict[str, Any] = data
    return result


def _check(data: Any, schema: dict[str, Any], where: str) -> None:
    kinds = {"object": dict, "array": list, "string": str, "integer": int, "boolean": bool}
    kind = schema.get("type")
    if kind and (not isinstance(data, kinds[kind]) or (kind == "integer" and isinstance(data, bool))):
        raise FieldcheckError(f"this must be {'an' if kind[0] in 'aoi' else 'a'} {kind}", where, "compare with --template")
    if "enum" in schema and data not in schema["enum"]:
        raise FieldcheckError(f"{json.dumps(data)} is not allowed", where, "use one of: " + ", ".join(schema["enum"]))
    if kind == "integer" and data < schema.get("minimum", data):
        raise FieldcheckError(f"this must be at least {schema['minimum']}", where)
    if "pattern" in schema and (len(data) != 10 or not data.replace("-", "").isdigit()):
        raise FieldcheckError(f'"{data}" is not a date', where, "write it as 2026-03-01")
    if kind == "array":
        for i, one in enumerate(data):
            _check(one, schema.get("items", {}), f"{where}[{i}]")
    if kind == "object":
        _check_object(data, schema, where)


def _check_object(data: dict[str, Any], schema: dict[str, Any], where: str) -> None:
    for name in schema.get("required", []):
        if name not in data:
            raise FieldcheckError(f'"{name}" is missing', where, "compare with --template")
    properties = schema.get("properties", {})
    more = schema.get("additionalProperties", True)
    for name in data:
        if name in properties:
            _check(data[name], properties[name], f"{where}.{name}")
        elif isinstance(more, dict):
            _check(data[name], more, f"{where}.{name}")
        elif not more:
            near = units.nearest(name, list(properties))
            raise FieldcheckError(f'unknown key "{name}"', where, f"did you mean {near}?" if near else
                                  "known: " + ", ".join(properties))


def template(part: dict[str, Any]) -> dict[str, Any]:
    """A run of a procedure to fill in: every question, with empty texts and the units that it is asked in."""
    answers = []
    for step in part["steps"]:
        if step["phase"] == "service" and step["kind"] == "action":
            continue
        answers += _questions(step)
    return {
        "procedure": part["id"], "depth": "routine", "on": "2026-12-01",
        "nameplate": {field["id"]: "unknown" for field in part["nameplate"]},
        "conditions": {"ambient": "20 °C"},
        "meters": [{"tag": "M1", "calibrated": "2026-03-01", "due": "2027-03-01", "functions": [
            {"function": function, "quantity": quantity, "ranges": [
                {"name": "2", "upto": "2", "resolution": "0.001", "gain": "0.5 %", "counts": "3"}]}
            for function, quantity in _functions(part)]}],
        "answers": answers, "left": [], "defects": [],
    }


def _functions(part: dict[str, Any]) -> list[tuple[str, str]]:
    found: list[tuple[str, str]] = []
    for step in part["steps"]:
        for one in step["columns"] if step["kind"] == "table" else [step]:
            if one.get("meter") and (one["meter"], one["quantity"]) not in found:
                found.append((one["meter"], one["quantity"]))
    return found


def _questions(step: dict[str, Any]) -> list[dict[str, Any]]:
    kind = step["kind"]
    if kind == "measure":
        return [{"step": step["id"], "text": "", "unit": step["unit"], **_meter(step)}]
    if kind == "timing":
        return [{"step": step["id"], "text": "", "unit": "s"}]
    if kind == "table":
        rows = (step.get("rows") or {}).get("labels") or ["1"]
        return [{"step": step["id"], "index": f"{row}/{column['id']}", "text": "", "unit": column["unit"],
                 **_meter(column)} for row in rows for column in step["columns"]]
    if kind == "sequence":
        return [{"step": step["id"], "start": "", "seen": []}]
    if kind == "choice":
        return [{"step": step["id"], "choice": "unknown"}]
    if kind == "action":
        return [{"step": step["id"], "done": True}]
    return []


def _meter(column: dict[str, Any]) -> dict[str, str]:
    return {"meter": "M1"} if column.get("meter") else {}


def assessment_text(said: dict[str, Any]) -> str:
    """What `assess` says, for a person."""
    lines = [f"{said['procedure']}: {said['outcome']}"]
    for key, row in said["verdicts"].items():
        words = row["final"] if not row["left"] or row["left"] == row["found"] else \
            f"{row['found'] or 'not judged'} as found, {row['left']} as left"
        lines.append(f"  {key}: {words}" + (f", {row['value']}" if row["value"] else "") +
                     (f" ({row['reason']})" if row["reason"] else ""))
    if said["reasons"]:
        lines.append("why not better:")
        lines += ["  " + one for one in said["reasons"]]
    if said["called_for"]:
        lines.append("called for: " + ", ".join(said["called_for"]))
    if said["next"]:
        lines.append("next: " + said["next"])
    return "\n".join(lines)
