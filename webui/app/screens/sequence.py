"""The tap recorder: what the drum shows after each pulse, one large key a function; or counting for long runs."""

from fieldcheck.engine import readings
from fieldcheck.engine.errors import EntryError, FieldcheckError

from .. import dom
from ..markup import field, h, join, key
from .step import Step


class Sequence(Step):
    """draft: start, seen (symbols joined by spaces), mode ("each" or "count"), pulses, end."""

    def __init__(self, place, bench, instance, index, correcting, draft):
        Step.__init__(self, place, bench, instance, index, correcting, draft)
        try:
            self.positions = readings.layout_of(bench.work, self.step)["positions"]
        except FieldcheckError:
            self.positions = []
        self.symbols = []
        for one in self.positions:
            if one not in self.symbols:
                self.symbols.append(one)
        self.wanted = int(self.step.get("pulses") or 0)
        if self.mode == "correct" and "start" not in draft:
            old = self.answer().value
            self.draft["start"] = old["start"]
            self.draft["seen"] = " ".join(old.get("seen") or [])
            self.draft["mode"] = old.get("mode") or "each"

    @property
    def seen(self):
        text = self.draft.get("seen") or ""
        return text.split(" ") if text else []

    def expected(self):
        """The symbol that a faultless drum shows next, or "" where that cannot be known."""
        shown = self.seen
        if not self.draft.get("start") or not self.positions:
            return ""
        trail = [self.draft["start"]] + shown
        for place in range(len(self.positions)):
            good = True
            for back in range(min(len(trail), len(self.positions))):
                if self.positions[(place - back) % len(self.positions)] != trail[len(trail) - 1 - back]:
                    good = False
                    break
            if good:
                return self.positions[(place + 1) % len(self.positions)]
        last = trail[-1]
        return self.positions[(self.positions.index(last) + 1) % len(self.positions)] if last in self.positions else ""

    def inputs(self):
        if not self.positions:
            return h("p.later", "Which drum it is is asked on the nameplate first.")
        if not self.draft.get("start"):
            return join([h("p.ask", "What does the drum show before the first pulse?"), self.pads("start-at")])
        if self.draft.get("mode") == "count":
            return self.counting()
        return join([h("p.ask", {"id": "ask"}, self.question()), self.pads("tap"),
                     h("p.tape", {"id": "tape", "aria-live": "polite"}, self.tape()),
                     h("div.helpers", [key("Undo last", "undo", "", "helper"),
                                       key("Count only", "count", "", "helper")])])

    def question(self):
        """What is asked next."""
        count = len(self.seen)
        if self.wanted and count >= self.wanted:
            return str(count) + " pulses tapped; take them, or tap on"
        return "Pulse " + str(count + 1) + (" of " + str(self.wanted) if self.wanted else "") + \
            ": what does the drum show?"

    def pads(self, do):
        """One large key a function; the one expected next is named to the foot switch, not to the eye."""
        return h("div.pads", [key(one, do, one, "pad") for one in self.symbols])

    def tape(self):
        """What was tapped so far."""
        return self.draft["start"] + ": " + " ".join(self.seen)

    def counting(self):
        """Count mode: so many pulses, and what the drum shows at the end."""
        return join([h("p.ask", "Started at " + self.draft["start"] + ". Count the pulses."),
                     h("p.stopwatch", {"id": "count"}, str(self.draft.get("pulses") or 0)),
                     key("Pulse", "pulse", "", "pad.wide"),
                     h("div.helpers", [key("One less", "less", "", "helper"),
                                       key("Tap each instead", "each", "", "helper")]),
                     field("Pulses", "pulses", str(self.draft.get("pulses") or ""), inputmode="numeric"),
                     h("p.ask", "Shown at the end: ", h("strong", {"id": "end"}, self.draft.get("end") or "?")),
                     self.pads("end-at")])

    def redraw(self):
        dom.fill("work", self.work())

    def on_start_at(self, symbol):
        self.keep("start", symbol)
        dom.fill("instruction", self.instruction())     # folded away: the pads come under the thumb
        dom.scroll_up()
        self.redraw()

    def on_tap(self, symbol):
        self.keep("seen", " ".join(self.seen + [symbol]))
        dom.text("ask", self.question())
        dom.text("tape", self.tape())
        if self.wanted and len(self.seen) == self.wanted:
            dom.focus("thumb")

    def on_undo(self, arg):
        if self.seen:
            self.keep("seen", " ".join(self.seen[:-1]))
        else:
            self.draft.pop("start", None)
            self.keep("seen", "")
        self.redraw()

    def on_count(self, arg):
        self.keep("mode", "count")
        self.redraw()

    def on_each(self, arg):
        self.keep("mode", "each")
        self.redraw()

    def on_pulse(self, arg):
        self.keep("pulses", int(self.draft.get("pulses") or 0) + 1)
        dom.text("count", str(self.draft["pulses"]))
        dom.set_value("pulses", str(self.draft["pulses"]))

    def on_less(self, arg):
        self.keep("pulses", max(0, int(self.draft.get("pulses") or 0) - 1))
        dom.text("count", str(self.draft["pulses"]))
        dom.set_value("pulses", str(self.draft["pulses"]))

    def typed(self, name, text):
        if name == "pulses":
            digits = "".join([ch for ch in text if ch in "0123456789"])
            self.keep("pulses", int(digits) if digits else 0)
            dom.text("count", str(self.draft["pulses"]))
        else:
            Step.typed(self, name, text)

    def on_end_at(self, symbol):
        self.keep("end", symbol)
        dom.text("end", symbol)

    def on_key(self, key_name, repeated):
        """Space: one more pulse, as the drum should show it; Enter takes."""
        if key_name == " " and self.mode in ("open", "correct") and not repeated and self.draft.get("start"):
            if self.draft.get("mode") == "count":
                self.on_pulse("")
            elif self.expected():
                self.on_tap(self.expected())
            return True
        return Step.on_key(self, key_name, repeated)

    def value(self, arg):
        if not self.draft.get("start"):
            raise EntryError("nothing was tapped yet", "", "tap what the drum shows before the first pulse")
        if self.draft.get("mode") == "count":
            pulses = int(self.draft.get("pulses") or 0)
            if pulses < 1 or not self.draft.get("end"):
                raise EntryError("the number of pulses or the last function is missing", "",
                                 "count the pulses and tap what the drum shows at the end")
            return {"start": self.draft["start"], "seen": [], "pulses": pulses, "mode": "count",
                    "end": self.draft["end"]}
        seen = self.seen
        if not seen:
            raise EntryError("no pulse was tapped yet", "", "tap what the drum shows after each pulse")
        if self.wanted and len(seen) < self.wanted:
            raise EntryError(str(self.wanted) + " pulses are wanted, " + str(len(seen)) + " tapped", "",
                             "tap the rest, or note the step as not done")
        return {"start": self.draft["start"], "seen": seen, "pulses": len(seen), "mode": "each"}


