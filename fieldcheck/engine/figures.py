"""Rounding and printing in whole numbers: the same text on the phone and at the desk.

The runtimes' own `round` and format specifications differ near ties (and for large numbers), so every number that
decides or is shown goes through here. "Exact" below means the exact binary value of the float, taken apart by
as_integer_ratio; "as written" means its shortest decimal text, which is what a person typed or reads.
Numbers must be finite (OutOfRange otherwise). Texts use the point as decimal mark and "-" as minus sign.
"""

import math

from fieldcheck.engine.errors import EntryError, OutOfRange

_LARGEST = 1.7976931348623157e308
_frexp = math.frexp
_ldexp = math.ldexp
_LOG10_2 = 0.30102999566398120
NARROW_SPACE = "\u202f"

# U may be lowered by rounding by at most one part in this many (2.5 %). A bound of 5 % would never act on two digits
# (10.5 -> 10 is 4.8 %) and could not give the GUM's own example 10.47 -> 11.
_LOWERED_BY_AT_MOST = 40


def _finite(x):
    x = float(x)
    if not -_LARGEST <= x <= _LARGEST:
        raise OutOfRange("only a finite number can be written, not " + repr(x))
    return x


def _half_even(a, b):
    """a / b to the nearest whole number, ties to even, for whole a >= 0 and b > 0."""
    q, r = divmod(a, b)
    r = 2 * r
    if r > b or (r == b and q & 1 == 1):
        q += 1
    return q


def _placed(digits, places):
    """Text of the whole number digits * 10^-places (digits >= 0)."""
    text = str(digits)
    if places <= 0:
        return text if digits == 0 else text + "0" * -places
    text = "0" * (places + 1 - len(text)) + text
    return text[:-places] + "." + text[-places:]


def _exact_digits(x, places):
    """|x| * 10^places to the nearest whole number, ties to even on the exact value."""
    a, b = x.as_integer_ratio()
    if a < 0:
        a = -a
    return _half_even(a * 10 ** places, b) if places >= 0 else _half_even(a, b * 10 ** -places)


def fixed(x, places):
    """x with `places` >= 0 decimals, ties to even on the exact value: what CPython's f"{x:.{places}f}" gives."""
    x = _finite(x)
    if places < 0:
        raise OutOfRange("a number of decimals is not negative")
    text = _placed(_exact_digits(x, places), places)
    return "-" + text if str(x)[0] == "-" else text


def signed_fixed(x, places):
    """Like fixed, with "+" before whatever carries no "-": f"{x:+.{places}f}"."""
    text = fixed(x, places)
    return text if text[0] == "-" else "+" + text


def printed(x, places):
    """x for the reader: as fixed, but never a negative zero; places < 0 rounds to tens, hundreds, ..."""
    x = _finite(x)
    digits = _exact_digits(x, places)
    text = _placed(digits, places)
    return "-" + text if x < 0 and digits > 0 else text


def _leading(x, n):
    """d, e with |x| = d * 10^(e - n + 1) to n significant digits (10^(n-1) <= d < 10^n), ties to even; x not zero."""
    a, b = x.as_integer_ratio()
    if a < 0:
        a = -a
    guess = (_frexp(x)[1] - 1) * _LOG10_2
    e = int(guess) if guess >= 0 else int(guess) - 1      # floor of log10, or one less
    if (a >= 10 ** (e + 1) * b) if e >= -1 else (a * 10 ** (-e - 1) >= b):
        e += 1
    shift = n - 1 - e
    d = _half_even(a * 10 ** shift, b) if shift >= 0 else _half_even(a, b * 10 ** -shift)
    if d == 10 ** n:
        return d // 10, e + 1
    return d, e


def _scientific(d, e, n):
    text = str(d)
    return text + "e" + str(e) if n == 1 else text[0] + "." + text[1:] + "e" + str(e)


def significant(x, n):
    """x to n >= 1 significant digits, trailing zeros kept, ties to even on the exact value.

    Plain from 1e-6 up to 1e15 (whole digits beyond n are zeros), else as 1.23e-9. Zero has n - 1 decimals.
    """
    x = _finite(x)
    if n < 1:
        raise OutOfRange("at least one significant digit is needed")
    if x == 0:
        return _placed(0, n - 1)
    d, e = _leading(x, n)
    text = _placed(d, n - 1 - e) if -6 <= e < 15 else _scientific(d, e, n)
    return "-" + text if x < 0 else text


