"""Units against pint (an independent unit library with CODATA/SI definitions) and the SI brochure."""

import math
from fractions import Fraction

import pint
import pytest

from fieldcheck.engine import unit_table, units
from fieldcheck.engine.errors import UnitError

PINT = pint.UnitRegistry(non_int_type=Fraction)
# Our symbol -> the text pint reads, where they differ.
FOR_PINT = {"A2s": "A**2*s", "kA2s": "1000*A**2*s", "N.m": "N*m", "mN.m": "mN*m", "uN.m": "uN*m", "%RH": "0.01",
            "%": "0.01", "ppm": "1e-6", "1": "1", "rpm": "1/minute", "0.1 mm": "0.1*mm", "%/K": "0.01/K",
            "ppm/K": "1e-6/K", "gf": "gram_force", "kgf": "kilogram_force", "lbf": "pound_force",
            "ozf": "pound_force/16", "d": "day", "ohm.m": "ohm*m", "nohm.m": "nohm*m", "uohm.m": "uohm*m",
            "ohm.mm2/m": "ohm*mm**2/m", "Pa.s": "Pa*s", "mPa.s": "mPa*s", "in": "inch", "ft": "foot",
            "mL": "cm**3", "uL": "mm**3", "L": "dm**3", "h": "hour", "deg": "degree"}
BASE = ("kilogram", "meter", "second", "ampere", "kelvin")
ALL = [(name, key) for name in units.quantity_names() for key in units.quantity(name).units]


def pint_text(symbol):
    text = FOR_PINT.get(symbol)
    if text is None:
        text = symbol
        for power in ("2", "3"):
            text = text.replace("m" + power, "m**" + power)
    return text


@pytest.mark.parametrize(("name", "key"), [row for row in ALL if row[0] not in ("temperature", "angle")])
def test_scale_and_dimension_agree_with_pint(name, key):
    ours = unit_table.UNITS["u:" + key]
    if key == "degF@difference":
        theirs = PINT.Quantity(Fraction(1), "delta_degF").to("kelvin")
    else:
        theirs = PINT.Quantity(Fraction(1)) * PINT.parse_expression(pint_text(ours.symbol))
    theirs = theirs.to_base_units() if hasattr(theirs, "to_base_units") else PINT.Quantity(theirs)
    exponents = dict(theirs.dimensionality)
    expected = tuple(int(exponents.get("[" + n + "]", 0)) for n in
                     ("mass", "length", "time", "current", "temperature"))
    assert ours.dimension == expected == units.quantity(name).dimension
    expression = PINT.Quantity(Fraction(1), "*".join(f"{b}**{e}" for b, e in zip(BASE, expected, strict=True)))
    scale = (theirs / expression).to_base_units().magnitude
    assert Fraction(ours.num, ours.den) == Fraction(scale).limit_denominator(10**16)


def test_degree_is_pi_over_180():
    assert units.to_base(1.0, units.unit("deg")) == math.pi / 180
    assert units.to_base(90.0, units.unit("deg")) == math.pi / 2


# Fixed points of the scales: SI brochure (0 degC = 273.15 K); Fahrenheit by definition 32 and 212 at 0 and 100 degC.
@pytest.mark.parametrize(("value", "typed", "celsius"), [
    (32, "°F", 0.0), (212, "°F", 100.0), (-40, "℉", -40.0), (72, "degF", 200 / 9), (273.15, "K", 0.0), (25, "C", 25.0),
    (300, "K", 26.85)])
def test_temperature_points(value, typed, celsius):
    found = units.parse_unit(typed, "temperature")
    assert units.to_base(value, found) == celsius
    assert units.from_base(celsius, found) == pytest.approx(value, rel=1e-15)


def test_a_temperature_difference_has_no_zero_to_shift():
    assert units.to_base(9.0, units.parse_unit("°F", "temperature difference")) == 5.0
    assert units.to_base(45.0, units.parse_unit("°C", "temperature difference")) == 45.0
    assert units.span_to_base(9.0, units.parse_unit("°F", "temperature")) == 5.0
    assert units.span_from_base(5.0, units.parse_unit("°F", "temperature")) == 9.0


@pytest.mark.parametrize(("name", "key"), ALL)
def test_there_and_back(name, key):
    found = unit_table.UNITS["u:" + key]
    for value in (1.0, 4.7, 0.033, 299.0):
        assert units.from_base(units.to_base(value, found), found) == pytest.approx(value, rel=4e-15, abs=1e-13)
        assert units.span_from_base(units.span_to_base(value, found), found) == pytest.approx(value, rel=1e-15)


@pytest.mark.parametrize(("name", "key"), ALL)
def test_printed_form_and_symbol_are_read_back_as_the_same_unit(name, key):
    found = unit_table.UNITS["u:" + key]
    assert units.parse_unit(found.symbol, name) == found
    if not found.printed.startswith("×"):
        assert units.parse_unit(units.symbol_text(found), name) == found


def test_every_quantity_offers_its_base_unit():
    elsewhere = {"penetration", "humidity"}
    for name in units.quantity_names():
        of = units.quantity(name)
        assert (of.base_unit in of.units) != (name in elsewhere)
        base = units.unit(of.base_unit)
        assert (base.num, base.den, base.offset_num) == (1, 1, 0)
        assert units.parse_unit(of.base_unit, name) == base


