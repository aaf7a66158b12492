"""Checks of values and limits: formulas, dimensions, citations, dates, decision rules."""

import datetime
from decimal import Decimal, InvalidOperation
from typing import Any

from fieldcheck.engine import budgets, units
from fieldcheck.engine.errors import FieldcheckError, UnitError
from fieldcheck.engine.formulas import names_in
from fieldcheck.engine.unit_table import NONE
from fieldcheck.rulebook.checks_flow import depth_problem
from fieldcheck.rulebook.findings import Findings, Source, did_you_mean
from fieldcheck.rulebook.formula import Scope, Tree, Type, Wrong, bound, check_quantity, check_unit, compiled
from fieldcheck.rulebook.lines import Path
from fieldcheck.rulebook.scope import row_table, scope_of, steps_behind
from fieldcheck.rulebook.shapes import Limit, LimitEntry, Procedure, Value
from fieldcheck.rulebook.shelf import Shelf

FIRST_DAY = datetime.date(2000, 1, 1)


def check_values(source: Source, procedure: Procedure, findings: Findings) -> dict[str, Tree]:
    """value id -> tree of every value that compiles; the rest becomes findings."""
    trees: dict[str, Tree] = {}
    tables = [one.id for one in procedure.step if one.kind == "table"]
    for place, value in enumerate(procedure.value):
        path: Path = ("value", place)
        if value.each and value.each not in tables:
            findings.add(source, (*path, "each"), f'"{value.each}" is no table', did_you_mean(value.each, tables))
            continue
        tree = _value(source, path, value, scope_of(procedure, value.each), findings)
        if tree is not None:
            trees[value.id] = tree
    _cycles(source, procedure, trees, findings)
    return trees


def _value(source: Source, path: Path, value: Value, scope: Scope, findings: Findings) -> Tree | None:
    try:
        tree, kind = compiled(value.formula, scope)
    except Wrong as wrong:
        findings.add(source, (*path, "formula"), wrong.what, wrong.mend)
        return None
    try:
        dimension = check_quantity(value.quantity)
        if value.unit:
            check_unit(value.unit, value.quantity)
        elif dimension != NONE:
            raise Wrong(f"{value.quantity} without a unit", "add unit = \"...\", in which it is shown")
    except Wrong as wrong:
        findings.add(source, (*path, "unit" if "unit" in wrong.what else "quantity"), wrong.what, wrong.mend)
        return tree
    if kind.what == "list":
        findings.add(source, (*path, "formula"), "the formula gives one value for each row",
                     'add each = "..." (the table), or take median, maximum or minimum')
    elif kind.what != "value":
        findings.add(source, (*path, "formula"), f"the formula gives {kind.name}, not a number", "let it give a number")
    elif kind.dimension != dimension:
        findings.add(source, (*path, "formula"), f"the formula gives {units.dimension_name(kind.dimension)}, not "
                     f"{value.quantity}", "correct the formula or the quantity")
    return tree


def _cycles(source: Source, procedure: Procedure, trees: dict[str, Tree], findings: Findings) -> None:
    places = {one.id: place for place, one in enumerate(procedure.value)}
    done: set[str] = set()

    def visit(name: str, way: list[str]) -> None:
        if name in way:
            ring = [*way[way.index(name):], name]
            findings.add(source, ("value", places[name], "formula"), "depends on itself: " + " -> ".join(ring),
                         "break the ring")
            done.update(ring)
            return
        if name in done:
            return
        for one in names_in(trees[name]):
            if one in trees:
                visit(one, [*way, name])
        done.add(name)

    for name in trees:
        visit(name, [])


def check_limits(source: Source, procedure: Procedure, trees: dict[str, Tree], shelf: Shelf,
                 findings: Findings) -> dict[tuple[str, int], dict[str, Tree | None]]:
    """(limit id, number of entry) -> {"at_least": tree, "at_most": tree} of every limit."""
    bounds: dict[tuple[str, int], dict[str, Tree | None]] = {}
    for place, limit in enumerate(procedure.limit):
        path: Path = ("limit", place)
        _rule(source, path, limit, findings)
        _safety(source, path, limit, findings)
        scope, kind = limit_scope(source, path, limit, procedure, findings)
        for number, entry in enumerate(limit.entry):
            bounds[(limit.id, number)] = check_entry(source, (*path, "entry", number), entry, scope, kind, shelf,
                                                     findings)
        _dates(source, path, limit.entry, findings)
        _foundation(source, path, limit, procedure, trees, findings)
    return bounds


