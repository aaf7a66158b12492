"""The kinds of event and the fold that turns a set of them into the state of the workshop and its jobs.

The fold is a function of the set: it may be given in any order, in pieces, with repeats.  Two ideas make it so:

* `precedes(a, b)`: b's device knew a when it made b.  Later in this causal order wins; events of one slot, neither of
  which precedes the other, are a conflict until a decision names them.
* `weight`: own sequence number plus all that the device had seen.  If a precedes b then weight(a) < weight(b), so
  (weight, device, seq) is a linear order that respects causality and is the same everywhere.

The clock (`at`) is recorded and shown, never used for order.
"""

from fieldcheck.engine.event import (
    AFTER_SIGNING,
    ANSWER_KINDS,
    JOB_TYPES,
    WORKSHOP_TYPES,
    Event,
    check_kind,
    make,
)

__all__ = ["AFTER_SIGNING", "ANSWER_KINDS", "JOB_TYPES", "WORKSHOP_TYPES", "Event", "check_kind", "fold",
           "make"]


def precedes(a, b):
    """True when the device that made b knew a."""
    if a.device == b.device:
        return a.seq < b.seq
    if a.job == "":
        return b.seen_workshop.get(a.device, 0) >= a.seq
    if a.job == b.job:
        return b.seen_job.get(a.device, 0) >= a.seq
    return False


def latest(events):
    """Those events that no other of the list follows, in linear order; more than one is a conflict."""
    ordered = sorted(events, key=by_order)
    result = []
    for i in range(len(ordered)):
        later = False
        for j in range(i + 1, len(ordered)):
            if precedes(ordered[i], ordered[j]):
                later = True
                break
        if not later:
            result.append(ordered[i])
    return result


def by_order(event):
    """Sort key: the linear order that respects causality."""
    return event.order


def insert(events, event):
    """Puts an event into a list that is in linear order."""
    events.append(event)
    if len(events) > 1 and events[-2].order > event.order:
        events.sort(key=by_order)


class Slot:
    """All answers ever given to one question, in linear order, and the one that counts.

    Attributes: history (list of Event), event (the one that counts, None in conflict), rivals (list, empty unless in
    conflict).
    """

    def __init__(self):
        self.history = []
        self.event = None
        self.rivals = []

    def settle(self, decisions):
        """Finds the one that counts; a decision holds while it knew every rival that it names."""
        rivals = latest(self.history)
        self.rivals = []
        if len(rivals) == 1:
            self.event = rivals[0]
            return
        names = [one.hash for one in rivals]
        self.event = None
        for decision in reversed(sorted(decisions, key=by_order)):
            kept = decision.data["keep"]
            named = decision.data["between"]
            if kept in names and not [one for one in rivals if one.hash not in named or not precedes(one, decision)]:
                self.event = rivals[names.index(kept)]
                return
        self.rivals = rivals


class Item:
    """One item of a job.  slots: "step|round|index" -> Slot (answers and steps left); sets: (step, round) -> n."""

    def __init__(self, data, order):
        self.describe(data, order)
        self.slots = {}
        self.outcomes = Slot()
        self.cautions = []
        self.defects = []
        self.parts = []
        self.sets = []

    def describe(self, data, order):
        """What the item is; order: (the describing event's order, place in its list)."""
        self.order = order
        self.id = data["item"]
        self.equipment = data["equipment"]
        self.kind = data["kind"]
        self.procedure = data["procedure"]
        self.depth = data["depth"]

    def slot(self, data):
        """The slot that an answer's data belong to, made when first met."""
        key = slot_key(data["step"], data["round"], data["index"])
        if key not in self.slots:
            self.slots[key] = Slot()
        return self.slots[key]


def slot_key(step, number, index):
    """One question: step, round (0 as found, n after the nth service) and index ("" or row/column)."""
    return step + "|" + str(number) + "|" + index


class Job:
    """The state of one job: opened (Event or None), items, conditions, acknowledgement, signings, events in order."""

    def __init__(self, job):
        self.id = job
        self.opened = None
        self.items = {}
        self.events = []
        self.conditions = Slot()
        self.acknowledged = Slot()
        self.handed = Slot()
        self.signings = []
        self.records = []
        self.decisions = []

    def signing(self):
        """The signing event that covers all that was done, or None: never signed, or reopened since."""
        for signing in reversed(sorted(self.signings, key=by_order)):
            uncovered = [e for e in self.events if e.type not in AFTER_SIGNING and e is not signing
                         and not precedes(e, signing)]
            if not uncovered:
                return signing
        return None

    def all_slots(self):
        """Every slot of the job, in no particular order."""
        slots = [self.conditions, self.acknowledged, self.handed]
        for item in self.items.values():
            slots += list(item.slots.values())
            slots.append(item.outcomes)
        return [slot for slot in slots if slot.history]

    def items_in_order(self):
        """The items as the job lists them."""
        return sorted(self.items.values(), key=lambda item: item.order)

    def conflicts(self):
        """The slots that need a person's decision: list of (item id, slot key, Slot)."""
        found = []
        for item in self.items.values():
            for key in item.slots:
                if item.slots[key].rivals:
                    found.append((item.id, key, item.slots[key]))
            if item.outcomes.rivals:
                found.append((item.id, "outcome", item.outcomes))
        return found


