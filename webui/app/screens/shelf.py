"""The note that names the lubricant: picked from the workshop's shelf list, which then stands half typed in the steps
that ask for its data, so that each is only looked at and taken."""

from browser import window

from fieldcheck.engine import events, texts

from .. import dom, store
from ..markup import NOTHING, h, join, key
from .simple import Note
from .words import choice_label

platform = window.platform
STEP = "lubricant_named"
UNKNOWN = ("unknown", "not-known", "nothing-known")


class ShelfNote(Note):
    """draft: text; oil, grease: ids of what was picked."""

    def inputs(self):
        return join([h("div", {"id": "shelf"}, self.shelf()), Note.inputs(self)])

    def shelf(self):
        """One key a tin, oils before greases; what is picked is pressed."""
        rows = []
        for kind in ("oil", "grease"):
            for data in store.state.workshop.all("lubricant"):
                if data.get("type") == kind:
                    rows.append(self.tin(data, kind))
        if not rows:
            return NOTHING
        return h("div.choices", {"role": "group", "aria-label": "Shelf list"}, h("p.note", "On the shelf"), rows)

    def tin(self, data, kind):
        """The key of one tin."""
        picked = self.draft.get(kind) == data["lubricant"]
        return key([h("span.where", data["name"]), h("span.note", about(data))],
                   "pick_tin", data["lubricant"], "row" + (".now" if picked else ""),
                   aria_pressed="true" if picked else "false")

    async def on_pick_tin(self, lubricant):
        """Picks a tin, or puts it back; what the list says of it becomes the draft of the steps that ask for it."""
        data = store.state.workshop.get("lubricant", lubricant)
        kind = data["type"]
        before = store.state.workshop.get("lubricant", self.draft.get(kind) or "")
        again = self.draft.get(kind) == lubricant
        self.keep(kind, "" if again else lubricant)
        words = renamed(dom.value("text").strip(), before["name"] if before is not None else "",
                        "" if again else data["name"])
        self.keep("text", words)
        dom.set_value("text", words)
        dom.fill("shelf", self.shelf())
        said = {} if again else said_of(data)
        for name in STEPS[kind]:
            await self.put_draft(name, said.get(name) or "", data["name"])

    async def put_draft(self, name, text, tin):
        """Puts a text of the shelf list into a step's draft, or takes the draft away where the list says nothing."""
        step = self.bench.work.steps.get(name)
        if step is None:
            return
        place = self.bench.job.id + "/" + self.bench.item.id + "/" + events.slot_key(name, 0, "")
        if step["kind"] == "choice":
            text = chosen_of(step, text)
            draft = {"choice": text}
        else:
            number, _, unit = text.partition(" ")
            draft = {"entry": number, "unit": unit or step.get("unit") or ""}
        if not text:
            await platform.dropDraft(place)
            return
        shown = choice_label(step.get("choices"), text) if step["kind"] == "choice" else draft["entry"]
        draft["listed"] = tin + ": " + shown
        await platform.putDraft(place, texts.write(draft))


def chosen_of(step, text):
    """The id of the choice that the shelf list means, "" where it means none."""
    known = [one["id"] for one in step["choices"]]
    if text in known:
        return text
    for one in UNKNOWN:
        if text == "unknown" and one in known:
            return one
    return ""


def renamed(text, old, new):
    """The note's text with one name in the place of another; typed words stay."""
    if old and old in text:
        return text.replace(old, new).strip(" ;")
    return text + ("; " if text and new else "") + new


def about(data):
    """One line of what the shelf list says."""
    words = [data["type"], str(data.get("base") or "base not known").replace("-", " ")]
    if data.get("grade"):
        words.append("VG " + digits(data["grade"]))
    if data.get("nlgi"):
        words.append("NLGI " + data["nlgi"])
    return ", ".join(words)


def digits(text):
    """The digits of "VG 22"."""
    return "".join([ch for ch in text if ch in "0123456789"])


STEPS = {"oil": ("oil_data", "oil_base", "oil_v40", "oil_v100", "oil_index", "oil_grade"),
         "grease": ("grease", "grease_base", "grease_v40", "grease_v100")}
"""What is asked about each, by the ids of the steps."""


def said_of(data):
    """Step id -> text of the shelf list about an oil or a grease."""
    v40, v100, grade = data.get("v40") or "", data.get("v100") or "", digits(data.get("grade") or "")
    if data["type"] == "grease":
        return {"grease": "nlgi-" + data["nlgi"] if data.get("nlgi") else "unknown",
                "grease_base": data.get("base") or "unknown", "grease_v40": v40, "grease_v100": v100}
    index = data.get("index") or ""
    known = "two-points" if v40 and v100 else "index" if v40 and index else "grade" if grade else "unknown"
    return {"oil_data": known, "oil_base": data.get("base") or "unknown", "oil_v40": v40, "oil_v100": v100,
            "oil_index": index, "oil_grade": grade}
