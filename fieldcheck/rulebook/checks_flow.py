"""Checks of the path: order of phases, what can be reached, what is opened and restored, corrective loops."""

from fieldcheck.engine.procedures import MOST_ROUNDS
from fieldcheck.rulebook.findings import Findings, Source, did_you_mean
from fieldcheck.rulebook.formula import Tree
from fieldcheck.rulebook.lines import Path
from fieldcheck.rulebook.scope import steps_behind
from fieldcheck.rulebook.shapes import Limit, Procedure, Step, When

PHASES = ("prepare", "as found", "service", "as left", "close")
LAST = ("as left", "close")


def check_flow(source: Source, procedure: Procedure, trees: dict[str, Tree], findings: Findings) -> None:
    """The whole path of a procedure."""
    _order(source, procedure, findings)
    for place, step in enumerate(procedure.step):
        if step.when is not None:
            check_when(source, ("step", place), step.when, procedure, place, findings)
    for place, limit in enumerate(procedure.limit):
        if limit.when is not None:
            check_when(source, ("limit", place), limit.when, procedure, len(procedure.step), findings)
        _corrective(source, place, limit, procedure, trees, findings)
    _entries(source, procedure, findings)
    _reached(source, procedure, findings)


def _order(source: Source, procedure: Procedure, findings: Findings) -> None:
    latest = 0
    for place, step in enumerate(procedure.step):
        at = PHASES.index(step.phase)
        if at < latest:
            findings.add(source, ("step", place, "phase"), f'phase "{step.phase}" after "{PHASES[latest]}"',
                         "write the steps in the order worked: " + ", ".join(PHASES))
        latest = max(latest, at)


def check_when(source: Source, path: Path, when: When, procedure: Procedure, before: int, findings: Findings) -> None:
    """`when` names a choice that is answered before, and choices of it that leave something in and something out."""
    plates = {one.id: [c.id for c in one.choices] for one in procedure.nameplate}
    steps = {one.id: [c.id for c in one.choices] for one in procedure.step[:before]}
    later = [one.id for one in procedure.step[before:]]
    path = (*path, "when")
    known = plates.get(when.field, steps.get(when.field))
    if known is None and when.field in later:
        findings.add(source, path, f'depends on "{when.field}", which is answered later',
                     "ask first: move that step up")
    elif known is None:
        findings.add(source, path, f'depends on "{when.field}", which is no nameplate field or step',
                     did_you_mean(when.field, [*plates, *steps]))
    elif not known:
        findings.add(source, path, f'depends on "{when.field}", which has no choices',
                     "when goes by a choice; a limit's bounds may go by a number")
    else:
        for one in when.is_:
            if one not in known:
                findings.add(source, path, f'"{one}" is none of the choices of {when.field}', did_you_mean(one, known))
        if not [one for one in when.is_ if one in known]:
            findings.add(source, path, "can never be reached", "name at least one choice in is")
        elif set(known) <= set(when.is_):
            findings.add(source, path, "holds for every choice", "leave when out")


def _entries(source: Source, procedure: Procedure, findings: Findings) -> None:
    opened: dict[str, int] = {}
    restoring: dict[str, list[int]] = {}
    for place, step in enumerate(procedure.step):
        if step.opens is not None:
            if step.opens.id in opened:
                findings.add(source, ("step", place, "opens"), f'opens "{step.opens.id}" a second time',
                             "give each open entry its own id")
            opened.setdefault(step.opens.id, place)
        if step.restores:
            restoring.setdefault(step.restores, []).append(place)
    for name, place in opened.items():
        _restored(source, name, place, restoring.get(name, []), procedure, findings)
    for name, places in restoring.items():
        if name not in opened:
            findings.add(source, ("step", places[0], "restores"), f'restores "{name}", which no step opens',
                         did_you_mean(name, opened, "leave restores out"))


def _restored(source: Source, name: str, place: int, restoring: list[int], procedure: Procedure,
              findings: Findings) -> None:
    opening = procedure.step[place]
    path = ("step", place, "opens")
    if not restoring:
        findings.add(source, path, f'opens "{name}" and no step restores it', f'add a step with restores = "{name}"')
        return
    after = [procedure.step[one] for one in restoring if one > place]
    if not after:
        findings.add(source, ("step", restoring[0], "restores"), f'restores "{name}" before it is opened',
                     "move it behind the step that opens it")
        return
    if not any(one.depth in ("both", opening.depth) for one in after):
        findings.add(source, path, f'opens "{name}" in depth {opening.depth}, restored only in {after[0].depth}',
                     "restore it in every depth in which it is opened")
    elif all(one.when is not None and one.when != opening.when for one in after):
        findings.add(source, path, f'opens "{name}", restored only for some choices', "give both steps the same when")
    elif all(one.optional for one in after):
        findings.add(source, path, f'opens "{name}", and the step that restores it is optional',
                     "leave optional out of it")
    elif all(one.phase == "service" and (one.corrective or opening.phase != "service") for one in after):
        findings.add(source, path, f'opens "{name}", restored only by an action that may not be called for',
                     "restore it in phase as left or close")


def _reached(source: Source, procedure: Procedure, findings: Findings) -> None:
    called = {name for limit in procedure.limit for name in limit.corrective}
    for place, step in enumerate(procedure.step):
        if step.corrective and step.id not in called:
            findings.add(source, ("step", place), "can never be reached: no limit calls for it",
                         "name it in the corrective list of a limit, or make it service that is always done")


def _corrective(source: Source, place: int, limit: Limit, procedure: Procedure, trees: dict[str, Tree],
                findings: Findings) -> None:
    path = ("limit", place, "corrective")
    steps = {one.id: one for one in procedure.step}
    behind = steps_behind([limit.value], procedure, trees)
    tries = 0
    for name in limit.corrective:
        if name not in steps:
            findings.add(source, path, f'calls for "{name}", which is no step',
                         did_you_mean(name, [one.id for one in procedure.step if one.corrective]))
            continue
        action = steps[name]
        if not action.corrective:
            findings.add(source, path, f'calls for "{name}", which is no corrective action',
                         "give that step kind = \"action\" and corrective = true")
            continue
        tries += max(1, action.tries)
        repeated = action.repeats if isinstance(action.repeats, list) else []
        if behind and not [one for one in behind if one in repeated]:
            findings.add(source, path, f'"{name}" repeats no reading on which this limit depends',
                         "add one of these to its repeats: " + ", ".join(behind))
        if action.depth not in ("both", limit.depth):
            findings.add(source, path, f'"{name}" is only in depth {action.depth}, the limit in {limit.depth}',
                         "give both the same depth")
    if len(set(limit.corrective)) < len(limit.corrective):
        findings.add(source, path, "calls for one action twice", "raise its tries instead")
    if tries > MOST_ROUNDS:
        findings.add(source, path, f"calls for {tries} rounds of service, {MOST_ROUNDS} are the most",
                     "lower the tries: what has not helped by then is for repair")
    if limit.corrective and behind and all(steps[one].phase in LAST for one in behind):
        findings.add(source, path, "calls for service, and its readings come only at the end",
                     "take them as found too, or leave corrective out")


def depth_problem(limit_depth: str, steps: list[Step]) -> Step | None:
    """The first step that is not taken in every depth in which a limit holds."""
    for step in steps:
        if step.depth != "both" and step.depth != limit_depth:
            return step
    return None
