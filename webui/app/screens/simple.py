"""The short kinds of step: confirm, choice, note, action, and the nameplate's questions."""

from fieldcheck.engine import entry
from fieldcheck.engine.errors import EntryError

from .. import dom
from ..markup import NOTHING, area, field, h, join, key, options
from .measure import Measure
from .step import Step


class Confirm(Step):
    """Done or not done; a hold point, or the change of supply state."""

    label = "Done"
    quick = True

    def inputs(self):
        if self.step["id"] != "supply":
            return NOTHING
        before = self.step.get("from")
        return h("p.change", h("span.note", (before + " to ") if before else ""), self.step["supply"])


class Choice(Step):
    """One of several answers."""

    quick = True

    def inputs(self):
        rows = [(one["id"], one["label"]) for one in self.step["choices"]]
        answer = self.answer()
        old = answer.value.get("choice") if answer is not None and not answer.left else ""
        return options(self.step["title"], "choice", rows, self.draft.get("choice") or old or "", True)

    def value(self, arg):
        chosen = dom.chosen("choice")
        if not chosen:
            raise EntryError("nothing is chosen yet", "", "choose one of the answers")
        return {"choice": chosen}


class Note(Step):
    """Words."""

    quick = True

    def inputs(self):
        answer = self.answer()
        old = answer.value.get("text") if answer is not None and not answer.left else ""
        return area("Note", "text", self.draft.get("text") or old or "")

    def value(self, arg):
        text = dom.value("text").strip()
        if not text:
            raise EntryError("nothing was written", "", "write a word, or note it as not done")
        return {"text": text}


class Action(Step):
    """Something done with the hands; what was used up is noted beside it."""

    label = "Done"
    quick = True

    def inputs(self):
        return h("details.background", {"open": bool(self.draft.get("used"))},
                 h("summary", "Used up, remark"),
                 field("Consumable", "used", self.draft.get("used") or ""),
                 field("Amount", "amount", self.draft.get("amount") or ""),
                 field("Remark", "remark", self.draft.get("remark") or ""))

    def value(self, arg):
        used = dom.value("used").strip()
        value = {"done": True, "consumables": [], "remark": dom.value("remark").strip()}
        if used:
            value["consumables"].append({"name": used, "amount": dom.value("amount").strip()})
        return value


class PlateChoice(Choice):
    """A nameplate question with fixed answers."""

    def inputs(self):
        rows = [(one["id"], one["label"]) for one in self.step["field"]["choices"]]
        rows.append(("unknown", "Not marked, not known"))
        answer = self.answer()
        old = ""
        if answer is not None and not answer.left:
            old = answer.value.get("choice") or "unknown"
        return options(self.step["title"], "choice", rows, self.draft.get("choice") or old, True)

    def value(self, arg):
        chosen = Choice.value(self, arg)["choice"]
        return {"unknown": True} if chosen == "unknown" else {"choice": chosen}


class Plate(Measure):
    """A nameplate question with a value."""

    quick = True

    def __init__(self, place, bench, instance, index, correcting, draft):
        instance.step.setdefault("quantity", instance.step["field"]["quantity"])
        instance.step.setdefault("unit", instance.step["field"].get("unit"))
        Measure.__init__(self, place, bench, instance, index, correcting, draft)

    def inputs(self):
        words = h("span.note", unknown_words(self.step["field"]))
        return join([Measure.inputs(self), key(["Not marked, not known", words], "unknown", "", "meter-now")])

    def helper_keys(self):
        return NOTHING

    def meter_line(self):
        return NOTHING

    def rails(self):
        return None, None

    def moving_scale(self):
        return NOTHING

    def value(self, arg):
        if arg == "unknown":
            return {"unknown": True}
        text = dom.value("entry").strip()
        entry.read(text, self.step["quantity"], default_unit=self.unit or None, allow=())
        value = {"text": text}
        if self.unit:
            value["unit"] = self.unit
        return value

    def on_unknown(self, arg):
        self.on_take("unknown")


def unknown_words(plate):
    """What then happens, in words."""
    unknown = plate["unknown"]
    if unknown["then"] == "not judged":
        return "what hangs on it is not judged"
    shown = str(unknown.get("text") or "")
    for one in plate.get("choices") or ():
        if one["id"] == shown:
            shown = one["label"]
    words = "worst case: " if unknown["then"] == "worst" else "then taken as "
    return words + shown + (" " + unknown["unit"] if unknown.get("unit") else "")
