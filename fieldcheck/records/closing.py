"""The last pages of a record: reasoning, instruments, cautions, photographs, what was corrected, course, proofs."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import Any

from fieldcheck.engine import judging, meters, readings, verdicts
from fieldcheck.records.answers import slot_key, title_of, untouched, value_text
from fieldcheck.records.bench import looked_at, margin_of
from fieldcheck.records.hand import NOT_NOTED, Hand
from fieldcheck.records.letter import Signature, signature
from fieldcheck.records.replay import ItemAgain
from fieldcheck.records.words import day_text

Data = dict[str, Any]  # JSON of many kinds
MOST_SHARES = 5
COURSE = {
    "job.opened": "job opened", "job.handed": "handed to a phone", "item.added": "item added on the spot",
    "conditions.taken": "conditions taken", "caution.acknowledged": "cautions acknowledged",
    "defect.found": "defect noted", "part.used": "part used", "outcome.given": "outcome given",
    "customer.acknowledged": "customer's acknowledgement", "job.signed": "signed", "decision.made": "decision made",
    "record.issued": "record issued", "set.declared": "number of repeats fixed",
}
OWN_RESULTS = ("All readings were taken by the persons named in this record; no result from others is included. "
               "No sampling: every item named was worked on, or is marked as not examined.")
RULES = {"simple": "simple acceptance", "guarded": "guarded acceptance",
         "probability": "acceptance by conformance probability"}


@dataclass(frozen=True)
class Argument:
    """How one verdict came about. lines: [(label, text)]; margin: citation, tag, gloss."""

    title: str
    statement: str
    lines: list[tuple[str, str]]
    margin: list[str]


@dataclass(frozen=True)
class Instrument:
    """A meter used. used: functions with ranges and specification; state: of its calibration when it was used."""

    tag: str
    name: str
    used: list[str]
    calibrated: str
    due: str
    certificate: str
    state: str


@dataclass(frozen=True)
class Caution:
    """signal: danger, warning, caution or notice; acknowledged: who, when, for which item and supply state."""

    signal: str
    title: str
    text: str
    acknowledged: list[str]


@dataclass(frozen=True)
class Picture:
    """A photograph by the SHA-256 of its original."""

    sha256: str
    caption: str


@dataclass(frozen=True)
class Change:
    """What was replaced, by what, why, who and when (local, with offset from UTC)."""

    when: str
    who: str
    what: str
    old: str
    new: str
    reason: str


# ---- reasoning

def arguments(hand: Hand, one: ItemAgain, number: int) -> list[Argument]:
    """The reasoning of every verdict of an item that had something to judge; those by what was seen in one."""
    if untouched(one):
        return []
    computed: list[tuple[Any, Any]] = []
    seen: list[tuple[Any, Any]] = []
    for _, found, left in one.rows:
        (seen if looked_at(one, left or found) else computed).append((found, left))
    told = [_argument(hand, one, found, left, number) for found, left in computed]
    return [*told, _seen(hand, one, seen, number)] if seen else told


def _label(judged: Any) -> str:
    return str(judged.limit["label"]) + (f" {judged.row}" if judged.row not in ("", "?") else "")


def _seen(hand: Hand, one: ItemAgain, rows: list[tuple[Any, Any]], number: int) -> Argument:
    """Limits that rest on what a person saw and chose: nothing to compute, a line each."""
    lines, margin, worst = [], dict[str, None](), verdicts.PASS
    for found, left in rows:
        last = left or found
        said = judging.explained(one.work, last)
        before = f"; as found {_seen_text(one, found)}" if found is not None and left is not None else ""
        note = f". {said['note']}" if said["note"] else ""
        lines.append((_label(last), hand.number(_seen_text(one, last) + before + note)))
        margin.update(dict.fromkeys(margin_of(hand, said)))
        worst = verdicts.worse(worst, last.verdict.statement)
    return Argument(f"{number} · Judged by what was seen", worst, lines, list(margin))


def _seen_text(one: ItemAgain, judged: Any) -> str:
    return f"{looked_at(one, judged)}: {judged.verdict.statement}"


def _argument(hand: Hand, one: ItemAgain, found: Any, left: Any, number: int) -> Argument:
    last = left or found
    said = judging.explained(one.work, last)
    accepted = f", {said['limit']}" if said["limit"] else ""
    lines = [
        ("Verdict", f"{said['value'] or 'no value'}: {said['statement']}, {said['reason']}"),
        ("As found", _as_found(one, found) if left is not None and found is not None else ""),
        ("Formula", f"{said['formula']} = {said['formula_with_numbers']}" if said["formula"] else ""),
        ("Corrections", "; ".join([*said["corrections"], *said["notes"]])),
        ("Rule", "; ".join([text for text in (_rule(last.verdict.rule, said["guard"]), _probability(said)) if text])),
        ("Uncertainty", ". ".join([text for text in (said["coverage"], _budget(said["budget"])) if text])),
        ("To settle it", (said["settle"] or {}).get("text", "")),
        ("Note", said["note"]),
    ]
    told = [(label, hand.number(text)) for label, text in lines if text]
    return Argument(f"{number} · {_label(last)}{hand.number(accepted)}", said["statement"], told, margin_of(hand, said))


def _rule(rule: str, guard: str) -> str:
    return guard if guard.startswith(RULES[rule]) else "; ".join([text for text in (RULES[rule], guard) if text])


def _as_found(one: ItemAgain, found: Any) -> str:
    value = judging.printed(one.work, found) or "no value"
    return f"{value}: {judging.explained(one.work, found)['statement']}, {found.verdict.reason}"


def _budget(rows: list[Data]) -> str:
    shown = [f"{row['name']} {row['share']} ({row['contribution']})" for row in rows[:MOST_SHARES]]
    rest = len(rows) - MOST_SHARES
    return "; ".join(shown) + (f"; {rest} smaller" if rest > 0 else "")


def _probability(said: Data) -> str:
    """Conformance probability and risk, where there was an uncertainty to compute them from."""
    if not said["probability"] or not said["budget"]:
        return ""
    risk = f", risk of a wrong accept {said['wrong_accept']}" if said["wrong_accept"] else ""
    return f"conformance {said['probability']}{risk}"


# ---- instruments and conditions

def instruments(hand: Hand) -> list[Instrument]:
    """Every meter that a reading or the conditions of this job name, by its tag."""
    used: dict[str, dict[tuple[str, str], None]] = {}
    first: dict[str, str] = {}
    for one in hand.again.items:
        for answer in one.work.answers.values():
            meter = answer.value.get("meter") if not answer.left else ""
            if meter:
                key = (answer.value.get("function") or "", _range(one, answer))
                used.setdefault(meter, {})[key] = None
                first[meter] = min(first.get(meter, answer.event.at), answer.event.at)
    conditions = hand.again.job.conditions.event
    if conditions is not None and conditions.data.get("meter"):
        used.setdefault(conditions.data["meter"], {})
        first.setdefault(conditions.data["meter"], conditions.at)
    found = [_instrument(hand, meter, list(keys), first[meter]) for meter, keys in used.items()]
    return sorted(found, key=lambda instrument: instrument.tag)


def _range(one: ItemAgain, answer: Any) -> str:
    """The range named with a reading, else the one that the engine takes for it."""
    if answer.value.get("range"):
        return str(answer.value["range"])
    meter = one.work.meters.get(answer.value["meter"])
    function = answer.value.get("function") or ""
    try:
        kind = meters.function_of(meter, function).quantity
        numbers = meters.numbers_of(readings.readings_of(answer.value, kind, None))
        size = max([abs(float(number.base)) for number in numbers])
        return str(meters.range_of(meter, function, None, size).name)
    except Exception:  # an over-range reading or an unknown function: the verdict says so, here it has no range
        return ""


def _instrument(hand: Hand, meter: str, keys: list[tuple[str, str]], at: str) -> Instrument:
    data = hand.entry("meter", meter)
    if not data:
        return Instrument(meter[:8], "not entered in the workshop", [], "", "", "", meters.UNKNOWN)
    state = meters.meter_state(meters.meter({**data, "id": meter}), at)
    return Instrument(
        tag=data["tag"], name=data.get("name") or "",
        used=[hand.number(_specification(data, function, name)) for function, name in sorted(keys)],
        calibrated=data.get("calibrated") or NOT_NOTED, due=data.get("due") or NOT_NOTED,
        certificate=data.get("certificate") or NOT_NOTED, state=state,
    )


def _specification(data: Data, function: str, name: str) -> str:
    for one in data.get("functions") or []:
        for span in one.get("ranges") or [] if one["function"] == function else []:
            if span["name"] == name:
                accuracy = " + ".join([span["gain"]] if span.get("gain") else [])
                if span.get("counts"):
                    accuracy = " + ".join([*([accuracy] if accuracy else []), f"{span['counts']} counts"])
                if span.get("class"):
                    accuracy = f"class {span['class']} of {span.get('full_scale') or span['upto']}"
                step = f", resolution {span['resolution']}" if span.get("resolution") else ""
                return f"{function}, {name} range: {accuracy or 'accuracy not stated'}{step}"
    return f"{function}, range not known" if function else "function not noted"


def conditions(hand: Hand) -> list[tuple[str, str]]:
    """Ambient temperature, humidity, supply voltage and frequency, whether taken or not, and when."""
    event = hand.again.job.conditions.event
    taken = event.data if event is not None else {}
    names = (("ambient", "Ambient temperature"), ("humidity", "Relative humidity"), ("voltage", "Supply voltage"),
             ("frequency", "Supply frequency"))
    rows = [(label, hand.amount(taken.get(key)) or "not taken") for key, label in names]
    meter = hand.entry("meter", taken.get("meter") or "")
    if event is not None:
        rows.append(("Taken", f"{hand.when(event)}, {hand.who(event)}" + (f", {meter['tag']}" if meter else "")))
    return rows


def _conditions_text(hand: Hand, event: Any) -> str:
    return ", ".join([hand.amount(event.data[key]) for key in ("ambient", "humidity", "voltage", "frequency")
                      if event.data.get(key)])


# ---- cautions, photographs

def cautions(hand: Hand) -> list[Caution]:
    """The cautions of the methods used, in the order read, with who acknowledged them."""
    texts: dict[str, Data] = {}
    said: dict[str, list[str]] = {}
    for number, one in enumerate(hand.again.items, 1):
        for caution in one.part.get("cautions") or []:
            texts.setdefault(caution["id"], caution)
        for event in one.item.cautions:
            for name in event.data["cautions"]:
                said.setdefault(name, []).append(
                    f"item {number}, {event.data['supply']}: {hand.who(event)}, {hand.when(event)}")
    return [Caution(one["signal"], one["title"], one["text"], said.get(name, [])) for name, one in texts.items()]


def pictures(hand: Hand) -> list[Picture]:
    """The photographs that count, in the order of the items."""
    found = []
    for number, one in enumerate(hand.again.items, 1):
        for key, slot in one.item.slots.items():
            event = slot.event
            taken = event is not None and event.type != "step.left" and event.data["kind"] == "photograph"
            if taken and event.data["value"].get("blob"):
                text = event.data["value"].get("caption") or title_of(hand, one, key)
                found.append(Picture(event.data["value"]["blob"], f"Item {number}: {text}. {hand.when(event)}"))
        found += [Picture(event.data["blob"], f"Item {number}: {event.data['what']}. {hand.when(event)}")
                  for event in one.item.defects if event.data.get("blob")]
    return found


# ---- what was corrected, and the course of the job

def changes(hand: Hand) -> list[Change]:
    """Every answer that took the place of another, and every decision between two; nothing was erased."""
    found = []
    for number, one in enumerate(hand.again.items, 1):
        found += [(new.order, _other_outcome(hand, number, old, new)) for old, new in pairs(one.item.outcomes.history)]
        for key, slot in one.item.slots.items():
            for old, new in pairs(slot.history):
                reason = new.data.get("reason") or "given anew, no reason asked"
                what = f"Item {number}, {title_of(hand, one, slot_key(new))}"
                found.append((new.order, Change(hand.when(new), hand.who(new), what, value_text(hand, one, old),
                                                value_text(hand, one, new), reason)))
            if slot.rivals:
                found.append((slot.rivals[-1].order, _undecided(hand, one, number, key, slot)))
    for old, new in pairs(hand.again.job.conditions.history):
        found.append((new.order, Change(hand.when(new), hand.who(new), "Conditions", _conditions_text(hand, old),
                                        _conditions_text(hand, new), "taken again")))
    for event in hand.again.job.decisions:
        found.append((event.order, Change(hand.when(event), hand.who(event), "Decision between two answers", "",
                                          f"kept {event.data['keep'][:16]}…", event.data["reason"])))
    return [change for _, change in sorted(found, key=lambda pair: pair[0])]


def _other_outcome(hand: Hand, number: int, old: Any, new: Any) -> Change:
    return Change(hand.when(new), hand.who(new), f"Item {number}, outcome", _outcome_text(old), _outcome_text(new),
                  "given anew")


def _outcome_text(event: Any) -> str:
    return ": ".join([text for text in (event.data["outcome"], event.data["reason"]) if text])


def pairs(history: list[Any]) -> list[tuple[Any, Any]]:
    """Each entry with the one that took its place."""
    return list(pairwise(history))


def _undecided(hand: Hand, one: ItemAgain, number: int, key: str, slot: Any) -> Change:
    texts = " against ".join(value_text(hand, one, event) for event in slot.rivals)
    return Change("", "", f"Item {number}, {title_of(hand, one, key)}", texts, "undecided",
                  "two answers, neither of which saw the other")


def course(hand: Hand) -> list[tuple[str, str, str]]:
    """(when, who on which device, what) of all that was no reading; readings carry their times themselves."""
    numbers = {one.item.id: str(number) for number, one in enumerate(hand.again.items, 1)}
    lines = []
    for event in hand.again.job.events:
        if event.type not in COURSE:
            continue
        item = numbers.get(event.data.get("item") or "", "")
        detail = _detail(hand, event)
        what = COURSE[event.type] + (f", item {item}" if item else "") + (f": {detail}" if detail else "")
        device = hand.name("device", event.device)
        person = hand.who(event)
        lines.append((hand.when(event), person if person == device else f"{person}, {device}", what))
    return lines


def _detail(hand: Hand, event: Any) -> str:
    data = event.data
    if event.type == "job.handed":
        return ", ".join([hand.name("device", data["device"]), hand.name("person", data["person"])])
    for key in ("outcome", "what", "supply", "name", "state", "number", "meaning", "reason"):
        if data.get(key):
            return str(data[key])
    return ""


def signatures(hand: Hand) -> list[Signature]:
    """Every signing of the job, oldest first; the last covers this record."""
    ordered = sorted(hand.again.job.signings, key=lambda event: event.order)
    return [signature(hand, event) for event in ordered]


def history(hand: Hand) -> list[str]:
    """Earlier records of this customer, to which this one is tied by a consistency proof."""
    return [f"Record {one['number']}, issued {day_text(one['issued'], one['offset'])}: journal of "
            f"{one['size']} events then, {hand.data['tree']['size']} now" for one in hand.data["earlier"]]
