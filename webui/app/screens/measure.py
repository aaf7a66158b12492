"""A reading: one big field, unit keys, the scale with its moving pointer, the meter."""

from browser import aio

from fieldcheck.engine import entry, formulas, judging, readings, scale, units
from fieldcheck.engine.errors import EntryError, FieldcheckError
from fieldcheck.engine.measured import value_of

from .. import dom, store
from ..markup import NOTHING, Html, address, h, join, key
from . import bench as bench_room
from .step import Step, step_place
from .words import answer_text, range_text, unit_text

POINTER_AFTER = 150     # milliseconds from the last keystroke until the pointer moves
SETS = (2, 3, 5, 10)
STATE_WORDS = {"overdue": "calibration overdue", "unknown": "no calibration date", "unchecked": "not checked today"}


class Measure(Step):
    """A measure step or one cell of a table."""

    def __init__(self, place, bench, instance, index, correcting, draft):
        Step.__init__(self, place, bench, instance, index, correcting, draft)
        self.pointer_timer = None
        self.echo = None
        self.unit = draft.get("unit") or self.column.get("unit") or ""
        self.function = self.column.get("meter") or ""
        used = store.rules.get("meters") or {}
        chosen = used.get("f " + self.function) or {}
        fit = [one["meter"] for one in bench.meters_for(self.function)]
        self.meter = draft.get("meter") or (chosen.get("meter") if chosen.get("meter") in fit else "")
        if not self.meter and "meter" not in draft and len(fit) > 0 and self.function:
            self.meter = fit[0]
        self.range = draft.get("range") or (chosen.get("range") or "" if self.meter == chosen.get("meter") else "")
        self.repeats = declared(bench.item, self.step["id"], instance.round) or int(self.column.get("repeats") or 1)
        if self.mode == "correct" and "entry" not in draft:
            old = self.answer().value
            self.draft["entry"] = "; ".join(old.get("texts") or []) or old.get("text") or ""
            self.unit = old.get("unit") or self.unit
            self.meter = old.get("meter") or ""
            self.range = old.get("range") or ""

    # ---- what is seen

    def inputs(self):
        if self.index == "?":
            return h("p.later", "How many rows there are is asked on the nameplate first.")
        wanted = NOTHING
        if self.repeats > 1:
            wanted = h("p.note", str(self.repeats) + " readings, a space or ; between them")
        quantity = self.column["quantity"]
        label = quantity[:1].upper() + quantity[1:]
        return join([
            h("p.entry", h("label", {"for": "entry"}, label),
              h("input" + (".long" if self.repeats > 1 else ""), {
                          "id": "entry", "name": "entry", "value": self.draft.get("entry") or "",
                          "inputmode": "decimal", "autocomplete": "off", "enterkeyhint": "done",
                          "aria-describedby": "refusal"}),
              h("span.unit-now", {"id": "unit-now"}, unit_text(self.unit))),
            self.unit_keys(), self.helper_keys(), wanted,
            h("div", {"id": "scale"}, self.moving_scale()),
            h("div", {"id": "meter"}, self.meter_line()),
            self.table_so_far()])

    def unit_keys(self):
        """One key a unit; it takes the reading in that unit."""
        names = units_offered(self.column)
        if len(names) < 2:
            return NOTHING
        rows = [key(unit_text(one) or "plain", "unit", one, "unit" + (".now" if one == self.unit else ""))
                for one in names]
        return h("div.units", rows)

    def helper_keys(self):
        """Characters that a number pad lacks."""
        keys = [("−", "−")]
        if self.function:
            keys += [("OL", "OL"), (">", ">")]
        if self.repeats > 1:
            keys.append(("next ;", "; "))
        return h("div.helpers", [key(label, "insert", text, "helper") for label, text in keys])

    def moving_scale(self):
        """The scale while one types: the pointer alone, on the limit's rails where this reading is judged itself."""
        number = None
        bound = ""
        text = (self.draft.get("entry") or "").strip()
        if text:
            try:
                read = entry.read(text, self.column["quantity"], default_unit=self.unit or None)
                if read.values:
                    number = float(read.values[-1].base)
                    bound = read.values[-1].bound
                elif read.kind == "over":
                    bound = ">"
            except FieldcheckError:
                number = None
        unit_name = self.column.get("unit") or ""
        shown = units.unit(unit_name) if unit_name else None
        low, high = self.rails()
        if number is None and not bound:
            return NOTHING                  # an empty scale would only suggest a value

        def turned(value):
            if value is None:
                return None
            return units.from_base(value, shown) if shown is not None else value

        words = "scale" if number is None else "the pointer stands at " + text
        return Html(scale.svg(turned(number), turned(low), turned(high), 0.0, 0.0, unit_text(unit_name), bound,
                              title=words))

    def rails(self):
        """(at least, at most) in SI of the limit on this very reading, as far as they are known already."""
        name = self.step["id"]
        if self.step["kind"] == "table":
            name = name + "." + self.column["id"]
        work = self.bench.work
        for limit in self.bench.part["limits"]:
            if limit["value"] != name or not judging.holds(work, limit):
                continue
            lookup = readings.Lookup(work, self.instance.round, bench_room.row_of(self.index))
            entry_now = judging.entry_on(limit, work.on)
            edges = []
            for side in ("at_least", "at_most"):
                edge = None
                if entry_now.get(side) is not None:
                    try:
                        edge = float(value_of(formulas.evaluate(entry_now[side], lookup)))
                    except FieldcheckError:
                        edge = None
                edges.append(edge)
            return edges[0], edges[1]
        return None, None

    def meter_line(self):
        """Which meter; one key opens the choice."""
        meter = self.bench.work.meters.get(self.meter)
        if not self.function and meter is None:
            return NOTHING
        if meter is None:
            words = "No meter named" if self.function else ""
        else:
            words = meter.tag + " " + meter.name + (", " + range_text(self.range) if self.range else "")
        state = state_of(self.bench, self.meter)
        return join([key([h("span", words), h("span.note", self.function), h("span.flagged", state) if state else None],
                         "meters", "", "meter-now", aria_expanded="false")])

    def more(self):
        """Besides the usual keys: another number of repeats, before the first is typed."""
        usual = Step.more(self)
        if self.mode == "open" and self.repeats > 1:
            return join([usual, h("div.more", {"id": "sets"}, key("Another number of readings", "sets", "",
                                                                  "quiet-key"))])
        return usual

    def on_sets(self, arg):
        """The choice of how many readings the set shall have."""
        dom.fill("sets", join([key(str(n), "set", str(n), "unit") for n in SETS]))

    async def on_set(self, n):
        """Declares the number of repeats; it stands in the record and is fixed before the first reading."""
        await self.bench.note("set.declared", {"step": self.step["id"], "round": self.instance.round, "n": int(n)})
        self.repeats = int(n)
        self.main.draw()
        self.shown()

    def on_meters(self, arg):
        """Opens the choice of meter and range."""
        rows = [key("No meter named", "meter", "", "row")]
        for data in self.bench.meters_for(self.function):
            state = state_of(self.bench, data["meter"])
            ranges = []
            for one in data["functions"]:
                if one["function"] == self.function:
                    ranges = one.get("ranges") or []
            rows.append(key([h("span.where", data["tag"] + " " + data["name"]), h("span.note", "range by size"),
                             h("span.flagged", state) if state else None], "meter", data["meter"] + " ", "row"))
            rows.append(h("div.ranges", [key(range_text(one["name"]), "meter", data["meter"] + " " + one["name"],
                                             "unit") for one in ranges]))
        dom.fill("meter", h("div.choices", {"role": "group", "aria-label": "Meter"}, rows))

    def on_meter(self, arg):
        self.meter, _, self.range = arg.partition(" ")
        self.keep("meter", self.meter)
        self.keep("range", self.range)
        dom.fill("meter", self.meter_line())

    def table_so_far(self):
        """What the table holds already, this cell marked."""
        step = self.step
        if step["kind"] != "table":
            return NOTHING
        return table_view(self.bench, self.instance, self.index)

    def shown(self):
        Step.shown(self)
        begun = self.known or bool(self.draft.get("entry")) and not self.draft.get("listed")
        if self.mode == "correct" or (self.mode == "open" and begun):
            dom.focus("entry")      # else the keyboard would hide what is to be read first

    def on_key(self, key_name, repeated):
        """A digit typed before the field has the focus goes into it."""
        if key_name not in ("Enter", " "):
            if self.mode in ("open", "correct"):
                dom.focus("entry")
            return False
        return Step.on_key(self, key_name, repeated)

    # ---- what happens

    def typed(self, name, text):
        self.keep(name, text)
        if name == "entry":
            dom.cancel(self.pointer_timer)
            self.pointer_timer = dom.later(POINTER_AFTER, self.move_pointer)
            if self.refused is not None:
                self.refused = None
                dom.fill("refusal", NOTHING)

    def move_pointer(self, *_):
        self.pointer_timer = None
        if self.mode in ("open", "correct") and self.main.screen is self:
            dom.fill("scale", self.moving_scale())

    def on_insert(self, text):
        dom.insert("entry", text)
        self.typed("entry", dom.value("entry"))

    def on_unit(self, name):
        """A unit key takes the reading, where one is typed."""
        self.unit = name
        self.keep("unit", name)
        if dom.value("entry").strip():
            self.on_take("")
        else:
            dom.text("unit-now", unit_text(name))
            dom.focus("entry")

    def on_pick(self, text):
        """One of the two ways in which an entry can be read."""
        dom.set_value("entry", text)
        self.keep("entry", text)
        self.on_take("")

    def value(self, arg):
        text = dom.value("entry").strip()
        read = entry.read(text, self.column["quantity"], default_unit=self.unit or None)
        count = max(1, len(read.values))
        if self.repeats > 1 and read.kind == "repeats" and count != self.repeats or \
                self.repeats > 1 and read.kind == "value":
            raise EntryError(str(self.repeats) + " readings are wanted here, " + str(count) + " typed", "",
                             "type the rest; the number was fixed before the first")
        if self.repeats == 1 and count > 1:
            raise EntryError("one reading is wanted here, " + str(count) + " typed", "", "type one")
        value = {"text": text}
        if self.unit:
            value["unit"] = self.unit
        if self.meter:
            value["meter"] = self.meter
            value["function"] = self.function
            if self.range:
                value["range"] = self.range
            self.check_meter(read)
        self.remember_meter()
        return value

    def check_meter(self, read):
        """Refuses a reading that the named range or meter cannot show."""
        from fieldcheck.engine import meters
        meter = self.bench.work.meters[self.meter]
        size = 0.0
        for number in read.values:
            if number.bound == "":
                size = max(size, abs(float(number.base)))
        meters.range_of(meter, self.function, self.range or None, size)

    def remember_meter(self):
        """The meter last used for a function is the one offered next."""
        if not self.function:
            return
        used = store.rules.setdefault("meters", {})
        before = used.get("f " + self.function)
        now = {"meter": self.meter, "range": self.range}
        if before != now:
            used["f " + self.function] = now
            aio.run(store.remember("meters used", used))

    @property
    def quick(self):
        return self.step["kind"] == "table"

    def taken(self):
        shown = Step.taken(self)
        if self.step["kind"] == "table":
            return join([shown, table_view(self.bench, self.instance, self.index)])
        return shown


