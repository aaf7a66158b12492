"""One job: its items, and what is left before it can be signed."""

from fieldcheck.engine import calculated

from .. import dom, parts
from ..markup import NOTHING, address, h, join, link
from ..screen import Screen
from . import waiting
from .jobs import count_text, site_text
from .step import next_place


class Job(Screen):
    """The items with their progress; the thumb goes on where the work stands."""

    def __init__(self, place, job, benches):
        Screen.__init__(self, place)
        self.job = job
        self.benches = benches
        self.name = "Job " + job.opened.data["number"]
        self.open_ones = [one for one in benches if one.outcome() is None]
        missing = len(job.items) - len(benches)
        self.missing = missing
        if self.open_ones:
            self.thumb = ("Go on", "go")
        elif benches and not missing and job.signing() is None:
            self.thumb = ("Customer and signature", "sign")
        self.ruler = parts.ruler(None, None, (len(self.job.items), 0), waiting.shown()) if waiting.running else None

    def body(self):
        data = self.job.opened.data
        done = len(self.benches) - len(self.open_ones)
        signing = self.job.signing()
        head = "Signed by " + signing.data["name"] if signing is not None else \
            str(done) + " of " + count_text(len(self.job.items), "item", "items") + " closed"
        return h("div.screen", h("p.path", link("Jobs", [], "plain")), h("h1", self.name),
                 h("p.do", site_text(self.job)), h("p", data.get("reason") or ""), h("p.state", head),
                 self.missing_words(), self.conflicts(),
                 h("ul.rows", [h("li", self.row(one)) for one in self.benches]),
                 h("div.more", link("Conditions", ["job", self.job.id, "conditions"], "quiet-key"),
                   link("Add equipment", ["job", self.job.id, "add"], "quiet-key"),
                   link("Customer", ["job", self.job.id, "customer"], "quiet-key")))

    def missing_words(self):
        """Items whose rules have not arrived."""
        if not self.missing:
            return NOTHING
        return h("p.warn", count_text(self.missing, "item has", "items have")
                 + " rules that are not on this phone yet; open the page near the desk.")

    def conflicts(self):
        """Two answers to one question wait for a person at the desk."""
        found = self.job.conflicts()
        if not found:
            return NOTHING
        return h("p.warn", count_text(len(found), "question has", "questions have")
                 + " two answers; they are decided at the desk.")

    def row(self, bench):
        """One item: what it is, how far it is, its outcome."""
        flow = bench.flow
        done = len([one for one in flow.instances if one.state != "to do"])
        outcome = bench.outcome()
        words = outcome["outcome"] if outcome else "step " + str(done + 1) + ", " + flow.current.step["title"] \
            if flow.current is not None else "outcome to be given" if flow.complete else "waits"
        minutes = bench.part.get("minutes", {}).get(bench.item.depth) or {}
        effort = NOTHING
        if not done and minutes:
            effort = h("span.note", str(minutes["work"]) + " min at work, " + str(minutes["wait"]) + " min waiting")
        return link([h("span.where", bench.title()), h("span.note", bench.part["title"] + ", " + bench.item.depth),
                     h("span.note" if not outcome else "span.word", words), effort], bench.place())

    async def on_go(self, arg):
        dom.go(await next_place(self.open_ones[0]))

    def on_sign(self, arg):
        here = "customer" if self.job.acknowledged.event is None else "sign"
        dom.go(address(["job", self.job.id, here]))

    def on_list(self, arg):
        dom.go("#/")

    def shown(self):
        waiting.keep_counting()


class Item(Screen):
    """One item: the path with every step's state, the verdicts so far, and the outcome."""

    def __init__(self, place, bench):
        Screen.__init__(self, place)
        self.bench = bench
        self.name = bench.title()
        current = bench.flow.current
        self.supply = bench.supply_now()
        self.entries = len(bench.flow.open_entries)
        if bench.outcome() is None:
            self.thumb = ("Go on", "go") if current is not None else ("Outcome", "outcome")
        else:
            self.thumb = ("Back to the job", "job")

    def body(self):
        bench = self.bench
        flow = bench.flow
        outcome = bench.outcome()
        data = bench.job.opened.data
        return h("div.screen",
                 h("p.path", link("Job " + data["number"], ["job", bench.job.id], "plain")), h("h1", bench.title()),
                 h("p.do", bench.part["title"] + ", " + bench.item.depth + " depth"),
                 h("p", bench.part.get("purpose") or ""),
                 h("p.state", "Outcome: " + outcome["outcome"]) if outcome else NOTHING,
                 self.open_words(), self.called_words(),
                 h("ol.path-list", [h("li." + ("now" if one is flow.current else one.state.replace(" ", "-")),
                                      self.line(one)) for one in flow.instances]),
                 h("div.more", link("Outcome", bench.place("outcome"), "quiet-key"),
                   link("Defect", bench.place("defect"), "quiet-key"),
                   link("Part used", bench.place("part"), "quiet-key"),
                   link("Cool-down", bench.place("wait"), "quiet-key")), self.noted(),
                 h("details.background", h("summary", "Also computed, not judged"),
                   h("div", {"id": "computed"}, h("p.note", "Nothing yet: its readings are still to come.")))
                 if calculated.free_values(bench.part) else NOTHING)

    def compute(self, *_):
        """What the procedure computes beside its limits; after the path is on the glass, for it may take a while."""
        if self.main.screen is not self or dom.find("computed") is None:
            return
        rows = [h("div", h("dt", one["label"] + (" " + one["row"] if one["row"] else "")), h("dd", one["text"]))
                for one in calculated.calculated(self.bench.work, self.bench.flow.last_round)]
        if rows:
            dom.fill("computed", h("dl.reason.computed", rows))

    def open_words(self):
        """The open entries by name."""
        return join([h("p.opens", "Open: " + one["text"]) for one in self.bench.flow.open_entries])

    def called_words(self):
        """The corrective actions that limits not met have called for."""
        called = []
        for number in sorted(self.bench.flow.called):
            for action in self.bench.flow.called[number]:
                called.append(self.bench.work.step(action)["title"])
        return h("p.called", "Called for: " + ", ".join(called)) if called else NOTHING

    def line(self, instance):
        """One step of the path."""
        from .parts_of import STATES, instance_line
        from .step import step_place
        words = instance_line(instance)
        state = STATES[instance.state] if instance.state != "left" else "not done: " + instance.reason
        inside = [h("span.tick", ""), h("span", words), h("span.note", state)]
        return link(inside, step_place(self.bench, instance), "path-row")

    def noted(self):
        """Defects and parts noted outside the steps."""
        rows = [h("li", "Defect, " + one["level"] + ": " + one["what"]) for one in self.bench.work.defects]
        rows += [h("li", "Used: " + event.data["name"] + " " + event.data["amount"]) for event in self.bench.item.parts]
        return h("ul.noted", rows) if rows else NOTHING

    async def on_go(self, arg):
        dom.go(await next_place(self.bench))

    def on_outcome(self, arg):
        dom.go(address(self.bench.place("outcome")))

    def on_job(self, arg):
        dom.go(address(["job", self.bench.job.id]))

    def shown(self):
        waiting.keep_counting()
        dom.after_paint(self.compute)
