"""Which step comes next: the compiled procedure unrolled against what has been answered.

The path of an item: prepare; as found (the untouched set, round 0); then rounds of service.  Round 1 holds the service
that is always done and the first corrective action of every limit that as found did not meet, then the readings that
these actions repeat; a further round follows while a limit is not met and an action is left to try.  Then come the
steps that only make sense at the end (as left), and closing.

A hold point is put in by itself wherever the supply state changes.  Nothing after an open hold point, an unrestored
entry, or an unfinished earlier phase is ready.
"""

from fieldcheck.engine import events, judging, readings, verdicts
from fieldcheck.engine.formulas import MissingInput
from fieldcheck.engine.work import LEFT, TAKEN, TO_DO

SUPPLY = "supply"
ISOLATED = "isolated"
SUPPLY_STATES = ("isolated", "low voltage live", "mains live")
UNMET = (verdicts.FAIL, verdicts.CONDITIONAL_FAIL)
MOST_ROUNDS = 12


class Instance:
    """One step at one round.  key: "step|round"; step: compiled data; round; indexes: list of the cells to answer
    ([""] where there is one); state: to do, taken or left; missing: indexes still open; ready: may be answered now;
    group: place of its phase in the path; supply: the supply state."""

    def __init__(self, step, number, indexes, group, index=""):
        self.step = step
        self.round = number
        self.indexes = indexes
        self.group = group
        self.index = index
        self.key = step["id"] + "|" + str(number) + ("|" + index if index else "")
        self.state = TO_DO
        self.missing = []
        self.reason = ""
        self.ready = False

    @property
    def supply(self):
        return self.step["supply"]

    @property
    def hold(self):
        return bool(self.step.get("hold"))


class Flow:
    """The path of one item as it stands.  instances: list of Instance in order; current: the first that is ready and
    to do, or None; last_round: number of the last round with service; called: round -> ids of the actions called for;
    open_entries: [{"id", "text", "step"}]; complete: every instance is settled."""

    def __init__(self, work):
        self.work = work
        self.instances = []
        self.called = {}
        self.last_round = 0
        self.open_entries = []
        self.complete = False
        self.current = None
        self._group = 0
        _unroll(self)
        _settle(self)

    def add(self, step, number):
        """Appends a step at a round, with a hold point before it where the supply state changes."""
        before = self.instances[-1].supply if self.instances else None
        if step["supply"] != before:
            hold = supply_hold(self.work.part, step["supply"], before)
            self.instances.append(Instance(hold, number, [step["id"]], self._group, step["id"]))
        self.instances.append(Instance(step, number, cells(self.work, step), self._group))

    def next_group(self):
        """The following instances wait until all before them are settled."""
        self._group += 1

    def settled(self, group):
        """True when every instance of a group and of those before it is taken or left."""
        for one in self.instances:
            if one.group <= group:
                state, _, _ = status(self.work, one)
                if state == TO_DO:
                    return False
        return True

    def find(self, key):
        """The instance of that key, or None."""
        for one in self.instances:
            if one.key == key:
                return one
        return None


def supply_hold(part, supply, before):
    """The step that a change of supply state puts in: a hold point with the procedure's own words."""
    return {"id": SUPPLY, "kind": "confirm", "phase": "supply", "supply": supply, "hold": True,
            "title": "Supply: " + supply, "text": part["supply"][supply], "why": "", "from": before or ""}


def cells(work, step):
    """The indexes that a step asks for: one "" or every row/column of its table."""
    if step["kind"] != "table":
        return [""]
    try:
        rows = readings.rows_of(work, step)
    except MissingInput:
        return ["?"]
    result = []
    for row in rows:
        for column in step["columns"]:
            result.append(readings.index_of(row, column["id"]))
    return result


def status(work, instance):
    """(state, indexes still open, reason when left) of an instance."""
    step_id = instance.step["id"]
    whole = work.at(step_id, instance.round, instance.index)
    if whole is not None and whole.left:
        return LEFT, [], whole.left
    open_cells = []
    reasons = []
    for index in instance.indexes:
        answer = work.at(step_id, instance.round, index)
        if answer is None:
            open_cells.append(index)
        elif answer.left and answer.left not in reasons:
            reasons.append(answer.left)
    if open_cells:
        return TO_DO, open_cells, ""
    return (LEFT if reasons else TAKEN), [], "; ".join(reasons)


def included(work, step):
    """True when a step belongs to this depth and nameplate."""
    return step.get("depth", "both") in ("both", work.depth) and judging.applies(work, step.get("when"))


def _unroll(flow):
    work = flow.work
    steps = [step for step in work.part["steps"] if included(work, step)]
    _plates(flow)
    for phase in ("prepare", "as found"):
        for step in steps:
            if step["phase"] == phase:
                flow.add(step, 0)
        flow.next_group()
    if not flow.settled(flow._group):
        return
    _rounds(flow, steps)
    if not flow.settled(flow._group):
        return
    for phase in ("as left", "close"):
        flow.next_group()
        for step in steps:
            if step["phase"] == phase:
                flow.add(step, 0)


