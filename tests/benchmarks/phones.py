"""What the two phone benchmarks share: the built phone on a real desk, a bare Brython page, and a slowed Chromium."""

from __future__ import annotations

import functools
import http.server
import importlib.resources
import logging
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any

import build
from desk_at_hand import PHONE_SIZE

if TYPE_CHECKING:
    from playwright.sync_api import BrowserContext, Page, Playwright

CHROMIUM = "/usr/bin/chromium"
FLAGS = ["--no-sandbox", "--disable-gpu", "--no-first-run", "--disable-background-networking",
         "--disable-component-update", "--disable-sync"]
REPO = Path(__file__).resolve().parents[2]
BARE = """<!doctype html><html lang="en"><head><meta charset="utf-8"><title>bare</title>
<script src="brython.js"></script></head><body onload="brython()"><script type="text/python">
from browser import document, window
document <= "hello"
window.performance.mark("fieldcheck usable")
</script></body></html>"""


def built(folder: Path) -> Path:
    """The phone of this checkout."""
    logging.getLogger("werkzeug").setLevel(logging.ERROR)
    build.build(folder, REPO, cache=REPO / "webui" / ".cache")
    return folder


class Cached(http.server.SimpleHTTPRequestHandler):
    """Files that a browser may keep, as it may the phone's."""

    def end_headers(self) -> None:
        self.send_header("Cache-Control", "no-cache" if self.path.endswith("/") else "max-age=31536000, immutable")
        super().end_headers()

    def log_message(self, format: str, *args: Any) -> None:
        """Silent."""


@contextmanager
def bare_page(folder: Path) -> Iterator[str]:
    """Address of a page with the stock brython.js, which says hello and marks the moment."""
    folder.mkdir()
    (folder / "index.html").write_text(BARE)
    stock = importlib.resources.files("brython") / "data" / "brython.js"
    (folder / "brython.js").write_bytes(stock.read_bytes())
    with http.server.ThreadingHTTPServer(("127.0.0.1", 0), functools.partial(Cached, directory=folder)) as server:
        threading.Thread(target=server.serve_forever, daemon=True).start()
        yield f"http://127.0.0.1:{server.server_port}/"
        server.shutdown()


def browser(playwright: Playwright, profile: Path) -> BrowserContext:
    """A fresh browser process on a profile that stays on the disk."""
    return playwright.chromium.launch_persistent_context(
        str(profile), executable_path=CHROMIUM, headless=True, args=FLAGS, viewport=PHONE_SIZE, has_touch=True
    )


def slowed(page: Page, factor: float) -> None:
    """Makes the page's processor slower, as CDP does it."""
    page.context.new_cdp_session(page).send("Emulation.setCPUThrottlingRate", {"rate": factor})
