"""The screen that every kind of step shares: what to do, the answer or its taking, and the way onward."""

from browser import aio, window

from fieldcheck.engine import events, procedures, texts
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.engine.work import LEFT

from .. import dom, parts, store
from ..markup import NOTHING, address, field, h, join, key, link, options
from ..screen import Screen
from . import bench as bench_room
from . import waiting
from .said import Said
from .words import WORDS, answer_text, history, range_text, value_words

platform = window.platform
LONG = 24               # characters of an answer that is shown smaller
PHASES = {"supply": "change of supply"}
DRAFT_AFTER = 300       # milliseconds from the last keystroke until a draft is on its way to the disk


class Step(Screen):
    """One question: a step at a round, and one index where it is a table.

    mode: "open" (to be answered), "taken", "correct" (answered, being corrected) or "barred" (not its turn).
    Subclasses give inputs() -> Html, value(arg) -> the event's value (FieldcheckError refuses it), and may give
    quick = True where the next screen may come at once when nothing is judged.
    """

    label = "Take"
    quick = False
    stale_on_change = False

    def __init__(self, place, bench, instance, index, correcting, draft):
        Screen.__init__(self, place)
        self.bench = bench
        self.instance = instance
        self.step = instance.step
        self.index = index
        self.column = bench_room.column_of(self.step, index)
        self.slot_key = events.slot_key(self.step["id"], instance.round, index)
        self.draft_name = bench.job.id + "/" + bench.item.id + "/" + self.slot_key
        self.draft = draft
        self.timer = None
        self.said = Said(bench, instance.round, self.step["phase"])
        self.refused = None
        self.supply = bench.supply_now()
        self.entries = len(bench.flow.open_entries)
        self.name = self.step["title"]
        self.known = self.step["kind"] == "table" and self.step["id"] in bench.read
        self.mode = self._mode(correcting)
        self._set_thumb()

    def _mode(self, correcting):
        answer = self.answer()
        if answer is not None and not answer.left:
            return "correct" if correcting else "taken"
        return "open" if self.instance.ready or self.instance.state == LEFT else "barred"

    def _set_thumb(self):
        if self.mode in ("open", "correct"):
            self.thumb = (self.label, "take")
        else:
            self.thumb = ("Next", "next")

    def answer(self):
        """The Answer of this slot, or None."""
        return self.bench.work.answers.get(self.slot_key)

    # ---- what is seen

    def body(self):
        self.ruler = self.ruler_html()
        step = self.step
        number = self.instance.round
        when = "as found" if step["phase"] == "as found" and number == 0 else \
            "after service " + str(number) if number > 0 else PHASES.get(step["phase"]) or step["phase"]
        return h("div.screen.step", h("p.path.line", link(self.bench.title(), self.bench.place(), "plain"),
                                      h("span.when", when)),
                 self.heading(),
                 h("p.hold", "Hold point: nothing after it before it is done") if self.instance.hold else NOTHING,
                 h("div", {"id": "instruction"}, self.instruction()),
                 h("div", {"id": "work"}, self.work()),
                 h("details.background", h("summary", "Why"), h("p", step["why"])) if step.get("why") else NOTHING,
                 h("div", {"id": "more"}, self.more()))

    def heading(self):
        """The title; in a table the row and column are what is read first."""
        if self.step["kind"] != "table" or not self.index:
            return h("h1", self.step["title"])
        return h("h1.in-table", h("span.of", self.step["title"]), " ",
                 h("span.cell", bench_room.row_of(self.index) + ": " + self.column.get("title", "")))

    def instruction(self):
        """What to do, where to put the probes, when to stop; folded away once read in this sitting."""
        rest = [h("p.do", self.step["text"]), self.drawing()]
        if self.mode == "taken":            # what it means comes first now
            return h("details.background.again", h("summary", "What to do"), rest, self.aborts(), self.entry_words())
        if self.known or self.draft.get("start") is not None:
            return join([h("details.background.again", h("summary", "What to do"), rest), self.aborts(),
                         self.entry_words()])
        return join([rest, self.aborts(), self.entry_words()])

    def drawing(self):
        """The step's drawing, with its words."""
        name = self.step.get("drawing")
        source = dom.picture(name + ".svg") if name else ""
        return h("img.drawing", {"src": source, "alt": WORDS.get(name, "")}) if source else NOTHING

    def aborts(self):
        """The limits at which the step is broken off."""
        rows = [h("p.abort", one["text"] + " " + value_words(one)) for one in self.step.get("abort") or []]
        return join(rows)

    def entry_words(self):
        """What the step opens or restores."""
        opens = self.step.get("opens")
        if opens:
            return h("p.opens", "Opens an entry: " + opens["text"])
        if self.step.get("restores"):
            return h("p.opens", "Closes the open entry")
        return NOTHING

    def work(self):
        """The changing part: inputs, or what was taken and what it means."""
        if self.mode == "barred":
            current = self.bench.flow.current
            text = "Its turn comes later."
            return h("p.later", text, " ", link("Now: " + current.step["title"], step_place(self.bench, current),
                                                "plain") if current is not None else NOTHING)
        if self.mode == "taken":
            return self.taken()
        answer = self.answer()
        left = h("p.left", "Not done: " + answer.left) if answer is not None and answer.left else NOTHING
        listed = self.draft.get("listed") or ""
        return join([left, h("p.opens", "Shelf list. " + listed) if listed else NOTHING, self.inputs(),
                     self.reason_field() if self.mode == "correct" else NOTHING,
                     h("p.refusal", {"id": "refusal", "role": "alert"}, "")])

    def inputs(self):
        """What is needed to answer."""
        return NOTHING

    def reason_field(self):
        """Why an answer is corrected."""
        reasons = [("typing slip", "Typing slip"), ("read again", "Read again"), ("wrong meter or range",
                   "Wrong meter or range"), ("other", "Another reason")]
        return join([options("Why it is corrected", "reason", reasons, self.draft.get("reason") or "typing slip"),
                     field("In words", "reason-words", self.draft.get("reason-words") or "")])

    def taken(self):
        """What was taken and what it means."""
        answer = self.answer()
        words = answer_text(self.step, self.column, answer.value)
        shown = [h("p.taken" + (".long" if len(words) > LONG else ""), {"id": "taken"}, words),
                 self.meter_words(answer.value)]
        if not self.said.judged:
            self.said.begin(self.candidates())
        shown.append(h("div", {"id": "said-here"}, self.said.html()))
        shown.append(h("div", {"id": "entries"}, self.entries_so_far()))
        return join(shown)

    def entries_so_far(self):
        """All that was ever answered here, when there is more than one entry."""
        slot = self.bench.slot(self.slot_key)
        if slot is None or len(slot.history) < 2:
            return NOTHING
        return history(slot, self.step, self.column)

    def written(self, key):
        """The answer is on the disk: it joins the entries."""
        if key == self.slot_key and self.main.screen is self and self.mode == "taken":
            dom.fill("entries", self.entries_so_far())

    def candidates(self):
        """The limits that can be judged with this answer, as bench.candidates gives them."""
        if self.step["kind"] in ("nameplate", "photograph", "note") or self.step["id"] == procedures.SUPPLY:
            return []
        if self.step["kind"] == "table":
            return self.bench.candidates(self.step["id"], self.instance.round, bench_room.row_of(self.index),
                                         self.column["id"])
        return self.bench.candidates(self.step["id"], self.instance.round)

    def judge_rest(self, *_):
        """One small piece a turn, each on the glass as soon as it is there."""
        if self.main.screen is not self or self.mode != "taken":
            return
        if self.said.turn():
            dom.after_paint(self.judge_rest)
        else:
            self.after_glass()

    def meter_words(self, value):
        """With which meter it was read."""
        meter = self.bench.work.meters.get(value.get("meter") or "") if isinstance(value, dict) else None
        if meter is None:
            return NOTHING
        return h("p.note", meter.tag + " " + meter.name + ", " + (value.get("function") or "")
                 + (", " + range_text(value["range"]) if value.get("range") else ""))

    def more(self):
        """The quieter keys."""
        keys = []
        if self.mode == "taken" and self.step["kind"] != "nameplate" or self.mode == "taken":
            keys.append(("Correct", "correct", ""))
        if self.mode == "open" and self.step["kind"] != "nameplate":
            keys.append(("Not done", "left", ""))
        if self.mode == "open" and self.bench.undoable is not None:
            keys.append(("Undo: " + self.bench.undoable[0].step["title"], "undo_last", ""))
        keys += [("Defect", "defect", ""), ("Part used", "part", "")]
        return parts.more(*keys)

    def ruler_html(self):
        """The ruler of the item, with the other items of the job as long ticks and what is waiting."""
        ids = [item.id for item in self.bench.job.items_in_order()]
        place = ids.index(self.bench.item.id)
        return parts.ruler(self.bench.flow, self.instance_now(), (place, len(ids) - place - 1), waiting.shown())

    def instance_now(self):
        """The present instance in the present flow."""
        return self.bench.flow.find(self.instance.key)

    def shown(self):
        waiting.keep_counting()
        if self.mode == "taken" and self.said.judged:
            dom.after_paint(self.judge_rest)

    # ---- drafts

    def keep(self, name, value):
        """Notes a half-done answer; it is on the disk soon after the last keystroke."""
        self.draft[name] = value
        dom.cancel(self.timer)
        self.timer = dom.later(DRAFT_AFTER, self.save_draft)

    def save_draft(self, *_):
        self.timer = None
        if self.mode in ("open", "correct"):
            platform.putDraft(self.draft_name, texts.write(self.draft))

    def leave(self):
        if self.timer is not None:
            dom.cancel(self.timer)
            self.save_draft()

    def typed(self, name, text):
        self.keep(name, text)

    # ---- taking

    def value(self, arg):
        """The value of the event; FieldcheckError when it cannot be taken."""
        return {"done": True}

    def on_take(self, arg):
        window.performance.mark("fieldcheck take")
        try:
            value = self.value(arg)
        except FieldcheckError as error:
            self.refuse(error)
            return
        self.commit(value)

    def refuse(self, error):
        """Says why an answer cannot be taken; what was typed stands."""
        self.refused = error
        picks = [key(text, "pick", text, "unit") for text in getattr(error, "choices", ())]
        dom.fill("refusal", join([h("span", error.what), " ", h("span.note", error.mend), picks]))

    def commit(self, value):
        """Takes the answer: at once into the work and onto the glass, then to the disk."""
        dom.cancel(self.timer)
        self.timer = None
        corrects, reason = "", ""
        if self.mode == "correct":
            corrects = self.bench.slot(self.slot_key).event.hash
            reason = dom.chosen("reason")
            words = dom.value("reason-words").strip()
            reason = (words if reason == "other" else reason + (": " + words if words else "")) or "no reason given"
            dom.rename(address(step_place(self.bench, self.instance, self.index)))
        self.mode = "taken"
        self.bench.undoable = None
        self.bench.after_write = self.written
        self.bench.read.append(self.step["id"])
        self.bench.answer(self.step["id"], self.instance.round, self.index, self.step["kind"], value, self.spoken,
                          corrects, reason, self.draft_name)
        self.after_taking()

    def spoken(self):
        """(statement, printed) that goes into the event: the first verdict that this step feeds."""
        self.said.begin(self.candidates())
        return self.said.first()

    def after_taking(self):
        """Shows what it means; where it means nothing yet, goes on."""
        said = self.said.valued
        bad = [one for one in said if one.verdict.statement in ("fail", "conditional fail")]
        buzz(2 if bad else 1)
        if self.quick and not said and not self.said.queue:
            self.bench.undoable = (self.instance, self.index)
            aio.run(self.on_next(""))
            return
        dom.fill("instruction", self.instruction())
        dom.fill("work", self.taken())
        dom.scroll_up()
        self._set_thumb()
        dom.text("thumb", self.thumb[0])
        dom.attribute("thumb", "data-do", self.thumb[1])
        dom.focus("thumb")
        if said:
            dom.say(said[0].verdict.statement)
        window.performance.mark("fieldcheck taken")
        dom.after_paint(self.judge_rest)

    def after_glass(self, *_):
        """What may wait until the statement is seen: the path, the ruler, the band."""
        if self.main.screen is not self:
            return
        self.entries = len(self.bench.flow.open_entries)
        self.supply = self.bench.supply_now()
        self.ruler = self.ruler_html()
        self.main.top()
        self.main.foot()
        dom.focus("thumb")
        dom.fill("more", self.more())

    # ---- keys

    async def on_next(self, arg):
        dom.go(await next_place(self.bench, self))

    def on_correct(self, arg):
        dom.go(address(step_place(self.bench, self.instance, self.index) + ["correct"]))

    def on_left(self, arg):
        dom.go(address(step_place(self.bench, self.instance, self.index) + ["left"]))

    def on_undo_last(self, arg):
        """One tap takes back what was just taken: a confirmation is not done again, an answer is corrected."""
        instance, index = self.bench.undoable
        self.bench.undoable = None
        place = step_place(self.bench, instance, index)
        if instance.step["kind"] in ("confirm", "action"):
            self.bench.leave(instance.step["id"], instance.round, index, "wrong tap, taken back")
            dom.go(address(place))
        else:
            dom.go(address(place + ["correct"]))

    def on_defect(self, arg):
        dom.go(address(self.bench.place("defect")))

    def on_part(self, arg):
        dom.go(address(self.bench.place("part")))

    def on_list(self, arg):
        dom.go(address(self.bench.place()))

    def on_why(self, limit_key):
        self.said.open_reason(limit_key)


def buzz(times):
    """One short buzz, or two."""
    if store.rules.get("quiet"):
        return
    platform.buzz(40)
    if times == 2:
        dom.later(140, second_buzz)


def second_buzz(*_):
    platform.buzz(40)


def step_place(bench, instance, index=None):
    """Address (segments) of an instance, at one index where it has several."""
    if index is None:
        index = procedures.slot_for(instance)[2]
    if instance.step["kind"] == "table":
        return bench.place("step", instance.key, "cell", index)
    return bench.place("step", instance.key)


async def next_place(bench, screen=None):
    """Address (text) of what comes next in an item: the next open cell, the next step, or the item's page."""
    if screen is not None and screen.step["kind"] == "table":
        _, missing, _ = procedures.status(bench.work, screen.instance)
        if missing:
            return address(step_place(bench, screen.instance, missing[0]))
    current = bench.flow.current
    if current is not None:
        return address(step_place(bench, current))
    if bench.flow.complete and bench.outcome() is None:
        return address(bench.place("outcome"))
    return address(bench.place())
