"""Evaluates a compiled formula: a tree of lists that the rulebook's compiler made, never text.

    ["num", "1.5"] number in SI          ["text", "bridge"] a choice        ["name", "v_plus"] a named value
    ["+", a, b] ["-", a, b] ["*", a, b] ["/", a, b] ["neg", a]
    ["<", a, b] ["<=", a, b] [">", a, b] [">=", a, b] ["==", a, b] ["!=", a, b] ["and", a, b] ["or", a, b] ["not", a]
    ["if", condition, a, b]              ["call", "median", [a, ...], {"name": a, ...}]

Values are SI: float, Measured, text, bool, or a list of them (a table's column); `Bound` stands for a reading that
was out of the meter's range.  Both sides of a comparison are rounded to 12 significant digits first.
"""

from fieldcheck.engine import measured
from fieldcheck.engine.errors import FieldcheckError, OutOfRange
from fieldcheck.engine.figures import decimal_text, parse_decimal, round12
from fieldcheck.engine.frozen import frozen
from fieldcheck.engine.physics import registry

INF = float("inf")


class MissingInput(FieldcheckError):
    """A value that a formula needs is not there.  names: the labels of what is missing, in the order met."""

    def __init__(self, names):
        FieldcheckError.__init__(self, "missing: " + ", ".join(names), "",
                                 "take the reading, or say why it is not done")
        self.names = names


@frozen("side", "value")
class Bound:
    """A reading known only to lie beyond a value.  side: ">" or "<".  value: float or Measured, SI, None = unknown."""


def _each(function):
    """The list function of a list that may hold a lone value; refuses bounds."""

    def apply(values):
        if not isinstance(values, list):
            values = [values]
        if not values:
            raise MissingInput(["every reading of the list"])
        for one in values:
            if isinstance(one, Bound):
                raise OutOfRange("a reading out of the meter's range cannot enter a median, mean or extreme")
        return function(values)

    return apply


LIST_FUNCTIONS = {
    "median": _each(measured.median),
    "maximum": _each(measured.maximum),
    "minimum": _each(measured.minimum),
    "mean": _each(measured.mean),
    "spread": _each(measured.spread),
    "count": lambda values: float(len(values)) if isinstance(values, list) else 1.0,
}

MATHS = {"sqrt": measured.sqrt, "exp": measured.exp, "log": measured.log, "log10": measured.log10,
         "sin": measured.sin, "cos": measured.cos, "atan": measured.atan, "asin": measured.asin,
         "acos": measured.acos, "abs": abs}
"""Functions of one value; all but sqrt and abs take and give pure numbers."""


def names_in(tree):
    """The names that a tree mentions, each once, in order."""
    found = []
    _collect(tree, found)
    return found


def _collect(tree, found):
    if tree[0] == "name":
        if tree[1] not in found:
            found.append(tree[1])
    elif tree[0] == "call":
        for one in tree[2]:
            _collect(one, found)
        for key in tree[3]:
            _collect(tree[3][key], found)
    elif tree[0] not in ("num", "text"):
        for one in tree[1:]:
            _collect(one, found)


def evaluate(tree, lookup):
    """The value of a tree.

    lookup: name -> value; it raises MissingInput for what has not been taken.  All missing names of the tree are
    gathered into one MissingInput.  A single Bound that the arithmetic carries through gives a Bound.
    OutOfRange and other FieldcheckErrors of the physics pass through.
    """
    try:
        return _value(tree, lookup)
    except MissingInput as first:
        names = list(first.names)
        for name in names_in(tree):
            try:
                lookup(name)
            except MissingInput as more:
                for one in more.names:
                    if one not in names:
                        names.append(one)
            except FieldcheckError:
                continue
        raise MissingInput(names) from first


def _value(tree, lookup):
    kind = tree[0]
    if kind == "num":
        return parse_decimal(tree[1])
    if kind == "name":
        return lookup(tree[1])
    if kind == "text":
        return tree[1]
    if kind == "call":
        return _call(tree, lookup)
    if kind == "if":
        return _value(tree[2] if truth(_value(tree[1], lookup)) else tree[3], lookup)
    if kind == "and":
        return truth(_value(tree[1], lookup)) and truth(_value(tree[2], lookup))
    if kind == "or":
        return truth(_value(tree[1], lookup)) or truth(_value(tree[2], lookup))
    if kind == "not":
        return not truth(_value(tree[1], lookup))
    a = _value(tree[1], lookup)
    if kind == "neg":
        return _negative(a)
    b = _value(tree[2], lookup)
    if kind in COMPARE:
        return COMPARE[kind](_comparable(a), _comparable(b))
    return _arithmetic(kind, a, b)


def truth(value):
    """A condition's value as True or False; anything else than a bool is an error of the rule."""
    if value is True or value is False:
        return value
    raise FieldcheckError("a condition gave neither yes nor no")


def _comparable(value):
    if isinstance(value, (str, bool)):
        return value
    if isinstance(value, (Bound, list)):
        raise OutOfRange("a reading out of the meter's range, or a whole column, cannot be compared")
    return round12(measured.value_of(value))


COMPARE = {
    "<": lambda a, b: a < b,
    "<=": lambda a, b: a <= b,
    ">": lambda a, b: a > b,
    ">=": lambda a, b: a >= b,
    "==": lambda a, b: a == b,
    "!=": lambda a, b: a != b,
}


