"""Answers -> values: what a name in a formula stands for, for one item, one round and one row of a table.

A `Lookup` notes what it was asked for, so that a verdict knows which meters took part, which corrections were made,
and whether a reading is older than the service that should have come before it.
"""

import math

from fieldcheck.engine import entry, events, meters, units
from fieldcheck.engine.errors import FieldcheckError, OutOfRange
from fieldcheck.engine.figures import parse_decimal
from fieldcheck.engine.formulas import Bound, MissingInput, evaluate
from fieldcheck.engine.measured import influence

ROOT3 = math.sqrt(3.0)

CONDITIONS = {
    "ambient": ("temperature", "ambient temperature", 0.5),
    "humidity": ("humidity", "relative humidity", 0.05),
    "supply_voltage": ("voltage", "supply voltage", 0.0),
    "supply_frequency": ("frequency", "supply frequency", 0.0),
}
"""name -> (quantity, label, half-width in SI of an instrument not entered as a meter, rectangular: PRACTICE)."""


MOST_ROWS = 500
"""A table longer than this is a slip of the thumb.  One of no row would leave each of its limits out unseen."""


def rows_of(work, step):
    """The row ids of a table or the single "" of another step; MissingInput when their number is not known."""
    rows = step.get("rows")
    if not rows:
        return [""]
    if rows.get("labels"):
        return rows["labels"]
    count = nameplate_value(work, rows["from"])
    if count < 1.0 or count > MOST_ROWS or float(int(count)) != count:
        raise MissingInput(["nameplate: " + nameplate_field(work, rows["from"])["label"]
                            + " (a whole number from 1 to " + str(MOST_ROWS) + ")"])
    return [str(i + 1) for i in range(int(count))]


def columns_of(step):
    """The columns of a table; a step without a table is its own single column with the id ""."""
    return step["columns"] if step["kind"] == "table" else [dict(step, id="")]


def index_of(row, column):
    """The index of one cell as it stands in events."""
    return row + "/" + column if column else row


def nameplate_field(work, name):
    """The field of the procedure's nameplate list, or None."""
    for field in work.part["nameplate"]:
        if field["id"] == name:
            return field
    return None


def nameplate_value(work, name):
    """Value of a nameplate field in SI (or the choice's id); what unknown means is the rule's."""
    field = nameplate_field(work, name)
    given = work.nameplate.get(name)
    if given is None:
        raise MissingInput(["nameplate: " + field["label"]])
    if given.get("unknown"):
        unknown = field["unknown"]
        if unknown["then"] == "not judged":
            raise MissingInput(["nameplate: " + field["label"] + " (not marked)"])
        given = unknown
    if field.get("choices"):
        return given.get("choice") or given["text"]
    if field["quantity"] == "count":
        return parse_decimal(given["text"])
    return one_figure(given, field["quantity"], field.get("unit"), "nameplate: " + field["label"])


def typed(value, quantity, unit):
    """The Entry of a value {"text", "unit"?}; unit: what is meant when none was typed."""
    return entry.read(value["text"], quantity, default_unit=value.get("unit") or unit)


def one_figure(value, quantity, unit, label):
    """The SI value of what must be a single figure; MissingInput for several, or for a mere bound ("OL", ">5 A")."""
    read = typed(value, quantity, unit)
    if len(read.values) != 1 or read.values[0].bound:
        raise MissingInput([label + " (a single figure)"])
    return float(read.values[0].base)


