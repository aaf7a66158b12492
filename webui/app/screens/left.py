"""A step not done, with its reason."""

from .. import dom
from ..markup import field, h, join, options
from ..screen import Screen
from . import parts_of
from .step import next_place

REASONS = (("no access", "No access"), ("no time", "No time"), ("instrument missing", "Instrument missing"),
           ("not safe today", "Not safe today"), ("does not apply", "Does not apply here"), ("other", "Another reason"))


class Left(Screen):
    """Why a step (or one cell of a table) is left out."""

    stale_on_change = False

    def __init__(self, place, bench, instance, index):
        Screen.__init__(self, place)
        self.bench = bench
        self.instance = instance
        self.index = index
        self.supply = bench.supply_now()
        self.entries = len(bench.flow.open_entries)
        self.name = "Not done"
        self.thumb = ("Not done", "leave")

    def body(self):
        step = self.instance.step
        whole = []
        if step["kind"] == "table":
            whole = [options("What is left out", "whole", [("cell", "This reading only: " + self.index),
                                                           ("all", "The whole step")], "cell")]
        return h("div.screen", h("p.path", step["title"]), h("h1", "Not done"),
                 h("p.warn", parts_of.consequence(step)),
                 whole, options("Reason", "reason", REASONS, ""), field("In words", "words"),
                 h("p.refusal", {"id": "refusal", "role": "alert"}, ""))

    async def on_leave(self, arg):
        reason = dom.chosen("reason")
        words = dom.value("words").strip()
        if not reason or (reason == "other" and not words):
            dom.fill("refusal", join(["Choose a reason, or give it in words."]))
            return
        text = words if reason == "other" else reason + (": " + words if words else "")
        step = self.instance.step
        index = self.index
        if step["kind"] == "table" and dom.chosen("whole") == "all":
            index = self.instance.index
        if step["kind"] != "table":
            index = self.instance.index or self.index
        self.bench.leave(step["id"], self.instance.round, index, text)
        dom.go(await next_place(self.bench), True)


