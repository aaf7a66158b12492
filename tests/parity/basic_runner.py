"""A small runner: whole numbers, floats by their bits, a few engine functions, errors. Runs in every runtime."""

import math

from fieldcheck.engine import elementary, figures
from fieldcheck.engine.errors import EntryError
from fieldcheck.engine.frozen import frozen


@frozen("value", "unit", "decimals", unit="", decimals=0)
class Taken:
    pass


def from_hex16(text):
    """The float whose 64 bits these 16 hex digits are."""
    bits = int(text, 16)
    sign = -1.0 if bits >> 63 else 1.0
    exponent = (bits >> 52) & 0x7FF
    fraction = bits & ((1 << 52) - 1)
    if exponent == 0x7FF:
        return sign * math.inf if fraction == 0 else math.nan
    if exponent == 0:
        return sign * math.ldexp(float(fraction), -1074)
    return sign * math.ldexp(float(fraction | (1 << 52)), exponent - 1075)


def to_hex16(x):
    """16 hex digits of the 64 bits of a finite float."""
    negative = x < 0.0 or (x == 0.0 and str(x)[0] == "-")
    m, e = math.frexp(-x if negative else x)
    exponent = e + 1022
    if m == 0.0:
        bits = 0
    elif exponent >= 1:
        bits = (exponent << 52) | (int(math.ldexp(m, 53)) & ((1 << 52) - 1))
    else:
        bits = int(math.ldexp(m, 52 + exponent))
    if negative:
        bits |= 1 << 63
    text = ""
    for shift in range(60, -4, -4):
        text += "0123456789abcdef"[(bits >> shift) & 15]
    return text


def run(case):
    op, args = case
    if op == "product":
        return str(args[0] * args[1])
    if op == "divmod":
        return str(divmod(args[0], args[1]))
    if op == "power":
        return str(args[0] ** args[1])
    if op == "arithmetic":
        x, y = from_hex16(args[0]), from_hex16(args[1])
        return " ".join([to_hex16(z) for z in (x + y, x - y, x * y, x / y)])
    if op == "root":
        return to_hex16(math.sqrt(from_hex16(args[0])))
    if op == "repr":
        return repr(from_hex16(args[0]))
    if op == "frozen":
        return repr(Taken(args[0], unit=args[1]).replace(decimals=3)) + str(Taken(args[0]) == Taken(args[0], ""))
    if op == "surplus":
        return repr(Taken(1, unknown=2))
    if op == "exp":
        return to_hex16(elementary.exp(from_hex16(args[0])))
    if op == "log":
        return to_hex16(elementary.log(from_hex16(args[0])))
    if op == "fixed":
        return figures.fixed(from_hex16(args[0]), args[1])
    if op == "round12":
        return to_hex16(figures.round12(from_hex16(args[0])))
    if op == "import":
        __import__(args[0])
        return args[0]
    if op == "echo":
        return args[0]
    raise EntryError("no such operation", "case", "use another")
