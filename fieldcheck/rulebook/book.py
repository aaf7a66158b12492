"""The whole rulebook: read, check, compile; all findings together."""

import hashlib
from dataclasses import dataclass, field
from pathlib import Path as FilePath

from fieldcheck.engine.errors import NotFound, RuleError
from fieldcheck.rulebook import cases as case_files
from fieldcheck.rulebook import compiling, overlay, shapes
from fieldcheck.rulebook.checks_flow import check_flow
from fieldcheck.rulebook.checks_head import check_head, check_ids, check_nameplate, check_words
from fieldcheck.rulebook.checks_limits import check_limits, check_values
from fieldcheck.rulebook.checks_steps import check_steps
from fieldcheck.rulebook.compiling import Bounds, Json
from fieldcheck.rulebook.findings import Finding, Findings, Source, did_you_mean
from fieldcheck.rulebook.formula import Tree
from fieldcheck.rulebook.published import check_published
from fieldcheck.rulebook.reading import shaped
from fieldcheck.rulebook.shapes import Procedure
from fieldcheck.rulebook.shelf import Shelf, load_shelf


@dataclass(frozen=True)
class Rulebook:
    """index: its exact text; digest: its SHA-256; parts: SHA-256 -> exact text of a part; by_id: procedure id ->
    SHA-256 of its part."""

    index: str
    digest: str
    parts: dict[str, str]
    by_id: dict[str, str]


@dataclass
class Draft:
    """A rulebook on its way: what was read, and the trees of what compiles."""

    folder: FilePath
    shelf: Shelf
    procedures: list[tuple[Source, Procedure]] = field(default_factory=list)
    trees: dict[str, dict[str, Tree]] = field(default_factory=dict)
    bounds: dict[str, Bounds] = field(default_factory=dict)
    overlaid: list[Json] = field(default_factory=list)


def drafted(folder: FilePath, own: FilePath | None, findings: Findings) -> Draft:
    """Reads and checks everything but the cases."""
    draft = Draft(folder, load_shelf(folder, findings))
    files = [one for one in sorted((folder / "procedures").glob("*.toml")) if not one.name.endswith(".cases.toml")]
    if not files:
        findings.all.append(Finding(str(folder), 1, "", "holds no procedures", "a rules folder has procedures/*.toml"))
    for file in files:
        source, procedure = shaped(shapes.Procedure, file, findings)
        if source is not None:
            check_words(source, findings)
        if source is not None and procedure is not None:
            draft.procedures.append((source, procedure))
            _checked(draft, source, procedure, findings)
    for source in draft.shelf.read:
        check_words(source, findings)
    _shared_fields(draft, findings)
    check_published(folder, draft.procedures, findings)
    if own is not None:
        changed, draft.overlaid = overlay.apply(overlay.read_overlay(own, findings),
                                                [one for _, one in draft.procedures], draft.bounds, draft.shelf,
                                                findings)
        draft.procedures = [(source, new) for (source, _), new in zip(draft.procedures, changed, strict=True)]
    return draft


def _checked(draft: Draft, source: Source, procedure: Procedure, findings: Findings) -> None:
    check_head(source, procedure, draft.shelf, findings)
    check_ids(source, procedure, findings)
    check_nameplate(source, procedure, findings)
    check_steps(source, procedure, draft.shelf, findings)
    trees = check_values(source, procedure, findings)
    draft.trees[procedure.id] = trees
    draft.bounds[procedure.id] = check_limits(source, procedure, trees, draft.shelf, findings)
    check_flow(source, procedure, trees, findings)


def _shared_fields(draft: Draft, findings: Findings) -> None:
    """Procedures of one kind ask a nameplate question in the same way: its answer is the equipment's, not theirs."""
    first: dict[tuple[str, str], tuple[str, shapes.Plate]] = {}
    for source, procedure in draft.procedures:
        for place, plate in enumerate(procedure.nameplate):
            known = first.setdefault((procedure.kind, plate.id), (procedure.id, plate))
            if known[1].model_copy(update={"unknown": plate.unknown, "text": plate.text}) != plate:
                findings.add(source, ("nameplate", place), f"is asked otherwise in {known[0]}",
                             "procedures of one kind share their nameplate: give both the same definition")