def round12(x):
    """x to 12 significant digits, as the float nearest to that decimal: both sides of a comparison go through it."""
    x = _finite(x)
    if len(repr(x)) <= 13:           # point or exponent counted: 12 digits at most, so x is that float already
        return x + 0.0
    d, e = _leading(x, 12)
    value = float(str(d) + "e" + str(e - 11))
    return -value if x < 0 else value


def _written(x):
    """d, p with |x| = d * 10^p as written (shortest text that reads back as x)."""
    text = repr(x).lower()
    if text[0] == "-":
        text = text[1:]
    body, _, power = text.partition("e")
    whole, _, part = body.partition(".")
    return int(whole + part), (int(power) if power else 0) - len(part)


def _half_up_written(x, places):
    """|x| * 10^places to the nearest whole number, ties up, on the digits as written."""
    d, p = _written(x)
    shift = p + places
    if shift >= 0:
        return d * 10 ** shift
    unit = 10 ** -shift
    return (2 * d + unit) // (2 * unit)


def round_half_up_text(x, places):
    """x with `places` decimals (tens for < 0), ties away from zero on the digits as written: 2.675 -> "2.68"."""
    x = _finite(x)
    digits = _half_up_written(x, places)
    text = _placed(digits, places)
    return "-" + text if x < 0 and digits > 0 else text


def decimal_text(x):
    """Shortest text that reads back as x: 2 for 2.0, plain from 1e-6 up to 1e15, else as 1.5e-7."""
    x = _finite(x)
    if x == 0:
        return "0"
    d, p = _written(x)
    while d % 10 == 0:
        d, p = d // 10, p + 1
    n = len(str(d))
    e = p + n - 1
    text = _placed(d, -p) if -6 <= e < 15 else _scientific(d, e, n)
    return "-" + text if x < 0 else text


def engineering(x, n):
    """(text, power): x to n significant digits is text * 10^power, power a multiple of three, 1 <= |text| < 1000."""
    x = _finite(x)
    if n < 1:
        raise OutOfRange("at least one significant digit is needed")
    if x == 0:
        return _placed(0, n - 1), 0
    d, e = _leading(x, n)
    third = e // 3 * 3
    text = _placed(d, n - 1 - (e - third))
    return ("-" + text if x < 0 else text), third


def grouped(text):
    """Digits in threes from the decimal mark, by narrow no-break spaces; four alone stay together (SI brochure 5.4.4).

    text: sign, digits and at most one "." or ",", with what may follow (exponent, unit) left as it is.
    """
    start = 1 if text[:1] in ("-", "+", "\u2212") else 0
    end = start
    while end < len(text) and text[end] in "0123456789":
        end += 1
    whole, rest, mark = text[start:end], text[end:], ""
    part = ""
    if rest[:1] in (".", ","):
        mark = rest[0]
        end = 1
        while end < len(rest) and rest[end] in "0123456789":
            end += 1
        part, rest = rest[1:end], rest[end:]
    return text[:start] + _in_threes(whole, len(whole) % 3) + mark + _in_threes(part, 3) + rest


def _in_threes(digits, first):
    if len(digits) <= 4:
        return digits
    pieces = [digits[:first]] if first else []
    for i in range(first, len(digits), 3):
        pieces.append(digits[i:i + 3])
    return NARROW_SPACE.join(pieces)


