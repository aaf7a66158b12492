"""A whole job by touch at 390 x 844, from the list to the signature, on a real desk; every kind of step."""

from __future__ import annotations

import hashlib
from typing import TYPE_CHECKING

import pytest
from hand import Hand, until

from fieldcheck.engine import chain
from fieldcheck.journal.hashing import run
from fieldcheck.keys.devices import verify

if TYPE_CHECKING:
    from desk_at_hand import Desk

pytestmark = pytest.mark.browser


def open_item(hand: Hand, desk: Desk) -> None:
    """From nothing to the first question of the first item."""
    hand.begin(desk.address)
    until(lambda: "Hall 2" in hand.text(), "the job")
    hand.tap("2026-001")
    hand.wait_for("Job 2026-001")
    hand.tap("drawer 1")
    hand.wait_for("Contact set, drawer 1")
    hand.onward()


def to_the_first_reading(hand: Hand, desk: Desk) -> None:
    """Nameplate, cautions, cover, supply and conditions, up to the first reading."""
    open_item(hand, desk)
    hand.wait_for("Rated current")
    hand.type("entry", "2")
    hand.onward()
    hand.tap("Four positions")
    hand.onward()
    hand.wait_for("Before: isolated")
    hand.onward()
    hand.wait_for("Take the cover off")
    hand.onward()
    hand.wait_for("Before: low voltage live")
    hand.onward()
    hand.wait_for("Supply: low voltage live")
    assert hand.page.inner_text("#top").startswith("isolated")  # the state that holds until the hold point is done
    hand.onward()
    hand.wait_for("Conditions")
    hand.type("ambient", "22.5")
    hand.onward()
    hand.wait_for("Contact resistance")
    assert hand.page.inner_text("#top").split() == ["low", "voltage", "live", "1", "entry", "open"]


def take(hand: Hand, text: str) -> None:
    hand.type("entry", text)
    hand.onward()


def test_a_job_is_worked_from_the_list_to_the_signature(hand: Hand, desk: Desk) -> None:
    to_the_first_reading(hand, desk)
    # Half-width 0.5 % of 80 + 2 counts of 0.1 mOhm = 0.6, rectangular; times 1.96: 0.68 (GUM 4.3.7; likewise below).
    take(hand, "80")
    assert hand.statements()[0].startswith("Contact resistance fail 80.00 ± 0.68 mΩ outside limit, service")
    hand.onward()
    hand.wait_for("Drop, three times")
    take(hand, "12.1 12.3 12.2")
    hand.onward()
    for row in ("F", "R"):
        hand.wait_for(f"Each finger\n{row}: Drop")
        take(hand, "21.2")
        assert hand.statements()[0].startswith(f"Drop of a finger {row} pass 21.200 ± 0.0")
        hand.onward()
        hand.wait_for(f"Each finger\n{row}: Time")
        hand.press()
        until(lambda: hand.thumb() == "Stop", "a running stopwatch")
        hand.onward()
        hand.onward()
    hand.wait_for("Wear track")
    hand.tap("Even")
    hand.onward()
    hand.wait_for("Eight pulses")
    for symbol in ("F", "N1", "R", "N2", "F"):
        hand.page.locator(".pad", has_text=symbol).first.tap()
    hand.onward()
    assert "F: N1 R N2 F" in hand.text()
    hand.onward()
    hand.wait_for("Coast-down")
    hand.tap("Type the time instead")
    take(hand, "12.5")
    hand.onward()
    hand.wait_for("Supply: isolated")
    hand.onward()
    hand.wait_for("Brush with alcohol")  # called for by the limit that was not met
    hand.onward()
    hand.wait_for("Supply: low voltage live")
    hand.onward()
    hand.wait_for("Contact resistance")
    take(hand, "20.4")
    assert hand.statements()[0].startswith("Contact resistance pass 20.40 ± 0.34 mΩ")
    hand.onward()
    hand.wait_for("Supply: isolated")
    hand.onward()
    hand.wait_for("Photograph")
    hand.page.set_input_files("#file", {"name": "a.png", "mimeType": "image/png", "buffer": PIXEL})
    until(lambda: hand.page.locator("#preview img").count(), "the picture")
    hand.onward()
    hand.wait_for("Remarks")
    hand.type("text", "Spring is soft")
    hand.onward()
    hand.wait_for("Put the cover on")
    hand.onward()
    hand.wait_for("Covers on and tight")
    assert "nothing open" in hand.page.inner_text("#top")
    hand.onward()
    hand.wait_for("Outcome")
    assert "At best: serviceable" in hand.text()
    hand.onward()
    hand.wait_for("Job 2026-001")
    leave_second_out(hand, desk)
    hand.onward()
    hand.wait_for("Customer")
    hand.tap("Nobody present")
    hand.onward()
    hand.wait_for("Signature")
    summary = hand.page.inner_text(".summary")
    assert "Contact resistance: 20.40 ± 0.34 mΩ, pass" in " ".join(summary.split())
    hand.draw()
    hand.onward()
    hand.wait_for("Job 2026-001")
    assert "Signed by R. Example" in hand.text()
    check_signing(desk, summary)


def leave_second_out(hand: Hand, desk: Desk) -> None:
    """The second item is not examined."""
    hand.page.goto(f"{desk.address}#/job/{desk.ids['job']}/{desk.ids['item2']}/outcome")
    hand.wait_for("Outcome")
    hand.tap("Reason, restrictions")
    hand.page.locator("label.option", has_text="Not examined").tap()
    hand.page.locator("label.option", has_text="No time").tap()
    hand.onward()
    hand.wait_for("Job 2026-001")


def check_signing(desk: Desk, summary: str) -> None:
    """The desk took the signing: signature over its text, root over the job's texts, digest of the summary.

    Sources: RFC 6962 2.1 (through the engine's chain, itself checked elsewhere), contract of the event's form.
    """
    until(lambda: desk.events("job.signed"), "the signing at the desk")
    signed = desk.events("job.signed")[0]
    stored = next(one for one in desk.shop.journal.events(limit=10000) if one.type == "job.signed")
    key = desk.events("device.enrolled")[-1]["data"]["public_key"]
    assert verify(key, ("fieldcheck signing 1\n" + stored.text).encode(), desk.shop.journal.signature(stored.hash))
    assert signed["data"]["summary_sha256"] == hashlib.sha256(summary.encode()).hexdigest()
    job = desk.state().jobs[desk.ids["job"]]
    covered = sorted((e for e in job.events if e.type != "job.signed"), key=lambda e: (e.device, e.seq))
    assert signed["data"]["root"] == run(chain.root([e.text for e in covered]))
    assert job.signing() is not None and job.signing().data["name"] == "R. Example"
    assert desk.shop.journal.blob(signed["data"]["blob"]).startswith(b"<?xml")


PIXEL = bytes.fromhex(
    "89504e470d0a1a0a0000000d49484452000000010000000108060000001f15c4890000000d49444154789c63f8ffff3f0005fe02fe"
    "a7d6059b0000000049454e44ae426082")
