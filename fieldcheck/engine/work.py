"""One item under work: its compiled procedure with all that has been answered, in one form for phone, desk and cases.

A `Work` is filled either from the fold of events (`of_item`) or from a filled-in run (engine/assess.py); from there on
everything is the same.
"""

from fieldcheck.engine import events, meters
from fieldcheck.engine.errors import FieldcheckError, NotFound
from fieldcheck.engine.formulas import names_in

TO_DO = "to do"
TAKEN = "taken"
LEFT = "left"


class Answer:
    """What was answered to one question.  kind, value: as in the event; order: place in causal order;
    event: the Event or None; left: the reason when the step was left, else ""; read: what readings.Lookup made of it,
    kept because a reading never changes. """

    def __init__(self, kind, value, order, event=None, left=""):
        self.kind = kind
        self.value = value
        self.order = order
        self.event = event
        self.left = left
        self.read = {}

    def follows(self, other):
        """True when it was certainly given after the other: by knowledge, never by the clock."""
        if self.event is not None and other.event is not None:
            return events.precedes(other.event, self.event)
        return self.order > other.order


class Work:
    """part: the compiled procedure; depth: routine or full; on: ISO date of the work (which limits hold, which
    meters are due); answers: slot key -> Answer; nameplate: field -> value; meters: id -> engine Meter;
    conditions: name -> {"text", "unit", "meter"?}; defects: [{"what", "level"}]; conflicts: slot keys in dispute."""

    def __init__(self, part, depth, on):
        self.part = part
        self.depth = depth
        self.on = on
        self.answers = {}
        self.nameplate = {}
        self.meters = {}
        self.conditions = {}
        self.defects = []
        self.conflicts = []
        self.steps = {}
        for step in part["steps"]:
            self.steps[step["id"]] = step
        self.values = {}
        for value in part["values"]:
            self.values[value["id"]] = value
        self.cache = {}
        self._needs = None

    def step(self, step_id):
        """The step of that id; NotFound when the procedure has none."""
        if step_id not in self.steps:
            raise NotFound('procedure "' + self.part["id"] + '" has no step "' + step_id + '"')
        return self.steps[step_id]

    def put(self, key, answer):
        """Takes an answer in and forgets the verdicts that depend on its step."""
        if answer is None:
            self.answers.pop(key, None)
        else:
            self.answers[key] = answer
        step = key.split("|")[0]
        if step == "nameplate":
            self.cache = {}
            return
        for limit in self.limits_on(step):
            for known in [k for k in self.cache if k[0] == limit]:
                del self.cache[known]
        if step in self.steps and self.steps[step].get("repeats_steps"):
            self.cache = {}

    def limits_on(self, step_id):
        """Ids of the limits whose value depends on a step."""
        if self._needs is None:
            self._needs = dependencies(self.part)
        return self._needs.get(step_id, [])

    def at(self, step_id, number, index):
        """The Answer of a slot, or None."""
        return self.answers.get(events.slot_key(step_id, number, index))

    def newest(self, step_id, number, index):
        """(round, Answer) of the last taken answer of a question up to a round, or None."""
        for n in range(number, -1, -1):
            answer = self.answers.get(events.slot_key(step_id, n, index))
            if answer is not None and not answer.left:
                return n, answer
        return None


def limit_names(part, limit):
    """Every name that a limit's value and bounds mention, through derived values down to steps and nameplate."""
    trees = [["name", limit["value"]]]
    for entry in limit["entries"]:
        for key in ("at_least", "at_most"):
            if entry.get(key) is not None:
                trees.append(entry[key])
    values = {}
    for value in part["values"]:
        values[value["id"]] = value
    found = []
    while trees:
        for name in names_in(trees.pop()):
            if name in found:
                continue
            found.append(name)
            if name in values:
                trees.append(values[name]["formula"])
    return found


def dependencies(part):
    """step id -> ids of the limits that depend on it."""
    needs = {}
    for limit in part["limits"]:
        for name in limit_names(part, limit):
            step = name.split(".")[0]
            needs.setdefault(step, []).append(limit["id"])
    return needs


def of_item(state, job, item, part, on):
    """The Work of one item of a folded job.

    state: events.State; job: events.Job; item: events.Item; part: its compiled procedure; on: ISO date.
    """
    work = Work(part, item.depth, on)
    equipment = state.workshop.get("equipment", item.equipment)
    if equipment is not None:
        for field in equipment.get("nameplate") or {}:
            work.nameplate[field] = equipment["nameplate"][field]
    for key in item.slots:
        slot = item.slots[key]
        if slot.event is None:
            work.conflicts.append(key)
        else:
            work.answers[key] = answer_of(slot.event)
            if key.startswith("nameplate|"):
                work.nameplate[slot.event.data["index"]] = slot.event.data.get("value") or {"unknown": True}
    if item.outcomes.rivals:
        work.conflicts.append("outcome")
    for defect in item.defects:
        work.defects.append(defect.data)
    if job.conditions.event is not None:
        work.conditions = job.conditions.event.data
    add_meters(work, state)
    _entries_in_dispute(work, state, job, item)
    return work


def _entries_in_dispute(work, state, job, item):
    """Entries of the job and the workshop on which a verdict may rest, and of which two stand unsettled."""
    if job.conditions.rivals:
        work.conflicts.append("conditions")
    tables = state.workshop.entries
    if item.equipment in tables["equipment"] and tables["equipment"][item.equipment].rivals:
        work.conflicts.append("nameplate of the equipment")
    for answer in work.answers.values():
        slot = tables["meter"].get(answer.value.get("meter") or "")
        if slot is not None and slot.rivals:
            name = "meter " + slot.rivals[-1].data["tag"]
            if name not in work.conflicts:
                work.conflicts.append(name)


def add_meters(work, state):
    """Gives the work every meter that the workshop has entered; one whose entry makes no sense counts as no meter."""
    for data in state.workshop.all("meter"):
        described = dict(data)
        described["id"] = data["meter"]
        try:
            work.meters[data["meter"]] = meters.meter(described)
        except FieldcheckError:
            continue


def answer_of(event):
    """The Answer that an event of an item gives."""
    if event.type == "step.left":
        return Answer("left", {}, event.order, event, event.data["reason"] or "no reason given")
    return Answer(event.data["kind"], event.data["value"], event.order, event)
