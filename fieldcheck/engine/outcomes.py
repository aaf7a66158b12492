"""The best outcome that the engine allows for an item.  A person may choose worse, never better.

Nothing falls through: what was not taken, not judged, not restored or is in dispute bounds the outcome like a failure.
"""

from fieldcheck.engine import judging, procedures, verdicts
from fieldcheck.engine.work import LEFT, TO_DO

SERVICEABLE = "serviceable"
RESTRICTED = "serviceable with restrictions"
UNSERVICEABLE = "unserviceable"
NOT_EXAMINED = "not examined"
OUTCOMES = (SERVICEABLE, RESTRICTED, UNSERVICEABLE, NOT_EXAMINED)
REASONS_NOT_EXAMINED = ("no access", "no time", "permission refused", "awaiting parts", "taken to the workshop",
                        "repair declined")

DEFECT_LEVELS = ("stop use", "repair before next use", "watch")


def rows(work, flow):
    """Every limit of the item as found and as left: list of (key, found Judged or None, left Judged or None).

    found is None for what only the closing steps show; left is None where no reading was taken again after service:
    as found stands.
    """
    result = []
    last = flow.last_round
    for limit in work.part["limits"]:
        if not judging.holds(work, limit):
            continue
        has_found = judging.is_found_limit(work, limit)
        for key, row in judging.keys_of(work, limit):
            found = judging.judge(work, limit, key, row, 0) if has_found else None
            left = judging.judge(work, limit, key, row, last) if last > 0 or not has_found else None
            if has_found and left is not None and not (left.stale or taken_again(left)):
                left = None
            result.append((key, found, left))
    return result


def taken_again(judged):
    """True when a reading behind a verdict is of a round of service."""
    for _, _, number, _ in judged.lookup.used:
        if number > 0:
            return True
    return False


def bounded(work, flow, judged_rows=None):
    """(best outcome allowed, list of reasons, list of outcomes that may be chosen now)."""
    reasons = []
    worst = 0

    def bound(level, reason):
        nonlocal worst
        worst = max(worst, level)
        reasons.append(reason)

    for key, found, left in judged_rows if judged_rows is not None else rows(work, flow):
        judged = left or found
        statement = judged.verdict.statement
        if statement in (verdicts.PASS, verdicts.CONDITIONAL_PASS):
            continue
        limit = judged.limit
        label = limit["label"] + (" " + judged.row if judged.row not in ("", "?") else "")
        said = label + ": " + statement + (" (" + judged.verdict.reason + ")" if judged.verdict.reason else "")
        if limit.get("safety"):
            bound(2, said)
        elif limit.get("bounds") == "nothing":
            continue
        else:
            bound(2 if limit.get("bounds") == UNSERVICEABLE and statement == verdicts.FAIL else 1, said)
    _from_steps(work, flow, bound)
    best = (SERVICEABLE, RESTRICTED, UNSERVICEABLE)[worst]
    if flow.open_entries:
        return best, reasons, []
    allowed = list(OUTCOMES[worst:3]) if flow.complete else [UNSERVICEABLE]
    return best, reasons, allowed + [NOT_EXAMINED]


def _from_steps(work, flow, bound):
    for one in flow.open_entries:
        bound(2, "still open: " + one["text"])
    for key in work.conflicts:
        bound(2, "two answers to one question, undecided: " + key.split("|")[0])
    for defect in work.defects:
        if defect["level"] != "watch":
            bound(2, "defect, " + defect["level"] + ": " + defect["what"])
    for one in flow.instances:
        if one.state == LEFT:
            safety = one.hold or one.step.get("safety")
            if safety or one.step["phase"] in ("as left", "close"):
                bound(2 if safety else 1, "not done: " + one.step["title"] + " (" + one.reason + ")")
    if not flow.complete:
        to_do = [one for one in flow.instances if one.state == TO_DO]
        bound(2, "not finished: " + (to_do[0].step["title"] if to_do else "the last steps"))


def may_choose(work, flow, outcome):
    """"" when an outcome may be given now, else the reason why not."""
    best, reasons, allowed = bounded(work, flow)
    if outcome in allowed:
        return ""
    if flow.open_entries:
        return "restore first: " + ", ".join([one["text"] for one in flow.open_entries])
    if outcome not in OUTCOMES:
        return '"' + outcome + '" is not an outcome'
    return "the readings allow at best " + best + (": " + reasons[0] if reasons else "")


def called_for(flow):
    """Ids of all corrective actions that were called for, in order."""
    found = []
    for number in sorted(flow.called):
        for action in flow.called[number]:
            if action not in found:
                found.append(action)
    return found


def closing(work):
    """A Flow and its bounded outcome in one go: (flow, rows, best, reasons, allowed)."""
    flow = procedures.Flow(work)
    judged_rows = rows(work, flow)
    best, reasons, allowed = bounded(work, flow, judged_rows)
    return flow, judged_rows, best, reasons, allowed
