"""One item in hand: its Work kept in memory, answers put into it at once and written to the disk behind them."""

from browser import aio, window

from fieldcheck.engine import events, judging, outcomes, procedures, readings
from fieldcheck.engine.formulas import names_in
from fieldcheck.engine.physics import registry
from fieldcheck.engine.work import TAKEN, Answer, answer_of, limit_names, of_item

from .. import pen, store

platform = window.platform
VISIT_HOURS = 4         # conditions older than this are asked again
read_steps = {}
"""item id -> ids of steps; outlives the Bench, which is built anew when another phone's events arrive."""


class Bench:
    """job: engine Job; item: engine Item; part: compiled procedure; work: engine Work.  flow is computed when asked
    for and forgotten with every answer."""

    def __init__(self, job, item, part):
        self.job = job
        self.item = item
        self.part = part
        self.work = of_item(store.state, job, item, part, store.today())
        self._flow = None
        self.before = {}
        self.names = {}
        self.asked = ""             # id of the step whose answer is being judged
        self.after_write = None     # called with the slot's key once an answer is on the disk
        self.undoable = None        # (instance, index) of the answer just taken, while one tap may take it back
        self.read = read_steps.setdefault(item.id, [])     # steps whose instruction was read in this sitting

    @property
    def flow(self):
        if self._flow is None:
            self._flow = procedures.Flow(self.work)
        return self._flow

    def changed(self):
        """Something that the path depends on has changed."""
        self._flow = None

    def place(self, *more):
        """Address of a screen of this item."""
        return ["job", self.job.id, self.item.id, *more]

    def title(self):
        """What the item is called."""
        found = store.state.workshop.get("equipment", self.item.equipment)
        return found["name"] if found is not None else self.part["title"]

    def slot(self, key):
        """The engine's Slot of a key, or None before the first answer."""
        return self.item.slots.get(key)

    # ---- answers

    def answer(self, step_id, number, index, kind, value, judged=(), corrects="", reason="", draft=""):
        """Puts an answer into the work at once and writes its event behind it.

        judged() is called after the answer is in and gives (statement, printed) as shown; a correction names the
        hash that it corrects and the reason.
        """
        key = events.slot_key(step_id, number, index)
        answer = Answer(kind, value, store.next_order(self.job.id))
        self._put(key, index, answer)
        data = {"item": self.item.id, "step": step_id, "round": number, "index": index}
        if corrects:
            data["corrects"] = corrects
        data["kind"] = kind
        data["value"] = value
        if corrects:
            data["reason"] = reason
        if judged:
            data["statement"], data["printed"] = judged()
        return self._write("answer.corrected" if corrects else "answer.given", data, key, answer, draft)

    def leave(self, step_id, number, index, reason, draft=""):
        """Notes that a step is not done, with its reason."""
        key = events.slot_key(step_id, number, index)
        answer = Answer("left", {}, store.next_order(self.job.id), None, reason)
        self._put(key, index, answer)
        data = {"item": self.item.id, "step": step_id, "round": number, "index": index, "reason": reason}
        return self._write("step.left", data, key, answer, draft)

    def _put(self, key, index, answer):
        if key.startswith("nameplate|") and not answer.left:
            self.work.nameplate[index] = answer.value
        self.work.put(key, answer)
        self.changed()

    def _write(self, kind, data, key, answer, draft):
        async def write():
            event = await pen.write(self.job.id, kind, data, draft)
            if self.work.answers.get(key) is answer:
                self.work.answers[key] = answer_of(event)
            if self.after_write is not None:
                self.after_write(key)
        running = write()
        aio.run(running)
        return answer

    async def note(self, kind, data, draft=""):
        """Writes an event of this item that is no answer."""
        full = {"item": self.item.id}
        full.update(data)
        event = await pen.write(self.job.id, kind, full, draft)
        if kind == "defect.found":
            self.work.defects.append(event.data)
        self.changed()
        return event

    # ---- verdicts

    def candidates(self, step_id, number, row="", column=""):
        """What a step (or one cell of a table) lets the engine judge now: list of (limit, key, row).

        A limit of which a reading is still to come is not asked for: it would cost time and say nothing.
        """
        work = self.work
        found = []
        self.asked = step_id
        wanted = work.limits_on(step_id)
        for limit in self.part["limits"]:
            if limit["id"] not in wanted or not judging.holds(work, limit):
                continue
            if column and step_id + "." + column not in self.names_of(limit):
                continue
            for key, limit_row in judging.keys_of(work, limit):
                if row and limit_row not in ("", "?", row):
                    continue
                table = judging.table_of(work, limit) if limit.get("each") else ""
                if self.all_there(limit["value"], number, limit_row, table):
                    found.append((limit, key, limit_row))
        return found

    def judge(self, candidate, number):
        """The Judged of a candidate."""
        limit, key, row = candidate
        return judging.judge(self.work, limit, key, row, number)

    def all_there(self, name, number, row, table):
        """True unless a reading that a name needs is still to be taken (left out counts as there)."""
        work = self.work
        value = work.values.get(name)
        if value is not None:
            inner = row if table and value.get("each") == table else ""
            for one in names_in(value["formula"]):
                if not self.all_there(one, number, inner, table):
                    return False
            return True
        if name.startswith("each "):
            name = name[5:]
        step_id, _, column = name.partition(".")
        step = work.steps.get(step_id)
        if step is None or step.get("optional") or not procedures.included(work, step):
            return True
        cells = [""]
        if step["kind"] == "table":
            if step_id == table and row not in ("", "?"):
                cells = [row + "/" + column]
            else:
                cells = [one for one in procedures.cells(work, step) if not column or one.endswith("/" + column)]
        for cell in cells:
            if not self.answered(step_id, number, cell):
                return False
        return True

    def answered(self, step_id, number, index):
        """True when a question was answered or left at a round or before; what is asked just now counts at its own
        round only, for it is being repeated."""
        last = number - 1 if step_id == self.asked else -1
        for n in range(number, last, -1):
            if self.work.at(step_id, n, index) is not None or self.work.at(step_id, n, "") is not None:
                return True
        return False

    def names_of(self, limit):
        """Every name that a limit depends on."""
        if limit["id"] not in self.names:
            self.names[limit["id"]] = limit_names(self.part, limit)
        return self.names[limit["id"]]

    def closing(self):
        """(flow, rows, best, reasons, allowed) of the item."""
        flow = self.flow
        rows = outcomes.rows(self.work, flow)
        best, reasons, allowed = outcomes.bounded(self.work, flow, rows)
        return flow, rows, best, reasons, allowed

    def outcome(self):
        """The outcome given, as event data, or None."""
        given = self.item.outcomes.event
        return given.data if given is not None else None

    def supply_now(self):
        """The supply state that the item was last brought to, by the path."""
        supply = procedures.ISOLATED
        for one in self.flow.instances:
            if one.state == TAKEN:
                supply = one.supply
        return supply

    # ---- what must come before a step

    def cautions_for(self, supply, step=None):
        """The cautions of a supply state that this person has not acknowledged on this visit, and a step's own."""
        done = self._acknowledged(supply)
        extra = (step or {}).get("cautions") or []
        result = []
        for one in self.part.get("cautions") or []:
            states = one.get("when") or []
            belongs = not states or supply in states or one["id"] in extra
            if belongs and one["id"] not in done:
                result.append(one)
        return result

    def _acknowledged(self, supply):
        today = store.today()
        done = []
        for item in self.job.items.values():
            for event in item.cautions:
                day = store.local_time(store.instant(event.at))[:10]
                if event.person == store.own["person"] and event.data["supply"] == supply and day == today:
                    done += event.data["cautions"]
        return done

    def conditions_due(self):
        """True when the job's conditions were never taken or are stale."""
        event = self.job.conditions.event
        if event is None:
            return True
        return platform.wall() - store.instant(event.at) > VISIT_HOURS * 3600000

    # ---- meters

    def meters_for(self, function):
        """Data of the meters that have a function, the one last used first."""
        fit = []
        for data in store.state.workshop.all("meter"):
            names = [one["function"] for one in data["functions"]]
            if not function or function in names:
                fit.append(data)
        return fit

    def last_value(self, judged):
        """The value (SI) of the same limit and row the last time this equipment was worked on, or None."""
        name = judged.key
        if name not in self.before:
            self.before[name] = None
            for work, number in self.before.get("works", []):
                for limit in work.part["limits"]:
                    if limit["id"] == judged.limit["id"]:
                        old = judging.judge(work, limit, judged.key, judged.row, number)
                        if old.verdict.value is not None and not old.verdict.bound:
                            self.before[name] = old.verdict.value
        return self.before[name]

    async def look_back(self):
        """Finds the last earlier job with this equipment and procedure; what last_value() then reads."""
        best = None
        for job in store.state.jobs.values():
            if job.id == self.job.id or job.opened is None or self.job.opened is None:
                continue
            if job.opened.at >= self.job.opened.at:
                continue
            for item in job.items.values():
                same = item.equipment == self.item.equipment and item.procedure == self.item.procedure
                if same and (best is None or job.opened.at > best[0].opened.at):
                    best = (job, item)
        self.before = {"works": []}
        if best is not None:
            part = await store.part(best[0].opened.data["rulebook"], best[1].procedure)
            if part is not None:
                work = of_item(store.state, best[0], best[1], part, best[0].opened.at[:10])
                self.before["works"].append((work, procedures.Flow(work).last_round))


