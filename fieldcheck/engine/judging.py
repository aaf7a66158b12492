"""The limits of a procedure, judged for one round of an item's work.

A verdict is identified by its key: the limit's id, or "limit/row" where a limit holds for each row of a table.
What has been judged is kept in the work's cache until one of its readings changes.
"""

from fieldcheck.engine import explain, figures, formulas, readings, units, verdicts
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.engine.frozen import frozen
from fieldcheck.engine.measured import Measured

FOUND_PHASES = ("prepare", "as found", "service")


@frozen("key", "limit", "row", "round", "verdict", "value", "bounds", "entry", "lookup", "stale")
class Judged:
    """One limit judged once.  limit: its compiled data; verdict: verdicts.Verdict; value: Measured, float or None;
    bounds: verdicts.Limit with the bounds in SI; entry: the dated entry that held; lookup: what was read, or None;
    stale: title of the service that came after the reading, or ""."""


def keys_of(work, limit):
    """[(key, row)] of a limit: one, or one for each row of the table on which it looks."""
    if not limit.get("each"):
        return [(limit["id"], "")]
    step = work.step(table_of(work, limit))
    try:
        return [(limit["id"] + "/" + row, row) for row in readings.rows_of(work, step)]
    except formulas.MissingInput:
        return [(limit["id"], "?")]


def table_of(work, limit):
    """The table step whose rows an each-limit judges one by one."""
    name = limit["value"]
    if name in work.values:
        return work.values[name]["each"]
    return name.split(".")[0]


def entry_on(limit, day):
    """The dated entry of a limit that holds on a day; the earliest when none has begun."""
    best = limit["entries"][0]
    for one in limit["entries"]:
        if one["since"] <= day and one["since"] >= best["since"]:
            best = one
    return best


def holds(work, limit):
    """True when a limit applies to this depth and nameplate."""
    if limit.get("depth", "both") not in ("both", work.depth):
        return False
    return applies(work, limit.get("when"))


def applies(work, when):
    """A `when` of a step or limit: field (nameplate field or choice step) is one of the values.

    Unknown counts as a match, so that what nobody knows is looked at rather than left out.
    """
    if not when:
        return True
    field = when["field"]
    if field in work.steps:
        found = work.newest(field, 0, "")
        return found is None or found[1].value.get("choice") in ["unknown"] + when["is"]
    given = work.nameplate.get(field)
    if given is None or given.get("unknown"):
        return True
    return (given.get("choice") or given.get("text")) in when["is"]


def judge(work, limit, key, row, number):
    """The Judged of a limit at a round (0 as found), from the cache or computed."""
    cached = work.cache.get((limit["id"], key, number))
    if cached is None:
        cached = _judge(work, limit, key, row, number)
        work.cache[(limit["id"], key, number)] = cached
    return cached


def _judge(work, limit, key, row, number):
    entry = entry_on(limit, work.on)
    lookup = readings.Lookup(work, number)
    if row not in ("", "?"):
        lookup = readings.Lookup(work, number, row, table_of(work, limit))
    value = None
    side = ""
    reason = ""
    bounds = None
    try:
        if row == "?":
            readings.rows_of(work, work.step(table_of(work, limit)))
        bounds = _limit(limit, entry, lookup)
        value = lookup(limit["value"])
        if isinstance(value, list):
            raise FieldcheckError("a whole column cannot be judged as one value")
        if isinstance(value, formulas.Bound):
            side = value.side
            value = value.value
    except formulas.MissingInput as missing:
        reason = missing.what
    except FieldcheckError as error:
        reason = str(error.what)
    stale = _stale(work, lookup, number)
    if bounds is None:
        bounds = verdicts.Limit(limit["id"], at_most=0.0, rule=limit["rule"], coverage=limit["coverage"],
                                safety=bool(limit.get("safety")))
        verdict = verdicts.not_judged(bounds, reason).replace(at_most=None, accept_high=None)
    elif reason:
        verdict = verdicts.not_judged(bounds, reason)
    elif stale:
        verdict = verdicts.not_judged(bounds, "to be repeated after: " + stale)
    else:
        verdict = verdicts.judge(value, bounds, tuple(lookup.states), side)
    return Judged(key, limit, row, number, verdict, value, bounds, entry, lookup, stale)


