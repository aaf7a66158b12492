"""The outcome of an item, within what the engine allows; defects, parts used, cool-downs."""

from browser import window

from fieldcheck.engine import judging, outcomes

from .. import dom, parts
from ..markup import NOTHING, address, field, h, join, key, options
from ..screen import Screen
from . import waiting
from .photo import camera

platform = window.platform
MINUTES = (1, 2, 5, 10, 20, 30)


class Outcome(Screen):
    """Every limit as found and as left, and the outcome."""

    name = "Outcome"
    stale_on_change = False

    def __init__(self, place, bench):
        Screen.__init__(self, place)
        self.bench = bench
        self.flow, self.rows, self.best, self.reasons, self.allowed = bench.closing()
        self.supply = bench.supply_now()
        self.entries = len(self.flow.open_entries)
        self.thumb = ("Give this outcome", "give")
        self.judged = [left or found for _, found, left in self.rows]

    def body(self):
        work = self.bench.work
        rows = []
        for _, found, left in self.rows:
            judged = left or found
            before = found.verdict.value if left is not None and found is not None and not found.verdict.bound else None
            rows.append(parts.statement(judged, judging.printed(work, judged), ""))
            if parts.is_drawn(judged):
                rows.append(parts.verdict_scale(work, judged, before, self.bench.last_value(judged)))
        return h("div.screen", h("p.path", self.bench.title()), h("h1", "Outcome"),
                 h("p.do", "At best: " + self.best), self.reason_list(),
                 self.choice(), self.details(),
                 h("p.refusal", {"id": "refusal", "role": "alert"}, ""), h("h2", "Limits"), rows)

    def reason_list(self):
        return h("ul.reasons", [h("li", one) for one in self.reasons[:6]]) if self.reasons else NOTHING

    def choice(self):
        """The four outcomes; what is not allowed says why."""
        rows = []
        for one in outcomes.OUTCOMES:
            why = "" if one in self.allowed else outcomes.may_choose(self.bench.work, self.flow, one)
            rows.append((one, one[0].upper() + one[1:], why))
        given = self.bench.outcome()
        first = given["outcome"] if given else self.allowed[0] if self.flow.complete and self.allowed else ""
        return options("Outcome", "outcome", rows, first)

    def details(self):
        reasons = [(one, one[0].upper() + one[1:]) for one in outcomes.REASONS_NOT_EXAMINED]
        return h("details.background", h("summary", "Reason, restrictions, next due"),
                 options("Not examined, because", "not-examined", reasons, ""),
                 field("Reason in words", "reason"), field("Restrictions", "restrictions"),
                 field("Next due", "next_due", kind="date"))

    def on_why(self, limit_key):
        for one in self.judged:
            if one.key == limit_key:
                found = dom.find("why-" + limit_key)
                opening = bool(found.hidden)
                if opening and not found.innerHTML:
                    dom.fill("why-" + limit_key, parts.explanation(judging.explained(self.bench.work, one)))
                found.hidden = not opening

    async def on_give(self, arg):
        chosen = dom.chosen("outcome")
        why = outcomes.may_choose(self.bench.work, self.flow, chosen) if chosen else "choose an outcome"
        reason = dom.value("reason").strip()
        if chosen == outcomes.NOT_EXAMINED:
            reason = (dom.chosen("not-examined") + (": " + reason if reason else "")).strip(": ")
            if not reason:
                why = "not examined needs its reason: open it below"
        restrictions = dom.value("restrictions").strip()
        if chosen == outcomes.RESTRICTED and not restrictions:
            restrictions = "; ".join(self.reasons)
            if not restrictions:
                why = "say which restrictions: open it below"
        if why:
            dom.fill("refusal", join([why]))
            return
        await self.bench.note("outcome.given", {"outcome": chosen, "reason": reason or "; ".join(self.reasons),
                                                "restrictions": restrictions, "next_due": dom.value("next_due")})
        dom.go(address(["job", self.bench.job.id]), True)


class Defect(Screen):
    """Something wrong outside any limit."""

    name = "Defect"
    stale_on_change = False

    def __init__(self, place, bench):
        Screen.__init__(self, place)
        self.bench = bench
        self.blob = ""
        self.thumb = ("Note the defect", "note")

    def body(self):
        rows = [(one, one[0].upper() + one[1:]) for one in outcomes.DEFECT_LEVELS]
        return h("div.screen", h("p.path", self.bench.title()), h("h1", "Defect"),
                 field("What is wrong", "what"), options("How grave", "level", rows, ""), camera(),
                 h("div", {"id": "preview"}, NOTHING), h("p.refusal", {"id": "refusal", "role": "alert"}, ""))

    async def on_file(self, name, file):
        self.blob = await platform.putBlob(file)
        dom.fill("preview", h("img.photo", {"src": await platform.getBlob(self.blob), "alt": "Photograph"}))

    async def on_note(self, arg):
        what, level = dom.value("what").strip(), dom.chosen("level")
        if not what or not level:
            dom.fill("refusal", join(["Say what is wrong and how grave it is."]))
            return
        data = {"what": what, "level": level}
        if self.blob:
            data["blob"] = self.blob
        await self.bench.note("defect.found", data)
        dom.back()


class PartUsed(Screen):
    """A part or consumable used on an item."""

    name = "Part used"
    stale_on_change = False

    def __init__(self, place, bench):
        Screen.__init__(self, place)
        self.bench = bench
        self.thumb = ("Note it", "note")

    def body(self):
        return h("div.screen", h("p.path", self.bench.title()), h("h1", "Part or consumable used"),
                 field("What", "what"), field("How much", "amount", inputmode="decimal"),
                 field("Unit", "unit", note="pieces, mL, cm"), h("p.refusal", {"id": "refusal", "role": "alert"}, ""))

    async def on_note(self, arg):
        what, amount = dom.value("what").strip(), dom.value("amount").strip()
        if not what or not amount:
            dom.fill("refusal", join(["Say what was used and how much."]))
            return
        await self.bench.note("part.used", {"name": what, "amount": amount, "unit": dom.value("unit").strip()})
        dom.back()


class CoolDown(Screen):
    """A cool-down that counts on every screen while another item is worked on."""

    name = "Cool-down"

    def __init__(self, place, bench):
        Screen.__init__(self, place)
        self.bench = bench
        self.thumb = ("Back", "back")

    def body(self):
        running = waiting.get(self.bench.item.id)
        keys = [key(str(one) + " min", "begin", str(one), "pad") for one in MINUTES]
        return h("div.screen", h("p.path", self.bench.title()), h("h1", "Cool-down"),
                 h("p.do", "It counts on every screen; work on something else meanwhile."),
                 h("p.stopwatch", {"id": "clock-" + running["name"]}, waiting.text_of(running)) if running else NOTHING,
                 h("div.pads", keys), key("Stop it", "end", "", "quiet-key") if running else NOTHING)

    def on_begin(self, minutes):
        waiting.begin(self.bench.item.id, self.bench.title() + " cools", self.bench.place(), int(minutes) * 60000)
        dom.go(address(["job", self.bench.job.id]), True)

    def on_end(self, arg):
        waiting.end(self.bench.item.id)
        self.main.draw()

    def shown(self):
        waiting.keep_counting()
