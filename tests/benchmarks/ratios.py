"""How every figure here is taken: two things side by side in one run, many times over, and the median of the ratios.

A shared machine slows both alike within one round, so the ratio of a round says more than any time by itself.
"""

from __future__ import annotations

import gc
import resource
import statistics
import time
from collections.abc import Callable
from dataclasses import dataclass

ROUNDS = 9
Work = Callable[[], object]
Clock = Callable[[], float]


def processor() -> float:
    """Seconds of processor that this process and its finished children have used: waiting for others is left out."""
    both = (resource.getrusage(resource.RUSAGE_SELF), resource.getrusage(resource.RUSAGE_CHILDREN))
    return sum(one.ru_utime + one.ru_stime for one in both)


@dataclass(frozen=True)
class Row:
    """One line of the table. figure: as printed; met: None where there is no goal, it is only reported."""

    name: str
    figure: str
    goal: str = "reported"
    met: bool | None = None

    def verdict(self) -> str:
        return "" if self.met is None else "met" if self.met else "missed"


@dataclass(frozen=True)
class Paired:
    """Seconds of each round, ours and theirs taken right after one another."""

    ours: list[float]
    theirs: list[float]

    def ratios(self) -> list[float]:
        return [one / other for one, other in zip(self.ours, self.theirs, strict=True)]

    def ratio(self) -> float:
        """Median over the rounds of ours / theirs."""
        return statistics.median(self.ratios())

    def figure(self, unit_s: float, unit: str) -> str:
        """"0.84 (0.80 to 0.91), 21 us against 25 us"."""
        low, high = min(self.ratios()), max(self.ratios())
        ours, theirs = statistics.median(self.ours) / unit_s, statistics.median(self.theirs) / unit_s
        return f"{self.ratio():.2f} ({low:.2f} to {high:.2f}), {ours:.3g} {unit} against {theirs:.3g} {unit}"


def seconds(work: Work, loops: int = 1, clock: Clock = time.perf_counter) -> float:
    """Time of one call by a clock, the mean over `loops` of them; the collector rests meanwhile, as in `timeit`."""
    gc.collect()
    enabled = gc.isenabled()
    gc.disable()
    try:
        start = clock()
        for _ in range(loops):
            work()
        return (clock() - start) / loops
    finally:
        if enabled:
            gc.enable()


def paired(ours: Work, theirs: Work, rounds: int = ROUNDS, loops: int = 1, clock: Clock = time.perf_counter) -> Paired:
    """Times both in turn; who goes first changes from round to round. One round before does not count."""
    ours()
    theirs()
    first: list[float] = []
    second: list[float] = []
    for number in range(rounds):
        if number & 1:
            second.append(seconds(theirs, loops, clock))
            first.append(seconds(ours, loops, clock))
        else:
            first.append(seconds(ours, loops, clock))
            second.append(seconds(theirs, loops, clock))
    return Paired(first, second)


def at_most(name: str, measured: Paired, most: float, unit_s: float, unit: str, goal: str = "") -> Row:
    """Row of a cost ratio that is to stay at or below `most`."""
    return Row(name, measured.figure(unit_s, unit), goal or f"<= {most:g}", measured.ratio() <= most)


def table(rows: list[Row]) -> str:
    """The rows as text, in columns."""
    cells = [("subject", "figure: median (lowest to highest of the rounds)", "goal", "")]
    cells += [(row.name, row.figure, row.goal, row.verdict()) for row in rows]
    widths = [max(len(line[column]) for line in cells) for column in range(4)]
    lines = ["  ".join(cell.ljust(width) for cell, width in zip(line, widths, strict=True)).rstrip() for line in cells]
    return "\n".join([lines[0], "-" * len(lines[0]), *lines[1:]])