def limit_scope(source: Source, path: Path, limit: Limit, procedure: Procedure,
                findings: Findings) -> tuple[Scope, Type | None]:
    """The scope of a limit's bounds, and the type of what it judges (None with a finding)."""
    table = row_table(limit, procedure) if limit.each else ""
    scope = scope_of(procedure, table)
    kind = scope.names.get(limit.value)
    if kind is None:
        hint = scope.hidden.get(limit.value) or did_you_mean(limit.value, scope.names, "name a step, column or value")
        findings.add(source, (*path, "value"), f'judges "{limit.value}", which is no reading or value', hint)
        return scope, None
    if limit.each and not table:
        findings.add(source, (*path, "each"), f'"{limit.value}" is not computed row by row',
                     "leave each out, or give the value an each")
        return scope, None
    if kind.what == "list":
        findings.add(source, (*path, "value"), f'"{limit.value}" is one value for each row', "add each = true")
        return scope, None
    if kind.what != "value":
        findings.add(source, (*path, "value"), f'judges "{limit.value}", which is {kind.name}, not a number',
                     "judge a number")
        return scope, None
    _shown_unit(source, path, limit, kind, findings)
    return scope, kind


def _shown_unit(source: Source, path: Path, limit: Limit, kind: Type, findings: Findings) -> None:
    if not limit.unit:
        if kind.dimension != NONE:
            findings.add(source, path, "has no unit", 'add unit = "...", in which the verdict is shown')
        return
    try:
        found = units.unit(limit.unit)
    except UnitError as error:
        findings.add(source, (*path, "unit"), error.what, error.mend)
        return
    if found.dimension != kind.dimension:
        findings.add(source, (*path, "unit"), f'"{limit.unit}" is {units.dimension_name(found.dimension)}, the value '
                     f"is {units.dimension_name(kind.dimension)}", "use a unit of the value")


def check_entry(source: Source, path: Path, entry: LimitEntry, scope: Scope, kind: Type | None, shelf: Shelf,
                findings: Findings) -> dict[str, Tree | None]:
    """The trees of one dated entry's bounds."""
    trees: dict[str, Tree | None] = {"at_least": None, "at_most": None}
    for key in trees:
        text = getattr(entry, key)
        if not text:
            continue
        try:
            tree, found = bound(text, scope)
            if found.what != "value":
                raise Wrong(f"{key} is {found.name}, not one value", "give one value")
            if kind is not None and found.dimension != kind.dimension:
                raise Wrong(f"cannot compare {units.dimension_name(kind.dimension)} with "
                            f"{units.dimension_name(found.dimension)} ({key} = {text})",
                            "both sides need the same kind of unit")
            trees[key] = tree
        except Wrong as wrong:
            findings.add(source, (*path, key), wrong.what, wrong.mend)
    if not entry.at_least and not entry.at_most:
        findings.add(source, path, "says neither at_least nor at_most", "add one of them, or both")
    low, high = trees["at_least"], trees["at_most"]
    if low and high and low[0] == high[0] == "num" and Decimal(low[1]) > Decimal(high[1]):
        findings.add(source, (*path, "at_least"), "at_least is above at_most: nothing could pass", "exchange them")
    _citation(source, path, entry, shelf, findings)
    return trees


def _citation(source: Source, path: Path, entry: LimitEntry, shelf: Shelf, findings: Findings) -> None:
    cited = entry.cite.source
    if cited not in shelf.sources and "source" in shelf.broken:
        return
    if cited not in shelf.sources:
        findings.add(source, (*path, "cite"), f'cites "{cited}", which is no source',
                     did_you_mean(cited, shelf.sources, "add it to rules/sources.toml"))
        return
    house = ("practice", "workshop", "derived")
    if entry.tag == "PRACTICE" and cited not in house:
        findings.add(source, (*path, "tag"), f'common practice that cites "{cited}"',
                     'write cite = { source = "practice" }, or the tag of what was read')
    if entry.tag in ("READ", "READ-2", "MEM", "MEM+", "MEM?"):
        if cited in house:
            findings.add(source, (*path, "cite"), f'tag {entry.tag} cites "{cited}"',
                         "name the document that it was read or remembered from")
        elif not entry.cite.clause.strip():
            findings.add(source, (*path, "cite"), "the citation names no clause",
                         'add clause = "..." (section, table or page)')