def declared(item, step_id, number):
    """The number of repeats declared for a step at a round, or None."""
    for event in reversed(item.sets):
        if event.data["step"] == step_id and event.data["round"] == number:
            return event.data["n"]
    return None


def state_of(bench, meter_id):
    """What is wrong with a meter today, in words, or ""."""
    from fieldcheck.engine import meters
    meter = bench.work.meters.get(meter_id)
    if meter is None:
        return ""
    return STATE_WORDS.get(meters.meter_state(meter, store.today()), "")


def units_offered(column):
    """Unit keys of a step, smallest first: the four around its own unit where there are more (one row, no cut key)."""
    own = column.get("unit")
    names = list(column.get("units") or units.quantity(column["quantity"]).units)
    if own and own not in names:
        names.insert(0, own)
    if own:                                 # nobody reads an oil in m²/s
        names = [one for one in names if size_of(one) <= 1000.0 * size_of(own)]
    sized = [(size_of(one), one) for one in names]
    sized.sort(key=first_of)
    names = [one[1] for one in sized]
    first = max(0, min((names.index(own) if own else 0) - 1, len(names) - 4))
    return names[first:first + 4]


def first_of(pair):
    return pair[0]


def size_of(name):
    one = units.unit(name)
    return float(one.num) / float(one.den)


def table_view(bench, instance, index):
    """The table as it stands; each cell leads to its screen."""
    step = instance.step
    columns = step["columns"]
    head = h("tr", h("td", ""), [h("th", {"scope": "col"}, one["title"],
             h("span.note", " " + unit_text(one.get("unit")))) for one in columns])
    rows = []
    seen = []
    for cell in instance.indexes:
        row = bench_room.row_of(cell)
        if row in seen or cell == "?":
            continue
        seen.append(row)
        cells = []
        for column in columns:
            here = row + "/" + column["id"]
            answer = bench.work.at(step["id"], instance.round, here)
            text = "·"
            if answer is not None:
                text = "–" if answer.left else answer_text(step, column, answer.value)
            if here == index:
                cells.append(h("td.here", text))
                continue
            words = row + " " + column["title"] + (": " + text if answer is not None else ", to do")
            cells.append(h("td", h("a.cell-link", {"href": address(step_place(bench, instance, here)),
                                                   "aria-label": words}, text)))
        rows.append(h("tr", h("th", {"scope": "row"}, row), cells))
    return h("div.wide", h("table.cells", h("thead", head), h("tbody", rows)))