def _two_digits_of(U):
    """d, places with U = d * 10^-places to two digits: nearest, but up where nearest would lower U too much."""
    d, p = _written(U)
    n = len(str(d))
    places = 2 - n - p
    shift = n - 2
    if shift <= 0:
        return d * 10 ** -shift, places
    unit = 10 ** shift
    q = (2 * d + unit) // (2 * unit)
    lost = d - q * unit
    if _LOWERED_BY_AT_MOST * lost > d:
        q += 1
    return (q // 10, places - 1) if q == 100 else (q, places)


def value_with_uncertainty(y, U, unit_text=""):
    """(text of y, text of U): U to two significant digits, y to the same decimal place.

    JCGM 100:2008 (GUM) 7.2.6: U is rounded to nearest, but up when nearest would lower it by more than 2.5 %, which
    gives both of its examples (10.47 -> 11, 28.05 -> 28). Both are first taken to 12 significant digits (y: to 15), so
    that what arithmetic left in the last bit rounds nothing up. Ties of y go away from zero. U = 0 means exact: all
    digits of y. unit_text, when given, follows both after a space. Refuses U < 0 (OutOfRange).
    """
    y = _finite(y)
    U = round12(U)
    if U < 0:
        raise OutOfRange("an uncertainty is not negative: " + repr(U))
    if U == 0:
        texts = decimal_text(y), "0"
    else:
        digits, places = _two_digits_of(U)
        texts = round_half_up_text(_round15(y), places), _placed(digits, places)
    return texts if unit_text == "" else (texts[0] + " " + unit_text, texts[1] + " " + unit_text)


def _round15(x):
    if x == 0:
        return 0.0
    d, e = _leading(x, 15)
    value = float(str(d) + "e" + str(e - 14))
    return -value if x < 0 else value


def from_ratio(numerator, denominator):
    """The float nearest to numerator / denominator (whole numbers, denominator > 0), ties to even."""
    a = -numerator if numerator < 0 else numerator
    if denominator <= 0:
        raise OutOfRange("a denominator is above zero")
    if a == 0:
        return 0.0
    e = a.bit_length() - denominator.bit_length() - 54       # leaves a quotient of 54 or 55 bits
    if e < -1076:
        e = -1076                                            # subnormal: fewer bits are there to keep
    q, r = divmod(a << -e, denominator) if e < 0 else divmod(a, denominator << e)
    drop = q.bit_length() - 53
    if e + drop < -1074:
        drop = -1074 - e
    if drop > 0:
        half = 1 << (drop - 1)
        low = q & ((1 << drop) - 1)
        q = q >> drop
        if low > half or (low == half and (r > 0 or q & 1 == 1)):
            q += 1
        e += drop
    if q.bit_length() + e > 1024:
        raise OutOfRange("the number is too large: above 1.79e308")
    value = _ldexp(float(q), e)
    return -value if numerator < 0 else value


def parse_decimal(text):
    """The float nearest to a plain decimal text: [sign] digits [. digits] [e [sign] digits], nothing else.

    Refuses other text (EntryError) and what a float cannot hold (OutOfRange). At most 400 characters.
    """
    sign, whole, part, power = _decimal_parts(text)
    digits = whole + part
    if len(digits) > 17:
        digits = digits.lstrip("0") or "0"
    if len(digits) <= 17:
        value = float(digits + "e" + str(power - len(part)))
        if not value <= _LARGEST:
            raise OutOfRange("the number is too large: " + text)
    elif power - len(part) + len(digits) > 320:
        raise OutOfRange("the number is too large: " + text)
    elif power - len(part) + len(digits) < -330:
        value = 0.0
    else:
        shift = power - len(part)
        d = int(digits)
        value = from_ratio(d * 10 ** shift, 1) if shift >= 0 else from_ratio(d, 10 ** -shift)
    return -value if sign == "-" else value


def _decimal_parts(text):
    """sign, whole digits, decimals, exponent of a text that parse_decimal allows."""
    if not 0 < len(text) <= 400:
        _not_decimal(text)
    sign = text[0] if text[0] in ("+", "-") else ""
    body = text[1:] if sign else text
    for letter in ("e", "E"):
        mantissa, mark, power = body.partition(letter)
        if mark:
            break
    whole, point, part = mantissa.partition(".")
    if not _all_digits(whole + part) or (point and (whole == "" or part == "")):
        _not_decimal(text)
    exponent = 0
    if mark:
        bare = power[1:] if power[:1] in ("+", "-") else power
        if not _all_digits(bare) or len(bare) > 5:
            _not_decimal(text)
        exponent = -int(bare) if power[0] == "-" else int(bare)
    return sign, whole, part, exponent


def _all_digits(text):
    if text == "":
        return False
    for c in text:
        if c not in "0123456789":
            return False
    return True


def _not_decimal(text):
    shown = text if len(text) <= 40 else text[:40] + "..."
    raise EntryError('"' + shown + '" is not a plain decimal number', "",
        "use digits with a point, as 120, -0.5 or 1.5e3")