class Lookup:
    """name -> value, for one round and one row of one table ("" = the whole item).

    Inside a row the table's columns, and values computed for each of its rows, are that row's; all else is the whole
    item's.

    used: list of (step id, index, round, Answer); states: the state of each meter that took part; notes: corrections
    and assumptions in words.
    """

    def __init__(self, work, number, row="", table=""):
        self.work = work
        self.number = number
        self.row = row
        self.table = table
        self.used = []
        self.states = []
        self.notes = []
        self._values = {}

    def __call__(self, name):
        """The value of a name; MissingInput when it has not been taken."""
        if name in self._values:
            return self._values[name]
        value = self._find(name)
        self._values[name] = value
        return value

    def _find(self, name):
        work = self.work
        if name.startswith("each "):
            return self._every(name[5:])
        if name in CONDITIONS:
            return self._condition(name)
        if name in work.values:
            return self._derived(work.values[name])
        step_id, _, column = name.partition(".")
        if step_id in work.steps:
            return self._of_step(work.steps[step_id], column)
        if nameplate_field(work, name) is not None:
            return self._plate(name)
        raise FieldcheckError('the formula names "' + name + '", which is nothing in this procedure')

    def _plate(self, name):
        value = nameplate_value(self.work, name)
        if self.work.nameplate[name].get("unknown"):
            field = nameplate_field(self.work, name)
            unknown = field["unknown"]
            self.notes.append(field["label"] + " is not marked: " + unknown["text"] + _spaced(unknown.get("unit"))
                              + " assumed (" + unknown.get("tag", "PRACTICE") + ")")
        return value

    def _condition(self, name):
        quantity, label, half_width = CONDITIONS[name]
        key = name.replace("supply_", "")
        given = self.work.conditions.get(key)
        if not given:
            raise MissingInput([label])
        value = one_figure(given, quantity, None, label)
        return influence(value, half_width / ROOT3, label) if half_width else value

    def _derived(self, value):
        each = value.get("each") or ""
        if each == self.table:
            return evaluate(value["formula"], self)
        if not each:
            return self._inside("", "", value)
        return [self._inside(row, each, value) for row in rows_of(self.work, self.work.step(each))]

    def _inside(self, row, table, value):
        """A value of another row or of the whole item; what it used counts as used here."""
        inner = Lookup(self.work, self.number, row, table)
        try:
            return evaluate(value["formula"], inner)
        finally:
            self._take_over(inner)

    def _take_over(self, inner):
        self.used += inner.used
        self.states += inner.states
        for note in inner.notes:
            if note not in self.notes:
                self.notes.append(note)

    def _of_step(self, step, column):
        kind = step["kind"]
        if kind == "sequence":
            return self._sequence(step, column)
        if kind == "choice":
            value = self._answer(step, "").value.get("choice") or "unknown"
            if value == "unknown":
                raise MissingInput([step["title"] + " (not known)"])
            return value
        if kind == "table":
            found = [one for one in step["columns"] if one["id"] == column]
            if not found:
                raise FieldcheckError('table "' + step["id"] + '" has no column "' + column + '"')
            if self.table == step["id"]:
                return self._reading(step, found[0], self.row)
            return [self._reading(step, found[0], row) for row in rows_of(self.work, step)]
        return self._reading(step, step, "")

    def _every(self, name):
        """The single readings behind a name, for median, maximum and the like."""
        step = self.work.steps.get(name)
        if step is None or step["kind"] not in ("measure", "timing"):
            return self(name)
        return self._reading(step, step, "", True)

    def _answer(self, step, index):
        found = self.work.newest(step["id"], self.number, index)
        if found is None:
            raise MissingInput([self._label(step, index)])
        self.used.append((step["id"], index, found[0], found[1]))
        return found[1]

    def _label(self, step, index):
        label = step["title"] + (" " + index if index else "")
        for key in (index, ""):
            for n in range(self.number, -1, -1):
                answer = self.work.at(step["id"], n, key)
                if answer is not None and answer.left:
                    return label + " (not done: " + answer.left + ")"
        slot = events.slot_key(step["id"], self.number, index)
        return label + (" (two answers, undecided)" if slot in self.work.conflicts else "")

    def _reading(self, step, column, row, every=False):
        """A reading as Measured, Bound or (every) a list of Measured."""
        index = index_of(row, column["id"] if step["kind"] == "table" else "")
        answer = self._answer(step, index)
        given = self.work.conditions.get("ambient")
        name = ("each" if every else "mean") + (given["text"] + (given.get("unit") or "") if given else "")
        if name not in answer.read:
            answer.read[name] = self._read(step, column, index, answer, every)
        state, value = answer.read[name]
        if state:
            self.states.append(state)
        return value

    def _read(self, step, column, index, answer, every):
        """(state of the meter or "", value) of an answer, computed once an answer."""
        value = answer.value
        number = readings_of(value, column["quantity"], column.get("unit"))
        slot = step["title"] + (" " + index if index else "")
        if step["kind"] == "timing" or column.get("timing"):
            if value.get("function") is None and value.get("meter") is None:
                return "", meters.stopwatch_value(number, slot)
        meter = self.work.meters.get(value.get("meter") or "")
        state = meters.meter_state(meter, answer.event.at if answer.event is not None else self.work.on)
        if column["quantity"] in UNMETERED:
            state = ""
        function = value.get("function") or column.get("meter") or ""
        named = value.get("range") or None
        bound = meters.bound_of(number, meter, function, named)
        if bound is not None:
            return state, Bound(bound[0], bound[1])
        read = meters.reading_list if every else meters.reading_value
        return state, read(number, meter, function, named, self._ambient(), slot, bool(column.get("two_wire")))

    def _ambient(self):
        given = self.work.conditions.get("ambient")
        return one_figure(given, "temperature", None, "ambient temperature") if given else None

    def _sequence(self, step, part):
        if part == "layout":
            return layout_of(self.work, step)["positions"]
        value = self._answer(step, "").value
        if "seen" not in value or "start" not in value:
            raise MissingInput([step["title"] + " (what the drum showed)"])
        if part == "pulses":
            return float(value.get("pulses") or len(value["seen"]))
        if part == "start":
            return value["start"]
        if part == "end":
            return value.get("end") or (value["seen"][-1] if value["seen"] else value["start"])
        if part == "seen":
            return value["seen"]
        return {"layout": layout_of(self.work, step)["positions"], "start": value["start"], "seen": value["seen"]}


UNMETERED = ("count", "ratio", "temperature difference", "viscosity", "penetration")
"""Quantities that a person counts, or reads off a scale or a data sheet, without a meter of the workshop."""


def layout_of(work, step):
    """The drum's layout: the step's own, or the one that a nameplate choice names."""
    layout = step["layout"]
    if layout.get("from"):
        return layout["layouts"][nameplate_value(work, layout["from"])]
    return layout


def readings_of(value, quantity, unit):
    """The Entry of an answer's value: {"text"} as typed, or {"texts": [...]} one repeat each."""
    if value.get("texts"):
        numbers = []
        bare = []
        for text in value["texts"]:
            read = typed({"text": text, "unit": value.get("unit")}, quantity, unit)
            numbers += list(read.values)
            if not read.values:
                bare.append(read)
        if bare and numbers:
            raise OutOfRange(*meters.MIXED_REPEATS)
        return bare[0] if bare else numbers
    if not value.get("text"):
        raise MissingInput(["a figure"])
    return typed(value, quantity, unit)


def _spaced(unit):
    return " " + units.symbol_text(units.unit(unit)) if unit else ""