def compiled_part(draft: Draft, procedure: Procedure) -> Json:
    """The part of one procedure of a draft without findings."""
    part = compiling.part(procedure, draft.trees[procedure.id], draft.bounds[procedure.id], draft.shelf)
    own = [one["limit"] for one in draft.overlaid if one["procedure"] == procedure.id]
    for limit in part["limits"]:
        limit["workshop"] = limit["id"] in own
    return part


def load(folder: FilePath, own: FilePath | None = None) -> Rulebook:
    """The compiled rulebook of a folder, with a workshop's own limits from `own`.

    Cases are not run (check does that).  RuleError with all findings when something is wrong.
    """
    findings = Findings()
    draft = drafted(folder, own, findings)
    _refuse(findings)
    parts: dict[str, str] = {}
    by_id: dict[str, str] = {}
    for _, procedure in draft.procedures:
        text = compiling.text_of(compiled_part(draft, procedure))
        by_id[procedure.id] = hashlib.sha256(text.encode()).hexdigest()
        parts[by_id[procedure.id]] = text
    index = compiling.text_of(compiling.index([(one, by_id[one.id]) for _, one in draft.procedures], draft.shelf,
                                              draft.overlaid))
    return Rulebook(index, hashlib.sha256(index.encode()).hexdigest(), parts, by_id)


def _refuse(findings: Findings) -> None:
    if findings.all:
        raise RuleError(f"the rulebook has {len(findings.all)} errors", "",
                        "\n    ".join(str(one) for one in sorted(findings.all)))


def check(folder: FilePath, own: FilePath | None = None) -> tuple[list[Finding], str]:
    """(all findings in order of file and line, a line that says what was checked).

    The cases of a procedure run when the procedure itself is in order, with our own limits: they test our files.
    """
    findings = Findings()
    draft = drafted(folder, None, findings)
    ran = 0
    for source, procedure in draft.procedures:
        cases = case_files.read_cases(source.file, draft.shelf, findings)
        if cases is not None and not findings.of(source.file) and _shelf_in_order(draft, findings):
            ran += case_files.check_cases(procedure, compiled_part(draft, procedure), cases, findings)
    if own is not None:
        with_own = Findings()
        drafted(folder, own, with_own)
        findings.all += [one for one in with_own.all if one not in findings.all]
    limits = sum(len(one.limit) for _, one in draft.procedures)
    said = f"{len(draft.procedures)} procedures, {limits} limits and {ran} cases are in order"
    return sorted(findings.all), said


def _shelf_in_order(draft: Draft, findings: Findings) -> bool:
    return not any(findings.of(source.file) for source in draft.shelf.read)


def find(draft: Draft, name: str) -> Procedure:
    """The procedure of that id (or file name); NotFound names the nearest."""
    wanted = name.removesuffix(".toml").replace("_", "-")
    for _, procedure in draft.procedures:
        if procedure.id == wanted:
            return procedure
    known = [one.id for _, one in draft.procedures]
    raise NotFound(f'there is no procedure "{name}"', "", did_you_mean(wanted, known))


def part(name: str, folder: FilePath) -> Json:
    """The compiled part of one procedure as data.  NotFound, or RuleError where the rules are not in order."""
    findings = Findings()
    draft = drafted(folder, None, findings)
    _refuse(findings)
    return compiled_part(draft, find(draft, name))


def runs(name: str, folder: FilePath) -> list[tuple[str, Json, Json]]:
    """(case name, run for engine/assess.py, what it must say) of every case of a procedure, as plain data."""
    findings = Findings()
    draft = drafted(folder, None, findings)
    _refuse(findings)
    procedure = find(draft, name)
    source = next(where for where, one in draft.procedures if one is procedure)
    cases = case_files.read_cases(source.file, draft.shelf, findings)
    _refuse(findings)
    assert cases is not None
    return [(case.name, case_files.run_of(procedure, case, cases.meters), case.expect.model_dump())
            for case in cases.cases]
