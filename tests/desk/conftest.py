"""A desk in a new folder with a small invented rulebook, and phones that talk to it."""

from __future__ import annotations

import sys
from pathlib import Path

import pytest
from flask.testing import FlaskClient

from fieldcheck.desk.app import create_app

sys.path[:0] = [str(Path(__file__).resolve().parent), str(Path(__file__).resolve().parent.parent / "journal")]

from small_rulebook import small_rulebook  # noqa: E402


@pytest.fixture
def phone_folder(tmp_path: Path) -> Path:
    folder = tmp_path / "phone"
    (folder / "a").mkdir(parents=True)
    (folder / "index.html").write_text("<!doctype html><title>phone</title>")
    (folder / "a" / "core.0123456789ab.js").write_text("1")
    return folder


@pytest.fixture
def desk(tmp_path: Path, phone_folder: Path) -> FlaskClient:
    """A client of a desk in an empty workshop."""
    return create_app(tmp_path / "workshop", small_rulebook(), phone_folder).test_client()
