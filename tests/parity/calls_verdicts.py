"""Generated calls of verdicts, their explanations and their scales."""

from __future__ import annotations

import random

from calls_data import Data, Table, as_data, call, named, real, summed, tupled
from calls_values import reading_text, repeats

Dice = random.Random
STATEMENTS = ("pass", "conditional pass", "conditional fail", "fail", "not judged")
STATES = ((), ("in calibration",), ("no meter",), ("overdue",), ("in calibration", "unchecked"))
CITE = {"source": "practice", "clause": "5.3", "edition": ""}


def bounds(dice: Dice) -> tuple[Data, Data]:
    """at_least, at_most about 1, one of them perhaps missing."""
    low, high = dice.uniform(0.6, 1.0), dice.uniform(1.0, 1.6)
    return dice.choice(((real(low), real(high)), (None, real(high)), (real(low), None)))


def limit(dice: Dice) -> Data:
    low, high = bounds(dice)
    if low is None and dice.random() < 0.2:
        high = summed(dice, 2)
    return call(
        "verdicts.Limit",
        "drop",
        low,
        high,
        dice.choice(("simple", "guarded", "guarded", "probability")),
        real(dice.choice((1.0, 1.0, 0.5, 0.0))),
        real(dice.choice((0.95, 0.9))),
        dice.choice(("95 %", "k = 2")),
        dice.random() < 0.25,
    )


def value(dice: Dice) -> Data:
    """Near 1, with repeats often, so that all statements come up."""
    base = call("measured.mean_of_repeats", repeats(dice, dice.randrange(2, 6)), "drop")
    return dice.choice(
        (
            ["o", "*", base, real(dice.uniform(0.12, 0.32))],
            ["o", "*", base, real(0.2)],
            summed(dice, 3),
            real(dice.uniform(0.5, 1.7)),
            None,
        )
    )


def judged(dice: Dice) -> tuple[Data, Data, Data]:
    """(verdict, limit, value) that belong together."""
    of, on = value(dice), limit(dice)
    return call("verdicts.judge", of, on, tupled(list(dice.choice(STATES)))), on, of


def nearly(dice: Dice) -> Data:
    return real(dice.choice((dice.uniform(0.5, 1.7), 1.0, 1.0000000000001, 0.1 + 0.2)))


def explained(dice: Dice) -> list[Data]:
    verdict, on, of = judged(dice)
    return [
        verdict,
        on,
        of,
        "mΩ",
        ["u", "mohm"],
        "(v_plus - v_minus) / (2 i)",
        as_data([("v_plus", reading_text(dice) + " V"), ("v_minus", "-" + reading_text(dice) + " V"), ("i", "0.45 A")]),
        as_data(("leads taken off",)),
        as_data(CITE),
        dice.choice(("PRACTICE", "READ", "MEM?", "")),
        "a note",
    ]


def settling(dice: Dice) -> list[Data]:
    """A repeated reading near a limit: the value, its limit and the verdict."""
    of = [
        "o",
        "+",
        call("measured.mean_of_repeats", repeats(dice, dice.randrange(2, 5)), "drop"),
        summed(dice, 1, 0.01),
    ]
    on = call("verdicts.Limit", "drop", None, real(dice.uniform(4.9, 6.8)), named("rule", "guarded"))
    return [call("verdicts.judge", of, on), on, of]


def drawn(dice: Dice) -> list[Data]:
    low, high = bounds(dice)
    return [
        dice.choice((None, real(dice.uniform(0.3, 2)), real(10 ** dice.uniform(-3, 3)))),
        low,
        high,
        real(dice.choice((0.0, 0.05))),
        real(dice.choice((0.0, 0.07))),
        dice.choice(("", "mΩ")),
        dice.choice(("", "", "", ">", "<")),
        dice.choice((None, real(1.4))),
        dice.choice((None, real(0.9))),
        "drop <&>",
    ]


VERDICTS: Table = {
    "verdicts.not_judged": lambda dice: [limit(dice), "the reading is missing", dice.choice((None, nearly(dice)))],
    "verdicts.statement_of": lambda dice: [nearly(dice), *bounds(dice), real(dice.choice((0.0, 0.1, 0.3)))],
    "verdicts.conformance_probability": lambda dice: [
        nearly(dice),
        real(dice.choice((0.0, 0.05, 0.3))),
        *bounds(dice),
        dice.choice((None, real(4.0), real(27.05))),
    ],
    "verdicts.risk_at_acceptance_limit": lambda dice: [real(dice.uniform(0, 2)), real(dice.choice((2.0, 1.96)))],
    "verdicts.probability_guard": lambda dice: [
        real(dice.choice((0.95, 0.9, 0.6))),
        real(dice.choice((0.0, 0.05, 0.3))),
        *bounds(dice),
        dice.choice((None, real(4.0))),
    ],
    "verdicts.guard_band": lambda dice: [
        limit(dice),
        dice.choice(("simple", "guarded", "probability")),
        call("budgets.expanded", summed(dice, 3)),
        *bounds(dice),
    ],
    "verdicts.judge": lambda dice: [
        value(dice),
        limit(dice),
        tupled(list(dice.choice(STATES))),
        dice.choice(("", "", "", ">", "<")),
    ],
    "verdicts.as_found_word": lambda dice: [dice.choice(STATEMENTS)],
    "verdicts.worse": lambda dice: [dice.choice(STATEMENTS), dice.choice(STATEMENTS)],
    "verdicts.printed": lambda dice: [judged(dice)[0], dice.choice((["u", "mohm"], ["u", "ohm"], ["u", "kohm"]))],
    "explain.put_in": lambda dice: [
        "(v_plus - v_minus) / (2 i)",
        as_data([("v_plus", reading_text(dice)), ("v_minus", "-" + reading_text(dice)), ("hasOwnProperty", "1")]),
    ],
    "explain.percent": lambda dice: [real(dice.uniform(-0.1, 1.1))],
    "explain.probability_text": lambda dice: [dice.choice((None, real(0.0), real(1.0), real(dice.random())))],
    "explain.rounded_down": lambda dice: [real(10 ** dice.uniform(-9, 9)), dice.randrange(1, 5)],
    "explain.with_repeats": lambda dice: [settling(dice)[2], dice.choice((None, 2, 5, 100))],
    "explain.repeats_that_settle": settling,
    "explain.explanation": explained,
    "scale.escaped": lambda dice: [dice.choice(("a < b", "&amp;", '"x"', "Ω > 1", "plain")) + str(dice.randrange(99))],
    "scale.svg": drawn,
    "scale.of_verdict": lambda dice: [
        judged(dice)[0],
        ["u", "mohm"],
        "mΩ",
        dice.choice((None, real(1.3))),
        dice.choice((None, real(0.8))),
    ],
    "scale.sign": lambda dice: [dice.choice(STATEMENTS)],
}
