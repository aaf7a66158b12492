"""What a thumb types -> values with unit and resolution.

Accepted: 120, -0,5, 2.75 kΩ, 2k75 and R47 (letter code of IEC 60062), 1.5e3 ohm, 72 °F, 1:23.4 for a time;
what meters show out of range: OL, >200 M, <0.1; several readings in one field. Readings are separated by spaces,
`;` or a comma with a space after it (never by `/`, which belongs to units). One unit at the end is meant for all.
Clear thousands are read (1,234.5 or 1.234,5, or with narrow spaces); what can be read in two ways is asked about.
The resolution is the size of the last digit typed.
"""

from fieldcheck.engine.errors import EntryError, UnitError
from fieldcheck.engine.frozen import frozen
from fieldcheck.engine.numerals import DIGITS, Malformed, characters, pieces, quoted
from fieldcheck.engine.units import (
    default_unit as first_unit,
)
from fieldcheck.engine.units import (
    exact_base,
    normal,
    parse_unit,
    quantity,
    symbol_text,
    unit,
    unit_names,
)

LONGEST = 200
EVERYTHING = ("repeats", "bounds", "negative")
# Source: IEC 60062, letter code for resistance and capacitance values (checks, section 15); k as it is often written.
LETTERS = {"resistance": {"R": "ohm", "r": "ohm", "K": "kohm", "k": "kohm", "M": "Mohm", "L": "mohm", "G": "Gohm"},
           "capacitance": {"p": "pF", "n": "nF", "u": "uF", "m": "mF", "F": "F"}}
_FOREIGN_DIGITS = "０１２３４５６７８９٠١٢٣٤٥٦٧٨٩۰۱۲۳۴۵۶۷۸۹०१२३४५६७८९²³¹⁰⁴⁵⁶⁷⁸⁹₀₁₂₃₄₅₆₇₈₉½¼¾"


@frozen("value", "digits", "unit", "base", "resolution_base", "bound")
class Number:
    """One number as typed. value: float in `unit`; digits: its text with a point; base: float in the SI base
    (degC for temperatures); resolution_base: size of the last digit typed, in the SI base; bound: "", ">" or "<"."""


@frozen("kind", "values", "text", "unit")
class Entry:
    """kind: "value", "repeats", "over" or "under" (beyond what the meter shows); values: tuple of Number, empty
    for OL; text: as typed; unit: the Unit common to all values, else None."""


def read(text, quantity_name, decimal="either", default_unit=None, allow=EVERYTHING):
    """The Entry that `text` means for a quantity; EntryError for whatever else is typed.

    decimal: "either", "point" or "comma" (the house's mark; it settles 1,234). default_unit: Unit or spelling meant
    when none is typed; None for the quantity's first. allow: which of "repeats", "bounds", "negative" may be typed.
    The error's `choices` holds the texts to pick from where the entry can be read in two ways, else ().
    UnitError, for the program's own mistakes: unknown quantity, or a default unit that is not of it.
    """
    of = quantity(quantity_name)
    meant = first_unit(quantity_name) if default_unit is None else default_unit
    if isinstance(meant, str):
        meant = parse_unit(meant, quantity_name)
    if not isinstance(text, str):
        raise _error("", of, allow, "what was entered is not text", ())
    try:
        return _entry(text, of, decimal, meant, allow)
    except Malformed as problem:
        raise _error(text, of, allow, problem.why, problem.choices) from None


def echo(entry):
    """Canonical text of an Entry, which reads as the same values: "2.75 kΩ", "1.2; 1.3 mΩ", ">200 MΩ", "OL"."""
    if not entry.values:
        return "OL" if entry.kind == "over" else "-OL"
    common = entry.unit is not None
    parts = [_echo_one(number, not common) for number in entry.values]
    text = "; ".join(parts)
    return _with_unit(text, entry.unit) if common else text


def _echo_one(number, with_unit):
    text = number.bound + number.digits
    return _with_unit(text, number.unit) if with_unit else text


