"""What a person at a bench expects: drafts, back, corrections, one tap to undo, keys of a foot switch, no network."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from hand import Hand, until
from test_whole_job import take, to_the_first_reading

if TYPE_CHECKING:
    from desk_at_hand import Desk

pytestmark = pytest.mark.browser


def test_a_half_typed_entry_is_there_after_a_reload(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    where = hand.address()
    hand.page.locator("#entry").press_sequentially("20.")
    hand.page.wait_for_timeout(450)
    hand.page.goto("about:blank")
    hand.page.goto(desk.address)  # as from the icon: no address behind it
    hand.wait_for("Contact resistance")
    assert hand.address() == where and hand.page.input_value("#entry") == "20."
    hand.page.locator("#entry").press_sequentially("4")
    hand.onward()
    assert hand.statements()[0].startswith("Contact resistance pass 20.4")


def test_a_correction_keeps_what_it_corrects(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    take(hand, "80")
    assert hand.statements()[0].startswith("Contact resistance fail")
    hand.tap("Correct")
    until(lambda: hand.page.locator("#reason-typing_slip").count(), "the reasons")
    assert hand.page.input_value("#entry") == "80"
    take(hand, "20.4")
    assert hand.statements()[0].startswith("Contact resistance pass 20.40 ± 0.34 mΩ")
    hand.tap("Corrected; all entries")
    assert hand.page.locator("ol.history li").count() == 2 and "80" in hand.page.inner_text("ol.history s")
    until(lambda: desk.events("answer.corrected"), "the correction at the desk")
    corrected = desk.events("answer.corrected")[0]["data"]
    assert corrected["reason"] == "typing slip" and corrected["value"]["text"] == "20.4"
    hand.page.locator("button[data-do=correct]").tap()  # and once more: the address is the question's own again
    until(lambda: hand.page.locator("#reason-typing_slip").count(), "the reasons")
    given = [one for one in desk.shop.journal.events(limit=1000) if one.hash == corrected["corrects"]]
    assert '"text":"80"' in given[0].text


def test_a_step_is_left_out_with_its_reason(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    hand.tap("Not done")
    hand.wait_for("Not done")
    hand.press()
    until(lambda: "Choose a reason" in hand.text(), "the refusal")
    hand.tap("Instrument missing")
    hand.onward()
    hand.wait_for("Drop, three times")
    until(lambda: desk.events("step.left"), "the event")
    assert desk.events("step.left")[0]["data"]["reason"] == "instrument missing"
    hand.page.locator("button.rule").tap()
    hand.wait_for("Contact set, drawer 1")
    assert "not done: instrument missing" in hand.text()


def test_what_cannot_be_read_is_refused_and_stands(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    hand.type("entry", "1,234")
    hand.press()
    until(lambda: "can be read in two ways" in hand.text(), "the question")
    assert hand.page.input_value("#entry") == "1,234" and hand.statements() == []
    hand.page.locator("#refusal button").first.tap()
    until(hand.statements, "a verdict on the reading picked")


def test_back_goes_to_the_question_before_and_a_deep_link_leads_in(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    first = hand.address()
    take(hand, "20.4")
    hand.onward()
    hand.wait_for("Drop, three times")
    hand.page.go_back()
    hand.wait_for("Contact resistance")
    assert hand.address() == first and hand.thumb() == "Next" and hand.statements()
    hand.page.goto("about:blank")
    hand.page.goto(desk.address + first.replace("r|0", "three|0"))
    hand.wait_for("Drop, three times")
    assert hand.thumb() == "Take"


def test_a_step_whose_turn_has_not_come_cannot_be_taken(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    later = hand.address().replace("r|0", "coast|0")
    hand.page.goto(desk.address + hand.address().replace("r|0", "cover_on|0"))
    hand.wait_for("Nothing here")  # closing is not on the path yet
    hand.page.goto(desk.address + later)
    hand.wait_for("Coast-down")
    assert hand.thumb() == "Start"  # within as found the order is free


def test_one_tap_takes_back_a_wrong_tap(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    for text in ("20.4", "12.1 12.3 12.2"):
        take(hand, text)
        hand.onward()
    hand.page.goto(desk.address + hand.address().split("/step/")[0] + "/step/track|0")
    hand.wait_for("Wear track")
    hand.tap("Even")
    hand.onward()
    hand.tap("Undo: Wear track")
    until(lambda: hand.page.locator("#choice-uneven").count(), "the choice again")
    hand.page.locator("label.option", has_text="Uneven").tap()
    hand.onward()
    until(lambda: desk.events("answer.corrected"), "the correction")
    assert desk.events("answer.corrected")[0]["data"]["value"] == {"choice": "uneven"}


def test_space_and_enter_do_what_a_thumb_does(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    keys = hand.page.keyboard
    hand.page.locator("#main").focus()
    keys.type("20.4")
    keys.press("Enter")
    until(hand.statements, "the statement")
    until(lambda: hand.page.evaluate("document.activeElement.id") == "thumb", "the focus on the thumb's key")
    keys.press("Enter")
    hand.wait_for("Drop, three times")
    base = hand.address().split("/step/")[0]
    hand.page.goto(desk.address + base + "/step/coast|0")
    hand.wait_for("Coast-down")
    hand.page.locator("#main").focus()
    keys.press("Space")
    until(lambda: hand.thumb() == "Stop", "running")
    keys.press("Space")
    until(lambda: hand.page.locator("ol.laps li").count() == 1, "a split")
    keys.press("Enter")
    until(lambda: hand.thumb() == "Take", "stopped")
    keys.press("Enter")
    until(hand.statements, "the statement")
    until(lambda: [e for e in desk.events("answer.given") if e["data"]["step"] == "coast"], "the event")
    value = next(e["data"]["value"] for e in desk.events("answer.given") if e["data"]["step"] == "coast")
    assert len(value["laps"]) == 1 and value["wall"] is False and value["unit"] == "s"


def test_a_stopwatch_goes_on_while_another_item_is_worked_and_through_a_reload(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    base = hand.address().split("/step/")[0]
    hand.page.goto(desk.address + base + "/step/coast|0")
    hand.wait_for("Coast-down")
    hand.press()
    until(lambda: hand.thumb() == "Stop", "running")
    hand.page.goto(desk.address + "#/job/" + desk.ids["job"] + "/" + desk.ids["item2"] + "/step/nameplate|0|rated")
    hand.wait_for("Rated current")
    assert hand.page.locator("a.waiting").count() == 1
    hand.page.reload()
    hand.wait_for("Rated current")
    until(lambda: hand.page.inner_text("a.waiting") >= "0:02", "two seconds")
    hand.page.locator("a.waiting").tap()
    hand.wait_for("Coast-down")
    assert hand.thumb() == "Stop"
    hand.onward()
    assert float(hand.page.input_value("#entry")) > 2.0
    hand.onward()
    until(lambda: [e for e in desk.events("answer.given") if e["data"]["step"] == "coast"], "the event")
    value = next(e["data"]["value"] for e in desk.events("answer.given") if e["data"]["step"] == "coast")
    assert value["wall"] is True  # timed across a reload: by the wall clock, and the record says so


def test_cautions_are_read_once_a_person_visit_and_supply_state(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    hand.page.goto(desk.address + "#/job/" + desk.ids["job"] + "/" + desk.ids["item2"])
    hand.wait_for("Contact set, drawer 2")
    hand.onward()
    hand.type("entry", "2")
    hand.onward()
    hand.tap("Four positions")
    hand.onward()
    hand.wait_for("Take the cover off")  # no caution again for the second item
    until(lambda: len(desk.events("caution.acknowledged")) == 2, "both acknowledgements")
    assert [e["data"]["cautions"] for e in desk.events("caution.acknowledged")] == [["plug"], ["hot"]]


def test_an_overdue_meter_is_marked_and_the_last_used_is_offered(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    take(hand, "20.4")
    hand.onward()
    hand.wait_for("Drop, three times")
    assert "M1 bench meter" in hand.page.inner_text("#meter")
    hand.page.locator("#meter button").tap()
    assert "calibration overdue" in hand.page.inner_text("#meter")
    hand.page.locator("#meter button", has_text="M2 hand meter").tap()
    take(hand, "12 12 13")
    hand.onward()
    hand.wait_for("Each finger")
    assert "M2 hand meter" in hand.page.inner_text("#meter")


def test_a_defect_a_part_and_unregistered_equipment_are_noted_on_the_spot(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    hand.tap("Defect")
    hand.wait_for("Defect")
    hand.type("what", "Cracked insulator")
    hand.tap("Stop use")
    hand.onward()
    hand.wait_for("Contact resistance")
    hand.tap("Part used")
    hand.wait_for("Part or consumable used")
    hand.type("what", "Alcohol")
    hand.type("amount", "2")
    hand.onward()
    hand.wait_for("Contact resistance")
    hand.page.goto(desk.address + "#/job/" + desk.ids["job"] + "/add")
    hand.wait_for("Add equipment")
    hand.type("what", "Contact set found in the drawer")
    hand.tap("Trial of a contact")
    hand.onward()
    hand.wait_for("Job 2026-001")
    assert "found in the drawer" in hand.text()
    until(lambda: desk.events("item.added") and desk.events("part.used"), "the events")
    assert desk.events("defect.found")[0]["data"]["level"] == "stop use"
    added = desk.events("item.added")[0]["data"]
    assert desk.state().workshop.get("equipment", added["equipment"])["name"] == "Contact set found in the drawer"


def test_without_the_desk_everything_stays_and_says_so(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    hand.page.context.set_offline(True)
    take(hand, "20.4")
    assert hand.statements()[0].startswith("Contact resistance pass")
    hand.page.goto(desk.address.split("#")[0] + "#/")
    hand.wait_for("Jobs")
    until(lambda: "not yet handed over" in hand.page.inner_text("#top"), "the quiet line")
    hand.page.context.set_offline(False)
    until(lambda: hand.page.inner_text("#top") == "Handed over", "handed over")
    assert [e["data"]["value"]["text"] for e in desk.events("answer.given") if e["data"]["step"] == "r"] == ["20.4"]


def test_the_reason_is_one_tap_away(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    take(hand, "20.4")
    assert hand.page.locator("dl.reason").count() == 0  # built when opened
    hand.page.locator("button.verdict").first.tap()
    until(lambda: hand.page.locator("dl.reason").count(), "the reason")
    reason = hand.page.inner_text("dl.reason")
    for part in ("at most 50 mΩ", "Student's t", "PRACTICE", "usual range, no standard"):
        assert part in reason


def test_another_number_of_readings_is_declared_before_the_first(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    take(hand, "20.4")
    hand.onward()
    hand.wait_for("Drop, three times")
    hand.type("entry", "12.1 12.3")
    hand.press()
    until(lambda: "3 readings are wanted here, 2 typed" in hand.text(), "the refusal")
    hand.tap("Another number of readings")
    hand.page.locator("#sets button", has_text="5").tap()
    until(lambda: "5 readings" in hand.text(), "five")
    take(hand, "12.1 12.3 12.2 12.2 12.1")
    until(lambda: desk.events("set.declared"), "the event")
    assert desk.events("set.declared")[0]["data"]["n"] == 5
