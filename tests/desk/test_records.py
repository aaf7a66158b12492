"""Records at the desk: made from a signed job, listed, downloaded, verified; a changed file is found out."""

from __future__ import annotations

import io
import sys
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path
from typing import Any

import pytest
from flask.testing import FlaskClient
from test_pages import Shop, visible

from fieldcheck.desk.app import create_app

sys.path.insert(0, str(Path(__file__).resolve().parent.parent / "records"))

from small_rulebook import small_rulebook
from trial_job import full_job


class FromThread:
    """A client that asks in a thread of its own, as the server does.

    Sealing runs an event loop, and this thread has one already while a browser test's Chromium is open.
    """

    def __init__(self, desk: FlaskClient) -> None:
        self.desk = desk

    def get(self, *args: Any, **named: Any) -> Any:
        return self._ask(self.desk.get, args, named)

    def post(self, *args: Any, **named: Any) -> Any:
        return self._ask(self.desk.post, args, named)

    @staticmethod
    def _ask(call: Any, args: Any, named: Any) -> Any:
        with ThreadPoolExecutor(1) as pool:
            return pool.submit(call, *args, **named).result()


@pytest.fixture(scope="module")
def made(tmp_path_factory: pytest.TempPathFactory) -> tuple[FromThread, Any, Any]:
    """(desk, trial, answer to "Make the record"): one record is made once, since making takes seconds."""
    folder = tmp_path_factory.mktemp("shop")
    trial = full_job(folder)
    desk = FromThread(create_app(folder, small_rulebook()).test_client())
    assert "signed" in visible(desk.get(f"/jobs/{trial.job}"))
    assert "2026-0002" in visible(desk.get("/"))
    return desk, trial, desk.post(f"/records/of/{trial.job}")


def test_making_leads_to_the_record_verified(made):
    desk, _, answer = made
    assert answer.status_code == 303, answer.text
    page = desk.get(answer.headers["Location"])
    assert page.status_code == 200
    assert "intact and trusted" in visible(page)


def test_the_list_and_the_job_name_it(made):
    desk, trial, answer = made
    number = answer.headers["Location"].rpartition("/")[2]
    assert number in visible(desk.get("/records/?q=tidewater"))
    assert number not in visible(desk.get("/records/?q=quarrymen"))
    job = visible(desk.get(f"/jobs/{trial.job}"))
    assert f"Record {number}" in job and "State: recorded" in job


def test_the_download_is_the_sealed_file(made):
    desk, trial, answer = made
    file = desk.get(answer.headers["Location"] + ".pdf")
    assert file.mimetype == "application/pdf" and file.data.startswith(b"%PDF-1.7")
    assert desk.get(f"/records/of/{trial.job}.pdf", follow_redirects=True).data == file.data
    assert "attachment" in file.headers["Content-Disposition"]
    sent = desk.post("/records/verify", data={"file": (io.BytesIO(file.data), "x.pdf")})
    assert "intact and trusted" in visible(sent)


def test_a_changed_file_is_found_out(made):
    desk, _, answer = made
    data = bytearray(desk.get(answer.headers["Location"] + ".pdf").data)
    data[len(data) // 2] ^= 1
    sent = desk.post("/records/verify", data={"file": (io.BytesIO(bytes(data)), "x.pdf")})
    assert sent.status_code == 200 and "altered:" in visible(sent)


def test_a_second_record_of_the_same_signing_is_refused(made):
    desk, trial, _ = made
    answer = desk.post(f"/records/of/{trial.job}")
    assert answer.status_code == 422 and "nothing came since" in visible(answer)


def test_no_file_is_asked_for_again(made):
    assert made[0].post("/records/verify", data={}).status_code == 422


def test_a_workshop_without_a_name_makes_no_record(desk):
    answer = desk.post(f"/records/of/{Shop(desk).job()}")
    assert answer.status_code == 422 and "has no name yet" in visible(answer)


def test_a_job_that_is_not_signed_gets_no_record(desk):
    job = Shop(desk).job()
    shop = desk.application.extensions["fieldcheck workshop"]
    shop.journal.append_own("workshop.named", {"name": "Invented Works", "address": ""})
    answer = desk.post(f"/records/of/{job}")
    assert answer.status_code == 422 and "not signed" in visible(answer)
    assert "There are none yet." in visible(desk.get("/records/"))
