"""The stopwatch: start, splits, stop; it goes on while another item is worked, and through a reload."""

from browser import window

from fieldcheck.engine import entry
from fieldcheck.engine.errors import EntryError

from .. import dom
from ..markup import NOTHING, h, join, key
from . import waiting
from .measure import Measure, table_view
from .step import step_place

platform = window.platform
SHOW_EVERY = 100        # milliseconds


def seconds_text(milliseconds):
    """Milliseconds as seconds with two places, by whole numbers: 12340 is "12.34"."""
    hundredths = (int(milliseconds) + 5) // 10
    whole = hundredths // 100
    return str(whole) + "." + waiting.two(hundredths - whole * 100)


def times_text(times):
    """Several times as they are taken: "1.52; 1.48"."""
    return "; ".join([seconds_text(one) for one in times])


class Timing(Measure):
    """A timing step, or a timing cell of a table.

    draft: start (wall ms, while it runs), laps (list of ms), times (ms of each stop; where a step wants several, the
    key says Start again until all are there), wall (some were timed by the wall clock), entry (what is taken).
    """

    label = "Start"

    def __init__(self, place, bench, instance, index, correcting, draft):
        Measure.__init__(self, place, bench, instance, index, correcting, draft)
        self.meter = ""
        self.unit = self.column.get("unit") or "s"
        self.tick = None
        self.page = 0
        if self.mode == "open":
            self._set_phase()

    @property
    def quick(self):
        return self.step["kind"] == "table"

    @property
    def phase(self):
        """"ready", "running" or "stopped"."""
        if self.draft.get("start"):
            return "running"
        return "stopped" if self.draft.get("entry") else "ready"

    def _set_phase(self):
        self.thumb = {"ready": ("Start", "start"), "running": ("Stop", "stop"), "stopped": ("Take", "take")}[self.phase]

    def elapsed(self):
        """Milliseconds since the start: by the page's clock, which nobody sets, as long as the page lives."""
        if self.page:
            return int(platform.monotonic() - self.page)
        return int(platform.wall()) - self.draft["start"]

    def inputs(self):
        phase = self.phase
        shown = self.elapsed() if phase == "running" else 0
        if phase == "stopped":
            return join([Measure.inputs(self), self.laps(), key("Time it again", "again", "", "quiet-key")])
        keys = [key("Split", "split", "", "helper")] if phase == "running" and self.repeats == 1 else []
        if phase == "ready":
            keys = [key("Type the time instead", "type", "", "quiet-key")]
        return join([h("p.stopwatch", {"id": "watch", "role": "timer"}, clock_text(shown)), self.laps(), self.so_far(),
                     h("div.helpers", keys), self.table_so_far()])

    def so_far(self):
        """Where a step wants several times: which one comes, and those that are there."""
        if self.repeats == 1:
            return NOTHING
        times = self.draft.get("times") or []
        words = "Time " + str(len(times) + 1) + " of " + str(self.repeats)
        return h("p.note", words + ("; so far " + times_text(times) + "\u202fs" if times else ""))

    def helper_keys(self):
        return NOTHING

    def meter_line(self):
        return h("p.note", "Phone's stopwatch")

    def laps(self):
        """The splits so far."""
        rows = [h("li", seconds_text(one) + "\u202fs") for one in self.draft.get("laps") or []]
        return h("ol.laps", rows) if rows else NOTHING

    def shown(self):
        Measure.shown(self)
        self.run()

    def run(self, *_):
        """Moves the hand."""
        if self.main.screen is not self or self.phase != "running" or self.mode not in ("open", "correct"):
            return
        dom.text("watch", clock_text(self.elapsed()))
        self.tick = dom.later(SHOW_EVERY, self.run)

    def leave(self):
        dom.cancel(self.tick)
        Measure.leave(self)

    def on_key(self, key_name, repeated):
        """Space starts and splits; Enter stops and takes."""
        if repeated or self.mode not in ("open", "correct") or key_name not in ("Enter", " "):
            return Measure.on_key(self, key_name, repeated)
        if self.phase == "running":
            if key_name == " ":
                self.on_split("")
            else:
                self.on_stop("")
            return True
        return Measure.on_key(self, key_name, repeated)

    def redraw(self):
        self._set_phase()
        dom.fill("work", self.work())
        self.main.foot()
        self.run()

    def on_start(self, arg):
        self.page = platform.monotonic()
        self.draft["start"] = int(platform.wall())
        self.draft["laps"] = []
        waiting.begin(self.draft_name, self.step["title"], step_place(self.bench, self.instance, self.index), 0,
                      self.draft["start"])
        self.save_draft()
        platform.buzz(40)
        self.ruler = self.ruler_html()
        self.redraw()

    def on_split(self, arg):
        self.draft["laps"] = (self.draft.get("laps") or []) + [self.elapsed()]
        self.save_draft()
        platform.buzz(20)
        dom.fill("work", self.work())

    def on_stop(self, arg):
        times = (self.draft.get("times") or []) + [self.elapsed()]
        self.draft["times"] = times
        self.draft["wall"] = self.page == 0 or bool(self.draft.get("wall"))
        self.draft.pop("start")
        if len(times) >= self.repeats:
            self.draft["entry"] = times_text(times)
        waiting.end(self.draft_name)
        self.save_draft()
        platform.buzz(40)
        self.ruler = self.ruler_html()
        self.redraw()

    def on_again(self, arg):
        for name in ("entry", "start", "times", "laps", "wall"):
            self.draft.pop(name, None)
        self.page = 0
        self.save_draft()
        self.redraw()

    def on_type(self, arg):
        self.draft["entry"] = " "
        self.redraw()
        dom.set_value("entry", "")
        dom.focus("entry")

    def value(self, arg):
        text = dom.value("entry").strip()
        read = entry.read(text, "time", default_unit=self.unit)
        count = max(1, len(read.values))
        if count != self.repeats:
            wanted = "one time is" if self.repeats == 1 else str(self.repeats) + " times are"
            raise EntryError(wanted + " wanted here, " + str(count) + " typed", "",
                             "type as many, a space between them")
        value = {"text": text, "unit": self.unit}
        if self.draft.get("times") and text == times_text(self.draft["times"]):
            value["laps"] = [{"text": seconds_text(one)} for one in self.draft.get("laps") or []]
            value["wall"] = bool(self.draft.get("wall"))
        return value

    def table_so_far(self):
        return table_view(self.bench, self.instance, self.index) if self.step["kind"] == "table" else NOTHING


def clock_text(milliseconds):
    """What the big stopwatch shows: tenths while it runs."""
    tenths = int(milliseconds) // 100
    whole = tenths // 10
    if whole < 60:
        return str(whole) + "." + str(tenths - whole * 10)
    return str(whole // 60) + ":" + waiting.two(whole - whole // 60 * 60) + "." + str(tenths - whole * 10)
