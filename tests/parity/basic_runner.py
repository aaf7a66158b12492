"""A small runner: whole numbers, floats by their bits, a few engine functions, errors. Runs in every runtime."""

import math

from float_bits import from_hex16, to_hex16

from fieldcheck.engine import elementary, figures
from fieldcheck.engine.errors import EntryError
from fieldcheck.engine.frozen import frozen


@frozen("value", "unit", "decimals", unit="", decimals=0)
class Taken:
    pass


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