def _limit(limit, entry, lookup):
    """The verdicts.Limit with its bounds evaluated."""
    low = formulas.evaluate(entry["at_least"], lookup) if entry.get("at_least") is not None else None
    high = formulas.evaluate(entry["at_most"], lookup) if entry.get("at_most") is not None else None
    return verdicts.Limit(limit["id"], low, high, limit["rule"], figures.parse_decimal(limit.get("guard") or "1"),
                          figures.parse_decimal(limit.get("probability") or "0.95"), limit["coverage"],
                          bool(limit.get("safety")))


def _stale(work, lookup, number):
    """Title of a service action up to a round that may have changed what a used reading showed, and came after it."""
    for step_id, _, _, answer in lookup.used:
        for action in work.part["steps"]:
            if action["kind"] != "action" or step_id not in (action.get("repeats_steps") or []):
                continue
            for n in range(1, number + 1):
                done = work.at(action["id"], n, "")
                if done is not None and not done.left and not answer.follows(done):
                    return action["title"]
    return ""


def is_found_limit(work, limit):
    """True when a limit is judged as found too; False when only the closing steps of the work feed it."""
    for step in work.part["steps"]:
        if step["phase"] in FOUND_PHASES and limit["id"] in work.limits_on(step["id"]):
            return True
    return not [step for step in work.part["steps"] if limit["id"] in work.limits_on(step["id"])]


def display(work, judged):
    """(unit text, function SI -> that unit) in which a limit is shown."""
    name = judged.limit.get("unit") or ""
    if not name:
        return "", _same
    unit = units.unit(name)

    def convert(value):
        return units.from_base(value, unit)

    return units.symbol_text(unit), convert


def _same(value):
    return value


def value_texts(work, judged):
    """verdicts.Printed of a verdict with its unit: (Printed, unit text)."""
    unit, convert = display(work, judged)
    return verdicts.printed(judged.verdict, convert), unit


def printed(work, judged):
    """One line: "23.1 ± 0.9 mΩ", or "" without a value."""
    shown, unit = value_texts(work, judged)
    if not shown.value:
        return ""
    text = judged.verdict.bound + shown.value
    if shown.U:
        text = text + " ± " + shown.U
    return text + ("\u202f" + unit if unit else "")


def explained(work, judged):
    """The explanation of a verdict (explain.explanation) with its formula, numbers, corrections and citation."""
    unit, convert = display(work, judged)
    name = judged.limit["value"]
    derived = work.values.get(name)
    formula = ""
    numbers = []
    if derived is not None and judged.lookup is not None:
        formula = formulas.text(derived["formula"])
        numbers = [(one, name_text(work, judged.lookup, one)) for one in formulas.names_in(derived["formula"])]
    measured_value = judged.value if isinstance(judged.value, Measured) else None
    notes = list(judged.lookup.notes) if judged.lookup is not None else []
    return explain.explanation(judged.verdict, judged.bounds, measured_value, unit, convert, formula, numbers, notes,
                               judged.entry.get("cite"), judged.entry.get("tag", ""), judged.entry.get("note", ""))


def name_text(work, lookup, name):
    """What stands for a name when its number is put in: the value in the unit in which it is taken."""
    try:
        value = lookup(name)
    except FieldcheckError:
        return name
    if isinstance(value, str):
        return value
    if isinstance(value, (list, dict, formulas.Bound)):     # a column, a run of the drum, a bound: no one number
        return name
    unit = unit_of(work, name)
    plain = value.value if isinstance(value, Measured) else value
    if not unit:
        return figures.significant(plain, 6)
    converted = units.from_base(plain, units.unit(unit))
    return figures.significant(converted, 6) + "\u202f" + units.symbol_text(units.unit(unit))


def unit_of(work, name):
    """The unit in which a name is taken or shown, or ""."""
    if name in work.values:
        return work.values[name].get("unit") or ""
    step_id, _, column = name.partition(".")
    step = work.steps.get(step_id)
    if step is not None and step["kind"] == "table":
        for one in step["columns"]:
            if one["id"] == column:
                return one.get("unit") or ""
    if step is not None:
        return step.get("unit") or ""
    field = readings.nameplate_field(work, name)
    if field is not None:
        return field.get("unit") or ""
    return {"ambient": "degC", "supply_voltage": "V", "supply_frequency": "Hz", "humidity": "%"}.get(name, "")