def _dates(source: Source, path: Path, entries: list[LimitEntry], findings: Findings) -> None:
    if not entries:
        findings.add(source, path, "has no dated entry", "add [[limit.entry]] with since, a bound, cite and tag")
    days: list[datetime.date] = []
    for number, entry in enumerate(entries):
        here = (*path, "entry", number, "since")
        if entry.since < FIRST_DAY:
            findings.add(source, here, f"{entry.since} is before any rulebook", f"write {FIRST_DAY} or later")
        if entry.since in days:
            findings.add(source, here, "two entries since the same day", "a change holds from a later day")
        elif days and entry.since < days[-1]:
            findings.add(source, here, f"{entry.since} stands after {days[-1]}", "write the entries in order of date")
        days.append(entry.since)


def _rule(source: Source, path: Path, limit: Limit, findings: Findings) -> None:
    guard = _decimal(limit.guard)
    if guard is None or not 0 <= guard <= 3:
        findings.add(source, (*path, "guard"), f'"{limit.guard}" is no guard band factor', "write 0 to 3, as \"1\"")
    if limit.rule != "guarded" and "guard" in _raw(source, path):
        findings.add(source, (*path, "guard"), f"rule {limit.rule} has no guard", "write rule = \"guarded\"")
    chance = _decimal(limit.probability)
    if chance is None or not Decimal("0.5") <= chance < 1:
        findings.add(source, (*path, "probability"), f'"{limit.probability}" is no conformance probability',
                     "write 0.5 up to below 1, as \"0.95\"")
    if limit.rule != "probability" and "probability" in _raw(source, path):
        findings.add(source, (*path, "probability"), f"rule {limit.rule} has no probability",
                     "write rule = \"probability\"")
    try:
        budgets.coverage_factor(10, limit.coverage)
    except FieldcheckError as error:
        findings.add(source, (*path, "coverage"), error.what, error.mend)


def _safety(source: Source, path: Path, limit: Limit, findings: Findings) -> None:
    if not limit.safety:
        return
    guard = _decimal(limit.guard)
    if limit.rule != "guarded":
        findings.add(source, (*path, "rule"), f"a safety limit with rule {limit.rule} could pass by chance",
                     "write rule = \"guarded\"")
    elif guard is not None and guard < 1:
        findings.add(source, (*path, "guard"), "a safety limit guarded by less than U", "write guard = \"1\" or more")
    if limit.bounds in ("nothing", "restrictions"):
        findings.add(source, (*path, "bounds"), f'a safety limit that bounds "{limit.bounds}"',
                     "leave bounds out: a safety limit not met allows only unserviceable")
    for number, entry in enumerate(limit.entry):
        if entry.tag == "MEM?":
            findings.add(source, (*path, "entry", number, "tag"), "a safety limit from a memory that nobody verified",
                         "read the source first, or make it no safety limit")


def _foundation(source: Source, path: Path, limit: Limit, procedure: Procedure, trees: dict[str, Tree],
                findings: Findings) -> None:
    """What the limit judges is measured wherever the limit holds."""
    behind = steps_behind([limit.value], procedure, trees)
    steps = [one for one in procedure.step if one.id in behind]
    if not steps:
        known = limit.value in trees or limit.value in [one.id for one in procedure.nameplate]
        if known:
            findings.add(source, (*path, "value"), "rests on no reading", "judge what a step has measured")
        return
    early = depth_problem(limit.depth, steps)
    if early is not None:
        findings.add(source, path, f'holds in depth {limit.depth}, its reading "{early.id}" is taken in {early.depth}',
                     "give both the same depth")
    certain = steps_behind([limit.value], procedure, trees, certain=True)
    for step in [one for one in steps if one.id in certain]:
        if step.when is not None and (limit.when is None or limit.when.field != step.when.field
                                      or not set(limit.when.is_) <= set(step.when.is_)):
            findings.add(source, path, f'is judged where its reading "{step.id}" is not taken',
                         "give the limit the same when as the step")


def _raw(source: Source, path: Path) -> dict[str, Any]:
    found: dict[str, Any] = source.data["limit"][path[1]]
    return found


def _decimal(text: str) -> Decimal | None:
    try:
        value = Decimal(text)
    except InvalidOperation:
        return None
    return value if value.is_finite() else None
