"""Value and statement after Take on the real phone, its processor slowed four times: from the touch to the glass.

A hand works a made-up procedure of many plain readings, each judged against its own limit and, through a formula, a
second one, on a real desk. For every reading the page itself notes when the thumb's key was touched (the event's own
time), when the statement stood in the document and when the next frame had been drawn. The phone shows the first
verdict at once and the others one by one behind it.
"""

from __future__ import annotations

import statistics
import tempfile
from pathlib import Path
from typing import Any

from benchmarks import phones
from benchmarks.ratios import Row
from benchmarks.traced import Trace, between_marks
from desk_at_hand import running
from hand import Hand, until
from playwright.sync_api import sync_playwright
from trial_rules import PART, entry_of, limit, rulebook, step

READINGS = 36
SLOWER = 4.0
GOAL_MS = 50.0
WATCH = """
window.takes = []
let touched = 0
let seen = null
addEventListener('click', event => {
  const key = event.target.closest('[data-do="take"]')
  if (key) { touched = event.timeStamp; performance.mark('touched'); watch() }
}, true)
function watch() {
  if (seen) seen.disconnect()         // what was taken before had nothing to judge
  seen = new MutationObserver(() => {
    if (!document.querySelector('#said-here .statement')) return
    seen.disconnect()
    performance.mark('said')
    const take = [performance.now() - touched]
    requestAnimationFrame(() => setTimeout(() => { take.push(performance.now() - touched); takes.push(take) }))
  })
  seen.observe(document, {childList: true, subtree: true})
}
"""


def part() -> dict[str, Any]:
    """A procedure of nothing but plain readings; two limits look at each."""
    live = "low voltage live"
    names = [f"r{number}" for number in range(1, READINGS + 1)]
    steps = [step(name, "measure", "as found", live, f"Contact {name[1:]}", "Touch the probes to the finger.",
                  quantity="resistance", unit="mohm", meter="resistance", repeats=1) for name in names]
    values = [{"id": f"drop_{name}", "label": f"Drop {name[1:]}", "quantity": "voltage", "unit": "mV", "each": None,
               "formula": ["*", ["name", name], ["name", "rated"]], "formula_text": f"{name} * rated"}
              for name in names]
    limits = []
    for name in names:
        limits.append(limit(f"limit_{name}", f"Contact {name[1:]}", name, "mohm",
                            entry_of(at_most=["num", "0.05"]), bounds="nothing"))
        limits.append(limit(f"limit_drop_{name}", f"Drop {name[1:]}", f"drop_{name}", "mV",
                            entry_of(at_most=["num", "0.1"]), bounds="nothing"))
    return {**PART, "cautions": [], "nameplate": PART["nameplate"][:1], "steps": steps, "values": values,
            "limits": limits}


def to_first_reading(hand: Hand, address: str) -> None:
    hand.begin(address)
    until(lambda: "Hall 2" in hand.text(), "the job")
    hand.tap("2026-001")
    hand.wait_for("Job 2026-001")
    hand.tap("drawer 1")
    hand.wait_for("Contact set, drawer 1")
    hand.onward()
    hand.wait_for("Rated current")
    hand.type("entry", "2")
    for _ in range(8):                      # supply, conditions: whatever stands before the first reading
        if hand.title().startswith("Contact 1"):
            return
        if hand.title().startswith("Conditions"):
            hand.type("ambient", "22.5")
        hand.onward()
    hand.wait_for("Contact 1")


def takes(count: int, slower: float) -> list[tuple[float, float, float]]:
    """Of each reading: ms to the statement in the document, ms to the drawn frame, ms of processor to the first."""
    with tempfile.TemporaryDirectory() as made, sync_playwright() as playwright:
        folder = Path(made)
        phone = phones.built(folder / "phone")
        with running(folder / "workshop", phone, rulebook(part())) as desk, \
                phones.browser(playwright, folder / "profile") as context:
            page = context.new_page()
            page.add_init_script(WATCH)
            hand = Hand(page)
            to_first_reading(hand, desk.address)
            phones.slowed(page, slower)
            trace = Trace(page)
            for number in range(1, count + 1):
                hand.wait_for(f"Contact {number}")
                hand.type("entry", f"{20 + number}.{number % 10}")
                page.wait_for_timeout(400)  # the pointer has moved, the draft is on its way: a hand is slower still
                hand.press()
                until(lambda n=number: page.evaluate("takes.length") == n, "the statement")  # type: ignore[misc]
                assert hand.statements()[0].startswith(f"Contact {number} ")
                until(lambda: hand.thumb() == "Next", "the key Next")
                page.wait_for_timeout(300)  # what the phone does behind the statement
                hand.press()
            assert hand.fault() == "", hand.fault()
            busy = between_marks(trace.events(), "touched", "said")
            return [(*map(float, one), 1000.0 * cpu) for one, cpu in zip(page.evaluate("takes"), busy, strict=True)]


def figure(times: list[float]) -> str:
    """Quantiles in ms."""
    cuts = statistics.quantiles(times, n=20, method="inclusive")
    parts = [f"least {min(times):.0f}"] + [f"{5 * (n + 1)} % {cuts[n]:.0f}" for n in (9, 14, 17, 18)]
    return ", ".join(parts) + f", most {max(times):.0f} ms"


def rows(tiny: bool = False) -> list[Row]:
    count, slower = (2, 1.0) if tiny else (READINGS, SLOWER)
    found = takes(count, slower)
    calm = takes(count, 1.0)
    shown, drawn = [one[0] for one in found], [one[1] for one in found]
    name = f"Take to statement at {slower:g}x, {len(found)} takes"
    return [
        Row(f"{name}: in the document", figure(shown), f"< {GOAL_MS:g} ms", statistics.median(shown) < GOAL_MS),
        Row(f"{name}: drawn", figure(drawn)),
        Row(f"  main thread's processor time at 1x, times {SLOWER:g}", figure([SLOWER * one[2] for one in calm])),
    ]
