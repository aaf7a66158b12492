"""Floats by their 64 bits, in every runtime: JSON numbers lose their type between them."""

import math


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
