"""What an answer lets the engine say: one verdict a turn, its words on the glass before its scale is drawn."""

from fieldcheck.engine import judging

from .. import dom, parts
from ..markup import h, join
from .words import distance_words


class Said:
    """The verdicts of one answer.  queue: what is still to be judged, as Bench.candidates gives it; judged: list of
    Judged; undrawn: those whose scale is still to be drawn; printed: key -> one line."""

    def __init__(self, bench, number, phase):
        self.bench = bench
        self.number = number
        self.phase = phase if number == 0 else ""
        self.queue = []
        self.judged = []
        self.undrawn = []
        self.printed = {}

    def begin(self, candidates):
        """Starts over with what can be judged now, and judges the first."""
        self.queue = list(candidates)
        self.judged = []
        self.undrawn = []
        self.printed = {}
        self.judge_next()

    def judge_next(self):
        """Judges the next in the queue and gives it, or None."""
        if not self.queue:
            return None
        one = self.bench.judge(self.queue.pop(0), self.number)
        self.judged.append(one)
        if parts.is_drawn(one):
            self.undrawn.append(one)
        self.printed[one.key] = judging.printed(self.bench.work, one)
        return one

    @property
    def valued(self):
        """Those that judge a value."""
        return [one for one in self.judged if one.verdict.value is not None]

    def first(self):
        """(statement, printed) of the first, as it goes into the event."""
        if not self.valued:
            return "", ""
        return self.valued[0].verdict.statement, self.printed[self.valued[0].key]

    def html(self):
        """The words of all that is judged; scales follow."""
        return join([self.words(one) for one in self.judged])

    def words(self, one):
        """The words of one verdict, with the place of its scale."""
        if one.verdict.value is None:
            row = " " + one.row if one.row not in ("", "?") else ""
            return h("p.note", one.limit["label"] + row + ": " + one.verdict.reason)
        if not parts.is_drawn(one):
            return parts.statement(one, self.printed[one.key], self.phase)
        return join([parts.statement(one, self.printed[one.key], self.phase),
                     h("div.scale-place", {"id": "draw-" + one.key}),
                     h("p.note", {"id": "distance-" + one.key})])

    def turn(self):
        """One small piece of what is left, into the page; False when nothing was."""
        if self.undrawn:
            self.draw(self.undrawn.pop(0))
            return True
        one = self.judge_next()
        if one is None:
            return False
        dom.append("said-here", self.words(one))
        return True

    def draw(self, one):
        """The scale of a verdict, with as found and last time, and the distance to the limit."""
        work = self.bench.work
        last = self.bench.last_value(one)
        found = None
        if one.round > 0:
            before = judging.judge(work, one.limit, one.key, one.row, 0)
            found = before.verdict.value if not before.verdict.bound else None
        dom.fill("draw-" + one.key, parts.verdict_scale(work, one, found, last))
        dom.text("distance-" + one.key, distance_words(work, one, last))

    def open_reason(self, limit_key):
        """Opens or closes the reason of a verdict; it is built when first opened."""
        for one in self.judged:
            if one.key == limit_key:
                found = dom.find("why-" + limit_key)
                opening = bool(found.hidden)
                if opening and not found.innerHTML:
                    dom.fill("why-" + limit_key, parts.explanation(judging.explained(self.bench.work, one)))
                found.hidden = not opening
