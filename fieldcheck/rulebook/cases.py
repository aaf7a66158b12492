"""The cases beside a procedure: data -> filled-in runs for engine/assess.py, and what the engine must say of them."""

from dataclasses import dataclass
from pathlib import Path as FilePath
from typing import Any

from fieldcheck.engine import assess
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.rulebook import shapes
from fieldcheck.rulebook.compiling import Json
from fieldcheck.rulebook.findings import Findings, Source, did_you_mean
from fieldcheck.rulebook.formula import Wrong
from fieldcheck.rulebook.lines import Path
from fieldcheck.rulebook.reading import shaped
from fieldcheck.rulebook.shapes import Case, Procedure, Step
from fieldcheck.rulebook.shelf import Shelf, good_meters

LAST = ("as left", "close")
STATEMENTS = ("pass", "conditional pass", "conditional fail", "fail", "not judged", "")
PASSED = ("pass", "conditional pass")


@dataclass
class Cases:
    """The cases of one procedure: where they stand, their data, and the meters that they may use."""

    source: Source
    cases: list[Case]
    meters: list[Json]


def file_of(procedure_file: FilePath) -> FilePath:
    """The cases file beside a procedure's file."""
    return procedure_file.with_name(procedure_file.name.removesuffix(".toml") + ".cases.toml")


def read_cases(procedure_file: FilePath, shelf: Shelf, findings: Findings) -> Cases | None:
    """The cases beside a procedure, or None with findings."""
    file = file_of(procedure_file)
    if not file.exists():
        findings.add(Source(procedure_file), (), "has no cases beside it", f"write {file.name}: what it says of "
                     "readings as a technician keys them")
        return None
    source, found = shaped(shapes.CasesFile, file, findings)
    if source is None or found is None:
        return None
    own = good_meters(source, found.meter, shelf.functions, findings)
    return Cases(source, found.case, [*own, *shelf.bench])


def run_of(procedure: Procedure, case: Case, meters: list[Json]) -> Json:
    """A case as the filled-in run that engine/assess.py judges; Wrong names what does not fit.

    The order is the order of the work: found, the rounds of service, last.
    """
    chosen = _meters(case, meters)
    run: Json = {"procedure": procedure.id, "depth": case.depth, "on": case.on.isoformat(), "meters": chosen,
                 "nameplate": dict(case.nameplate), "conditions": dict(case.conditions),
                 "answers": [], "left": [], "defects": [{"what": one.what, "level": one.level} for one in case.defect]}
    for key in case.nameplate:
        if key not in [one.id for one in procedure.nameplate]:
            raise Wrong(f'there is no nameplate field "{key}"',
                        did_you_mean(key, [one.id for one in procedure.nameplate]))
    _unknown_steps(procedure, [*case.found, *case.last, *case.not_done, *[k for one in case.round for k in one],
                               *[key.split("|")[0] for key in case.skip]])
    for step in procedure.step:
        if step.phase in ("prepare", "as found"):
            _answer(run, step, 0, case.found, case, chosen)
    for number, given in enumerate(case.round, start=1):
        for phase in ("service", "prepare", "as found"):
            for step in procedure.step:
                if step.phase == phase:
                    _answer(run, step, number, given, case, chosen)
    if not case.round:
        _always(run, procedure, case)
    for step in procedure.step:
        if step.phase in LAST:
            _answer(run, step, 0, case.last, case, chosen)
    for key, reason in case.skip.items():
        step_id, _, rest = key.partition("|")
        round_text, _, index = rest.partition("|")
        run["left"].append({"step": step_id, "round": int(round_text or 0), "index": index, "reason": reason})
    return run


def _always(run: Json, procedure: Procedure, case: Case) -> None:
    """Service that is always done counts as done in round 1 where a case names no round."""
    for step in procedure.step:
        if step.phase == "service" and not step.corrective and step.kind == "action" and step.id not in case.not_done:
            run["answers"].append({"step": step.id, "round": 1, "done": True})


def _meters(case: Case, meters: list[Json]) -> list[Json]:
    if case.meters is None:
        return meters
    known = {one["tag"]: one for one in meters}
    for tag in case.meters:
        if tag not in known:
            raise Wrong(f'there is no meter "{tag}"', did_you_mean(tag, known))
    return [known[tag] for tag in case.meters]


def _unknown_steps(procedure: Procedure, names: list[str]) -> None:
    known = [one.id for one in procedure.step]
    for name in names:
        if name not in known:
            raise Wrong(f'there is no step "{name}"', did_you_mean(name, known))


def _answer(run: Json, step: Step, number: int, given: dict[str, Any], case: Case, meters: list[Json]) -> None:
    """Appends what a case says of one step in one round; actions not named are done where that goes without saying."""
    skipped = step.id in case.skip or f"{step.id}|{number}" in case.skip
    if step.kind == "action":
        unsaid = number == 0 or (number == 1 and step.phase == "service" and not step.corrective)
        if step.id in given or (unsaid and not skipped and step.id not in case.not_done):
            run["answers"].append({"step": step.id, "round": number, "done": True})
        return
    if step.id not in given:
        return
    value = given[step.id]
    if step.kind == "table":
        _table(run, step, number, value, meters)
        return
    run["answers"].append({"step": step.id, "round": number, **_value(step, value, step.meter, meters)})


def _table(run: Json, step: Step, number: int, value: Any, meters: list[Json]) -> None:
    if not isinstance(value, dict) or not all(isinstance(row, dict) for row in value.values()):
        raise Wrong(f'"{step.id}" is a table', f'write {step.id}.<row>.<column> = "..."')
    columns = {one.id: one for one in step.columns}
    for row, cells in value.items():
        for name, cell in cells.items():
            if name not in columns:
                raise Wrong(f'"{step.id}" has no column "{name}"', did_you_mean(name, columns))
            meter = "" if columns[name].timing else columns[name].meter
            run["answers"].append({"step": step.id, "round": number, "index": f"{row}/{name}",
                                   **_value(step, cell, meter, meters)})


