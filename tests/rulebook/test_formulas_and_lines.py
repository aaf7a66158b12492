"""The compiler's small parts against outside references: Python's own evaluation, pint, a generated document."""

from fractions import Fraction

import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldcheck.engine import formulas, units
from fieldcheck.engine.errors import UnitError
from fieldcheck.engine.unit_table import NONE, ORDER, POINT
from fieldcheck.rulebook import lines
from fieldcheck.rulebook.amounts import amount, decimal, number_and_unit
from fieldcheck.rulebook.formula import Scope, Type, Wrong, bound, compiled

NAMES = {"a": 2.5, "b": -3.0, "c": 0.125}
PLAIN = Scope({name: Type("value") for name in NAMES}, "", {})
ELECTRIC = Scope({"v": Type("value", units.unit("V").dimension), "i": Type("value", units.unit("A").dimension),
                  "t": Type("value", POINT), "rows": Type("list", units.unit("V").dimension),
                  "kind": Type("text", choices=("bridge", "half-wave"))}, "", {})

numbers = st.one_of(st.sampled_from(sorted(NAMES)), st.integers(1, 99).map(str),
                    st.sampled_from(["0.5", "1.25", "3e-2"]))
arithmetic = st.recursive(numbers, lambda inner: st.one_of(
    st.tuples(inner, st.sampled_from(["+", "-", "*", "/"]), inner).map(lambda p: f"({p[0]} {p[1]} {p[2]})"),
    inner.map(lambda one: f"(-{one})"),
    st.tuples(inner, inner, inner, st.sampled_from(["<", "<=", ">", ">="])).map(
        lambda p: f"({p[0]} if {p[1]} {p[3]} {p[2]} else {p[1]})")), max_leaves=8)


@given(arithmetic)
def test_a_compiled_formula_gives_what_python_gives(text):
    tree, kind = compiled(text, PLAIN)
    assert kind == Type("value", NONE)
    try:
        expected = eval(text, {"__builtins__": {}}, NAMES)
    except ZeroDivisionError:
        return
    try:
        found = formulas.evaluate(tree, NAMES.__getitem__)
    except formulas.OutOfRange:
        return
    assert float(found) == pytest.approx(float(expected), rel=1e-9, abs=1e-12)


@pytest.mark.parametrize(("text", "dimension"), [
    ("v / i", "ohm"), ("v * i", "W"), ("median(rows)", "V"), ("maximum(v, '3 V')", "V"), ("v / '2 ohm' + i", "A"),
    ("sqrt(v * v)", "V"), ("t - '20 degC'", "K"), ("t + '5 K'", "degC"), ("count(rows)", "1"),
    ("v if kind == 'bridge' else '0 V'", "V"), ("drop_at_current('2 ohm', i)", "V"), ("abs(-v)", "V"),
    ("resistance_from_drop(v, i=i)", "ohm"), ("log10(v / '1 V')", "1"), ("nlgi_low('2')", "m")])
def test_dimensions_follow_the_arithmetic(text, dimension):
    assert compiled(text, ELECTRIC)[1].dimension == units.unit(dimension).dimension


@pytest.mark.parametrize("text", [
    "v + i", "v ** 2", "v % i", "v // i", "log(v)", "median(v)", "kind + 1", "kind == 'brigde'", "kind < 'bridge'",
    "v < i", "rows > '1 V'", "not v", "v and i", "v if i else v", "[v]", "v[0]", "f'{v}'", "v.real", "lambda: v",
    "__import__('os')", "v; i", "", "v == 'bridge'", "True", "drop_at_current(i, v)", "drop_at_current('1 ohm', rows)",
    "drop_at_current('1 ohm', i, i)", "drop_at_current(r='1 ohm', q=i)", "drop_at_current('1 ohm', r='1 ohm', i=i)",
    "t * 2", "t + t", "'5 mohn'", "(v := i)", "{v}", "v is i", "v in rows", "+v", "*rows", "'1 V' < v < '2 V'"])
def test_what_is_no_formula_is_refused(text):
    with pytest.raises(Wrong):
        compiled(text, ELECTRIC)


def test_a_bound_may_be_a_bare_quantity():
    assert bound("50 mohm", ELECTRIC) == (["num", "0.05"], Type("value", units.unit("ohm").dimension))
    assert bound("1.5 * v", ELECTRIC)[1].dimension == units.unit("V").dimension
    with pytest.raises(Wrong):
        bound("50 mohn", ELECTRIC)


