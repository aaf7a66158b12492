"""The desk with the rulebook that ships: every kind can be entered, every procedure opened and followed."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from flask.testing import FlaskClient
from test_pages import entered, events, visible

from fieldcheck import rulebook
from fieldcheck.desk.app import create_app


@pytest.fixture(scope="module")
def desk(tmp_path_factory: pytest.TempPathFactory) -> FlaskClient:
    folder = tmp_path_factory.mktemp("shop")
    return create_app(folder, rulebook.load(rulebook.rules_folder()), Path("none")).test_client()


@pytest.fixture(scope="module")
def place(desk: FlaskClient) -> dict[str, str]:
    customer = entered(desk, "customers", "customer", {"name": "Invented Hall", "decimal_mark": "point"})
    return {"site": entered(desk, "sites", "site", {"name": "Cellar", "customer": customer})}


def test_every_procedure_is_opened_and_followed(desk: FlaskClient, place: dict[str, str]):
    shop: Any = desk.application.extensions["fieldcheck workshop"]
    assert shop.index["procedures"]
    for one in shop.index["procedures"]:
        assert desk.get(f"/equipment/new?kind={one['kind']}").status_code == 200
        thing = entered(desk, "equipment", "equipment", {"name": f"A {one['kind']}", **place}, f"?kind={one['kind']}")
        for depth in ("routine", "full"):
            form = {"number": f"J-{one['id']}-{depth}", "reason": "check", "place": "bench",
                    f"item-{thing}-{one['id']}": depth}
            answer = desk.post(f"/jobs/new?site={place['site']}", data=form)
            assert answer.status_code == 303, answer.text
            text = visible(desk.get(answer.headers["Location"]))
            assert f"{one['title']}, {depth}" in text
            assert "cannot be shown" not in text
            assert "min at work" in text
    assert len(events(desk, "job.opened")) == 2 * len(shop.index["procedures"])


def test_every_plate_question_of_the_rulebook_takes_not_marked(desk: FlaskClient, place: dict[str, str]):
    shop: Any = desk.application.extensions["fieldcheck workshop"]
    for kind in shop.index["kinds"]:
        plates = shop.plates(kind)
        form = {f"plate-{p['id']}" + ("" if p["choices"] else "-unknown"): "unknown" for p in plates}
        entered(desk, "equipment", "equipment", {"name": "Unmarked", **place, **form}, f"?kind={kind}")
        assert events(desk, "equipment.entered")[-1]["nameplate"] == {p["id"]: {"unknown": True} for p in plates}
