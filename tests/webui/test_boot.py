"""Start of the page under the strict policy, chunks, and the one page for anything uncaught."""

from __future__ import annotations

import shutil
import time
from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING

import pytest
from phone_server import serving
from small_phone import APP

if TYPE_CHECKING:
    from playwright.sync_api import BrowserContext, Page

pytestmark = pytest.mark.browser


def until(page: Page, expression: str) -> object:
    """Polls, because Playwright's own waiting for an expression needs eval in the page."""
    for _ in range(200):
        found = page.evaluate(expression)
        if found:
            return found
        time.sleep(0.02)
    raise AssertionError(f"never true: {expression}")


def test_the_start_breaks_no_policy_and_asks_for_no_python(context: BrowserContext, small_phone: Path) -> None:
    said: list[str] = []
    with serving(small_phone) as (address, asked):
        page = context.new_page()
        page.on("console", lambda message: said.append(message.text))
        page.on("pageerror", lambda error: said.append(str(error)))
        page.goto(address, wait_until="load")
        assert page.inner_text("h1") == "small phone"
        # The rest comes by itself once the page is idle.
        until(page, "performance.getEntriesByType('resource').filter(e => /screens|physics/.test(e.name)).length == 2")
        assert said == []
        assert page.locator("#failed").count() == 0
        assert [path for path in asked if ".py" in path or "?" in path] == []
        assert {path.split(".")[0] for path in asked} >= {"/", "/a/brython", "/a/core", "/a/screens", "/a/physics"}


def test_the_real_phone_breaks_no_policy_and_asks_for_no_python(context: BrowserContext, phone_build: Path) -> None:
    said: list[str] = []
    with serving(phone_build) as (address, asked):
        page = context.new_page()
        page.on("console", lambda message: said.append(message.text))
        page.goto(address, wait_until="load")
        until(page, "performance.getEntriesByName('fieldcheck started').length")
        until(page, "fieldcheckChunks.has('fieldcheck.engine.physics.windings')")
    assert [text for text in said if "Content Security Policy" in text] == []
    assert [path for path in asked if ".py" in path] == []


def test_a_screen_is_imported_once_its_chunk_is_there(page: Page) -> None:
    page.click("#ask")
    assert page.inner_text("#screen") == "screen one"
    page.evaluate("platform.loadChunk('physics')")
    assert page.evaluate("fieldcheckChunks.has('fieldcheck.engine.physics.windings')")


def test_an_unknown_chunk_is_refused(page: Page) -> None:
    message = page.evaluate("platform.loadChunk('cellar').catch(error => error.message)")
    assert message == 'There is no part "cellar" of the program.'


def test_an_altered_chunk_is_refused_and_the_next_try_fetches_it_again(
    context: BrowserContext, small_phone: Path, tmp_path: Path
) -> None:
    site = tmp_path / "site"
    shutil.copytree(small_phone, site)
    chunk = next((site / "a").glob("screens.*.js"))
    right = chunk.read_text()
    chunk.write_text(right.replace("screens", "SCREENS"))
    with serving(site) as (address, _):
        page = context.new_page()
        page.goto(address, wait_until="load")
        message = page.evaluate("platform.loadChunk('screens').catch(error => error.message)")
        assert message == 'The part "screens" of the program did not load.'
        chunk.write_text(right)
        assert page.evaluate("platform.loadChunk('screens')") == "screens"


def test_text_and_locks_cross_the_border_whole(page: Page) -> None:
    """hashlib of the same text in CPython is the reference."""
    import hashlib

    page.click("#keep")
    shown = page.inner_text("#kept").split(" ")
    digest = hashlib.sha256("\U0001f600 \u202f Ω __proto__".encode()).hexdigest()
    assert shown[:3] == ["True", "True", digest] and len(shown[3]) == 8


@pytest.mark.parametrize(
    ("break_it", "happened", "in_report"),
    [
        (lambda p: p.click("#divide"), "ZeroDivisionError: division by zero", "main.py"),
        (lambda p: p.click("#later"), "ZeroDivisionError: division by zero", "wait_and_divide"),
        (lambda p: p.click("#missing"), "ModuleNotFoundError: No module named 'app.nowhere'", "missing"),
        (lambda p: p.evaluate("void setTimeout(() => { null.x })"), "TypeError: Cannot read properties of null", ""),
        (lambda p: p.evaluate("void Promise.reject(new Error('no luck'))"), "Error: no luck", ""),
    ],
    ids=["in a handler", "in a coroutine", "in an import", "in a script", "in a promise"],
)
def test_whatever_is_uncaught_shows_one_page(
    page: Page, break_it: Callable[[Page], None], happened: str, in_report: str
) -> None:
    break_it(page)
    page.wait_for_selector("#failed")
    assert "What happened: " + happened in page.inner_text("#failed")
    assert "Nothing that was taken is lost." in page.inner_text("#failed")
    report = page.input_value("#failed textarea")
    assert report.startswith("fieldcheck 0.") and happened in report and in_report in report
    assert page.locator("#failed").count() == 1


def test_a_fault_is_told_once_and_another_joins_the_report(page: Page) -> None:
    page.click("#divide")
    page.wait_for_selector("#failed")
    page.click("#divide")
    page.click("#missing")
    report = page.input_value("#failed textarea")
    assert report.count("division by zero") == 1 and report.count("app.nowhere") == 1
    line = APP.splitlines().index("    return inner / 0") + 1  # where it stands in the source, docstring and all
    assert f'main.py", line {line}, in divide' in report


def test_a_missing_core_is_told(context: BrowserContext, small_phone: Path, tmp_path: Path) -> None:
    site = tmp_path / "site"
    shutil.copytree(small_phone, site)
    next((site / "a").glob("core.*.js")).unlink()
    with serving(site) as (address, _):
        page = context.new_page()
        page.goto(address, wait_until="load")
        assert "What happened: A part of the program did not load." in page.inner_text("#failed")


def test_the_report_is_text_even_when_it_looks_like_markup(page: Page) -> None:
    page.evaluate("fieldcheckFailed('<img src=x onerror=alert(1)>')")
    assert page.locator("#failed img").count() == 0
    assert "<img src=x onerror=alert(1)>" in page.input_value("#failed textarea")
