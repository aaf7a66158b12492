"""What every test may use: the folders on the import path, the phone built once, and a Chromium."""

from __future__ import annotations

import fcntl
import sys
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

TESTS = Path(__file__).resolve().parent
REPO = TESTS.parent
for folder in (REPO, REPO / "webui", TESTS, TESTS / "parity"):
    if str(folder) not in sys.path:
        sys.path.insert(0, str(folder))

if TYPE_CHECKING:
    from playwright.sync_api import Browser

CHROMIUM = "/usr/bin/chromium"
CHROMIUM_FLAGS = [
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
]


@pytest.fixture(scope="session")
def phone_build(tmp_path_factory: pytest.TempPathFactory, worker_id: str) -> Path:
    """The folder of a phone built from this checkout, once for all workers of a run."""
    import build

    shared = tmp_path_factory.getbasetemp()
    if worker_id != "master":
        shared = shared.parent  # the folder that all workers of this run have in common
    out, done = shared / "phone", shared / "phone.done"
    with open(shared / "phone.lock", "w") as lock:
        fcntl.flock(lock, fcntl.LOCK_EX)
        if not done.exists():
            build.build(out, REPO, cache=REPO / "webui" / ".cache")
            done.touch()
    return out


@pytest.fixture(scope="session")
def chromium() -> Iterator[Browser]:
    """A headless Chromium; each test opens its own context in it."""
    from playwright.sync_api import sync_playwright

    with sync_playwright() as playwright:
        browser = playwright.chromium.launch(executable_path=CHROMIUM, headless=True, args=CHROMIUM_FLAGS)
        yield browser
        browser.close()
