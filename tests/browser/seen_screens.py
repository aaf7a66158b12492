"""Looks at each kind of screen that a run over the shipped rules comes past, once: axe, edges, the policy."""

from __future__ import annotations

from typing import TYPE_CHECKING

from axe_at_hand import look

if TYPE_CHECKING:
    from worker import Worker


class Looker:
    """Called by a Worker on every screen.  scheme: "light" or "dark"; seen: what was looked at, "kind, key"."""

    def __init__(self, scheme: str) -> None:
        self.scheme = scheme
        self.seen: list[str] = []

    def __call__(self, worker: Worker) -> None:
        now = worker.look()
        place = now["hash"].partition("/step/")[2]
        kind = worker.steps.get(place.split("|")[0], {}).get("kind") or place.split("|")[0] or now["title"]
        name = f"{kind}, {now['act']}"
        if name in self.seen or now["act"] == "":
            return
        self.seen.append(name)
        worker.page.emulate_media(color_scheme="dark" if self.scheme == "dark" else "light")
        found = look(worker.page)
        assert found["violations"] == [], f"{name}: {found['violations']}"
        assert found["passes"] > 10, name
        wide = worker.page.evaluate("[document.documentElement.scrollWidth, innerWidth]")
        assert wide[0] <= wide[1], f"{name}: wider than the screen: {wide}"