REGISTRY = pint.UnitRegistry()
IN_PINT = {"mohm": "milliohm", "ohm.mm2/m": "ohm*mm**2/m", "kgf": "kilogram_force", "ozf": "ounce_force",
           "psi": "psi", "rpm": "rpm", "h": "hour", "degF": "degF", "lb": "pound", "mm2/s": "mm**2/s", "bar": "bar",
           "N/cm2": "N/cm**2", "kA2s": "kiloampere*ampere*second", "in": "inch", "%": "percent", "uL": "microliter"}
SI = {"degF": "degC", "rpm": "1/s", "kA2s": "A**2*s", "%": "dimensionless"}


@pytest.mark.parametrize("unit", sorted(IN_PINT))
@pytest.mark.parametrize("number", ["1", "0.25", "37.5"])
def test_quantities_convert_as_pint_converts_them(unit, number):
    quantity = REGISTRY.Quantity(float(number), IN_PINT[unit])
    if unit == "rpm":
        expected = float(number) / 60
    else:
        expected = quantity.to(SI[unit]).magnitude if unit in SI else quantity.to_base_units().magnitude
    assert float(amount(f"{number} {unit}")[1]) == pytest.approx(expected, rel=1e-12)


@given(st.decimals(min_value=0, max_value=10**6, places=4), st.sampled_from(ORDER))
def test_a_conversion_is_the_exact_ratio_rounded_once_at_most(number, symbol):
    unit = units.UNITS["u:" + symbol]
    if "@" in symbol or units.normal(unit.symbol) != symbol:
        return
    exact = (Fraction(number) + Fraction(unit.offset_num, unit.offset_den)) * Fraction(unit.num, unit.den)
    assert float(amount(f"{number:f} {symbol}")[1]) == float(exact)


@given(st.fractions(max_denominator=10**6))
def test_decimal_text_is_the_nearest_float(value):
    assert float(decimal(value)) == float(value)


def test_a_number_is_split_from_its_unit_in_any_spelling():
    assert number_and_unit("1.5 kΩ") == ("1.5", "kohm") and number_and_unit("4") == ("4", "")
    with pytest.raises(UnitError):
        number_and_unit("much")


documents = st.lists(st.tuples(st.sampled_from(["step", "limit", "limit.entry", "minutes", "nameplate"]),
                               st.lists(st.sampled_from(["one", "two", "three"]), unique=True, max_size=3),
                               st.sampled_from(["\n", "\n# note\n", "\n\n"])), max_size=8)


@given(documents)
def test_every_key_of_a_house_style_document_is_found_on_its_line(blocks):
    text, expected, seen = "", {}, {}
    for header, keys, gap in blocks:
        if header == "limit.entry" and "limit" not in seen:
            continue
        if header == "minutes" and "minutes" in seen:
            continue
        if header == "minutes":
            path = ("minutes",)
            seen["minutes"] = 0
            text += "[minutes]\n"
        else:
            parent = ("limit", seen["limit"]) if header == "limit.entry" else ()
            name = "entry" if header == "limit.entry" else header
            place = (*parent, name)
            seen[place] = seen.get(place, -1) + 1
            if header == "limit":
                seen["limit"] = seen[place]
            path = (*place, seen[place])
            text += f"[[{header}]]\n"
        expected[path] = text.count("\n")
        for key in keys:
            text += f'{key} = ["=", "[x]"]\n' if key == "two" else f'{key} = "x = y"\n'
            expected[(*path, key)] = text.count("\n")
        text += gap
    found = lines.index(text)
    assert {path: found.get(path) for path in expected} == expected


def test_dotted_keys_texts_over_several_lines_and_open_lists_keep_their_places():
    text = 'a.b."c d" = 1\nlong = """\nx = 1\n[not.a.table]\n"""\nlist = [\n  "y = 2",\n]\nlast = 1\n'
    found = lines.index(text)
    assert found == {(): 1, ("a",): 1, ("a", "b"): 1, ("a", "b", "c d"): 1, ("long",): 2, ("list",): 6, ("last",): 9}
    assert lines.line_of(found, ("list", 0, "deep")) == 6 and lines.line_of(found, ("nowhere",)) == 1