def _plates(flow):
    """Nameplate fields are asked first; what the equipment's entry already says is not asked again."""
    work = flow.work
    for field in work.part["nameplate"]:
        if field["id"] in work.nameplate and work.at("nameplate", 0, field["id"]) is None:
            continue
        step = {"id": "nameplate", "kind": "nameplate", "phase": "prepare", "supply": ISOLATED, "title": field["label"],
                "text": field.get("text") or "Read the nameplate or the owner's papers", "why": "", "field": field}
        flow.instances.append(Instance(step, 0, [field["id"]], flow._group, field["id"]))


def _rounds(flow, steps):
    """Rounds of service until every limit is met or nothing is left to try."""
    work = flow.work
    always = [s for s in steps if s["phase"] == "service" and not s.get("corrective")]
    number = 1
    while number <= MOST_ROUNDS:
        wanted = corrective_actions(work, steps, number)
        actions = [s for s in steps if s["phase"] == "service"
                   and (s["id"] in wanted or (number == 1 and s in always))]
        if not actions:
            return
        flow.called[number] = wanted
        flow.next_group()
        for step in actions:
            flow.add(step, number)
        if not flow.settled(flow._group):
            return
        repeats = _repeats(work, actions, number)
        if repeats:
            flow.last_round = number
            flow.next_group()
            for step in steps:
                if step["id"] in repeats and step["phase"] in ("prepare", "as found"):
                    flow.add(step, number)
            if not flow.settled(flow._group):
                return
        number += 1


def _repeats(work, actions, number):
    """Ids of the steps to repeat after the actions of a round that were done."""
    result = []
    for action in actions:
        answer = work.at(action["id"], number, "")
        if answer is not None and not answer.left:
            result += action.get("repeats_steps") or []
    return result


def unmet_limits(work, number):
    """The limits that as found (0) or a round of service left unmet: list of Judged."""
    result = []
    for limit in work.part["limits"]:
        if not judging.holds(work, limit) or not judging.is_found_limit(work, limit):
            continue
        for key, row in judging.keys_of(work, limit):
            judged = judging.judge(work, limit, key, row, number)
            if judged.verdict.statement in UNMET:
                result.append(judged)
    return result


def corrective_actions(work, steps, number):
    """Ids of the corrective actions that a round calls for: for each unmet limit the first not used up.

    An action is used up when it has been done `tries` times, or left with a reason.
    """
    wanted = []
    present = [step["id"] for step in steps]
    for judged in unmet_limits(work, number - 1):
        for action in judged.limit.get("corrective") or []:
            if action not in present or used_up(work, work.step(action), number):
                continue
            if action not in wanted:
                wanted.append(action)
            break
    return wanted


def used_up(work, action, number):
    """True when an action has had its tries, or was left, before a round."""
    done = 0
    for n in range(1, number):
        answer = work.at(action["id"], n, "")
        if answer is None:
            continue
        if answer.left:
            return True
        done += 1
    return done >= int(action.get("tries") or 1)


def _settle(flow):
    """Fills in state, readiness, open entries and the current instance."""
    work = flow.work
    barrier = False
    open_group = None
    flow.complete = True
    opened = {}
    for one in flow.instances:
        one.state, one.missing, one.reason = status(work, one)
        one.ready = not barrier and (open_group is None or one.group == open_group)
        if one.state == TO_DO:
            flow.complete = False
            if open_group is None:
                open_group = one.group
            if one.hold or one.step.get("restores"):
                barrier = True
            if one.ready and flow.current is None:
                flow.current = one
        elif one.state == LEFT and one.hold:
            barrier = True
        _entries(one, opened)
    flow.open_entries = [opened[key] for key in opened]
    if not flow.instances or flow.instances[-1].step["phase"] not in ("close", "as left"):
        flow.complete = flow.complete and not _has_end(work)


def _has_end(work):
    return bool([s for s in work.part["steps"] if s["phase"] in ("as left", "close") and included(work, s)])


def _entries(instance, opened):
    step = instance.step
    if instance.state != TAKEN:
        return
    if step.get("opens"):
        opened[step["opens"]["id"]] = {"id": step["opens"]["id"], "text": step["opens"]["text"], "step": step["id"]}
    if step.get("restores"):
        opened.pop(step["restores"], None)


def slot_for(instance, index=None):
    """(step, round, index) to answer: the first open cell of an instance unless one is named."""
    if index is None:
        index = instance.missing[0] if instance.missing else instance.indexes[0]
    return instance.step["id"], instance.round, index


def key_of(instance, index=None):
    """The slot key that an answer to an instance goes to."""
    step, number, index = slot_for(instance, index)
    return events.slot_key(step, number, index)