def _with_unit(text, of):
    symbol = symbol_text(of)
    return text if symbol == "" else text + " " + symbol


# ---- refusals ---------------------------------------------------------------------------------------------------

def _error(text, of, allow, why, choices):
    shown = quoted(text) + " " if text else ""
    found = EntryError(shown + why, mend=_mend(of, allow))
    found.choices = tuple(choices)
    return found


def _mend(of, allow):
    names = unit_names(of.name)
    parts = ["type one " + of.name]
    if "repeats" in allow:
        parts.append(", or several readings with a space or ; between")
    if names:
        text = ", ".join(names[:-1]) + " or " + names[-1] if len(names) > 1 else names[0]
        parts.append(", in " + text.replace("× ", "units of "))
    if "bounds" in allow:
        parts.append("; OL, > or < as the meter shows it")
    return "".join(parts) + "; for example " + of.example


# ---- meaning ----------------------------------------------------------------------------------------------------

def _entry(text, of, decimal, meant, allow):
    if len(text) > LONGEST:
        raise Malformed("is longer than " + str(LONGEST) + " characters")
    chars = characters(text)
    letters = "".join(LETTERS.get(of.name, {}))
    try:
        found = pieces(chars, letters, decimal, of.name == "time")
    except Malformed as problem:
        raise _foreign(chars, problem) from None
    if not found:
        raise Malformed("nothing was typed" if text == "" else "holds no number")
    if [piece for piece in found if piece.over]:
        return _out_of_range(text, found, of, allow)
    units = _units_of(found, of, meant, chars)
    _ask_if_unclear(found)
    numbers = []
    for piece, its_unit in zip(found, units):
        numbers.append(_number(piece, its_unit, of, allow))
    if len(numbers) > 1 and "repeats" not in allow:
        raise Malformed("holds " + str(len(numbers)) + " values where one is wanted")
    kind = "repeats"
    if len(numbers) == 1:
        kind = {"": "value", ">": "over", "<": "under"}[numbers[0].bound]
    return Entry(kind, tuple(numbers), text, _common(units))


def _foreign(chars, problem):
    for ch in chars:
        if ch in _FOREIGN_DIGITS:
            return Malformed("holds digits other than 0 to 9 in their plain form", problem.choices)
    return problem


def _common(units):
    for other in units:
        if other != units[0]:
            return None
    return units[0]


def _out_of_range(text, found, of, allow):
    """OL alone, or the same several times: there is no number to keep."""
    first = found[0]
    for piece in found:
        if piece.over != first.over:
            raise Malformed("mixes OL with numbers; write > and the end of the range instead, as in >200")
        if piece.run == "0" and of.name == "resistance":
            raise Malformed("could be out of range or zero: OL or 0 mΩ?", ("OL", "0 mΩ"))
    if "bounds" not in allow:
        raise Malformed("is out of range where a value is wanted")
    if len(found) > 1 and "repeats" not in allow:
        raise Malformed("holds " + str(len(found)) + " readings where one is wanted")
    word = found[-1].word
    shown = None if word in ("", "L") else _unit_of(word, of)
    return Entry("over" if first.over == "OL" else "under", (), text, shown)


def _ask_if_unclear(found):
    if [piece for piece in found if piece.alternatives]:
        choices = ["; ".join([_rewritten(piece, pick) for piece in found]) for pick in (0, 1)]
        raise Malformed("can be read in two ways: " + choices[0] + " or " + choices[1] + "?", choices)
    if _looks_like_thousands(found):
        word = " " + found[-1].word if found[-1].word else ""
        runs = [piece.run for piece in found]
        front = found[0].bound + found[0].sign
        choices = [front + "; ".join(runs) + word, front + "".join(runs) + word]
        raise Malformed("can be read in two ways: " + choices[0] + " or " + choices[1] + "?", choices)


def _rewritten(piece, pick):
    number = piece.alternatives[pick] if piece.alternatives else piece.run
    power = "e" + str(piece.exponent) if piece.exponent else ""
    return piece.bound + piece.sign + number + power + (" " + piece.word if piece.word else "")


