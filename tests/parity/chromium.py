"""Cases run through the shipped phone code in a real Chromium, under the phone's Content-Security-Policy."""

from __future__ import annotations

import json
import shutil
import tempfile
from pathlib import Path
from typing import TYPE_CHECKING, Any

from phone_server import serving
from runner_modules import PARITY, runner_chunk
from v8 import REPO, chunk_names

if TYPE_CHECKING:
    from playwright.sync_api import Browser

PAGE = '<!doctype html><html lang="en"><head><meta charset="utf-8"><title>parity</title>{}</head><body></body></html>'
BOOT = """
document.body.onload = function () {}
brython({indexeddb: false})
__BRYTHON__.handle_error = function (error) { window.fault = __BRYTHON__.error_trace(error) }
fieldcheckChunks.begin("parity_driver")
"""


def run_in_chromium(
    cases: list[Any], runner_module: str, phone: Path, browser: Browser, folder: Path = PARITY
) -> list[str]:
    """As run_in_v8, in a page of `browser` served from loopback."""
    with tempfile.TemporaryDirectory() as made:
        site = Path(made)
        shutil.copytree(phone / "a", site / "a")
        (site / "parity.js").write_text(runner_chunk(runner_module, REPO, folder), encoding="utf-8")
        (site / "boot.js").write_text(BOOT)
        names = [next((phone / "a").glob(f"{name}.{'[0-9a-f]' * 12}.js")).name for name in scripts(phone)]
        paths = [*(f"a/{name}" for name in names), "parity.js", "boot.js"]
        tags = [f'<script defer src="{path}"></script>' for path in paths]
        (site / "index.html").write_text(PAGE.format("".join(tags)))
        with serving(site) as (address, _):
            return in_page(browser, address, cases)


def scripts(phone: Path) -> list[str]:
    return ["brython", "loader", *chunk_names(phone)]


def in_page(browser: Browser, address: str, cases: list[Any]) -> list[str]:
    page = browser.new_page()
    try:
        page.goto(address, wait_until="load")
        fault = page.evaluate("window.fault || ''")
        if fault:
            raise RuntimeError(fault)
        return list(json.loads(page.evaluate("text => fieldcheckRunCases(text)", json.dumps(cases))))
    finally:
        page.close()
