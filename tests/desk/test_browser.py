"""The desk in a real Chromium: no axe violation, nothing refused by the policy, the keyboard alone, the live page."""

from __future__ import annotations

import threading
from collections.abc import Iterator
from importlib.resources import files
from pathlib import Path
from socketserver import ThreadingMixIn
from typing import Any
from wsgiref.simple_server import WSGIRequestHandler, WSGIServer, make_server

import pytest
from small_rulebook import small_rulebook
from test_pages import METER, Shop, Worker, entered

from fieldcheck.desk.app import ROOMS, create_app

pytestmark = pytest.mark.browser

AXE = files("axe_playwright_python").joinpath("axe.min.js").read_text(encoding="utf-8")
RUN = """axe.run(document, {runOnly: ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa', 'best-practice']})
  .then(found => ({passes: found.passes.length,
                   violations: found.violations.map(v => v.id + ': ' + v.nodes.map(n => n.html).join(' '))}))"""


class Threaded(ThreadingMixIn, WSGIServer):
    daemon_threads = True


class Silent(WSGIRequestHandler):
    def log_message(self, format: str, *args: Any) -> None:
        """Says nothing."""


@pytest.fixture(scope="module")
def served(tmp_path_factory: pytest.TempPathFactory) -> Iterator[tuple[str, Shop, str]]:
    """(address, workshop, job with two answers in dispute), served from this process."""
    folder = tmp_path_factory.mktemp("desk")
    app = create_app(folder / "w", small_rulebook(), Path("none"))
    shop = Shop(app.test_client())
    entered(shop.desk, "meters", "meter", {**METER, "tag": "M2", "due": "2020-01-01", "calibrated": "", **shop.by})
    job = shop.job()
    for text in ("31.2", "48.9"):
        Worker(shop, job).read(shop, text)
    with make_server("127.0.0.1", 0, app, Threaded, Silent) as server:
        threading.Thread(target=server.serve_forever, daemon=True).start()
        yield f"http://127.0.0.1:{server.server_port}", shop, job
        server.shutdown()


@pytest.fixture
def page(chromium: Any, request: pytest.FixtureRequest) -> Iterator[Any]:
    context = chromium.new_context(color_scheme=getattr(request, "param", "light"))
    page = context.new_page()
    page.complaints = []
    page.on("console", lambda said: page.complaints.append(said.text) if said.type == "error" else None)
    page.on("pageerror", lambda error: page.complaints.append(str(error)))
    yield page
    context.close()


def addresses(shop: Shop, job: str) -> list[str]:
    return [*(address for address, _ in ROOMS), f"/jobs/{job}", "/jobs/new", f"/jobs/new?site={shop.site}",
            "/meters/new", f"/meters/{shop.meter}", "/equipment/new", f"/equipment/{shop.equipment}", "/persons/new",
            "/sites/new", "/lubricants/new", "/records/verify", "/customers/?q=nothing+like+it"]


@pytest.mark.parametrize("page", ["light", "dark"], indirect=True)
def test_no_page_has_an_axe_violation_or_a_refused_script_or_style(page, served):
    base, shop, job = served
    found = {}
    for address in addresses(shop, job):
        page.goto(base + address)
        page.evaluate(AXE + ";0")
        looked = page.evaluate(RUN)
        assert looked["passes"] > 10, address
        if looked["violations"]:
            found[address] = looked["violations"]
    assert found == {}
    assert page.complaints == []


def test_a_refused_form_and_the_error_page_have_no_axe_violation(page, served):
    base, _, _ = served
    page.goto(base + "/meters/new")
    page.get_by_role("button", name="Keep").click()
    assert page.get_by_role("alert").is_visible()
    page.evaluate(AXE + ";0")
    assert page.evaluate(RUN)["violations"] == []
    page.goto(base + "/nothing")
    page.evaluate(AXE + ";0")
    assert page.evaluate(RUN)["violations"] == []


def test_axe_finds_what_is_wrong_when_something_is(page, served):
    page.goto(served[0] + "/customers/")
    page.evaluate("document.querySelector('label').remove()")
    page.evaluate(AXE + ";0")
    assert any(one.startswith("label") for one in page.evaluate(RUN)["violations"])


def test_the_policy_refuses_an_inline_script(page, served):
    page.goto(served[0])
    page.evaluate("""() => { const s = document.createElement('script'); s.textContent = 'window.ran = 1'
                             document.body.append(s) }""")
    assert page.evaluate("window.ran") is None
    assert any("Content Security Policy" in said for said in page.complaints)


def test_a_customer_is_entered_by_the_keyboard_alone(page, served):
    base = served[0]
    page.goto(base + "/customers/new")
    page.keyboard.press("Tab")
    assert page.evaluate("document.activeElement.className") == "skip"
    page.keyboard.press("Enter")
    page.keyboard.press("Tab")
    page.keyboard.type("Keyboard Hall")
    for _ in range(3):
        page.keyboard.press("Tab")
    page.keyboard.type("Ines")
    page.keyboard.press("Tab")
    page.keyboard.press("Enter")
    page.wait_for_url("**/customers/?fresh=*")
    assert "Keyboard Hall" in page.inner_text("table")


def test_enter_in_a_field_keeps_the_form_and_adds_no_row(page, served):
    base, shop, _ = served
    page.goto(base + f"/equipment/{shop.equipment}")
    page.get_by_label("Written by").select_option(label="Ines Example")
    page.get_by_role("textbox", name="Number, identity 1").press("Enter")
    page.wait_for_url("**/equipment/?fresh=*")


def test_the_job_page_shows_a_reading_within_a_few_seconds_and_keeps_what_is_being_typed(page, served):
    base, shop, _ = served
    job = shop.job(number="J-live")
    page.goto(f"{base}/jobs/{job}")
    page.get_by_label("Technician").select_option(label="Ines Example")
    page.locator("details summary").first.click()
    worker = Worker(shop, job)
    worker.item = next(one["items"][0]["item"] for one in shop.desk.get("/api/jobs").json["jobs"] if one["job"] == job)
    worker.read(shop, "31.2")
    page.get_by_role("cell", name="± 0.36 mΩ pass").wait_for(timeout=10_000)
    assert page.get_by_label("Technician").input_value() == shop.person
    assert page.locator("details").first.get_attribute("open") is not None
    assert page.complaints == []


def test_targets_are_large_enough_for_a_thumb(page, served):
    base, shop, job = served
    for address in addresses(shop, job):
        page.goto(base + address)
        small = page.evaluate("""() =>
            [...document.querySelectorAll('button, select, input[type=text], .rooms a, .key')]
            .filter(one => one.offsetParent && !one.classList.contains('unseen') && one.offsetHeight < 44)
            .map(one => one.outerHTML.slice(0, 80))""")
        assert small == [], address


def test_no_page_is_wider_than_a_narrow_screen(chromium, served):
    base, shop, job = served
    context = chromium.new_context(viewport={"width": 390, "height": 844})
    page = context.new_page()
    for address in addresses(shop, job):
        page.goto(base + address)
        assert page.evaluate("document.documentElement.scrollWidth") <= 390, address
    context.close()
