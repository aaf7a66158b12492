"""Every screen, light and dark: no axe violation, targets for gloves, 7:1 contrast, nothing beside the edge."""

from __future__ import annotations

import re
from collections.abc import Iterator
from importlib.resources import files
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest
from desk_at_hand import PHONE_SIZE, Desk
from hand import Hand, until
from test_whole_job import take, to_the_first_reading

if TYPE_CHECKING:
    from playwright.sync_api import Browser

pytestmark = pytest.mark.browser
AXE = files("axe_playwright_python").joinpath("axe.min.js").read_text(encoding="utf-8")
RULES = "['wcag2a', 'wcag2aa', 'wcag2aaa', 'wcag21a', 'wcag21aa', 'wcag22aa', 'best-practice']"
RUN = f"""axe.run(document, {{runOnly: {RULES}}}).then(found => found.violations.map(
    one => one.id + ': ' + one.nodes.map(node => node.target.join(' ') + ' ' + node.failureSummary).join(' | ')))"""
TARGETS = """Array.from(document.querySelectorAll('button, #main a, input, select, textarea, summary')).filter(e =>
    e.offsetParent !== null && !e.disabled && e.type !== 'file' && e.type !== 'radio' && !e.closest('.path, .who'))
    .map(e => [e.tagName + '.' + e.className + ' ' + (e.id || e.textContent.slice(0, 20)),
               e.getBoundingClientRect().width, e.getBoundingClientRect().height])"""
TOKENS = Path(__file__).resolve().parents[2] / "webui" / "css" / "a_tokens.css"


def look_at(hand: Hand, name: str) -> None:
    """What must hold on any screen."""
    hand.page.evaluate(AXE)
    violations: list[str] = hand.page.evaluate(RUN)
    assert violations == [], f"{name}: {violations}"
    small = [one for one in hand.page.evaluate(TARGETS) if one[1] < 47.5 or one[2] < 47.5]
    assert small == [], f"{name}: targets too small: {small}"
    wide = hand.page.evaluate("[document.documentElement.scrollWidth, innerWidth]")
    assert wide[0] <= wide[1], f"{name}: wider than the screen: {wide}"
    assert hand.page.evaluate("document.querySelectorAll('#main [style], #top [style], #foot [style]').length") == 0


@pytest.fixture(params=["light", "dark"])
def toned(chromium: Browser, request: pytest.FixtureRequest) -> Iterator[Hand]:
    context = chromium.new_context(viewport=PHONE_SIZE, has_touch=True, color_scheme=request.param)
    hand = Hand(context.new_page())
    yield hand
    assert hand.fault() == "" and hand.said == []
    context.close()


def test_every_screen_holds(toned: Hand, desk: Desk) -> None:
    hand = toned
    hand.page.goto(desk.address)
    hand.wait_for("Who works here?")
    look_at(hand, "who")
    to_the_first_reading(hand, desk)
    hand.type("entry", "18")
    until(lambda: hand.page.locator("#scale svg").count(), "the pointer")
    look_at(hand, "measure, typed")
    hand.page.locator("#meter button").tap()
    look_at(hand, "meters")
    take(hand, "49.9")
    until(lambda: len(hand.statements()) == 2, "both statements")
    hand.page.locator("button.verdict").first.tap()
    until(lambda: hand.page.locator("dl.reason").count(), "the reason")
    look_at(hand, "measure, taken, reason open")
    base = hand.address().split("/step/")[0]
    for name, title in (("three|0", "Drop, three"), ("fingers|0", "Each finger"), ("track|0", "Wear track"),
                        ("drum_run|0", "Eight pulses"), ("coast|0", "Coast-down"), ("three|0/left", "Not done")):
        hand.page.goto(desk.address + base + "/step/" + name)
        hand.wait_for(title)
        look_at(hand, name)
    for name, title in (("", "Contact set"), ("/outcome", "Outcome"), ("/defect", "Defect"), ("/part", "Part or"),
                        ("/wait", "Cool-down"), ("/step/r|0/correct", "Contact resistance")):
        hand.page.goto(desk.address + base + name)
        hand.wait_for(title)
        look_at(hand, name)
    for name, title in (("", "Job 2026"), ("/conditions", "Conditions"), ("/add", "Add equipment"),
                        ("/customer", "Customer"), ("/sign", "Signature")):
        hand.page.goto(desk.address + "#/job/" + desk.ids["job"] + name)
        hand.wait_for(title)
        look_at(hand, name)
    hand.page.set_viewport_size({"width": 320, "height": 568})
    hand.page.goto(desk.address + base + "/step/fingers|0")
    hand.wait_for("Each finger")
    look_at(hand, "a small phone")


def luminance(colour: str) -> float:
    """Relative luminance as WCAG 2.2 defines it."""
    parts = [int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)]
    red, green, blue = [p / 12.92 if p <= 0.04045 else ((p + 0.055) / 1.055) ** 2.4 for p in parts]
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue


def contrast(one: str, other: str) -> float:
    """Contrast ratio as WCAG 2.2 defines it."""
    high, low = sorted((luminance(one), luminance(other)), reverse=True)
    return (high + 0.05) / (low + 0.05)


@pytest.mark.parametrize("theme", [0, 1], ids=["light", "dark"])
def test_every_text_colour_keeps_seven_to_one(theme: int) -> None:
    blocks = TOKENS.read_text(encoding="utf-8").split("@media")
    tokens: dict[str, Any] = dict(re.findall(r"--(\w+): (#[0-9A-F]{6})", blocks[theme]))
    for name in ("ink", "verdigris", "brass", "copper", "iron"):
        assert contrast(tokens[name], tokens["ground"]) >= 7.0, name
    assert contrast(tokens["line"], tokens["ground"]) >= 3.0