@pytest.mark.parametrize(("typed", "name", "symbol"), [
    ("kΩ", "resistance", "kohm"), ("k\u03a9", "resistance", "kohm"), ("ohms", "resistance", "ohm"),
    ("Ohm", "resistance", "ohm"), ("KOHM", "resistance", "kohm"), ("MOHM", "resistance", "Mohm"),
    ("µA", "current", "uA"), ("μA", "current", "uA"),
    ("uA", "current", "uA"), ("mv", "voltage", "mV"), ("hz", "frequency", "Hz"), ("cSt", "viscosity", "mm2/s"),
    ("mm²/s", "viscosity", "mm2/s"), ("A²s", "let-through", "A2s"), ("A²·s", "let-through", "A2s"),
    ("%", "humidity", "%RH"),
    ("Nm", "torque", "N.m"), ("", "ratio", "1"), ("° C", "temperature", "degC")])
def test_spellings(typed, name, symbol):
    assert units.parse_unit(typed, name).symbol == symbol


@pytest.mark.parametrize(("typed", "name"), [
    ("MV", "voltage"), ("MA", "current"), ("k", "resistance"), ("C", "voltage"), ("", "voltage"),
    ("V", "resistance"), ("m", "time"), ("Ω", "temperature"), ("__proto__", "voltage"), ("degC", "voltage")])
def test_what_is_not_a_unit_here(typed, name):
    with pytest.raises(UnitError) as caught:
        units.parse_unit(typed, name)
    assert caught.value.what == f'"{typed}" is not a unit of {name}'
    for printed in units.unit_names(name):
        assert printed in caught.value.mend


def test_errors_name_the_nearest():
    with pytest.raises(UnitError, match='did you mean "resistance"') as caught:
        units.quantity("resistence")
    assert caught.value.what == '"resistence" is not a quantity'
    with pytest.raises(UnitError, match='did you mean "kohm"'):
        units.parse_unit("kohn", "resistance")
    with pytest.raises(UnitError, match='did you mean "kohm"'):
        units.unit("kohmm")
    assert units.nearest("xylophone", ["ohm", "V"]) == ""


def test_dimension_algebra():
    volt, ampere, ohm = unit_table.VOLT, unit_table.AMPERE, unit_table.OHM
    assert units.divide(volt, ampere) == ohm
    assert units.multiply(units.power(ampere, 2), unit_table.SECOND) == units.quantity("let-through").dimension
    assert units.root(units.power(volt, 2)) == volt
    assert units.root(units.power(volt, 3), 3) == volt
    point, kelvin = unit_table.POINT, unit_table.KELVIN
    assert units.subtract(point, point) == kelvin
    assert units.subtract(point, kelvin) == units.add(kelvin, point) == point
    assert units.compare(point, point) == point
    for refused in (lambda: units.root(volt), lambda: units.add(volt, ohm), lambda: units.compare(ohm, volt),
                    lambda: units.multiply(point, ohm), lambda: units.power(point, 2), lambda: units.add(point, point),
                    lambda: units.subtract(kelvin, point), lambda: units.compare(point, kelvin)):
        with pytest.raises(UnitError):
            refused()


@pytest.mark.parametrize(("dimension", "text"), [
    (unit_table.OHM, "ohm"), (unit_table.VOLT, "V"), (unit_table.NONE, "a plain number"), (unit_table.POINT, "degC"),
    (units.power(unit_table.VOLT, 2), "V²"), (units.multiply(unit_table.OHM, unit_table.KELVIN), "ohm·K"),
    (units.divide(unit_table.KELVIN, unit_table.WATT), "K/W"), ((2, 3, -1, 0, 4), "kg²·m³·s⁻¹·K⁴"),
    (units.quantity("let-through").dimension, "A²s"), (units.quantity("viscosity").dimension, "m²/s")])
def test_dimensions_have_names(dimension, text):
    assert units.dimension_name(dimension) == text


def test_comparing_ohms_with_volts_says_so():
    with pytest.raises(UnitError) as caught:
        units.compare(unit_table.OHM, unit_table.VOLT)
    assert caught.value.what == "cannot compare ohm and V"


@pytest.mark.parametrize(("name", "key"), ALL)
def test_exact_base_is_the_nearest_float(name, key):
    """Oracle: Python's own exact fractions, rounded once. Where the whole numbers pass 2^53 and the scale is no
    power of ten (degrees, pounds) it may be off by the two roundings of a float product and quotient."""
    found = unit_table.UNITS["u:" + key]
    offset = Fraction(found.offset_num, found.offset_den)
    tolerance = 4.5e-16 if key in ("deg", "lbf", "ozf", "psi") else 0
    for mantissa, exponent in ((1, 0), (-123, -2), (4700001, -6), (22, 1), (-12345, -3), (6, 3)):
        span = Fraction(mantissa) * Fraction(10) ** exponent * Fraction(found.num, found.den)
        exact = span + offset * Fraction(found.num, found.den)
        assert units.exact_base(mantissa, exponent, found) == pytest.approx(float(exact), rel=tolerance, abs=0)
        assert units.exact_base(mantissa, exponent, found, span=True) == pytest.approx(
            float(span), rel=tolerance, abs=0)
