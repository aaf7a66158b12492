"""The whole verdict: judged, printed and explained, in multiples of propagating six influences (GTC as the measure).

Every limit of a sound contact set's first case is judged from the readings as typed, nothing remembered: meter
specification to influences, formula, expanded uncertainty, statement, printed line, explanation with its budget.
"""

from __future__ import annotations

from benchmarks import propagation
from benchmarks.ratios import ROUNDS, Row, paired

from fieldcheck import rulebook
from fieldcheck.engine import assess, judging, outcomes

PROCEDURE = "contact_cleaning"


def rows(tiny: bool = False) -> list[Row]:
    part = rulebook.part(PROCEDURE)
    _, run, expected = rulebook.runs(PROCEDURE)[0]
    work = assess.fill(part, run)
    assess._confirm(work)
    _, closing, _, _, _ = outcomes.closing(work)
    wanted = [found for _, found, _ in closing if found is not None and found.verdict.U > 0.0]
    assert wanted and expected, "the case has verdicts with an uncertainty"

    def judged() -> None:
        work.cache = {}
        for one in wanted:
            judging.judge(work, one.limit, one.key, one.row, one.round)

    def whole() -> None:
        work.cache = {}
        for one in wanted:
            found = judging.judge(work, one.limit, one.key, one.row, one.round)
            assert judging.printed(work, found)
            assert judging.explained(work, found)["budget"]

    def measure() -> None:
        for _ in wanted:
            propagation.by_gtc()

    rounds, loops = (1, 1) if tiny else (ROUNDS, 20)
    name = f"mean of {len(wanted)} verdicts"
    return [Row(f"{name}: {text} / GTC's propagation of 6 influences", per(paired(work_, measure, rounds, loops),
            len(wanted))) for text, work_ in (("judged", judged), ("judged, printed, explained", whole))]


def per(measured, count):  # type: ignore[no-untyped-def]
    """The figure for one of `count`."""
    return type(measured)([one / count for one in measured.ours], [one / count for one in measured.theirs]).figure(
        1e-3, "ms")
