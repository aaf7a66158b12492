"""A lubricant picked from the shelf list stands half typed in the steps that ask for its data; nothing is answered."""

from __future__ import annotations

from pathlib import Path

import pytest
from bench_scripts import PLANS
from hand import Hand, until
from invented_bench import NUMBER, bench
from worker import Worker, begin

from fieldcheck.journal.forms import new_id

pytestmark = pytest.mark.browser
SHELF = (
    {"name": "Tin one", "type": "oil", "base": "synthetic-hydrocarbon", "grade": "VG 22", "v40": "22 mm2/s",
     "v100": "4.6 mm2/s"},
    {"name": "Tin two", "type": "grease", "base": "synthetic-hydrocarbon", "nlgi": "1"},
)


class Arrived(Exception):
    """The note that names the lubricants stands on the phone."""


class UpToTheShelf(Worker):
    """Answers what comes before it."""

    def step(self, place: str) -> None:
        if "lubricant_named" in place:
            raise Arrived
        super().step(place)


def test_a_tin_is_picked_and_its_data_only_confirmed(hand: Hand, tmp_path: Path, phone_build: Path) -> None:
    with bench(tmp_path / "workshop", phone_build, [(NUMBER, "gear-lubrication", "routine")]) as desk:
        for one in SHELF:
            desk.write("lubricant.entered", {"lubricant": new_id(), **one})
        begin(hand, desk, NUMBER)
        worker = UpToTheShelf(hand, desk, "gear-lubrication", PLANS["gear-lubrication"])
        with pytest.raises(Arrived):
            worker.work()
        for one in SHELF:
            hand.tap(one["name"])
            hand.page.wait_for_timeout(200)
        until(lambda: hand.page.locator("#shelf [aria-pressed=true]").count() == 2, "both picked")
        hand.page.wait_for_timeout(300)
        names = [one["name"] for one in SHELF]
        worker.press()
        chosen = []
        for _ in range(4):
            entry = hand.page.locator("#entry")
            chosen.append(entry.input_value() if entry.count() else hand.page.locator("input:checked").input_value())
            worker.take("shelf")
        assert chosen == ["two-points", "synthetic-hydrocarbon", "22", "4.6"]   # as SHELF says
        until(lambda: len(desk.events("answer.given")) and "oil_v100" in
              [one["data"]["step"] for one in desk.events("answer.given")], "the desk has them")
        given = {one["data"]["step"]: one["data"]["value"] for one in desk.events("answer.given")}
        assert given["lubricant_named"]["text"] == "; ".join(names)
        assert "grease" not in given, "a draft is no answer"
