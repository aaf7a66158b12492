"""The same entries give the same texts, floats and refusals in CPython and in the phone's runtime (embedded V8)."""

from __future__ import annotations

import random
from pathlib import Path
from typing import Any

import entry_runner
from parity_answers import answers
from v8 import run_in_v8

from fieldcheck.engine import units

PARTS = [*"01234567890123456789.,;:/ -+<>eEkKMmRLGnpuFVAOLΩµ°C%sh", "\u2009", "\u2212", "OL", "kΩ", " V", "e3", "4R7",
         "2k75", " mΩ", "min", "１", " 120", ", ", "1,234",
         "\u00a0", "\u00b2", "é", "\U0001d7cf", "__proto__", "\ufeff", "\x1c"]
TYPED = ["120", "-0,5", "2.75 k\u2126", "2k75", "4R7", "R47", "470L", "1.5e3 ohm", "72 °F", "OL", ">200 M", "<0.1",
         "1,234", "1,234.5", "1.234,5", "1\u2009234.5", "4RK7", "1:23.4", "1.2 1.3; 1.4, 1.5 m", "120 121 119",
         "1 234", "0L", "-OL", "\U0001d7cf" * 60, "x" * 300, "", "265 × 0.1 mm", "300 K", "1e-12",
         "12345678901234567", "0.000000123456789"]


def cases() -> list[Any]:
    dice = random.Random(1)
    made: list[Any] = []
    for name in ("resistance", "time", "temperature"):
        made += [["read", [text, name, "either"]] for text in TYPED]
    for name in units.quantity_names():
        for key in units.quantity(name).units:
            symbol = key.partition("@")[0]
            made.append(["unit", [symbol, name]])
            made.append(["read", [f"{dice.randrange(10**6)}e{dice.randrange(-6, 6)} {symbol}", name, "point"]])
        made.append(["unit", ["xV", name]])
    for _ in range(1200):
        text = "".join(dice.choice(PARTS) for _ in range(dice.randrange(1, 9)))
        made.append(["read", [text, dice.choice(units.quantity_names()), dice.choice(("either", "point", "comma"))]])
    made += [["dimension", [dice.randrange(-3, 4) for _ in range(5)]] for _ in range(60)]
    return made


def test_v8_agrees(phone_build: Path) -> None:
    made = cases()
    expected = answers(entry_runner.run, made)
    assert len({text.partition("|")[0] for text in expected}) > 300  # the cases do differ
    found = run_in_v8(made, "entry_runner", phone_build, Path(__file__).parent)
    differing = [(case, a, b) for case, a, b in zip(made, expected, found, strict=True) if a != b]
    assert differing == []
