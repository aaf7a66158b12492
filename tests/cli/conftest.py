"""The folder of these tests on the import path, and no workshop of the person who runs them."""

import sys
from pathlib import Path

import pytest

sys.path.insert(0, str(Path(__file__).resolve().parent))


@pytest.fixture(autouse=True)
def _empty_home(monkeypatch, tmp_path):
    monkeypatch.setenv("HOME", str(tmp_path))
    monkeypatch.delenv("FIELDCHECK_DATA", raising=False)
    monkeypatch.chdir(tmp_path)
