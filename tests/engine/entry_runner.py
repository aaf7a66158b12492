"""Runs in every runtime: what an entry is read as, floats by repr (equal in both runtimes)."""

from fieldcheck.engine import units
from fieldcheck.engine.entry import echo, read
from fieldcheck.engine.errors import EntryError


def run(case):
    op, args = case
    if op == "read":
        return read_text(args[0], args[1], args[2])
    if op == "unit":
        return repr(units.parse_unit(args[0], args[1]))
    if op == "dimension":
        return units.dimension_name(tuple(args))
    raise ValueError(op)


def read_text(text, name, decimal):
    try:
        found = read(text, name, decimal)
    except EntryError as problem:
        return problem.what + "|" + problem.mend + "|" + "|".join(problem.choices)
    parts = [found.kind, echo(found), "" if found.unit is None else found.unit.symbol]
    for number in found.values:
        there = units.to_base(number.value, number.unit)
        for value in (number.value, number.base, number.resolution_base, there, units.from_base(there, number.unit)):
            parts.append(repr(float(value)))
        parts.append(number.digits + number.bound)
    return "|".join(parts)
