"""Dimensions, units and named quantities as exact whole-number ratios.

A dimension is a tuple of five whole exponents (kg, m, s, A, K), or POINT for a temperature on a scale (degC):
points may be compared and subtracted (which gives kelvin) but never multiplied.
A unit takes a value to the coherent SI base in one step, (value + offset) * num / den, never by a chain of floats.
The tables, with their sources, stand in unit_table.py.
"""

from fieldcheck.engine.errors import UnitError
from fieldcheck.engine.unit_table import (
    ALIASES,
    KELVIN,
    NAMES,
    NONE,
    ORDER,
    POINT,
    QUANTITIES,
    SPELLED,
    UNITS,
    print_form,
)

WHOLE = 9007199254740992  # 2^53: whole numbers up to here are exact floats


# ---- dimensions -------------------------------------------------------------------------------------------------

def _plain(dimension):
    if dimension == POINT:
        raise UnitError("a temperature in degC cannot be multiplied, divided or raised to a power",
                        mend="use the difference of two temperatures, which is in kelvin")
    return dimension


def multiply(a, b):
    """Dimension of a product. UnitError for a temperature point."""
    _plain(a), _plain(b)
    return tuple([a[i] + b[i] for i in range(5)])


def divide(a, b):
    """Dimension of a quotient. UnitError for a temperature point."""
    _plain(a), _plain(b)
    return tuple([a[i] - b[i] for i in range(5)])


def power(a, exponent):
    """Dimension of a whole-number power. UnitError for a temperature point."""
    _plain(a)
    return tuple([a[i] * exponent for i in range(5)])