def _looks_like_thousands(found):
    """1 234 may be one number; 120 121 119 is three readings, since repeats lie within a factor of two."""
    first, last = found[0], found[-1]
    if len(found) < 2 or not first.whole() or len(first.run) > 3 or first.run.startswith("0"):
        return False
    size, apart = int(first.run), False
    for piece in found[1:]:
        alone = not (piece.bound or piece.sign or piece.own or piece.exponent)
        if not alone or piece.before != " " or not (piece is last or piece.whole()):
            return False
        if _leading_digits(piece.run) != 3:
            return False
        other = int(piece.digits.partition(".")[0])
        apart = apart or piece.run.startswith("0") or other > 2 * size or size > 2 * other
    return apart and len([piece for piece in found[:-1] if piece.word]) == 0


def _leading_digits(run):
    count = 0
    for ch in run:
        if ch not in DIGITS:
            break
        count += 1
    return count


def _units_of(found, of, meant, chars):
    """One Unit a piece: its own, or the one at the end, or the one that is meant when none is typed."""
    bare = [piece for piece in found if not piece.word and not piece.own]
    said = [piece for piece in found if piece.word or piece.own]
    if not said:
        return [meant for piece in found]
    if bare and (len(said) > 1 or not found[-1].word or found[-1].own):
        raise Malformed("gives some readings a unit and some not; write it once at the end, or with each")
    try:
        if bare:
            last = _unit_of(found[-1].word, of)
            return [last for piece in found]
        units = [_own_unit(piece, of) if piece.own else _unit_of(piece.word, of) for piece in found]
    except Malformed as problem:
        raise _foreign(chars, problem) from None
    if of.name == "time" and _common(units) is None:
        raise Malformed("mixes units of time; write minutes and seconds as 1:23.4")
    return units


def _own_unit(piece, of):
    symbol = "s" if piece.own == ":" else LETTERS[of.name][piece.own]
    if piece.word and normal(piece.word) not in (of.base_unit, of.base_unit.capitalize()):
        raise Malformed("has one letter in place of the decimal mark and " + quoted(piece.word, 20)
                        + " besides; a letter code holds exactly one letter")
    return unit(symbol)


def _unit_of(word, of):
    short = normal(word)
    code = LETTERS.get(of.name, {})
    if len(short) == 1 and short in code:
        return unit(code[short])
    if of.stem and len(short) == 1 and short + of.stem in of.units:
        return unit(short + of.stem)
    if of.name == "time" and short in ("m", "M"):
        raise Malformed('has the unit "' + short + '", which is no time: write ms or min')
    try:
        return parse_unit(word, of.name)
    except UnitError as problem:
        hint = problem.mend.partition("?")
        near = ": " + hint[0] + "?" if hint[1] else ""
        why = "has " + quoted(word, 20) + " after the number, which is not a unit of " + of.name + near
    raise Malformed(why)


def _number(piece, its_unit, of, allow):
    whole, _, fraction = piece.digits.partition(".")
    mantissa = int(whole + fraction)
    exponent = piece.exponent - len(fraction)
    sign = piece.sign if mantissa else ""
    if sign:
        mantissa = -mantissa
        if not of.signed or "negative" not in allow:
            raise Malformed("is below zero, which " + ("this cannot be" if of.signed else of.name + " cannot be"))
    if piece.bound and "bounds" not in allow:
        raise Malformed("is out of range where a value is wanted")
    if of.name == "count" and exponent < 0:
        raise Malformed("is not a whole number")
    digits = sign + piece.digits.rstrip(".") + ("e" + str(piece.exponent) if piece.exponent else "")
    base = exact_base(mantissa, exponent, its_unit)
    if of.name == "temperature" and base < -273.15:
        raise Malformed("is below absolute zero, -273.15 °C")
    value = float(str(mantissa) + "e" + str(exponent))
    resolution = exact_base(1, exponent, its_unit, span=True)
    return Number(value, digits, its_unit, base, resolution, piece.bound)
