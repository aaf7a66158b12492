"""What a hand does with the phone: taps, types, reads; waits by polling, since the policy forbids eval in the page."""

from __future__ import annotations

import time
from collections.abc import Callable
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from playwright.sync_api import Page

PATIENCE = 15.0


def until(ask: Callable[[], object], what: str) -> object:
    """The first true answer of `ask`; an AssertionError that says what never came."""
    end = time.monotonic() + PATIENCE
    while time.monotonic() < end:
        found = ask()
        if found:
            return found
        time.sleep(0.02)
    raise AssertionError(f"never came: {what}")


class Hand:
    """One person with one phone."""

    def __init__(self, page: Page) -> None:
        self.page = page
        self.said: list[str] = []
        page.set_default_timeout(PATIENCE * 1000)
        page.on("console", lambda message: self.said.append(message.text))
        page.on("pageerror", lambda error: self.said.append(str(error)))

    # ---- reading

    def title(self) -> str:
        """The heading of the present screen, "" while there is none."""
        found = self.page.locator("#main h1")
        return str(found.inner_text()).strip() if found.count() else ""

    def text(self) -> str:
        return str(self.page.inner_text("#main"))

    def thumb(self) -> str:
        found = self.page.locator("#thumb")
        return str(found.inner_text()) if found.count() else ""

    def statements(self) -> list[str]:
        """What stands on the glass: "label word value" of each verdict."""
        return [" ".join(str(one.inner_text()).split()) for one in self.page.locator(".statement").all()]

    def fault(self) -> str:
        """The report on the page for anything uncaught, or ""."""
        found = self.page.locator("#failed textarea")
        return str(found.input_value()) if found.count() else ""

    def wait_for(self, title: str) -> None:
        """Until the heading begins with `title`."""
        until(lambda: self.title().startswith(title) or self.fault(), title + ", but there is " + self.title())
        assert self.fault() == "", self.fault()

    def address(self) -> str:
        return str(self.page.evaluate("location.hash"))

    # ---- acting

    def press(self) -> None:
        """The thumb's key."""
        self.page.tap("#thumb")

    def onward(self) -> None:
        """Presses the thumb's key and waits until another screen or another key stands there."""
        before = (self.address(), self.title(), self.thumb(), self.page.locator("#main").inner_text())
        self.press()
        until(lambda: (self.address(), self.title(), self.thumb(), self.page.locator("#main").inner_text()) != before
              or self.fault(), "a change after " + before[2] + " at " + before[1])
        assert self.fault() == "", self.fault()

    def tap(self, words: str) -> None:
        """A key, link or answer by its words."""
        self.page.locator("button, a, label, summary").filter(has_text=words).first.tap()

    def type(self, name: str, text: str) -> None:
        self.page.fill(f"#{name}", text)

    def draw(self) -> None:
        """A signature: one stroke."""
        box = self.page.locator("#pad").bounding_box()
        assert box is not None
        mouse = self.page.mouse
        self.page.locator("#pad").scroll_into_view_if_needed()
        box = self.page.locator("#pad").bounding_box()
        assert box is not None
        mouse.move(box["x"] + 30, box["y"] + 90)
        mouse.down()
        for step in range(8):
            mouse.move(box["x"] + 40 + step * 25, box["y"] + (60 if step & 1 else 110))
        mouse.up()

    def begin(self, address: str, person: str = "R. Example") -> None:
        """Opens the phone and says who works."""
        self.page.goto(address)
        self.wait_for("Who works here?")
        self.tap(person)
        self.wait_for("Jobs")
