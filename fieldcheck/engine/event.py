"""One event: the kinds there are, what its text must hold, and how it is read and made."""

from fieldcheck.engine import chain, texts
from fieldcheck.engine.errors import EventError

WORKSHOP_TYPES = {
    "workshop.named": ("name", "address"),
    "device.enrolled": ("device", "name", "public_key"),
    "person.entered": ("person", "name", "competences", "active"),
    "customer.entered": ("customer", "name", "address"),
    "site.entered": ("site", "customer", "name", "address"),
    "equipment.entered": ("equipment", "kind", "name", "identities"),
    "equipment.joined": ("keep", "other", "reason"),
    "meter.entered": ("meter", "tag", "name", "functions"),
    "lubricant.entered": ("lubricant", "name"),
}
JOB_TYPES = {
    "job.opened": ("number", "customer", "site", "place", "rulebook", "items"),
    "job.handed": ("device", "person"),
    "item.added": ("item", "equipment", "kind", "procedure", "depth"),
    "conditions.taken": (),
    "caution.acknowledged": ("item", "supply", "cautions"),
    "answer.given": ("item", "step", "round", "index", "kind", "value"),
    "answer.corrected": ("item", "step", "round", "index", "kind", "value", "corrects", "reason"),
    "step.left": ("item", "step", "round", "index", "reason"),
    "set.declared": ("item", "step", "round", "n"),
    "defect.found": ("item", "what", "level"),
    "part.used": ("item", "name", "amount"),
    "outcome.given": ("item", "outcome", "reason"),
    "customer.acknowledged": ("state", "name"),
    "job.signed": ("person", "meaning", "name", "rulebook", "summary_sha256", "root", "heads"),
    "decision.made": ("between", "keep", "reason"),
    "record.issued": ("number", "sha256"),
}
AFTER_SIGNING = ("record.issued", "job.handed")
"""Events of a job that a signature need not cover and that do not reopen it."""

_FORMS = {"round": (int, "a whole number"), "n": (int, "a whole number"), "active": (bool, "true or false"),
          "value": (dict, "an object"), "heads": (dict, "an object"), "items": (list, "a list"),
          "identities": (list, "a list"), "functions": (list, "a list"), "competences": (list, "a list"),
          "cautions": (list, "a list"), "between": (list, "a list")}
"""Form of what an event must hold, where it is no text."""

ANSWER_KINDS = ("confirm", "choice", "note", "measure", "table", "sequence", "timing", "action", "photograph",
                "nameplate")


class Event:
    """One event, read and checked.  Attributes: the fields of its text, `hash`, `text` and `order`."""

    def __init__(self, digest, text):
        fields = chain.read_event(text)
        check_kind(fields)
        self.hash = digest
        self.text = text
        self.device = fields["device"]
        self.seq = fields["seq"]
        self.prev = fields["prev"]
        self.at = fields["at"]
        self.offset = fields["offset"]
        self.person = fields["person"]
        self.job = fields["job"]
        self.type = fields["type"]
        self.data = fields["data"]
        self.seen_job = fields["seen"]["job"]
        self.seen_workshop = fields["seen"]["workshop"]
        self.order = (self._weight(), self.device, self.seq)

    def _weight(self):
        weight = self.seq
        for device in self.seen_job:
            weight += max(self.seen_job[device], self.seen_workshop.get(device, 0))
        for device in self.seen_workshop:
            if device not in self.seen_job:
                weight += self.seen_workshop[device]
        return weight


def check_kind(fields):
    """Refuses (EventError) an event of no known kind, or whose data lack what it needs or hold it in another form."""
    where = fields["type"]
    wanted = (JOB_TYPES if fields["job"] else WORKSHOP_TYPES).get(where)
    if wanted is None:
        raise EventError('"' + where + '" is not a kind of event of ' + ("a job" if fields["job"] else "the workshop"))
    _check_data(fields["data"], wanted, where)
    if where == "job.opened":
        for one in fields["data"]["items"]:
            if not isinstance(one, dict):
                raise EventError('one of its "items" is not an object', where)
            _check_data(one, JOB_TYPES["item.added"], where)


def _check_data(data, wanted, where):
    """The fold indexes by these values: one of another form would stop it for ever, in a journal that never forgets."""
    for name in wanted:
        if name not in data:
            raise EventError('its data lack "' + name + '"', where)
        right, word = _FORMS.get(name, (str, "a text"))
        if not isinstance(data[name], right) or (right is int and isinstance(data[name], bool)):
            raise EventError('its "' + name + '" is not ' + word, where)


def make(device, seq, prev, at, offset, person, job, seen, kind, data):
    """The exact text of a new event.  seen: {"job": {device: seq}, "workshop": {device: seq}} of other devices."""
    fields = {"v": 1, "device": device, "seq": seq, "prev": prev, "at": at, "offset": offset, "person": person,
              "job": job, "seen": seen, "type": kind, "data": data}
    check_kind(fields)
    return texts.write(fields)
