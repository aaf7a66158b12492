"""Makes the README's pictures from the real program: `.venv/bin/python demo/pictures.py` (after tests/run.py once).

A fresh invented workshop; the API's phone works the first item up to a reading; Chromium opens the real phone there,
types the reading and takes it; the picture of the record is page one of the demo's record.
"""

import json
import subprocess
import tempfile
import time
from pathlib import Path

import bootstrap
import invented
import run
import season
from phone import Hands, Phone
from playwright.sync_api import Page, sync_playwright
from scripts import SCRIPTS

OUT = bootstrap.REPO / "demo" / "pictures"
PORT = 8497
FLAGS = ["--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-background-networking",
         "--disable-component-update", "--disable-sync"]


def up_to(step: str, data: Path, address: str) -> None:
    """Answers the first item's steps through the API until the one with this id is next."""
    ids = json.loads((data / season.IDS).read_text())
    phone = Phone(address, "Demo phone", season.CLOCK)
    phone.pull()
    phone.enrol()
    phone.person = ids["person"]["tobin"]
    phone.write(ids["job"], "conditions.taken", {"ambient": {"text": "19.5", "unit": "degC"}})
    hands = Hands(phone, ids["job"], ids["item"]["fingers"], SCRIPTS["fingers"], season._meters(ids))
    while True:
        made, flow = phone.flow(ids["job"], ids["item"]["fingers"])
        if flow.current is None or flow.current.step["id"] == step:
            break
        hands.answer(made, flow.current)
    phone.push()


def tap(page: Page, words: str) -> None:
    """Taps the key or link with these words once it is there."""
    page.locator("button, a, label").filter(has_text=words).first.tap(timeout=20_000)


def photograph_phone(address: str) -> None:
    """The reading screen with a value taken."""
    with sync_playwright() as play:
        browser = play.chromium.launch(executable_path="/usr/bin/chromium", args=FLAGS)
        context = browser.new_context(viewport={"width": 390, "height": 844}, has_touch=True, is_mobile=True,
                                      device_scale_factor=2, reduced_motion="reduce")
        page = context.new_page()
        page.goto(address + "/phone/")
        tap(page, invented.PERSONS["tobin"]["name"])
        tap(page, "2026-0001")
        tap(page, invented.EQUIPMENT["fingers"]["name"])
        page.locator("#thumb").tap(timeout=20_000)
        for _ in range(6):              # cautions and conditions stand before the reading
            time.sleep(2)
            if page.locator("#entry").count():
                break
            page.locator("#thumb").tap(timeout=20_000)
        for value in ("39.1", "41.6", "38.4", "40.2", "39.5", "-39.2", "0.500"):
            page.fill("#entry", value)
            page.locator("#thumb").tap()
            time.sleep(2)
        page.screenshot(path=str(OUT / "phone.png"))
        browser.close()


def photograph_record() -> None:
    """Page one of the record that demo/run.py made."""
    record = season.record_of(bootstrap.REPO / "demo" / "workshop")
    if record is None:
        raise SystemExit("make the demo's record first: python3 demo/run.py --once")
    subprocess.run(["pdftoppm", "-r", "70", "-f", "1", "-l", "1", "-png", "-singlefile", str(record),
                    str(OUT / "record")], check=True)


def main() -> None:
    """Both pictures."""
    OUT.mkdir(exist_ok=True)
    photograph_record()
    with tempfile.TemporaryDirectory() as folder:
        data = Path(folder)
        season.create_workshop(data)
        desk = run.start_desk(data, PORT)
        try:
            up_to("worked", data, f"http://127.0.0.1:{PORT}")
            photograph_phone(f"http://127.0.0.1:{PORT}")
        finally:
            desk.terminate()
            desk.wait(20)


if __name__ == "__main__":
    main()
