"""Works an item on the phone: reads which screen stands there, answers it from a script, goes on until the outcome."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any
from urllib.parse import unquote

from desk_at_hand import Desk
from hand import Hand, until
from invented_bench import TECHNICIAN, meters, part_of
from test_whole_job import PIXEL

LOOK = """() => {
  const one = s => document.querySelector(s), words = e => e ? e.innerText.trim() : '';
  return {hash: decodeURIComponent(location.hash), title: words(one('#main h1')), thumb: words(one('#thumb')),
          act: one('#thumb') ? one('#thumb').dataset.do : '', old: !!one('#main [data-old]'),
          refusal: words(one('#refusal')), failed: one('#failed textarea') ? one('#failed textarea').value : ''} }"""
MARK = "() => { const e = document.querySelector('#main').firstElementChild; if (e) e.dataset.old = '1' }"
HALF_MS = 450           # a draft is on the disk 300 ms after the last keystroke

Script = dict[str, list[Any]]


@dataclass
class Plan:
    """What the hand does beside answering.

    script: step id (or "nameplate.field") -> answers, one for each round that it comes up, the last used again; an
    answer is a text, a list of repeats, {"text" or "texts", "range"}, {"stopwatch": number of times}, a dict of cell or
    column -> text, a choice's id.
    reload: slot at which the page is closed and opened again with half the reading typed.
    slips: slot -> what is typed first and corrected; left: slot -> the reason in words.
    """

    script: Script
    reload: str = ""
    slips: dict[str, str] = field(default_factory=dict)
    left: dict[str, str] = field(default_factory=dict)


class Worker:
    """One item of one job under one hand.  said: slot -> the statements that stood on the glass after Take."""

    def __init__(self, hand: Hand, desk: Desk, procedure: str, plan: Plan,
                 each: Callable[[Worker], None] | None = None) -> None:
        self.hand = hand
        self.page = hand.page
        self.desk = desk
        self.part = part_of(procedure)
        self.plan = plan
        self.each = each
        self.steps = {one["id"]: one for one in self.part["steps"]}
        self.plates = {one["id"]: one for one in self.part["nameplate"]}
        self.rounds: dict[str, list[str]] = {}
        self.said: dict[str, list[str]] = {}
        self.screens = 0

    # ---- moving

    def look(self) -> dict[str, Any]:
        found: dict[str, Any] = self.page.evaluate(LOOK)
        assert found["failed"] == "", found["failed"]
        return found

    def press(self) -> dict[str, Any]:
        """The thumb's key; waits until another screen or another key is there, and gives how it looks."""
        before = self.look()["act"]
        self.page.evaluate(MARK)
        self.hand.press()
        return self.changed(before)

    def changed(self, before: str = "") -> dict[str, Any]:
        def ask() -> dict[str, Any] | None:
            now = self.look()
            assert now["refusal"] == "", now
            return now if not now["old"] or now["act"] != before else None
        return dict(until(ask, "a change"))  # type: ignore[call-overload]

    def go(self, address: str) -> None:
        self.page.evaluate(MARK)
        self.page.goto(self.desk.address + address)
        until(lambda: not self.look()["old"], address)

    # ---- the whole item

    def work(self) -> None:
        """From the item's page to the screen of its outcome."""
        for _ in range(600):
            now = self.look()
            self.screens += 1
            if self.each is not None:
                self.each(self)
            if now["title"] == "Outcome":
                return
            self.screen(now)
        raise AssertionError("the path does not end")

    def screen(self, now: dict[str, Any]) -> None:
        """Answers one screen."""
        if now["act"] == "agree":
            self.press()
        elif now["title"] == "Conditions":
            self.conditions()
        elif "/step/" not in now["hash"] or now["act"] == "next":
            self.press()
        else:
            self.step(now["hash"])

    def conditions(self) -> None:
        for name, text in self.plan.script["conditions"][0].items():
            self.hand.type(name, text)
        self.press()

    def step(self, place: str) -> None:
        key, _, cell = unquote(place.split("/step/")[1]).partition("/cell/")
        name, number, *more = key.split("|")
        slot = "|".join([name, number, cell or (more[0] if more else "")])
        if slot in self.plan.left:
            self.leave(slot)
            return
        if name == "nameplate":
            self.nameplate(more[0])
            return
        given = self.given(name, number)
        step = self.steps.get(name, {"kind": "confirm"})
        if step["kind"] in ("measure", "table", "timing"):
            self.reading(slot, self.cell(given, cell) if step["kind"] == "table" else given)
        else:
            getattr(self, step["kind"])(step, given)
            self.take(slot)

    def given(self, name: str, number: str) -> Any:
        """The script's answer for a step at a round."""
        answers = self.plan.script.get(name)
        if answers is None:
            return None
        seen = self.rounds.setdefault(name, [])
        if number not in seen:
            seen.append(number)
        return answers[min(seen.index(number), len(answers) - 1)]

    @staticmethod
    def cell(given: Any, cell: str) -> Any:
        return given[cell] if cell in given else given[cell.rpartition("/")[2]]

    def take(self, slot: str) -> None:
        """Takes, keeps what stood on the glass, goes on."""
        now = self.press()
        if now["old"]:
            self.keep(slot)
            if self.each is not None:
                self.each(self)
            self.press()

    def keep(self, slot: str) -> None:
        """What the glass says of a slot, once no verdict is to come any more."""
        before: list[str] = []
        for _ in range(40):
            found = self.hand.statements()
            if found and found == before:
                break
            before = found
            self.page.wait_for_timeout(60)
            if not found and self.page.locator("#said-here").inner_text() != "":
                break
        self.said[slot] = before

    # ---- kinds

    def nameplate(self, name: str) -> None:
        given = self.plan.script.get("nameplate." + name)
        if self.plates[name].get("choices"):
            self.choose("choice", str(given[0]) if given else "unknown")
            self.press()
        elif given is None:
            self.page.evaluate(MARK)
            self.page.locator("[data-do=unknown]").tap()
            self.changed("take")
        else:
            self.hand.type("entry", given[0])
            self.press()

    def choose(self, group: str, choice: str) -> None:
        self.page.locator(f"label[for='{group}-{choice.replace(' ', '_')}']").tap()

    def confirm(self, step: dict[str, Any], given: Any) -> None:
        """Nothing to fill in."""

    def action(self, step: dict[str, Any], given: Any) -> None:
        if given:
            self.page.locator("details summary", has_text="Used up").tap()
            self.hand.type("used", given["used"])
            self.hand.type("amount", given["amount"])

    def choice(self, step: dict[str, Any], given: Any) -> None:
        self.choose("choice", given or step["choices"][0]["id"])

    def note(self, step: dict[str, Any], given: Any) -> None:
        self.hand.type("text", given or "nothing to add")

    def photograph(self, step: dict[str, Any], given: Any) -> None:
        self.page.set_input_files("#file", {"name": "a.png", "mimeType": "image/png", "buffer": PIXEL})
        until(lambda: self.page.locator("#preview img").count(), "the picture")

    def sequence(self, step: dict[str, Any], given: Any) -> None:
        for symbol in [given["start"], *given["seen"]]:
            self.page.locator(f".pad[data-arg='{symbol}']").first.tap()

    def reading(self, slot: str, given: Any) -> None:
        """A reading: with its meter's range, by halves over a reload, or with a slip that is put right."""
        if isinstance(given, dict) and "stopwatch" in given:
            for _ in range(given["stopwatch"]):
                self.press()
                self.page.wait_for_timeout(120)
                self.press()
            self.take(slot)
            return
        if self.look()["act"] == "start":
            self.hand.tap("Type the time instead")
        texts = given if isinstance(given, dict) else {"texts": given} if isinstance(given, list) else {"text": given}
        text = " ".join(texts["texts"]) if "texts" in texts else texts["text"]
        if texts.get("range"):
            self.range(texts["range"])
        if slot == self.plan.reload:
            text = self.close_and_open(text)
        if slot in self.plan.slips:
            self.slip(slot, text)
            return
        if slot == self.plan.reload:
            self.page.locator("#entry").press_sequentially(text)    # behind the half that stands there
        else:
            self.hand.type("entry", text)
        self.take(slot)

    def range(self, name: str) -> None:
        line = self.page.locator("#meter")
        if name in line.inner_text():
            return
        function = line.locator(".note").inner_text()
        tag = line.inner_text().split()[0]
        meter = next(key for key, one in meters().items() if one["tag"] == tag)
        assert function in [one["function"] for one in meters()[meter]["functions"]]
        line.locator("[data-do=meters]").tap()
        line.locator(f"[data-arg='{self.desk.ids[meter]} {name}']").tap()

    def close_and_open(self, text: str) -> str:
        """Types half, closes the page, opens it as from the icon; the rest of the text is still to be typed."""
        half = text[:len(text) // 2]
        place, title = self.hand.address(), self.hand.title()
        self.page.locator("#entry").press_sequentially(half)
        self.page.wait_for_timeout(HALF_MS)
        self.page.goto("about:blank")
        self.page.goto(self.desk.address)
        self.hand.wait_for(title)
        assert self.hand.address() == place
        assert self.page.input_value("#entry") == half
        return text[len(half):]

    def slip(self, slot: str, text: str) -> None:
        """Takes a wrong reading, then corrects it with its reason."""
        place = self.hand.address()
        self.hand.type("entry", self.plan.slips[slot])
        now = self.press()
        if not now["old"]:
            self.go(place)
        self.page.evaluate(MARK)
        self.page.locator("[data-do=correct]").tap()
        until(lambda: self.page.locator("#reason-read_again").count(), "the reasons")
        assert self.page.input_value("#entry") == self.plan.slips[slot]
        self.choose("reason", "read again")
        self.hand.type("entry", text)
        self.take(slot)

    def leave(self, slot: str) -> None:
        self.page.evaluate(MARK)
        self.page.locator("[data-do=left]").tap()
        self.changed("take")
        self.choose("reason", "other")
        self.hand.type("words", self.plan.left[slot])
        self.press()


def begin(hand: Hand, desk: Desk, number: str) -> None:
    """From the list of jobs to the first question of the job's one item."""
    hand.begin(desk.address, TECHNICIAN)
    until(lambda: number in hand.text(), "the job")
    hand.tap(number)
    hand.wait_for("Job " + number)
    hand.onward()


def close(worker: Worker, outcome: str, customer: str = "A. Sample") -> None:
    """From the screen of the outcome to the signed job."""
    hand = worker.hand
    assert f"At best: {outcome}\n" in hand.text() + "\n"
    for title in ("Job ", "Customer", "Signature", "Job "):
        if title == "Signature":
            hand.type("name", customer)
        if hand.page.locator("#pad").count():
            hand.draw()
        hand.press()
        hand.wait_for(title)
        if worker.each is not None:
            worker.each(worker)
    assert "Signed by " + TECHNICIAN in hand.text()
