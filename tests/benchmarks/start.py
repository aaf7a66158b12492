"""Phone start to a usable screen against a bare Brython page that says hello, in one run, at full and quarter speed.

The phone is the shipped one on a real desk, enrolled, with a job on it: its first screen is the list of jobs. Its own
performance mark, set when that screen stands there, is read; the bare page sets the same mark. Cold: a new browser
process on a profile that has seen both pages before, as when a phone is switched on. Warm: the page again in the same
process. First: a profile that has seen neither, as after each update.
"""

from __future__ import annotations

import tempfile
from pathlib import Path
from typing import TYPE_CHECKING

from playwright.sync_api import sync_playwright

from benchmarks import phones
from benchmarks.ratios import ROUNDS, Paired, Row, at_most
from desk_at_hand import running
from hand import Hand, until

if TYPE_CHECKING:
    from playwright.sync_api import BrowserContext, Page, Playwright

MOST = 1.5
MARK = """() => new Promise(found => new PerformanceObserver(list => {
  const marks = list.getEntriesByName('fieldcheck usable')
  if (marks.length) found(marks[0].startTime)
}).observe({type: 'mark', buffered: true}))"""


def usable(page: Page, address: str) -> float:
    """Seconds from navigation to the mark."""
    page.goto(address, wait_until="commit")
    return float(page.evaluate(MARK)) / 1000.0


def opened(context: BrowserContext, slower: float) -> Page:
    page = context.new_page()
    phones.slowed(page, slower)
    return page


def first(playwright: Playwright, folder: Path, address: str, slower: float) -> float:
    """With an empty profile in a new process."""
    with tempfile.TemporaryDirectory(dir=folder) as profile, phones.browser(playwright, Path(profile)) as context:
        return usable(opened(context, slower), address)


def cold_and_warm(playwright: Playwright, profile: Path, address: str, slower: float) -> tuple[float, float]:
    """In a new process, then once more in it."""
    with phones.browser(playwright, profile) as context:
        page = opened(context, slower)
        cold = usable(page, address)
        page.wait_for_timeout(300)          # what the page does behind its first screen
        page.goto("about:blank")
        return cold, usable(page, address)


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
    """The three rows of one slow-down."""
    times: dict[str, Paired] = {name: Paired([], []) for name in ("cold", "warm", "first")}
    for number in range(rounds):
        for ours in (True, False) if number & 1 else (False, True):
            address = phone if ours else bare
            cold, warm = cold_and_warm(playwright, profile, address, slower)
            seen = {"cold": cold, "warm": warm, "first": first(playwright, folder, address, slower)}
            for name, time in seen.items():
                (times[name].ours if ours else times[name].theirs).append(time)
    return [at_most(f"phone start, {name}, {slower:g}x slower / bare Brython", one, MOST, 1e-3, "ms")
            for name, one in times.items()]
