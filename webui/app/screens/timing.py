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


class Timing(Measure):
    """A timing step, or a timing cell of a table.

    draft: start (wall ms), page (monotonic ms, 0 after a reload), laps (list of ms), stopped (ms or absent).
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
        if self.draft.get("entry"):
            return "stopped"
        return "running" if self.draft.get("start") else "ready"

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
        keys = [key("Split", "split", "", "helper")] if phase == "running" else []
        if phase == "ready":
            keys = [key("Type the time instead", "type", "", "quiet-key")]
        return join([h("p.stopwatch", {"id": "watch", "role": "timer"}, clock_text(shown)), self.laps(),
                     h("div.helpers", keys), self.table_so_far()])

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
        passed = self.elapsed()
        self.draft["entry"] = seconds_text(passed)
        self.draft["stopped"] = passed
        self.draft["wall"] = self.page == 0
        waiting.end(self.draft_name)
        self.save_draft()
        platform.buzz(40)
        self.ruler = self.ruler_html()
        self.redraw()

    def on_again(self, arg):
        for name in ("entry", "start", "stopped", "laps", "wall"):
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
        if len(read.values) > 1:
            raise EntryError("one time is wanted here", "", "type one")
        value = {"text": text, "unit": self.unit}
        if self.draft.get("stopped") is not None and text == seconds_text(self.draft["stopped"]):
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