def _value(step: Step, given: Any, function: str, meters: list[Json]) -> Json:
    """An answer's value from what a case says: text, list of repeats, choice, or a table of keys."""
    if step.kind in ("confirm", "photograph", "note"):
        return {"done": True, "text": str(given)}
    if step.kind == "choice":
        if not isinstance(given, str) or given not in [*[one.id for one in step.choices], "unknown"]:
            raise Wrong(f'"{given}" is no choice of "{step.id}"',
                        did_you_mean(str(given), [one.id for one in step.choices]))
        return {"choice": given}
    if step.kind == "sequence":
        if not isinstance(given, dict):
            raise Wrong(f'"{step.id}" is a sequence', 'write { start = "...", seen = ["...", "..."] }')
        return {**given, "seen": list(given.get("seen", []))}
    value: Json
    if isinstance(given, list):
        value = {"texts": given}
    elif isinstance(given, dict):
        value = dict(given)
    else:
        value = {"text": given}
    if value.get("meter") == "none":
        del value["meter"]
    elif function and "meter" not in value:
        for meter in meters:
            if function in [one["function"] for one in meter["functions"]]:
                value["meter"] = meter["tag"]
                break
    if value.get("meter") and function and "function" not in value:
        value["function"] = function
    return value


def check_cases(procedure: Procedure, part: Json, cases: Cases, findings: Findings) -> int:
    """Runs the cases of a procedure against its compiled part; how many ran.  What does not hold becomes findings."""
    said: dict[str, set[str]] = {}
    names: set[str] = set()
    for place, case in enumerate(cases.cases):
        path: Path = ("case", place)
        if case.name in names:
            findings.add(cases.source, (*path, "name"), "a second case of this name", "name what is special about it")
        names.add(case.name)
        try:
            result = assess.assess(part, run_of(procedure, case, cases.meters))
        except Wrong as wrong:
            findings.add(cases.source, path, wrong.what, wrong.mend)
            continue
        except FieldcheckError as error:
            findings.add(cases.source, path, f"{error.where}: {error.what}" if error.where else error.what, error.mend)
            continue
        _hold(cases.source, path, case, result, findings)
        for one in result["verdicts"]:
            verdict = result["verdicts"][one]
            said.setdefault(one.split("/")[0], set()).update([verdict["found"], verdict["left"]])
    _bitten(procedure, said, cases, findings)
    return len(cases.cases)


def _hold(source: Source, path: Path, case: Case, result: Json, findings: Findings) -> None:
    expect = case.expect
    where: Path = (*path, "expect")
    verdicts = result["verdicts"]

    def differs(key: str, wanted: Any, got: Any) -> None:
        if wanted is not None and wanted != got:
            findings.add(source, (*where, key), f"no longer holds: {key} is {_said(got)}, not {_said(wanted)}",
                         _because(result))

    differs("outcome", expect.outcome, result["outcome"])
    differs("called_for", expect.called_for, result["called_for"])
    differs("open_entries", expect.open_entries, result["open_entries"])
    differs("complete", expect.complete, result["complete"])
    for reason in expect.reasons:
        if not [one for one in result["reasons"] if reason in one]:
            findings.add(source, (*where, "reasons"), f'no longer holds: no reason says "{reason}"', _because(result))
    for key in ("found", "left", "final", "value", "reason"):
        for limit, wanted in getattr(expect, key).items():
            here = (*where, key, limit)
            if key in ("found", "left", "final") and wanted not in STATEMENTS:
                findings.add(source, here, f'"{wanted}" is no statement', did_you_mean(wanted, STATEMENTS[:-1]))
            elif limit not in verdicts:
                findings.add(source, here, f'there is no verdict "{limit}"', did_you_mean(limit, verdicts))
            elif wanted != _plain(verdicts[limit][key]) and not (key == "reason" and wanted in verdicts[limit][key]):
                got = verdicts[limit]
                said = ": ".join(part for part in (got["value"], got["reason"]) if part)
                reason = f" ({said})" if said and key != "reason" else ""
                findings.add(source, here, f"no longer holds: {limit}, {key} is {_said(got[key])}{reason}, not "
                             f"{_said(wanted)}", "correct the rule, or the case if the rule is right")


def _plain(text: str) -> str:
    """Printed text with ordinary spaces before the unit, as a case's author types it."""
    return text.replace("\u202f", " ")


def _said(value: Any) -> str:
    if isinstance(value, list):
        return "[" + ", ".join(_said(one) for one in value) + "]"
    if isinstance(value, bool):
        return "true" if value else "false"
    return f'"{value}"'


def _because(result: Json) -> str:
    if not result["reasons"]:
        return "the engine gives no reason against serviceable"
    return "the engine says: " + "; ".join(result["reasons"][:3])


def _bitten(procedure: Procedure, said: dict[str, set[str]], cases: Cases, findings: Findings) -> None:
    """Every limit is passed by one case and not met by another: a limit that no case bites may say anything."""
    for limit in procedure.limit:
        statements = said.get(limit.id, set())
        if not statements & set(PASSED):
            findings.add(cases.source, (), f'no case passes limit "{limit.id}"', "add a case that meets it")
        if not statements & {"fail", "conditional fail"}:
            findings.add(cases.source, (), f'no case fails limit "{limit.id}"', "add a case that does not meet it")
