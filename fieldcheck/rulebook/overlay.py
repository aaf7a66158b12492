"""A workshop's own limits: files that replace the dated entries of ours without touching our files.

They are compiled in, so the digest changes, and every part says which of its limits are the workshop's own.
"""

from dataclasses import dataclass
from pathlib import Path as FilePath

from fieldcheck.rulebook import shapes
from fieldcheck.rulebook.checks_limits import check_entry, limit_scope
from fieldcheck.rulebook.compiling import Bounds, Json
from fieldcheck.rulebook.findings import Findings, Source, did_you_mean
from fieldcheck.rulebook.lines import Path
from fieldcheck.rulebook.reading import shaped
from fieldcheck.rulebook.shapes import Limit, LimitEntry, OverlayLimit, Procedure
from fieldcheck.rulebook.shelf import Shelf


@dataclass
class OwnLimit:
    """One limit of the workshop: where it stands and what it says."""

    source: Source
    place: int
    limit: OverlayLimit


def read_overlay(folder: FilePath, findings: Findings) -> list[OwnLimit]:
    """The workshop's own limits of a folder."""
    found: list[OwnLimit] = []
    taken: set[tuple[str, str]] = set()
    for file in sorted(folder.glob("*.toml")):
        source, shape = shaped(shapes.OverlayFile, file, findings)
        if source is None or shape is None:
            continue
        for place, limit in enumerate(shape.limit):
            if (limit.procedure, limit.id) in taken:
                findings.add(source, ("limit", place), f"{limit.procedure} is given this limit twice", "keep one")
            taken.add((limit.procedure, limit.id))
            found.append(OwnLimit(source, place, limit))
    return found


def apply(own: list[OwnLimit], procedures: list[Procedure], bounds: dict[str, Bounds], shelf: Shelf,
          findings: Findings) -> tuple[list[Procedure], list[Json]]:
    """(procedures with the workshop's entries, what was replaced as plain data); bounds gains their trees."""
    changed = {one.id: one for one in procedures}
    said: list[Json] = []
    for one in own:
        path: Path = ("limit", one.place)
        procedure = changed.get(one.limit.procedure)
        if procedure is None:
            findings.add(one.source, (*path, "procedure"), f'there is no procedure "{one.limit.procedure}"',
                         did_you_mean(one.limit.procedure, changed))
            continue
        known = {limit.id: limit for limit in procedure.limit}
        if one.limit.id not in known:
            findings.add(one.source, (*path, "id"), f'{procedure.id} has no limit "{one.limit.id}"',
                         did_you_mean(one.limit.id, known))
            continue
        _entries(one, known[one.limit.id], procedure, bounds[procedure.id], shelf, findings)
        changed[procedure.id] = _with(procedure, one.limit.id, one.limit.entry)
        said.append({"procedure": procedure.id, "limit": one.limit.id})
    return list(changed.values()), said


def _entries(one: OwnLimit, limit: Limit, procedure: Procedure, bounds: Bounds, shelf: Shelf,
             findings: Findings) -> None:
    quiet = Findings()
    scope, kind = limit_scope(one.source, (), limit, procedure, quiet)
    for number, entry in enumerate(one.limit.entry):
        path: Path = ("limit", one.place, "entry", number)
        if entry.tag != "WORKSHOP":
            findings.add(one.source, (*path, "tag"), f"a workshop's own limit with tag {entry.tag}",
                         "write tag = \"WORKSHOP\": the record says so")
        if not entry.note:
            findings.add(one.source, path, "does not say why", "add note = \"...\"")
        bounds[(limit.id, number)] = check_entry(one.source, path, entry, scope, kind, shelf, findings)


def _with(procedure: Procedure, name: str, entries: list[LimitEntry]) -> Procedure:
    limits = [one.model_copy(update={"entry": entries}) if one.id == name else one for one in procedure.limit]
    return procedure.model_copy(update={"limit": limits})
