"""What comes before a step: cautions of the supply state, the job's conditions, a person who may."""

from fieldcheck.engine import entry
from fieldcheck.engine.errors import FieldcheckError

from .. import dom, parts, pen, store
from ..markup import field, h, join, options
from ..screen import Screen

FIELDS = (("ambient", "Ambient temperature", "temperature", "°C"), ("humidity", "Relative humidity", "humidity", "%RH"),
          ("voltage", "Supply voltage", "voltage", "V"), ("frequency", "Supply frequency", "frequency", "Hz"))


class Cautions(Screen):
    """The cautions of a supply state, acknowledged once a person and visit."""

    name = "Cautions"
    stale_on_change = False

    def __init__(self, place, bench, supply, cautions):
        Screen.__init__(self, place)
        self.bench = bench
        self.supply = bench.supply_now()
        self.wanted = supply
        self.cautions = cautions
        self.entries = len(bench.flow.open_entries)
        self.thumb = ("Read and understood", "agree")

    def body(self):
        return h("div.screen", h("p.path", self.bench.title()), h("h1", "Before: " + self.wanted),
                 [parts.signal(one) for one in self.cautions],
                 h("p.note", "Local codes and licensed practice come first."))

    async def on_agree(self, arg):
        await self.bench.note("caution.acknowledged", {"supply": self.wanted,
                                                       "cautions": [one["id"] for one in self.cautions]})
        await self.main.arrive()


class NotAllowed(Screen):
    """A mains step in front of a person who is not marked for it."""

    name = "Not for this person"

    def __init__(self, place, bench):
        Screen.__init__(self, place)
        self.bench = bench
        self.supply = bench.supply_now()
        self.thumb = ("Another person", "who")

    def body(self):
        person = store.person_name(store.own["person"])
        return h("div.screen", h("h1", "Mains live"),
                 h("p.warn", "This step is worked mains live. " + person + " is not marked mains-competent."),
                 h("p", "Let a mains-competent person take it, or note it as not done from the list of steps."))

    def on_who(self, arg):
        dom.go("#/who")


def may_work(supply):
    """True when the present person may work in a supply state."""
    if supply != "mains live":
        return True
    person = store.state.workshop.get("person", store.own["person"])
    return person is not None and [one for one in person.get("competences") or [] if "mains" in one.lower()] != []


class Conditions(Screen):
    """Ambient and supply, once a job and again when stale."""

    name = "Conditions"
    stale_on_change = False

    def __init__(self, place, job, gate):
        Screen.__init__(self, place)
        self.job = job
        self.gate = gate
        self.thumb = ("Take", "take")
        self.half = {}
        self.warned = False         # an empty page was taken once: a slip of the thumb, or meant

    def body(self):
        event = self.job.conditions.event
        old = event.data if event is not None else {}
        rows = []
        for name, label, _, unit in FIELDS:
            given = self.half.get(name)
            if given is None:
                given = ""
            before = old.get(name)
            note = ("last: " + before["text"] + " " + (before.get("unit") or unit)) if before else ""
            rows.append(h("div.with-unit", field(label, name, given, note=note, inputmode="decimal"), h("span", unit)))
        meters = [(data["meter"], data["tag"] + " " + data["name"]) for data in store.state.workshop.all("meter")]
        names = [("", "Not a workshop meter")] + meters
        return h("div.screen", h("p.path", "Job " + self.job.opened.data["number"]), h("h1", "Conditions"),
                 h("p.do", "Read room and supply where the work is done. Leave empty what you cannot read."),
                 rows, options("Read with", "meter", names, self.half.get("meter") or ""),
                 h("p.refusal", {"id": "refusal", "role": "alert"}, ""))

    def typed(self, name, text):
        self.half[name] = text

    async def on_take(self, arg):
        data = {}
        for name, label, quantity, unit in FIELDS:
            text = dom.value(name).strip()
            if not text:
                continue
            try:
                read = entry.read(text, quantity, default_unit=unit, allow=("negative",))
            except FieldcheckError as error:
                dom.fill("refusal", join([label + ": " + error.what + ". " + error.mend]))
                dom.focus(name)
                return
            data[name] = {"text": text, "unit": read.unit.symbol if read.unit is not None else unit}
        if not data and not self.warned:
            self.warned = True
            dom.fill("refusal", join(["Nothing is typed yet. Take again if nothing of this can be read here."]))
            return
        meter = dom.chosen("meter")
        if meter:
            data["meter"] = meter
        await pen.write(self.job.id, "conditions.taken", data)
        store.forget_benches(self.job.id)
        if self.gate:
            await self.main.arrive()
        else:
            dom.back()
