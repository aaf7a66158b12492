"""Phone start to a usable screen against a bare Brython page that says hello, in one run, at full and quarter speed.

The phone is the shipped one on a real desk, enrolled, with a job on it: its first screen is the list of jobs. Its own
performance mark, set when that screen stands there, is read; the bare page sets the same mark. Cold: a new browser
process on a profile that has seen both pages before, as when a phone is switched on. Warm: the page reloaded in
the same process. First: a profile that has seen neither, as after each update.
Processor time is that of the page's main thread: on a busy machine it says more than the wall clock, but it leaves
out what the browser does beside it.
"""

from __future__ import annotations

import tempfile
from pathlib import Path
from typing import TYPE_CHECKING

from benchmarks import phones
from benchmarks.ratios import ROUNDS, Paired, Row, at_most
from benchmarks.traced import Trace, until_mark
from desk_at_hand import running
from hand import Hand, until
from playwright.sync_api import sync_playwright

if TYPE_CHECKING:
    from playwright.sync_api import BrowserContext, Page, Playwright

MOST = 1.5
STARTS = ("cold", "warm", "first")
Times = tuple[float, float]
MARK = """() => new Promise(found => new PerformanceObserver(list => {
  const marks = list.getEntriesByName('fieldcheck usable')
  if (marks.length) found(marks[0].startTime)
}).observe({type: 'mark', buffered: true}))"""


def usable(page: Page, address: str = "") -> tuple[float, float]:
    """(seconds from navigation to the mark, processor seconds of the page's main thread); reloads without address."""
    trace = Trace(page)
    if address:
        page.goto(address, wait_until="commit")
    else:
        page.reload(wait_until="commit")
    wall = float(page.evaluate(MARK)) / 1000.0
    return wall, until_mark(trace.events(), "fieldcheck usable")


def opened(context: BrowserContext, slower: float) -> Page:
    page = context.new_page()
    phones.slowed(page, slower)
    return page


def all_starts(playwright: Playwright, folder: Path, profile: Path, address: str, slower: float) -> dict[str, Times]:
    """Cold and warm on the profile, first on an empty one."""
    with phones.browser(playwright, profile) as context:
        page = opened(context, slower)
        cold = usable(page, address)
        page.wait_for_timeout(500)          # what the page does behind its first screen
        warm = usable(page)
    with tempfile.TemporaryDirectory(dir=folder) as empty, phones.browser(playwright, Path(empty)) as context:
        return {"cold": cold, "warm": warm, "first": usable(opened(context, slower), address)}


def rows(tiny: bool = False) -> list[Row]:
    found: list[Row] = []
    with tempfile.TemporaryDirectory() as made:
        folder = Path(made)
        phone = phones.built(folder / "phone")
        with running(folder / "workshop", phone) as desk, phones.bare_page(folder / "bare") as bare, \
                sync_playwright() as playwright:
            profile = folder / "profile"
            with phones.browser(playwright, profile) as context:
                hand = Hand(context.new_page())
                hand.begin(desk.address)
                until(lambda: "Hall 2" in hand.text(), "the job")
                usable(hand.page, bare)
            for slower in (1.0,) if tiny else (1.0, 4.0):
                found += compare(playwright, folder, profile, desk.address, bare, slower, 1 if tiny else ROUNDS)
    return found


def compare(playwright: Playwright, folder: Path, profile: Path, phone: str, bare: str, slower: float,
            rounds: int) -> list[Row]:
    """Rows of one slow-down: by the clock on the wall, then by the processor."""
    walls = {name: Paired([], []) for name in STARTS}
    busy = {name: Paired([], []) for name in STARTS}
    for number in range(rounds):
        for ours in (True, False) if number & 1 else (False, True):
            found = all_starts(playwright, folder, profile, phone if ours else bare, slower)
            for name, (wall, processor) in found.items():
                (walls[name].ours if ours else walls[name].theirs).append(wall)
                (busy[name].ours if ours else busy[name].theirs).append(processor)
    rows = [at_most(f"phone start, {name}, {slower:g}x slower / bare Brython", walls[name], MOST, 1e-3, "ms")
            for name in STARTS]
    return rows + [Row(f"  the same in main thread's processor time, {name}", busy[name].figure(1e-3, "ms"))
                   for name in STARTS]
