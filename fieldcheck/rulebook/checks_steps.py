"""Checks of single steps: each kind has what it needs and nothing else."""

from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.rulebook.amounts import of_quantity
from fieldcheck.rulebook.checks_head import (
    NAME,
    check_choices,
    doubles,
    quantity_and_unit,
)
from fieldcheck.rulebook.findings import Findings, Source, did_you_mean
from fieldcheck.rulebook.formula import Wrong, check_quantity
from fieldcheck.rulebook.lines import Path
from fieldcheck.rulebook.shapes import Column, Plate, Procedure, Step
from fieldcheck.rulebook.shelf import Shelf

ONLY = {
    "quantity": ("measure",), "unit": ("measure", "timing"), "meter": ("measure", "timing"), "two_wire": ("measure",),
    "choices": ("choice",), "rows": ("table",), "columns": ("table",), "layout": ("sequence",),
    "pulses": ("sequence",), "corrective": ("action",), "tries": ("action",), "opens": ("action", "confirm"),
    "restores": ("action", "confirm"),
}
"""key of a step -> kinds that may have it"""

WITHOUT_METER = ("count", "ratio", "temperature difference", "angle", "viscosity", "penetration")


def check_steps(source: Source, procedure: Procedure, shelf: Shelf, findings: Findings) -> None:
    """Every step by itself."""
    for place, step in enumerate(procedure.step):
        path: Path = ("step", place)
        for key, kinds in ONLY.items():
            if getattr(step, key) and step.kind not in kinds:
                findings.add(source, (*path, key), f'a step of kind {step.kind} has no "{key}"',
                             "that is for kind " + " or ".join(kinds))
        for caution in step.cautions:
            if caution not in procedure.cautions:
                findings.add(source, (*path, "cautions"), f'caution "{caution}" is not among the procedure\'s',
                             did_you_mean(caution, procedure.cautions, "name it in the cautions of the head too"))
        _repeats_form(source, path, step, findings)
        _aborts(source, path, step, findings)
        {"measure": _measure, "timing": _timing, "table": _table, "choice": _choice, "sequence": _sequence,
         "action": _action}.get(step.kind, _plain)(source, path, step, procedure, shelf, findings)


def _plain(source: Source, path: Path, step: Step, procedure: Procedure, shelf: Shelf, findings: Findings) -> None:
    """confirm, photograph and note need nothing more."""


def _repeats_form(source: Source, path: Path, step: Step, findings: Findings) -> None:
    if isinstance(step.repeats, list) and step.kind != "action":
        findings.add(source, (*path, "repeats"), f'a step of kind {step.kind} repeats other steps',
                     "only an action does; for several readings write repeats = 3")
    if isinstance(step.repeats, int) and step.repeats != 1 and step.kind not in ("measure", "timing"):
        findings.add(source, (*path, "repeats"), f"a step of kind {step.kind} is not read several times",
                     "repeats = number is for measure and timing; an action names steps, as repeats = [\"drop\"]")
    if isinstance(step.repeats, int) and not 1 <= step.repeats <= 50:
        findings.add(source, (*path, "repeats"), f"{step.repeats} repeats", "write 1 to 50")


def _aborts(source: Source, path: Path, step: Step, findings: Findings) -> None:
    if step.can_burn and not step.abort:
        findings.add(source, (*path, "can_burn"), "can burn something and has no abort limit",
                     "add [[step.abort]] with text, quantity and at_most")
    for place, abort in enumerate(step.abort):
        try:
            check_quantity(abort.quantity)
        except Wrong as wrong:
            findings.add(source, (*path, "abort", place, "quantity"), wrong.what, wrong.mend)
            continue
        try:
            of_quantity(abort.at_most, abort.quantity)
        except FieldcheckError as error:
            findings.add(source, (*path, "abort", place, "at_most"), f"abort limit: {error.what}", error.mend)


def _measure(source: Source, path: Path, step: Step, procedure: Procedure, shelf: Shelf, findings: Findings) -> None:
    if not step.quantity:
        findings.add(source, path, "measures and names no quantity", 'add quantity = "..." and unit = "..."')
        return
    if quantity_and_unit(source, path, step.quantity, step.unit, findings):
        _meter(source, path, step, shelf, findings)


def _meter(source: Source, path: Path, what: Step | Column, shelf: Shelf, findings: Findings) -> None:
    if not what.meter:
        if what.quantity not in WITHOUT_METER:
            findings.add(source, path, f"a {what.quantity} without a meter", 'add meter = "...", a function of '
                         "rules/meters/functions.toml")
        return
    if "function" in shelf.broken:
        return
    if what.meter not in shelf.functions:
        findings.add(source, (*path, "meter"), f'there is no meter function "{what.meter}"',
                     did_you_mean(what.meter, shelf.functions))
    elif shelf.functions[what.meter] != what.quantity:
        findings.add(source, (*path, "meter"), f'"{what.meter}" measures {shelf.functions[what.meter]}, not '
                     f"{what.quantity}", "name a function of that quantity")


def _timing(source: Source, path: Path, step: Step, procedure: Procedure, shelf: Shelf, findings: Findings) -> None:
    if step.unit:
        quantity_and_unit(source, path, "time", step.unit, findings)


