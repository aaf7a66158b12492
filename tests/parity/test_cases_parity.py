"""Every case beside a procedure: verdicts, texts and explanations are the same in CPython, on V8 and in Chromium.

That they are right is held by `fieldcheck rules check`, which compares each case with what stands beside it. A normal
run takes every eighth case in V8 and leaves Chromium to the `full` mark, which takes all.
"""

from __future__ import annotations

import functools
from typing import TYPE_CHECKING, Any

import cases_runner
import pytest
from chromium import run_in_chromium
from parity_answers import answers
from v8 import run_in_v8

from fieldcheck import rulebook
from fieldcheck.engine import texts

if TYPE_CHECKING:
    from pathlib import Path

    from playwright.sync_api import Browser

SOME = 8
PROCEDURES = sorted(one.name.removesuffix(".toml").replace("_", "-")
                    for one in (rulebook.rules_folder() / "procedures").glob("*.toml")
                    if not one.name.endswith(".cases.toml"))


@functools.cache
def loaded() -> rulebook.Rulebook:
    return rulebook.load(rulebook.rules_folder())


def cases(procedure: str, stride: int = 1) -> list[Any]:
    """The part's exact text, then each case's run judged and explained; only judged, but for the first, in a part."""
    book = loaded()
    made: list[Any] = [["part", [book.parts[book.by_id[procedure]]]]]
    for number, (_, run, _) in enumerate(rulebook.runs(procedure)[::stride]):
        made.append(["assess", [texts.write(run)]])
        if stride == 1 or number == 0:
            made.append(["explanations", [texts.write(run)]])
    return made


def agreed(made: list[Any], found: list[str], expected: list[str]) -> None:
    names = [case[0] + " " + case[1][0][:3000] for case in made]
    assert [one for one in zip(names, expected, found, strict=True) if one[1] != one[2]] == []


def expected_of(made: list[Any]) -> list[str]:
    """CPython's answers; each must be one."""
    expected = answers(cases_runner.run, made)
    assert [text for text in expected if text.startswith("E:")] == []
    assert len(set(expected)) > len(made) // 2
    return expected


def test_there_are_five_procedures() -> None:
    assert len(PROCEDURES) >= 5


@pytest.mark.parametrize("procedure", PROCEDURES)
def test_some_cases_agree_in_v8(procedure: str, phone_build: Path) -> None:
    made = cases(procedure, SOME)
    agreed(made, run_in_v8(made, "cases_runner", phone_build), expected_of(made))


@pytest.mark.full
@pytest.mark.parametrize("procedure", PROCEDURES)
def test_all_cases_agree_in_v8(procedure: str, phone_build: Path) -> None:
    made = cases(procedure)
    agreed(made, run_in_v8(made, "cases_runner", phone_build), expected_of(made))


@pytest.mark.full
@pytest.mark.browser
@pytest.mark.parametrize("procedure", PROCEDURES)
def test_all_cases_agree_in_chromium(procedure: str, phone_build: Path, chromium: Browser) -> None:
    made = cases(procedure)
    agreed(made, run_in_chromium(made, "cases_runner", phone_build, chromium), expected_of(made))
