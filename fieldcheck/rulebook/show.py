"""A procedure as a senior technician would read it: plain text, in the order worked."""

import textwrap

from fieldcheck.engine import units
from fieldcheck.rulebook.shapes import Limit, Procedure, Step, When
from fieldcheck.rulebook.shelf import Shelf

PHASES = {"prepare": "Prepare", "as found": "As found, untouched", "service": "Service", "as left": "As left",
          "close": "Close"}
WIDTH = 100


def shown(procedure: Procedure, shelf: Shelf) -> str:
    """The whole procedure as text."""
    kind = shelf.kinds[procedure.kind]
    lines = [procedure.title.upper(), f"{kind.title}; the trade also says: {', '.join(procedure.trade)}", ""]
    lines += _wrapped(procedure.purpose)
    for depth in ("routine", "full"):
        minutes = getattr(procedure.minutes, depth)
        lines.append(f"{depth}: {minutes.work} min at work, {minutes.wait} min waiting")
    lines += ["", "CAUTIONS"]
    for name in procedure.cautions:
        caution = shelf.cautions[name]
        when = f" ({', '.join(caution.supply)})" if caution.supply else ""
        lines += _wrapped(f"{caution.signal.upper()}{when}: {caution.title}. {caution.text}")
    lines += ["", "SUPPLY STATES"]
    for state, text in procedure.supply.items():
        lines += _wrapped(f"{state}: {text}")
    lines += _nameplate(procedure)
    lines += _steps(procedure)
    lines += ["", "WHAT IS COMPUTED"]
    for value in procedure.value:
        each = f", for each row of {value.each}" if value.each else ""
        lines += _wrapped(f"{value.label} ({value.id}{each}) = {value.formula}   [{_unit(value.unit)}]")
    lines += ["", "LIMITS"]
    for limit in procedure.limit:
        lines += _limit(limit, procedure)
    return "\n".join(lines)


def _wrapped(text: str, first: str = "  ", then: str = "    ") -> list[str]:
    return textwrap.wrap(" ".join(text.split()), WIDTH, initial_indent=first, subsequent_indent=then)


def _unit(key: str) -> str:
    return units.symbol_text(units.unit(key)) if key else "plain number"


def _when(when: When | None) -> str:
    return "" if when is None else f" [only where {when.field} is {' or '.join(when.is_)}]"


def _nameplate(procedure: Procedure) -> list[str]:
    if not procedure.nameplate:
        return []
    lines = ["", "NAMEPLATE"]
    for field in procedure.nameplate:
        unknown = field.unknown
        then = "not judged" if unknown.then == "not judged" else f"{unknown.value} ({unknown.then}, {unknown.tag})"
        choices = ": " + ", ".join(one.label for one in field.choices) if field.choices else ""
        note = f" {unknown.note}" if unknown.note else ""
        lines += _wrapped(f"{field.label}{choices}. {field.text} Not marked: {then}.{note}")
    return lines


def _steps(procedure: Procedure) -> list[str]:
    lines: list[str] = []
    phase = supply = ""
    for number, step in enumerate(procedure.step, start=1):
        if step.phase != phase:
            lines += ["", PHASES[step.phase].upper()]
            phase = step.phase
        if step.supply != supply:
            lines.append(f"  -- hold point: {step.supply} --")
            supply = step.supply
        lines += _wrapped(f"{number}. {step.title}{_marks(step)}{_when(step.when)}")
        lines += _wrapped(step.text, "     ", "     ")
        if step.why:
            lines += _wrapped("Why: " + step.why, "     ", "     ")
        lines += _details(step)
    return lines


def _marks(step: Step) -> str:
    marks: list[str] = [step.kind]
    if step.depth != "both":
        marks.append(step.depth + " only")
    if step.hold:
        marks.append("hold point")
    if step.corrective:
        marks.append(f"only when called for, at most {step.tries} times")
    return " (" + ", ".join(marks) + ")"


def _details(step: Step) -> list[str]:
    lines: list[str] = []
    if step.kind == "measure":
        times = f", {step.repeats} times" if isinstance(step.repeats, int) and step.repeats > 1 else ""
        meter = f", {step.meter}" if step.meter else ""
        lines.append(f"     Read: {step.quantity} in {_unit(step.unit)}{times}{meter}")
    for column in step.columns:
        how = "stopwatch" if column.timing else column.meter
        lines.append(f"     Column: {column.title} ({column.quantity}" + (f", {how})" if how else ")"))
    if step.rows is not None:
        rows = ", ".join(step.rows.labels) if step.rows.labels else "one for each of " + step.rows.from_
        lines.append(f"     Rows: {rows}")
    if step.choices:
        lines += _wrapped("Choose: " + ", ".join(one.label for one in step.choices), "     ", "     ")
    for abort in step.abort:
        lines += _wrapped(f"ABORT: {abort.text} {abort.at_most}", "     ", "     ")
    if step.opens is not None:
        lines.append(f"     Opens: {step.opens.text}")
    if step.restores:
        lines.append(f"     Restores: {step.restores}")
    if isinstance(step.repeats, list) and step.repeats:
        lines += _wrapped("Repeat afterwards: " + ", ".join(step.repeats), "     ", "     ")
    return lines


def _limit(limit: Limit, procedure: Procedure) -> list[str]:
    titles = {one.id: one.title for one in procedure.step}
    rule = {"simple": "simple acceptance", "guarded": f"guarded by {limit.guard} U",
            "probability": f"conformance probability {limit.probability}"}[limit.rule]
    marks = [rule, limit.coverage] + (["SAFETY"] if limit.safety else [])
    lines = _wrapped(f"{limit.label} ({limit.id}), {', '.join(marks)}{_when(limit.when)}")
    for entry in limit.entry:
        bounds = " and ".join(f"{word} {text}" for word, text in (("at least", entry.at_least),
                                                                 ("at most", entry.at_most)) if text)
        cite = ", ".join(one for one in (entry.cite.source, entry.cite.clause, entry.cite.edition) if one)
        note = f" {entry.note}" if entry.note else ""
        lines += _wrapped(f"since {entry.since}: {bounds}   [{cite}; {entry.tag}]{note}", "     ", "       ")
    if limit.corrective:
        lines += _wrapped("If not met: " + ", then ".join(titles.get(one, one) for one in limit.corrective), "     ",
                          "       ")
    return lines
