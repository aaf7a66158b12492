"""Answers, units, distances and histories in words; and the words of the drawings."""

from fieldcheck.engine import figures, judging, units
from fieldcheck.engine.errors import FieldcheckError

from .. import store
from ..markup import h

SAID = {"confirm": "Done", "action": "Done", "photograph": "Photograph taken"}
WORDS = {
    "four-wire": "The current probes, bars, lie outside; the potential probes, rings, touch finger and stud inside "
                 "them; the measuring path runs through the contact.",
    "two-wire": "One probe on the finger, the other on its stud, as near the contact as they reach.",
    "leads-shorted": "The meter with the tips of both probes pressed together.",
    "contact-force": "The gauge pulls square to the finger, at its contact point, until the contact just opens.",
    "drum": "The drum seen from the pawl: fingers rest on the contact segments, the pawl turns it one tooth a pulse.",
    "bypass": "The breaker with a link across its terminals, and the dummy load in series.",
    "rectifier-cell": "One plate of the rectifier: the counter-electrode faces the spring washer; probes on its two "
                      "tags.",
    "gear-points": "Where oil belongs: both ends of each shaft, a trace on the teeth, none on the commutator.",
}


def value_words(one):
    """The limit of an abort: "5 A"."""
    at_most = str(one.get("at_most") or "")
    unit = one.get("unit")
    return at_most + ("\u202f" + units.symbol_text(units.unit(unit)) if unit else "") if at_most else ""


def unit_text(name):
    """Printed form of a unit key; "" where there is none."""
    if not name:
        return ""
    try:
        return units.symbol_text(units.unit(name))
    except FieldcheckError:
        return name


def range_text(name):
    """A meter's range as it is printed: "5 kohm" is "5 kΩ"."""
    number, blank, unit = name.partition(" ")
    return number + ("\u202f" + unit_text(unit) if blank else "")


def choice_label(choices, chosen):
    """The label of a choice's id."""
    for one in choices or ():
        if one["id"] == chosen:
            return one["label"]
    return "Not known" if chosen == "unknown" else chosen


def answer_text(step, column, value):
    """An answer in words: "20.4 mΩ", "Silver", "Done"."""
    kind = step["kind"]
    if value.get("unknown"):
        return "Not marked"
    if kind == "choice" or "choice" in value:
        choices = step.get("choices") or (step.get("field") or {}).get("choices")
        return choice_label(choices, value["choice"])
    if kind == "sequence":
        if value.get("mode") == "count":
            return str(value["pulses"]) + " pulses, from " + value["start"] + " to " + value["end"]
        return value["start"] + ": " + " ".join(value["seen"])
    if kind == "nameplate":
        return value["text"] + unit_end(value.get("unit"), value["text"])
    if "text" in value:
        shown = "; ".join(value["texts"]) if value.get("texts") else value["text"]
        return shown + unit_end(value.get("unit") or column.get("unit"), shown)
    remark = value.get("remark") or ""
    return (SAID.get(kind) or "Done") + (", " + remark if remark else "")


def unit_end(unit, text):
    """The unit after a value that was typed without one."""
    if not text or text[-1] not in "0123456789.," or not unit:
        return ""
    return "\u202f" + unit_text(unit)


def history(slot, step, column):
    """All that was ever answered here, newest last; nothing is erased."""
    rows = []
    for event in slot.history:
        at = store.local_time(store.instant(event.at))[11:16]
        who = store.person_name(event.person)
        if event.type == "step.left":
            text = "not done: " + event.data["reason"]
        else:
            text = answer_text(step, column, event.data["value"])
        reason = event.data.get("reason") if event.type == "answer.corrected" else ""
        counts = event is slot.event
        words = at + " " + text + (", " + reason if reason else "") + (", " + who if who else "")
        rows.append(h("li", words if counts else h("s", words)))
    return h("details.background", h("summary", "Corrected; all entries"), h("ol.history", rows))


def distance_words(work, judged, last):
    """How far the value is from its limit, and the previous season's value; only after Take."""
    verdict = judged.verdict
    if verdict.value is None or verdict.bound:
        return ""
    unit, convert = judging.display(work, judged)
    gaps = []
    for edge in (verdict.at_least, verdict.at_most):
        if edge is not None:
            gaps.append(abs(convert(edge) - convert(verdict.value)))
    words = []
    if gaps and min(gaps) == 0.0:
        words.append("on the limit")
    elif gaps:
        words.append(figures.significant(min(gaps), 2) + ("\u202f" + unit if unit else "") + " from the limit")
    if last is not None:
        words.append("last time " + figures.significant(convert(last), 3) + ("\u202f" + unit if unit else ""))
    return "; ".join(words)
