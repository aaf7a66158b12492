"""axe-core on a page: the package's own text, run in the page; what it finds wrong, by rule and element."""

from __future__ import annotations

from importlib.resources import files
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from playwright.sync_api import Page

AXE = files("axe_playwright_python").joinpath("axe.min.js").read_text(encoding="utf-8")
RUN = """axe.run(document, {runOnly: ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa', 'best-practice']})
  .then(found => ({passes: found.passes.length,
                   violations: found.violations.map(v => v.id + ': ' + v.nodes.map(n => n.html).join(' '))}))"""


def look(page: Page) -> dict[str, Any]:
    """{"passes": number of rules that held, "violations": ["rule: elements"]} of the page as it stands."""
    if not page.evaluate("typeof window.axe === 'object'"):
        page.evaluate(AXE + ";0")
    found: dict[str, Any] = page.evaluate(RUN)
    return found
