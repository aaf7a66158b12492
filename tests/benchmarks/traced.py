"""Chromium's own trace of a page: seconds of processor of its main thread, which a busy machine does not lengthen."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from playwright.sync_api import Page

CATEGORIES = "devtools.timeline,blink.user_timing"


class Trace:
    """Records from the start until `events` is called, once."""

    def __init__(self, page: Page) -> None:
        self._page = page
        self._session = page.context.new_cdp_session(page)
        self._found: list[dict[str, Any]] = []
        self._done = False
        self._session.on("Tracing.dataCollected", lambda told: self._found.extend(told["value"]))
        self._session.on("Tracing.tracingComplete", self._complete)
        self._session.send("Tracing.start", {"transferMode": "ReportEvents",
                                             "traceConfig": {"includedCategories": CATEGORIES.split(",")}})

    def _complete(self, told: object) -> None:
        self._done = True

    def events(self) -> list[dict[str, Any]]:
        """Every event, as Chromium writes it: name, tid, ts, tts, tdur in microseconds, args."""
        self._session.send("Tracing.end")
        for _ in range(500):
            if self._done:
                break
            self._page.wait_for_timeout(20)
        self._session.detach()
        return sorted(self._found, key=lambda one: one.get("ts", 0))


def between_marks(events: list[dict[str, Any]], start: str, end: str) -> list[float]:
    """Processor seconds from each mark `end` back to the last mark `start` before it."""
    found: list[float] = []
    begun = None
    for one in events:
        if one["name"] == start and "tts" in one:
            begun = one["tts"]
        elif one["name"] == end and begun is not None:
            found.append((one["tts"] - begun) / 1e6)
    return found


def until_mark(events: list[dict[str, Any]], name: str) -> float:
    """Processor seconds of the main thread from the navigation that a mark belongs to until that mark."""
    marks = [one for one in events if one["name"] == name and "tts" in one]
    if not marks:
        raise AssertionError(f"the trace lacks the mark {name}")
    last = marks[-1]
    begun = [one["tts"] for one in events if one["name"] in ("CommitLoad", "navigationStart") and "tts" in one
             and one["tid"] == last["tid"] and one["pid"] == last["pid"] and one["ts"] <= last["ts"]]
    return (last["tts"] - (begun[-1] if begun else 0)) / 1e6