def root(a, degree=2):
    """Dimension of a square (or higher) root; UnitError when it would not have whole exponents."""
    _plain(a)
    for exponent in a:
        if exponent % degree != 0:
            raise UnitError("the root of " + dimension_name(a) + " has no unit",
                            mend="take the root of a quantity whose unit is a square")
    return tuple([exponent // degree for exponent in a])


def add(a, b):
    """Dimension of a sum: equal dimensions, or a temperature and a temperature difference."""
    if a == POINT and b == POINT:
        raise UnitError("two temperatures in degC cannot be added", mend="add a temperature difference (kelvin)")
    if (a == POINT and b == KELVIN) or (a == KELVIN and b == POINT):
        return POINT
    return _same(a, b, "add")


def subtract(a, b):
    """Dimension of a difference: temperature minus temperature is kelvin, minus kelvin a temperature."""
    if a == POINT and b == POINT:
        return KELVIN
    if a == POINT and b == KELVIN:
        return POINT
    return _same(a, b, "subtract")


def compare(a, b):
    """The common dimension of two things compared. UnitError when they differ."""
    return _same(a, b, "compare")


def _same(a, b, verb):
    if a != b:
        raise UnitError("cannot " + verb + " " + dimension_name(a) + " and " + dimension_name(b),
                        mend="both sides need the same kind of unit")
    return a


def unit(symbol):
    """The Unit of an exact ASCII symbol ("kohm", "degC", "mm2/s"). UnitError when there is none.

    "K" is the temperature difference; the point of that name is found through parse_unit("K", "temperature").
    """
    found = UNITS.get("u:" + symbol)
    if found is None:
        near = nearest(symbol, ORDER)
        raise UnitError('"' + symbol + '" is not a unit', mend='did you mean "' + near + '"?' if near else "")
    return found


def quantity(name):
    """The Quantity of that name. UnitError with the nearest name when there is none."""
    found = QUANTITIES.get("q:" + name)
    if found is None:
        near = nearest(name, NAMES)
        hint = 'did you mean "' + near + '"?' if near else "use one of " + ", ".join(NAMES)
        raise UnitError('"' + name + '" is not a quantity', mend=hint)
    return found


def quantity_names():
    """All names that quantity() knows, in the order of the table."""
    return tuple(NAMES)


# ---- reading a unit ---------------------------------------------------------------------------------------------

def normal(text):
    """A unit as typed, in ASCII: "kΩ" is "kohm", "° C" is "degC", "mm²/s" is "mm2/s"."""
    parts = []
    for ch in text:
        parts.append(SPELLED.get(ch, ch))
    word = "".join(parts)
    return word.replace("ohms", "ohm").replace("Ohms", "ohm")


def parse_unit(text, quantity_name):
    """The Unit that `text` means for this quantity, in any of its spellings.

    Capitals are forgiven where only one unit can be meant, but not in a leading m or M (milli, mega).
    UnitError names the units allowed here and the nearest.
    """
    of = quantity(quantity_name)
    word = normal(text)
    keys = of.units
    for key in keys:
        if word == UNITS["u:" + key].symbol or word == key:
            return UNITS["u:" + key]
    if word == of.base_unit:  # where it is not offered to people, rules and functions may still say it
        return UNITS["u:" + word]
    for name, spelling, key in ALIASES:
        if name == quantity_name and word == spelling:
            return UNITS["u:" + key]
    loose = [key for key in keys if _but_for_case(word, UNITS["u:" + key].symbol)]
    if len(loose) == 1:
        return UNITS["u:" + loose[0]]
    raise _not_a_unit(text, of, word)


def _not_a_unit(text, of, word):
    near = nearest(word, [UNITS["u:" + key].symbol for key in of.units])
    names = ", ".join(unit_names(of.name)) or "none"
    mend = "use one of " + names
    if near and near != "1":
        mend = 'did you mean "' + near + '"? ' + mend
    return UnitError('"' + text + '" is not a unit of ' + of.name, mend=mend)


def unit_names(quantity_name):
    """Printed forms of the units offered for a quantity, without the plain number."""
    texts = [UNITS["u:" + key].printed for key in quantity(quantity_name).units]
    return tuple([text for text in texts if text])


def _but_for_case(a, b):
    if a == "" or a.lower() != b.lower():
        return False
    return a[0] == b[0] or a[0] not in "mM"


def default_unit(quantity_name):
    """The Unit meant when none is typed: the first of the quantity's units."""
    return UNITS["u:" + quantity(quantity_name).units[0]]


def symbol_text(unit):
    """Printed form: "kΩ", "µA", "°C", "mm²/s"; "" for a plain number. The space before it is the caller's."""
    return unit.printed


# ---- values -----------------------------------------------------------------------------------------------------

def to_base(value, unit):
    """Value in the coherent SI base (degC for temperatures) of a float given in `unit`."""
    if unit.offset_num == 0:
        return float(value) * unit.num / unit.den
    return (float(value) * unit.offset_den + unit.offset_num) * unit.num / (unit.offset_den * unit.den)


def from_base(base, unit):
    """Value in `unit` of a float given in the SI base; the inverse of to_base to the rounding of a float."""
    if unit.offset_num == 0:
        return float(base) * unit.den / unit.num
    shifted = float(base) * unit.den * unit.offset_den - unit.offset_num * unit.num
    return shifted / (unit.num * unit.offset_den)


def span_to_base(value, unit):
    """As to_base for a difference, resolution or uncertainty: the zero of the scale plays no part."""
    return float(value) * unit.num / unit.den


def span_from_base(base, unit):
    """As from_base for a difference, resolution or uncertainty."""
    return float(base) * unit.den / unit.num


def exact_base(mantissa, exponent, unit, span=False):
    """mantissa * 10^exponent in `unit` (whole numbers) as the nearest float in the SI base.

    Rounded once, whatever the unit, as long as the whole numbers stay below 2^53 or the unit is a power of ten;
    otherwise as to_base. span: the zero of the scale plays no part.
    """
    up, down = 1, 1
    if exponent >= 0:
        up = 10**exponent
    else:
        down = 10**-exponent
    offset = 0 if span else unit.offset_num
    num = (mantissa * up * unit.offset_den + offset * down) * unit.num
    den = down * unit.offset_den * unit.den
    if abs(num) <= WHOLE and den <= WHOLE:
        return float(num) / float(den)
    tens = _power_of_ten(unit)
    if tens is not None and offset == 0:
        return float(str(mantissa) + "e" + str(exponent + tens))
    value = float(str(mantissa) + "e" + str(exponent))
    return span_to_base(value, unit) if span else to_base(value, unit)


def _power_of_ten(unit):
    size, sign = (unit.num, 1) if unit.den == 1 else (unit.den, -1)
    if unit.num != 1 and unit.den != 1:
        return None
    tens = 0
    while size >= 10 and size % 10 == 0:
        size = size // 10
        tens += 1
    return sign * tens if size == 1 else None


# ---- words ------------------------------------------------------------------------------------------------------

_READABLE = ("ohm", "V", "A", "W", "s", "1/s", "m", "m2", "m3", "kg", "N", "Pa", "J", "Wb", "H", "F", "T", "S", "A2s",
             "K", "1/K", "m/s", "m2/s", "kg/m3", "N/m", "Pa.s", "ohm/m", "ohm.m", "A/m2", "V/s", "V/m", "A/m", "K/s")
_STEMS = ("ohm", "V", "A", "W", "N", "Pa", "J", "m", "s", "kg", "K")
_RAISED = "⁰¹²³⁴⁵⁶⁷⁸⁹"


def dimension_name(dimension):
    """Readable text of a dimension: "ohm", "V²", "A·m", "ohm·K", else in base units ("kg·m²·s⁻³")."""
    if dimension == POINT:
        return "degC"
    if dimension == NONE:
        return "a plain number"
    for symbol in _READABLE:
        if UNITS["u:" + symbol].dimension == dimension:
            return symbol if symbol == "ohm" else print_form(symbol).replace("Ω", "ohm")
    for first in _STEMS:
        if power(UNITS["u:" + first].dimension, 2) == dimension:
            return first + "²"
    for first in _STEMS:
        a = UNITS["u:" + first].dimension
        for second in _STEMS:
            b = UNITS["u:" + second].dimension
            if multiply(a, b) == dimension:
                return first + "·" + second
            if divide(a, b) == dimension:
                return first + "/" + second
    parts = []
    for symbol, exponent in zip(("kg", "m", "s", "A", "K"), dimension):
        if exponent != 0:
            parts.append(symbol + ("" if exponent == 1 else _raised(exponent)))
    return "·".join(parts)


def _raised(exponent):
    text = "⁻" if exponent < 0 else ""
    for digit in str(abs(exponent)):
        text += _RAISED[int(digit)]
    return text


def nearest(word, options):
    """The option that differs from `word` in the fewest letters, at most a third of them, or ""."""
    best, least = "", 1 + max(1, len(word) // 3)
    if len(word) > 40:
        return ""
    for option in options:
        distance = _letters_apart(word.lower(), option.lower())
        if distance < least:
            best, least = option, distance
    return best


def _letters_apart(a, b):
    above = list(range(len(b) + 1))
    row = 0
    for x in a:
        row += 1
        line = [row]
        column = 0
        for y in b:
            column += 1
            line.append(min(above[column] + 1, line[column - 1] + 1, above[column - 1] + (0 if x == y else 1)))
        above = line
    return above[-1]
