"""A small phone, built and served once for the tests of the page, and a page on it."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING

import build
import pytest
from phone_server import serving
from small_phone import make_small_repo

if TYPE_CHECKING:
    from playwright.sync_api import Browser, BrowserContext, Page

REPO = Path(__file__).resolve().parent.parent.parent


@pytest.fixture(scope="session")
def small_repo(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return make_small_repo(tmp_path_factory.mktemp("small"), REPO)


@pytest.fixture(scope="session")
def small_phone(small_repo: Path) -> Path:
    out = small_repo / "webui" / "dist"
    build.build(out, small_repo)
    return out


@pytest.fixture(scope="session")
def address(small_phone: Path) -> Iterator[str]:
    with serving(small_phone) as (where, _):
        yield where


@pytest.fixture
def context(chromium: Browser) -> Iterator[BrowserContext]:
    """An empty browser profile."""
    made = chromium.new_context()
    yield made
    made.close()


@pytest.fixture
def page(context: BrowserContext, address: str) -> Page:
    """The small phone, started."""
    made = context.new_page()
    made.set_default_timeout(4000)
    made.goto(address, wait_until="load")
    return made
