"""Each benchmark runs in a tiny form and prints its rows. No time is judged here: a busy machine is no fault."""

from __future__ import annotations

import re

import pytest
from benchmarks import run
from benchmarks.ratios import Paired, Row, at_most, table

from fieldcheck.records.apart import apart

FIGURE = re.compile(r"\d")


@pytest.mark.parametrize("name", ["propagation", "verdict", "append", "record"])
def test_a_benchmark_runs_and_prints_its_rows(name: str) -> None:
    check(name)


@pytest.mark.browser
@pytest.mark.parametrize("name", ["start", "take"])
def test_a_benchmark_of_the_phone_runs_and_prints_its_rows(name: str) -> None:
    apart(check, name)      # it starts Playwright itself, which a thread that drives a browser already refuses


def check(name: str) -> None:
    rows = run.rows(name, tiny=True)
    assert len(rows) >= 2
    assert all(FIGURE.search(row.figure) for row in rows)
    assert [line.strip().split("  ")[0] for line in table(rows).splitlines()[2:]] == [row.name.strip() for row in rows]


def test_every_subject_is_tried_here() -> None:
    assert set(run.SUBJECTS) == {"propagation", "verdict", "append", "record", "start", "take"}


def test_a_missed_goal_is_called_missed() -> None:
    slow = Paired([3.0, 2.0, 9.0], [2.0, 1.0, 3.0])     # ratios 1.5, 2, 3: the median of the ratios, not of the times
    assert slow.ratio() == 2.0
    assert at_most("x", slow, 1.9, 1.0, "s").verdict() == "missed"
    assert at_most("x", slow, 2.0, 1.0, "s").verdict() == "met"
    assert Row("x", "1").verdict() == ""


def test_an_unknown_name_is_refused(capsys: pytest.CaptureFixture[str]) -> None:
    assert run.main(["speed"]) == 2
    assert "there is no benchmark speed" in capsys.readouterr().err
