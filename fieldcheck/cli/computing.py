"""What `functions` and `evaluate` do: read values with uncertainty, call the engine, put the answer into words."""

import json
import math
from typing import Any

from fieldcheck.engine import budgets, entry, explain, figures, formulas, units
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.engine.measured import Measured, influence, value_of
from fieldcheck.engine.physics.registry import REGISTRY, call

PLUS_MINUS = ("±", "+-", "+/-")
Value = Any  # float or Measured, in SI
Function = Any  # registry.Function, whose fields are made at run time


# ---- functions


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
        if key in given:
            raise FieldcheckError(f"{key} is given twice", "", "give each argument once; a list has commas: "
                                  f"{key}=1,2,3")
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
    """A value with its unit and perhaps ± its standard uncertainty; one unit serves both parts."""
    base = units.quantity(quantity).base_unit
    for sign in PLUS_MINUS:
        if sign not in text:
            continue
        middle, _, width = text.partition(sign)
        unit = _unit_in(middle) or _unit_in(width) or base
        centre = _one(middle if _unit_in(middle) else f"{middle.strip()} {unit}", quantity, base, name)
        spread = "temperature difference" if quantity == "temperature" else quantity
        written = width if _unit_in(width) else f"{width.strip()} {unit}"
        u = _one(written, spread, units.quantity(spread).base_unit, name)
        if not u >= 0.0:
            raise FieldcheckError("a standard uncertainty is zero or more", name, "give it without sign")
        return influence(centre, u, name)
    return _one(text, quantity, base, name)


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


# ---- a value with its uncertainty as texts


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
        return str(figures.decimal_text(figures.round12(float(result)))) + behind
    wide = budgets.expanded(result, "95 %")
    if wide.U == 0.0:
        return str(figures.decimal_text(figures.round12(value_of(result)))) + behind
    shown, spread = figures.value_with_uncertainty(result.value, wide.U)
    dof = "infinite" if wide.dof is None else str(int(wide.dof))
    k = figures.significant(wide.k, 3)
    return f"{shown} ± {spread}{behind}   (U = k·u, k = {k}, 95 %, degrees of freedom {dof})"


# ---- evaluate


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
    tree = _tree(model["formula"], known)

    def lookup(name: str) -> Value:
        if name.startswith("each "):
            name = name[5:]
        if name not in known:
            raise FieldcheckError(f'the formula names "{name}", which is not among the quantities', "quantities",
                                  "known: " + ", ".join(known))
        return known[name]

    result = formulas.evaluate(tree, lookup)
    if isinstance(result, bool):
        raise FieldcheckError("the formula says yes or no, it gives no value", "formula", "leave the comparison out")
    given = correlations(model.get("correlations") or [], known)
    coverage = model.get("coverage") or "95 %"
    if not isinstance(coverage, str):
        raise FieldcheckError(f"coverage {json.dumps(coverage)} is not understood", "coverage",
                              'write "95 %" or "k = 2"')
    if not (math.isfinite(value_of(result)) and math.isfinite(budgets.combined(result, given))):
        raise FieldcheckError("the result is too large to be computed with", "", "use larger units")
    return {"formula": formulas.text(tree), **numbers(result, given, coverage)}


def _tree(text: str, known: dict[str, Value]) -> list[Any]:
    """The compiled formula of a model; its names are pure numbers."""
    from fieldcheck.rulebook.formula import Scope, Type, Wrong, compiled

    try:
        return compiled(text, Scope({name: Type("value") for name in known}, "", {}))[0]
    except Wrong as wrong:
        raise FieldcheckError(wrong.what, "formula", wrong.mend) from wrong


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
        if row[0] == row[1]:
            raise FieldcheckError(f'"{row[0]}" stands on both sides', where, "name two different quantities")
        if (row[0], row[1]) in result or (row[1], row[0]) in result:
            raise FieldcheckError(f'the correlation of "{row[0]}" and "{row[1]}" is given twice', where, "give it once")
        result[(row[0], row[1])] = r
    _possible(result)
    return result


def _possible(given: dict[tuple[str, str], float]) -> None:
    """Refuses correlations that no quantities can have together: their matrix would have a negative eigenvalue."""
    import numpy

    names = sorted({name for pair in given for name in pair})
    matrix = numpy.eye(len(names))
    for (a, b), r in given.items():
        matrix[names.index(a), names.index(b)] = matrix[names.index(b), names.index(a)] = r
    if names and numpy.linalg.eigvalsh(matrix)[0] < -1e-6:
        raise FieldcheckError("no quantities can be correlated so, all at once", "correlations",
                              "check the signs: the matrix of correlations must not have a negative eigenvalue")


def evaluation_text(result: dict[str, Any]) -> str:
    """The result of `evaluate` for a person."""
    lines = [f"{result['formula']} = {result['value']}"]
    if "u" in result:
        lines += [f"u = {result['u']}", f"degrees of freedom = {result['dof']}",
                  f"U = {result['U']}  (k = {result['k']}, {result['coverage']})", "budget:"]
        lines += [f"  {row['name']}: {row['contribution']}  {row['share']}" for row in result["budget"]]
    return "\n".join(lines)
