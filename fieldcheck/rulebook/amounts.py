"""Quantities written in rule files: "50 mohm", "1.5 %", "23 degC", "4" -> dimension and exact SI number as text."""

import re
from decimal import Decimal
from fractions import Fraction
from typing import Any

from fieldcheck.engine import units
from fieldcheck.engine.errors import UnitError

_AMOUNT = re.compile(r"^\s*([+-]?\d+(?:\.\d+)?(?:[eE][+-]?\d+)?)\s*(.*?)\s*$")


def looks_like_amount(text: str) -> bool:
    """True for a number with or without something behind it."""
    return bool(_AMOUNT.match(text))


def amount(text: str) -> tuple[Any, str]:
    """(dimension, SI number as decimal text) of a quantity text.

    UnitError for an unknown unit.  The conversion is exact; where the decimal does not end (1 rpm in 1/s), it is the
    text of the nearest float.
    """
    match = _AMOUNT.match(text)
    if match is None:
        raise UnitError(f'"{text}" is not a quantity', mend='write a number and its unit, as "50 mohm"')
    unit = any_unit(match.group(2))
    offset = Fraction(unit.offset_num, unit.offset_den)
    base = (Fraction(Decimal(match.group(1))) + offset) * Fraction(unit.num, unit.den)
    return unit.dimension, decimal(base)


def any_unit(text: str) -> Any:
    """The engine's Unit of a spelling, whatever its quantity; UnitError with the nearest name."""
    word = units.normal(text) or "1"
    return units.unit(word)


def decimal(value: Fraction) -> str:
    """A ratio as decimal text: exact where it ends, else the shortest text of the nearest float."""
    rest = value.denominator
    for prime in (2, 5):
        while rest % prime == 0:
            rest //= prime
    if rest == 1:
        exact = Decimal(value.numerator) / Decimal(value.denominator)
        if Fraction(exact) == value and abs(exact) < Decimal(10) ** 15:
            text = format(exact, "f")
            return text.rstrip("0").rstrip(".") if "." in text else text
    return repr(float(value))


def of_quantity(text: str, quantity: str) -> str:
    """The SI number of a text that must be of a named quantity; UnitError when its unit is another's."""
    wanted = units.quantity(quantity).dimension
    found, number = amount(text)
    if found != wanted:
        raise UnitError(f'"{text}" is {units.dimension_name(found)}, not {quantity}',
                        mend="use one of " + ", ".join(units.unit_names(quantity)))
    return number


def number_and_unit(text: str) -> tuple[str, str]:
    """("1.5", "A") of "1.5 A"; the unit as its ASCII key."""
    match = _AMOUNT.match(text)
    if match is None:
        raise UnitError(f'"{text}" is not a quantity', mend='write a number and its unit, as "1 A"')
    behind = match.group(2)
    return match.group(1), any_unit(behind).symbol if behind else ""