def _table(source: Source, path: Path, step: Step, procedure: Procedure, shelf: Shelf, findings: Findings) -> None:
    if step.rows is None or bool(step.rows.from_) == bool(step.rows.labels):
        findings.add(source, (*path, "rows"), "a table needs rows, from a count or by labels",
                     'write rows = { from = "..." } or rows = { labels = ["...", "..."] }')
    elif step.rows.from_:
        _rows_from(source, (*path, "rows"), step.rows.from_, procedure, findings)
    else:
        _labels(source, (*path, "rows"), step.rows.labels, findings)
    if not step.columns:
        findings.add(source, path, "a table needs columns", "add [[step.columns]] with id, title, quantity")
    for one in doubles(column.id for column in step.columns):
        findings.add(source, (*path, "columns"), f'column "{one}" stands twice', "give each its own id")
    for place, column in enumerate(step.columns):
        _column(source, (*path, "columns", place), column, shelf, findings)


def _rows_from(source: Source, path: Path, name: str, procedure: Procedure, findings: Findings) -> None:
    counts = [one.id for one in procedure.nameplate if one.quantity == "count"]
    if name not in counts:
        findings.add(source, path, f'rows come from "{name}", which is no count on the nameplate',
                     did_you_mean(name, counts, "add a nameplate field of quantity count"))


def _labels(source: Source, path: Path, labels: list[str], findings: Findings) -> None:
    for one in labels:
        if "/" in one or "|" in one or not one.strip():
            findings.add(source, path, f'row "{one}" is empty or holds / or |', "write it otherwise")
    for one in doubles(labels):
        findings.add(source, path, f'row "{one}" stands twice', "give each its own label")


def _column(source: Source, path: Path, column: Column, shelf: Shelf, findings: Findings) -> None:
    where = f'step "{_step_id(source, path)}", column "{column.id}"'
    if not NAME.match(column.id):
        findings.add(source, (*path, "id"), f'"{column.id}" is no id', "use small letters, digits and _", where)
    if column.timing:
        if column.quantity != "time":
            findings.add(source, (*path, "quantity"), f"the stopwatch gives no {column.quantity}",
                         'write quantity = "time"', where)
        return
    own = Findings()
    if quantity_and_unit(source, path, column.quantity, column.unit, own):
        _meter(source, path, column, shelf, own)
    for one in own.all:
        findings.all.append(type(one)(one.file, one.line, where, one.what, one.mend))


def _step_id(source: Source, path: Path) -> str:
    return str(source.data["step"][path[1]].get("id"))


def _choice(source: Source, path: Path, step: Step, procedure: Procedure, shelf: Shelf, findings: Findings) -> None:
    check_choices(source, (*path, "choices"), step.choices, findings)


def _sequence(source: Source, path: Path, step: Step, procedure: Procedure, shelf: Shelf, findings: Findings) -> None:
    if step.layout is None or bool(step.layout.positions) == bool(step.layout.from_):
        findings.add(source, (*path, "layout"), "a sequence needs the drum's layout",
                     'write layout = { positions = ["...", "..."] } or layout = { from = "...", layouts = { ... } }')
        return
    layouts = {"": step.layout.positions} if step.layout.positions else step.layout.layouts
    for name, positions in layouts.items():
        said = f'layout "{name}"' if name else "the layout"
        if len(positions) < 2:
            findings.add(source, (*path, "layout"), f"{said} has fewer than two positions",
                         "name each position in turn")
        elif len(set(positions)) == 1:
            findings.add(source, (*path, "layout"), f"{said} shows the same at every position",
                         "then nothing can be told: name what each position shows")
    if step.layout.from_:
        _layouts(source, path, step, procedure.nameplate, findings)


def _layouts(source: Source, path: Path, step: Step, nameplate: list[Plate], findings: Findings) -> None:
    assert step.layout is not None
    fields = {one.id: [choice.id for choice in one.choices] for one in nameplate if one.choices}
    if step.layout.from_ not in fields:
        findings.add(source, (*path, "layout"), f'the layout comes from "{step.layout.from_}", which is no nameplate '
                     "field with choices", did_you_mean(step.layout.from_, fields, "add that nameplate field"))
        return
    known = fields[step.layout.from_]
    for name in step.layout.layouts:
        if name not in known:
            findings.add(source, (*path, "layout"), f'layout "{name}" is no choice of {step.layout.from_}',
                         did_you_mean(name, known))
    for name in known:
        if name not in step.layout.layouts:
            findings.add(source, (*path, "layout"), f'there is no layout for the choice "{name}"', "add it to layouts")


def _action(source: Source, path: Path, step: Step, procedure: Procedure, shelf: Shelf, findings: Findings) -> None:
    repeated = step.repeats if isinstance(step.repeats, list) else []
    if step.corrective:
        if step.phase != "service":
            findings.add(source, (*path, "phase"), f'a corrective action in phase "{step.phase}"',
                         "nothing is serviced before the as-found readings: write phase = \"service\"")
        if step.tries < 1:
            findings.add(source, path, "a corrective action without end: it does not say how often it is tried",
                         "add tries = 1")
        if not repeated:
            findings.add(source, path, "a corrective action repeats no reading", 'add repeats = ["..."]: the readings '
                         "that show whether it helped")
        if step.supply == "mains live":
            findings.add(source, (*path, "supply"), "a corrective action with mains live", "isolate first")
    elif step.tries:
        findings.add(source, (*path, "tries"), "tries without corrective", "add corrective = true, or leave tries out")
    _repeated(source, path, repeated, procedure, findings)


def _repeated(source: Source, path: Path, names: list[str], procedure: Procedure, findings: Findings) -> None:
    steps = {one.id: one for one in procedure.step}
    for name in names:
        if name not in steps:
            findings.add(source, (*path, "repeats"), f'repeats "{name}", which is no step', did_you_mean(name, steps))
        elif steps[name].phase not in ("prepare", "as found") or steps[name].kind == "action":
            findings.add(source, (*path, "repeats"), f'repeats "{name}", which is no reading of prepare or as found',
                         "only those are taken again; as left and close come once, at the end")
