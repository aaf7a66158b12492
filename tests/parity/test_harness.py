"""The harness itself: the same cases give the same texts in CPython, in the shipped code on V8 and in Chromium.

CPython is the reference: IEEE 754 asks for correctly rounded + - * / and square root, whole numbers are exact,
and `struct` says independently what the bits of a float are.
"""

from __future__ import annotations

import random
import struct
from pathlib import Path
from typing import TYPE_CHECKING, Any

import basic_runner
import build
import pytest
from chromium import run_in_chromium
from parity_answers import answers
from v8 import REPO, run_in_v8

if TYPE_CHECKING:
    from playwright.sync_api import Browser

ENGINE = REPO / "fieldcheck" / "engine"


def hex16(x: float) -> str:
    return struct.pack(">d", x).hex()


def made_cases() -> list[Any]:
    rng = random.Random(3)
    cases: list[Any] = [["product", [rng.randrange(2**40), rng.randrange(2**50)]] for _ in range(20)]
    cases += [["divmod", [rng.randrange(-(2**50), 2**50), rng.randrange(1, 2**30)]] for _ in range(20)]
    cases += [["power", [rng.randrange(2, 40), rng.randrange(200)]] for _ in range(20)]
    floats = [rng.uniform(-1, 1) * 10.0 ** rng.randrange(-150, 150) for _ in range(120)]
    cases += [["arithmetic", [hex16(x), hex16(y)]] for x, y in zip(floats[::2], floats[1::2], strict=True)]
    cases += [["root", [hex16(abs(x))]] for x in floats]
    cases += [["repr", [hex16(x)]] for x in [*floats, 5e-324, 2.2250738585072014e-308, -0.0, 1.5e16, 1e-7]]
    cases += [["exp", [hex16(rng.uniform(-700, 700))]] for _ in range(60)]
    cases += [["log", [hex16(abs(x))]] for x in floats]
    cases += [["fixed", [hex16(rng.randrange(10**6) / 10 ** (n + 1)), n]] for n in (1, 2, 3) for _ in range(40)]
    cases += [["round12", [hex16(x)]] for x in floats]
    cases += [["import", [module.name]] for module in build.modules_below(ENGINE, "fieldcheck.engine", "engine")]
    cases += [["frozen", [7, "ohm"]], ["surplus", []], ["unknown", []]]
    cases += [["echo", ["Ω µ − \u202f \U0001f600 __proto__ \" \\ \n"]]]
    return cases


CASES = made_cases()


@pytest.fixture(scope="module")
def expected() -> list[str]:
    return answers(basic_runner.run, CASES)


def test_the_reference_itself_is_right(expected: list[str]) -> None:
    """struct confirms the bits that the runner packs by hand; errors arrive as text."""
    for (op, args), text in zip(CASES, expected, strict=True):
        if op == "arithmetic":
            x, y = (struct.unpack(">d", bytes.fromhex(a))[0] for a in args)
            assert text == " ".join(hex16(z) for z in (x + y, x - y, x * y, x / y))
        if op == "fixed":
            assert text == f"{struct.unpack('>d', bytes.fromhex(args[0]))[0]:.{args[1]}f}"
        if op == "import":
            assert text == args[0]
        if op == "repr":
            assert text == repr(struct.unpack(">d", bytes.fromhex(args[0]))[0])
    assert "E:TypeError:Taken: unexpected ['unknown']" in expected
    assert "E:EntryError:case: no such operation\n    use another" in expected


def test_v8_agrees(phone_build: Path, expected: list[str]) -> None:
    assert run_in_v8(CASES, "basic_runner", phone_build) == expected


@pytest.mark.browser
def test_chromium_agrees(phone_build: Path, chromium: Browser, expected: list[str]) -> None:
    assert run_in_chromium(CASES, "basic_runner", phone_build, chromium) == expected


def test_a_difference_would_be_seen(phone_build: Path, expected: list[str]) -> None:
    """The printing of floats does differ between the runtimes (notes: f'{2.5:.0f}'), and the harness shows it."""
    folder = Path(__file__).parent
    cases = [["2.5", []]]
    assert answers(lambda case: f"{float(case[0]):.0f}", cases) == ["2"]
    assert run_in_v8(cases, "differing_runner", phone_build, folder) == ["3"]
