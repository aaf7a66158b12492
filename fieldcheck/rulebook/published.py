"""Published limits are never edited: rules/published.toml remembers what each dated entry said.

A change to a published entry is an error; a new entry from a later day is the way.  `publish` adds what is new.
"""

import hashlib
from pathlib import Path as FilePath

from fieldcheck.rulebook import shapes
from fieldcheck.rulebook.findings import Findings, Source
from fieldcheck.rulebook.reading import shaped
from fieldcheck.rulebook.shapes import Limit, LimitEntry, Procedure

FILE = "published.toml"
HEAD = """# What each dated limit entry said when it was published. Written by: python -m fieldcheck.rulebook publish
# Never edit: a changed limit is a new [[limit.entry]] from a later day.
"""


def says(limit: Limit, entry: LimitEntry) -> str:
    """What decides a verdict in one line: bounds, rule and citation."""
    parts = []
    if entry.at_least:
        parts.append("at least " + entry.at_least)
    if entry.at_most:
        parts.append("at most " + entry.at_most)
    parts.append({"simple": "simple", "guarded": "guard " + limit.guard + " U",
                  "probability": "probability " + limit.probability}[limit.rule])
    parts += [limit.coverage, "safety" if limit.safety else "no safety limit",
              ", ".join(one for one in (entry.cite.source, entry.cite.clause, entry.cite.edition) if one), entry.tag]
    return "; ".join(parts)


def digest(procedure: str, limit: Limit, entry: LimitEntry) -> str:
    """SHA-256 over all that decides: the value judged and what the entry says."""
    text = "\n".join([procedure, limit.id, limit.value, entry.since.isoformat(), says(limit, entry)])
    return hashlib.sha256(text.encode()).hexdigest()[:16]


def check_published(folder: FilePath, procedures: list[tuple[Source, Procedure]], findings: Findings) -> None:
    """Every published entry still stands as it was published."""
    if not (folder / FILE).exists():
        return
    source, known = shaped(shapes.PublishedFile, folder / FILE, findings)
    if source is None or known is None:
        return
    by_id = {procedure.id: (where, procedure) for where, procedure in procedures}
    for place, one in enumerate(known.entry):
        name = f'limit "{one.limit}" of {one.procedure}'
        if one.procedure not in by_id:
            if not (folder / "procedures" / f"{one.procedure.replace('-', '_')}.toml").exists():
                findings.add(source, ("entry", place), f"published, and {one.procedure} is gone",
                             "a published procedure stays readable: put it back", where=name)
            continue
        where, procedure = by_id[one.procedure]
        found = _find(procedure, one)
        if found is None:
            findings.add(source, ("entry", place), f"the entry since {one.since} was published and is gone",
                         "put it back: a changed limit is a new entry from a later day", where=name)
            continue
        limit_place, number = found
        limit = procedure.limit[limit_place]
        entry = limit.entry[number]
        if digest(procedure.id, limit, entry) != one.digest:
            findings.add(where, ("limit", limit_place, "entry", number),
                         f"overwrites what was published ({one.says})",
                         "put it back, and add a new [[limit.entry]] from a later day")


def _find(procedure: Procedure, one: shapes.Published) -> tuple[int, int] | None:
    for place, limit in enumerate(procedure.limit):
        if limit.id != one.limit:
            continue
        for number, entry in enumerate(limit.entry):
            if entry.since == one.since:
                return place, number
    return None


def publish(folder: FilePath, procedures: list[Procedure]) -> int:
    """Adds every dated entry that published.toml does not know yet; how many."""
    file = folder / FILE
    text = file.read_text(encoding="utf-8") if file.exists() else HEAD
    known = set()
    if file.exists():
        _, found = shaped(shapes.PublishedFile, file, Findings())
        known = {(one.procedure, one.limit, one.since) for one in found.entry} if found is not None else set()
    added = 0
    for procedure in procedures:
        for limit in procedure.limit:
            for entry in limit.entry:
                if (procedure.id, limit.id, entry.since) in known:
                    continue
                added += 1
                text += (f'\n[[entry]]\nprocedure = "{procedure.id}"\nlimit = "{limit.id}"\nsince = {entry.since}\n'
                         f"says = '''{says(limit, entry)}'''\ndigest = \"{digest(procedure.id, limit, entry)}\"\n")
    file.write_text(text, encoding="utf-8")
    return added