class Workshop:
    """What the workshop's stream says.  Each of `entries` maps an id to the Slot of its *.entered events."""

    def __init__(self):
        self.named = Slot()
        self.entries = {"device": {}, "person": {}, "customer": {}, "site": {}, "equipment": {}, "meter": {},
                        "lubricant": {}}
        self.joined = []
        self.events = []

    def get(self, noun, key):
        """The data last entered for an id, or None; of concurrent entries the last in linear order."""
        slot = self.entries[noun].get(key)
        if slot is None:
            return None
        return (slot.event or slot.rivals[-1]).data

    def all(self, noun):
        """The data of every id of a noun, in the order first entered."""
        slots = sorted(self.entries[noun].values(), key=lambda slot: slot.history[0].order)
        return [(slot.event or slot.rivals[-1]).data for slot in slots]


class State:
    """The fold.  add() as many events as there are, in any order; then read `workshop` and `jobs`."""

    def __init__(self):
        self.workshop = Workshop()
        self.jobs = {}
        self.known = {}
        self._waiting = {}

    def add(self, digest, text):
        """Takes one event in (once: a hash that is known is ignored).  EventError when it is malformed."""
        if digest in self.known:
            return self.known[digest]
        event = Event(digest, text)
        self.known[digest] = event
        if event.job == "":
            self._workshop(event)
        else:
            self._job(event)
        return event

    def _put(self, slot, event, decisions):
        insert(slot.history, event)
        slot.settle(decisions)

    def _workshop(self, event):
        self.workshop.events.append(event)
        if event.type == "workshop.named":
            self._put(self.workshop.named, event, [])
        elif event.type == "equipment.joined":
            insert(self.workshop.joined, event)
        else:
            noun = event.type.split(".")[0]
            table = self.workshop.entries[noun]
            key = event.data[noun]
            if key not in table:
                table[key] = Slot()
            self._put(table[key], event, [])

    def _job(self, event):
        if event.job not in self.jobs:
            self.jobs[event.job] = Job(event.job)
        job = self.jobs[event.job]
        insert(job.events, event)
        kind = event.type
        if kind == "job.opened":
            if job.opened is None or event.order < job.opened.order:
                job.opened = event
            for place, data in enumerate(event.data["items"]):
                self._item(job, data, (event.order, place))
        elif kind == "item.added":
            self._item(job, event.data, (event.order, 0))
        elif kind == "conditions.taken":
            self._put(job.conditions, event, job.decisions)
        elif kind == "customer.acknowledged":
            self._put(job.acknowledged, event, job.decisions)
        elif kind == "job.handed":
            self._put(job.handed, event, job.decisions)
        elif kind == "job.signed":
            job.signings.append(event)
        elif kind == "record.issued":
            insert(job.records, event)
        elif kind == "decision.made":
            job.decisions.append(event)
            for slot in job.all_slots():
                slot.settle(job.decisions)
        else:
            self._of_item(job, event)

    def _item(self, job, data, order):
        known = job.items.get(data["item"])
        if known is not None:
            if order < known.order:
                known.describe(data, order)
            return
        job.items[data["item"]] = Item(data, order)
        for event in self._waiting.pop((job.id, data["item"]), []):
            self._of_item(job, event)

    def _of_item(self, job, event):
        item = job.items.get(event.data["item"])
        if item is None:
            self._waiting.setdefault((job.id, event.data["item"]), []).append(event)
            return
        kind = event.type
        if kind in ("answer.given", "answer.corrected", "step.left"):
            self._put(item.slot(event.data), event, job.decisions)
        elif kind == "outcome.given":
            self._put(item.outcomes, event, job.decisions)
        else:
            lists = {"caution.acknowledged": item.cautions, "defect.found": item.defects, "part.used": item.parts,
                     "set.declared": item.sets}
            insert(lists[kind], event)


def fold(pairs):
    """The State of a set of events.  pairs: iterable of (hash, exact text)."""
    state = State()
    for digest, text in pairs:
        state.add(digest, text)
    return state


def seen_by(events, device, job):
    """The `seen` field for a new event of `device` in `job` ("" = workshop): what it knows of other devices."""
    seen = {"job": {}, "workshop": {}}
    for event in events:
        if event.device == device:
            continue
        if event.job == "":
            part = seen["workshop"]
        elif event.job == job and job != "":
            part = seen["job"]
        else:
            continue
        if event.seq > part.get(event.device, 0):
            part[event.device] = event.seq
    return seen
