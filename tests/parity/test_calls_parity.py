"""Every public function of the engine gives the same texts and floats in CPython, on V8 and in Chromium.

The arguments are generated, the same every time, at least 20 sets a function (`calls_*.py`); a normal run takes the
first few of each in V8 and fewer in Chromium, the `full` mark all of them. CPython is the reference: IEEE 754 fixes
what + - * / and square root give, and the tests in tests/references hold CPython's answers against the outside.
"""

from __future__ import annotations

import ast
from collections import Counter
from typing import TYPE_CHECKING, Any

import calls_runner
import pytest
from calls_data import cases_of
from calls_events import EVENTS
from calls_maths import MATHS
from calls_physics import PHYSICS
from calls_values import VALUES
from calls_verdicts import VERDICTS
from calls_work import WORK, prelude
from chromium import run_in_chromium
from parity_answers import answers
from v8 import REPO, run_in_v8

if TYPE_CHECKING:
    from pathlib import Path

    from playwright.sync_api import Browser

ENGINE = REPO / "fieldcheck" / "engine"
TABLE = {**MATHS, **VALUES, **VERDICTS, **PHYSICS, **EVENTS, **WORK}
EACH = 20
EACH_IN_A_NORMAL_RUN = 4
IN_ALL = 3000
NOT_CALLED_HERE = {"frozen.frozen": "a class decorator; every value class that the answers show is its work"}
REFUSES_ALWAYS = {"angles.refuse"}


def public_functions() -> set[str]:
    """ "module.function" of every public function at the top of an engine module, physics included."""
    found = set()
    for path in ENGINE.rglob("*.py"):
        module = ".".join(path.relative_to(ENGINE).with_suffix("").parts)
        for node in ast.parse(path.read_text(encoding="utf-8")).body:
            if isinstance(node, ast.FunctionDef) and not node.name.startswith("_"):
                found.add(f"{module}.{node.name}")
    return found


def cases(each: int) -> list[Any]:
    return [*prelude(), *cases_of(TABLE, each)]


def differing(made: list[Any], expected: list[str], found: list[str]) -> list[Any]:
    return [(case, want, got) for case, want, got in zip(made, expected, found, strict=True) if want != got]


def test_every_public_function_is_called_often_enough() -> None:
    calls = Counter(name for name, _ in cases(EACH))
    public = public_functions()
    assert len(public) > 200
    wanted = public - NOT_CALLED_HERE.keys()
    assert {name for name in wanted if calls[name] < EACH} == set()
    assert calls.keys() - {"let"} == wanted, "the tables name a function that is gone"
    assert sum(calls.values()) - calls["let"] >= IN_ALL


def test_most_calls_are_answered_and_no_refusal_is_the_runtimes_own() -> None:
    """A refusal carries the house's what, where and mend; answers differ within a function, so that they can differ."""
    made = cases(EACH)
    expected = answers(calls_runner.run, made)
    assert [one for one in zip(made, expected, strict=True) if one[0][0] == "let" and one[1] != "kept"] == []
    assert [one for one in zip(made, expected, strict=True) if one[1].startswith("E:") and "|" not in one[1]] == []
    answered = Counter(case[0] for case, text in zip(made, expected, strict=True) if not text.startswith("E:"))
    assert {name for name in TABLE if answered[name] < EACH // 2} == REFUSES_ALWAYS
    assert len(set(expected)) > len(made) * 0.6


def agree_in_v8(phone: Path, each: int) -> None:
    made = cases(each)
    expected = answers(calls_runner.run, made)
    assert differing(made, expected, run_in_v8(made, "calls_runner", phone)) == []


def agree_in_chromium(phone: Path, browser: Browser, each: int) -> None:
    made = cases(each)
    expected = answers(calls_runner.run, made)
    assert differing(made, expected, run_in_chromium(made, "calls_runner", phone, browser)) == []


def test_v8_agrees(phone_build: Path) -> None:
    agree_in_v8(phone_build, EACH_IN_A_NORMAL_RUN)


@pytest.mark.full
def test_v8_agrees_on_all(phone_build: Path) -> None:
    agree_in_v8(phone_build, EACH)


@pytest.mark.browser
def test_chromium_agrees(phone_build: Path, chromium: Browser) -> None:
    agree_in_chromium(phone_build, chromium, 1)


@pytest.mark.full
@pytest.mark.browser
def test_chromium_agrees_on_all(phone_build: Path, chromium: Browser) -> None:
    agree_in_chromium(phone_build, chromium, EACH)