def _arithmetic(kind, a, b):
    if isinstance(a, Bound) or isinstance(b, Bound):
        return _bounded(kind, a, b)
    if isinstance(a, list) or isinstance(b, list):
        return _by_row(kind, a, b)
    if kind == "+":
        return a + b
    if kind == "-":
        return a - b
    if kind == "*":
        return a * b
    if kind == "/":
        if measured.value_of(b) == 0.0:
            raise OutOfRange("a divisor is zero", "", "a reading of exactly zero cannot stand here: repeat it")
        return a / b
    raise FieldcheckError("unknown operation " + kind)


def _by_row(kind, a, b):
    """Arithmetic on a table's columns, row by row; a lone value goes with every row."""
    length = len(a) if isinstance(a, list) else len(b)
    if isinstance(a, list) and isinstance(b, list) and len(a) != len(b):
        raise FieldcheckError("two columns of different length cannot be combined")
    result = []
    for i in range(length):
        result.append(_arithmetic(kind, a[i] if isinstance(a, list) else a, b[i] if isinstance(b, list) else b))
    return result


def _negative(a):
    if isinstance(a, list):
        return [_negative(one) for one in a]
    if isinstance(a, Bound):
        return Bound("<" if a.side == ">" else ">", None if a.value is None else -a.value)
    return -a


def _bounded(kind, a, b):
    """One operand is a bound: exact interval arithmetic on its half line, refused where a pole or a sign is crossed."""
    if isinstance(a, Bound) and isinstance(b, Bound):
        raise OutOfRange("two readings out of the meter's range cannot be combined")
    if isinstance(a, list) or isinstance(b, list):
        raise OutOfRange("a reading out of the meter's range cannot be combined with a column")
    bound, other = (a, b) if isinstance(a, Bound) else (b, a)
    if bound.value is None:
        return Bound(bound.side, None) if kind in ("+", "*") else Bound(_turned(kind, a, bound.side), None)
    if kind == "+":
        return Bound(bound.side, a.value + b if bound is a else a + b.value)
    if kind == "-":
        return Bound(bound.side, a.value - b) if bound is a else Bound(_flip(bound.side), a - b.value)
    sign = measured.value_of(other)
    if sign == 0.0:
        raise OutOfRange("a reading out of the meter's range times zero says nothing")
    side = bound.side if sign > 0.0 else _flip(bound.side)
    if kind == "*":
        return Bound(side, a.value * b if bound is a else a * b.value)
    if bound is a:
        return Bound(side, a.value / b)
    # c / x for x beyond a bound: monotone only while x keeps its sign.
    edge = measured.value_of(bound.value)
    if (bound.side == ">" and edge <= 0.0) or (bound.side == "<" and edge >= 0.0):
        raise OutOfRange("a reading out of the meter's range may cross zero in a divisor")
    return Bound(_flip(side), a / bound.value)


def _flip(side):
    return "<" if side == ">" else ">"


def _turned(kind, a, side):
    """Side of an unknown bound after - or /, when it stands on the right."""
    return side if isinstance(a, Bound) else _flip(side)


def _call(tree, lookup):
    name = tree[1]
    if name in LIST_FUNCTIONS and len(tree[2]) == 1 and tree[2][0][0] == "name":
        return LIST_FUNCTIONS[name](lookup("each " + tree[2][0][1]))
    values = [_value(one, lookup) for one in tree[2]]
    named = {}
    for key in tree[3]:
        named[key] = _value(tree[3][key], lookup)
    if name in LIST_FUNCTIONS:
        return LIST_FUNCTIONS[name](values if len(values) > 1 else values[0])
    if name in MATHS:
        if isinstance(values[0], (list, Bound)):
            raise OutOfRange("a column, or a reading out of the meter's range, cannot enter " + name)
        return MATHS[name](values[0])
    function = registry.REGISTRY.get(name)
    if function is None:
        raise FieldcheckError("there is no function " + name)
    for i in range(len(values)):
        named[function.parameters[i].name] = values[i]
    for key in named:
        given = named[key] if isinstance(named[key], list) else [named[key]]
        if any([isinstance(one, Bound) for one in given]):
            raise OutOfRange("a reading out of the meter's range cannot enter " + name)
    return registry.call(name, named)


PRIORITY = {"or": 1, "and": 2, "not": 3, "<": 4, "<=": 4, ">": 4, ">=": 4, "==": 4, "!=": 4,
            "+": 5, "-": 5, "*": 6, "/": 6, "neg": 7}


def text(tree, show=None, above=0):
    """The formula as a person reads it.  show(name) gives the text of a name (its value put in); None = the name."""
    kind = tree[0]
    if kind == "num":
        return decimal_text(parse_decimal(tree[1]))
    if kind == "text":
        return tree[1]
    if kind == "name":
        return tree[1] if show is None else show(tree[1])
    if kind == "call":
        inside = [text(one, show) for one in tree[2]]
        inside += [key + " = " + text(tree[3][key], show) for key in tree[3]]
        return tree[1] + "(" + ", ".join(inside) + ")"
    if kind == "if":
        return "(" + text(tree[2], show) + " if " + text(tree[1], show) + ", else " + text(tree[3], show) + ")"
    own = PRIORITY[kind]
    if kind in ("neg", "not"):
        body = ("−" if kind == "neg" else "not ") + text(tree[1], show, own)
    else:
        sign = {"*": " × ", "-": " − ", "/": " / "}.get(kind) or " " + kind + " "
        body = text(tree[1], show, own) + sign + text(tree[2], show, own + 1)
    return "(" + body + ")" if own < above else body
