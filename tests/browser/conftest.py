"""A desk at hand, an empty phone on it, and the hand that works it."""

from __future__ import annotations

import logging
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING

import pytest
from desk_at_hand import PHONE_SIZE, Desk, running
from hand import Hand

if TYPE_CHECKING:
    from playwright.sync_api import Browser, BrowserContext


@pytest.fixture
def desk(tmp_path: Path, phone_build: Path) -> Iterator[Desk]:
    logging.getLogger("werkzeug").setLevel(logging.ERROR)
    with running(tmp_path / "workshop", phone_build) as found:
        yield found


@pytest.fixture
def profile(chromium: Browser) -> Iterator[BrowserContext]:
    """An empty browser profile of a phone's size, with touch."""
    made = chromium.new_context(viewport=PHONE_SIZE, has_touch=True)
    yield made
    made.close()


@pytest.fixture
def hand(profile: BrowserContext) -> Iterator[Hand]:
    """A hand on an empty phone; at the end nothing may have been complained of in the console."""
    made = Hand(profile.new_page())
    yield made
    assert made.fault() == ""
    assert [text for text in made.said if "net::ERR" not in text] == []
