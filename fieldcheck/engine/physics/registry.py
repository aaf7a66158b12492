"""What formulas and the command line may call: each function by name, with the quantity of every argument.

REGISTRY is read like a dict of name -> Function, but keeps its rows as text until one is asked for, and `call`
imports a physics module only then: the phone loads the chunk of a module when it meets a procedure that wants it
(`modules_needed`). Nothing is evaluated. Row of function_table.py: name, or name = function of another name;
arguments as "name:quantity", in brackets for a list, "text" or "texts" for words, "=" behind what may be left out;
the quantity that comes back; provenance tag; source; what it gives.
"""

from fieldcheck.engine import units
from fieldcheck.engine.errors import FieldcheckError, NotFound
from fieldcheck.engine.frozen import frozen
from fieldcheck.engine.physics.function_table import TABLE

NEEDS = {"pulses": ("sequencers",)}  # physics modules that a module imports itself


@frozen("name", "quantity", "unit", "label", "kind", "optional")
class Parameter:
    """kind: "value" (float or Measured), "list" of values, "text", "texts"; quantity and SI unit are "" for words."""


@frozen("name", "summary", "parameters", "returns", "unit", "source", "tag", "module", "target")
class Function:
    """returns: quantity that comes back, in SI `unit`; tag: provenance; module: where it is; target: its name there."""


def _split(heading):
    """("name", "function in the module") of a row's first text."""
    if " = " in heading:
        name, target = heading.split(" = ")
        return name, target
    return heading, heading


def _parameter(text):
    name, what = text.split(":")
    optional = what.endswith("=")
    if optional:
        what = what[:-1]
    label = name.replace("_", " ")
    if what == "text" or what == "texts":
        return Parameter(name, "", "", label, what, optional)
    kind = "value"
    if what.startswith("["):
        what, kind = what[1:-1], "list"
    return Parameter(name, what, units.quantity(what).base_unit, label, kind, optional)


class Registry:
    """Read-only mapping of name -> Function; a Function is made when first asked for."""

    def __init__(self, table):
        self.rows = {}
        self.made = {}
        for module in table:
            for row in table[module]:
                name, target = _split(row[0])
                self.rows[name] = (module, target, row)

    def __iter__(self):
        return iter(self.rows)

    def __len__(self):
        return len(self.rows)

    def __contains__(self, name):
        return name in self.rows

    def keys(self):
        return list(self.rows)

    def get(self, name, default=None):
        return self[name] if name in self.rows else default

    def __getitem__(self, name):
        if name not in self.rows:
            near = units.nearest(name, self.keys())
            raise NotFound("there is no function " + str(name), mend="did you mean " + near + "?" if near else "")
        if name not in self.made:
            module, target, row = self.rows[name]
            parameters = tuple([_parameter(text) for text in row[1].split(", ")])
            unit = units.quantity(row[2]).base_unit
            self.made[name] = Function(name, row[5], parameters, row[2], unit, row[4], row[3], module, target)
        return self.made[name]


REGISTRY = Registry(TABLE)


def modules_needed(name):
    """Names of the physics modules that must be loaded before `call(name, ...)`, in the order to load them."""
    module = REGISTRY[name].module
    return NEEDS.get(module, ()) + (module,)


def _module(name):
    """The physics module; each is imported where it is first wanted, so that the phone need not load all."""
    if name == "windings":
        from fieldcheck.engine.physics import windings
        return windings
    if name == "rectifiers":
        from fieldcheck.engine.physics import rectifiers
        return rectifiers
    if name == "meter_effects":
        from fieldcheck.engine.physics import meter_effects
        return meter_effects
    if name == "breakers":
        from fieldcheck.engine.physics import breakers
        return breakers
    if name == "breaker_fit":
        from fieldcheck.engine.physics import breaker_fit
        return breaker_fit
    if name == "conductors":
        from fieldcheck.engine.physics import conductors
        return conductors
    if name == "sequencers":
        from fieldcheck.engine.physics import sequencers
        return sequencers
    if name == "pulses":
        from fieldcheck.engine.physics import pulses
        return pulses
    if name == "lubricants":
        from fieldcheck.engine.physics import lubricants
        return lubricants
    from fieldcheck.engine.physics import contacts
    return contacts


def _fitted(parameter, value, name):
    """The argument as the function takes it: whole numbers as floats, a lone value as a list of one."""
    where = name + ", " + parameter.name
    if parameter.kind == "text" or parameter.kind == "texts":
        if parameter.kind == "text" and not isinstance(value, str):
            raise FieldcheckError("this argument is a word", where)
        if parameter.kind == "texts" and isinstance(value, (int, float)):
            raise FieldcheckError("this argument is a list of words", where)
        return value
    if parameter.kind == "list":
        given = list(value) if isinstance(value, (list, tuple)) else [value]
        return [_number(one, where) for one in given]
    if isinstance(value, (list, tuple)):
        raise FieldcheckError("this argument is one value, not a list", where, "name one row, or take the median")
    return _number(value, where)


def _number(value, where):
    if isinstance(value, (str, bool)) or value is None:
        raise FieldcheckError("this argument is a number", where)
    return float(value) if isinstance(value, int) else value


def call(name, given):
    """The function's answer: a float or a Measured, in SI.

    given: {parameter name: value in SI}. A run of a sequencer may be given whole, as the one argument `layout` =
    {"layout": ..., "start": ..., "seen": [...]}. Raises NotFound for an unknown function, FieldcheckError for an
    argument missing, surplus or of the wrong kind, and what the function itself refuses.
    """
    function = REGISTRY[name]
    run = given.get("layout")
    if isinstance(run, dict) and "seen" in run:
        given = dict(given)
        given.update({"layout": run["layout"], "start": run["start"], "seen": run["seen"]})
    arguments, known = {}, []
    for parameter in function.parameters:
        known.append(parameter.name)
        if parameter.name in given:
            arguments[parameter.name] = _fitted(parameter, given[parameter.name], name)
        elif not parameter.optional:
            raise FieldcheckError(name + " needs " + parameter.name, name, "its arguments are " + ", ".join(
                [one.name for one in function.parameters]))
    for key in given:
        if key not in known:
            raise FieldcheckError(name + " has no argument " + key, name, "its arguments are " + ", ".join(known))
    if function.module == "sequencers" and "seen" not in arguments:
        raise FieldcheckError(name + " needs what the drum showed after each pulse", name)
    return getattr(_module(function.module), function.target)(**arguments)