def calls_in(tree, found):
    """Names of the functions that a formula calls."""
    if not isinstance(tree, list):
        return
    if tree and tree[0] == "call" and tree[1] not in found:
        found.append(tree[1])
    for one in tree:
        if isinstance(one, list):
            calls_in(one, found)
        elif isinstance(one, dict):
            for name in one:
                calls_in(one[name], found)


async def load_physics(part):
    """Fetches the physics that a procedure's formulas call."""
    found = []
    for value in part["values"]:
        calls_in(value["formula"], found)
    for limit in part["limits"]:
        for entry in limit["entries"]:
            for side in ("at_least", "at_most"):
                calls_in(entry.get(side), found)
    for name in found:
        if name in registry.REGISTRY:
            for module in registry.modules_needed(name):
                await platform.loadChunk("physics." + module)


async def of(job_id, item_id):
    """The Bench of an item, built when first asked for; None when this phone does not hold it or its rules."""
    name = job_id + " " + item_id
    if name in store.benches:
        return store.benches[name]
    job = store.state.jobs.get(job_id)
    item = job.items.get(item_id) if job is not None else None
    if item is None or job.opened is None:
        return None
    part = await store.part(job.opened.data["rulebook"], item.procedure)
    if part is None:
        return None
    await load_physics(part)
    while store.own["waiting"]:
        await aio.sleep(0.01)               # an answer on its way to the disk is not in the fold yet
    if name in store.benches:
        return store.benches[name]          # another arrival built it meanwhile; answers must go into one only
    bench = Bench(job, item, part)
    store.benches[name] = bench
    await bench.look_back()
    return bench


async def all_of(job):
    """The Benches of a job's items in order; items whose rules are missing are left out."""
    found = []
    for item in job.items_in_order():
        bench = await of(job.id, item.id)
        if bench is not None:
            found.append(bench)
    return found


def row_of(index):
    """The row that a table's index belongs to."""
    return index.rpartition("/")[0] if "/" in index else ""


def column_of(step, index):
    """The data of what one index asks for: a table's column, or the step itself."""
    if step["kind"] != "table":
        return step
    name = index.rpartition("/")[2]
    for one in readings.columns_of(step):
        if one["id"] == name:
            return one
    return step
