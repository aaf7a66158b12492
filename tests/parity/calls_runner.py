"""Any public function of the engine, called with arguments that were written as data, its answer as exact text.

A case is [function, [argument, ...]] with the function as "module.name" below fieldcheck.engine; "let" keeps what its
second argument gives under the name that is its first. An argument is a text, whole number, bool or None as it
stands, or a list that begins with its kind:

    ["f", "16 hex digits"] float      ["l", ...] list   ["t", ...] tuple   ["d", [key, value], ...] dict
    ["m", value, u, name, dof, family] an influence     ["v", name] what `let` kept
    ["c", function, argument, ...] call                 ["n", name, argument] a named argument of a call
    ["a", thing, attribute, ...] attribute, and what it gives when called with the rest
    ["o", sign, a, b] arithmetic                        ["i", thing, index] element
    ["x", module, name] a name of a module              ["u", symbol] SI float -> that unit

A house error is "E:Class|what|where|mend"; of any other error the class alone is told, its text is the runtime's.
"""

import math

from float_bits import from_hex16, to_hex16

from fieldcheck.engine import (
    angles,
    assess,
    budgets,
    calculated,
    carrier,
    chain,
    distributions,
    elementary,
    entry,
    event,
    events,
    explain,
    figures,
    formulas,
    judging,
    measured,
    meters,
    numerals,
    outcomes,
    procedures,
    readings,
    scale,
    texts,
    unit_table,
    units,
    verdicts,
    work,
)
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.engine.physics import (
    breaker_fit,
    breakers,
    conductors,
    contacts,
    lubricants,
    meter_effects,
    pulses,
    rectifiers,
    registry,
    sequencers,
    windings,
)

MODULES = {
    "angles": angles,
    "assess": assess,
    "budgets": budgets,
    "calculated": calculated,
    "carrier": carrier,
    "chain": chain,
    "distributions": distributions,
    "elementary": elementary,
    "entry": entry,
    "event": event,
    "events": events,
    "explain": explain,
    "figures": figures,
    "formulas": formulas,
    "judging": judging,
    "measured": measured,
    "meters": meters,
    "numerals": numerals,
    "outcomes": outcomes,
    "procedures": procedures,
    "readings": readings,
    "scale": scale,
    "texts": texts,
    "unit_table": unit_table,
    "units": units,
    "verdicts": verdicts,
    "work": work,
    "physics.breaker_fit": breaker_fit,
    "physics.breakers": breakers,
    "physics.conductors": conductors,
    "physics.contacts": contacts,
    "physics.lubricants": lubricants,
    "physics.meter_effects": meter_effects,
    "physics.pulses": pulses,
    "physics.rectifiers": rectifiers,
    "physics.registry": registry,
    "physics.sequencers": sequencers,
    "physics.windings": windings,
}
KEPT = {}


def run(case):
    """The answer to one case, as text."""
    name, arguments = case
    try:
        if name == "let":
            KEPT["v" + arguments[0]] = value(arguments[1])
            return "kept"
        return shown(call(name, arguments), 0)
    except FieldcheckError as error:
        return "E:" + type(error).__name__ + "|" + error.what + "|" + error.where + "|" + error.mend
    except numerals.Malformed as error:
        return "E:Malformed|" + error.why + shown(error.choices, 0)
    except Exception as error:
        return "E:" + type(error).__name__


def call(name, arguments):
    """Calls "module.function" with arguments as data; "pairs" and "lookup" make what only a runtime can hold."""
    if name == "pairs":
        return {value(arguments[0]): value(arguments[1])}
    if name == "lookup":
        return looked_up(value(arguments[0]))
    return named(name)(
        *[value(one) for one in arguments if not is_named(one)],
        **{one[1]: value(one[2]) for one in arguments if is_named(one)},
    )


def looked_up(given):
    """name -> value for formulas; MissingInput for a name that is not given."""

    def lookup(name):
        bare = name[5:] if name.startswith("each ") else name
        if bare not in given:
            raise formulas.MissingInput([bare])
        return given[bare]

    return lookup


def is_named(argument):
    return isinstance(argument, list) and argument[0] == "n"


def named(name):
    """What stands under "module.name"."""
    module, _, function = name.rpartition(".")
    return getattr(MODULES[module], function)


