"""Puts the folders with what the tests have at hand (desk, hand, devices, trial job) on the import path."""

from __future__ import annotations

import sys
from pathlib import Path

TESTS = Path(__file__).resolve().parents[1]
NEEDED = [TESTS.parent, TESTS.parent / "webui", TESTS, *(TESTS / name for name in ("browser", "records", "journal"))]


def add() -> None:
    """Once, before the benchmarks are imported."""
    for folder in NEEDED:
        if str(folder) not in sys.path:
            sys.path.insert(0, str(folder))     # before a package of the same name (build)