def value(data):
    """The argument that data mean (see the head of this module)."""
    if not isinstance(data, list):
        return data
    kind = data[0]
    rest = data[1:]
    if kind == "f":
        return from_hex16(rest[0])
    if kind == "l":
        return [value(one) for one in rest]
    if kind == "t":
        return tuple([value(one) for one in rest])
    if kind == "d":
        return {key: value(one) for key, one in rest}
    if kind == "m":
        return carrier.influence(value(rest[0]), value(rest[1]), *rest[2:])
    if kind == "v":
        return KEPT["v" + rest[0]]
    if kind == "c":
        return call(rest[0], rest[1:])
    if kind == "x":
        return named(rest[0])
    if kind == "i":
        return value(rest[0])[rest[1]]
    if kind == "a":
        thing = getattr(value(rest[0]), rest[1])
        return thing(*[value(one) for one in rest[2:]]) if len(rest) > 2 else thing
    if kind == "u":
        return in_unit(rest[0])
    return arithmetic(rest[0], value(rest[1]), value(rest[2]))


def in_unit(symbol):
    """SI float -> float in a unit."""
    unit = units.unit(symbol)
    return lambda base: units.from_base(base, unit)


def arithmetic(sign, a, b):
    if sign == "+":
        return a + b
    if sign == "-":
        return a - b
    if sign == "*":
        return a * b
    return a / b


def shown(answer, depth):
    """The answer as text: floats by their bits, values by all their fields, generators by what they ask and give."""
    if answer is None or isinstance(answer, (bool, int)):
        return str(answer)
    if isinstance(answer, str):
        return '"' + answer + '"'
    if isinstance(answer, float):
        return to_hex16(answer) if math.isfinite(answer) else repr(answer)
    if depth > 8:
        return "..."
    if isinstance(answer, (list, tuple)):
        inside = ", ".join([shown(one, depth + 1) for one in answer])
        return "[" + inside + "]" if isinstance(answer, list) else "(" + inside + ")"
    if isinstance(answer, dict):
        return "{" + ", ".join([shown(key, depth) + ": " + shown(answer[key], depth + 1) for key in answer]) + "}"
    if isinstance(answer, carrier.Measured):
        return "Measured" + shown(
            [answer.value, sorted_items(answer.parts), sorted_items(answer.dofs), sorted_items(answer.families)], depth
        )
    if hasattr(answer, "send"):
        return driven(answer)
    if type(answer).__name__ == "function":  # a conversion: SI float -> the unit shown
        return "x -> " + shown([answer(0.0), answer(1.0), answer(-0.037)], depth)
    return of_object(answer, depth)


SHOWN_OF = {
    "Event": ("hash", "text", "order"),
    "Answer": ("kind", "value", "order", "left"),
    "Instance": ("key", "round", "indexes", "group", "state", "missing", "reason", "ready", "supply", "hold"),
    "Flow": ("instances", "called", "last_round", "open_entries", "complete", "current"),
    "Work": ("depth", "on", "answers", "nameplate", "meters", "conditions", "defects", "conflicts"),
    "Slot": ("history", "event", "rivals"),
    "Item": ("id", "procedure", "slots", "outcomes", "defects", "parts"),
    "Job": ("id", "opened", "items", "events", "conditions", "signings", "records"),
    "Workshop": ("named", "entries", "joined", "events"),
    "State": ("workshop", "jobs"),
    "Lookup": ("number", "row", "table", "used", "states", "notes"),
    "Piece": ("bound", "sign", "run", "digits", "exponent", "own", "word", "over", "before", "alternatives"),
    "Entry": ("kind", "values", "text", "unit"),
}


def of_object(answer, depth):
    """A value of a class: its name and fields."""
    name = type(answer).__name__
    fields = SHOWN_OF.get(name) or getattr(answer, "fields", None)
    if fields is None:
        raise ValueError("the table SHOWN_OF does not say what to show of " + name)
    return name + "(" + ", ".join([one + "=" + shown(getattr(answer, one), depth + 1) for one in fields]) + ")"


def sorted_items(table):
    return [[key, float(table[key]) if not isinstance(table[key], str) else table[key]] for key in sorted(table)]


def driven(steps):
    """Every request of a generator, each answered by a made-up digest of its number, and what it gives at the end."""
    asked = []
    try:
        request = next(steps)
        while True:
            asked.append(request[0] + ":" + request[1])
            digits = str(len(asked))
            request = steps.send("0" * (64 - len(digits)) + digits)
    except StopIteration as end:
        return "|".join(asked) + "=" + shown(end.value, 0)
