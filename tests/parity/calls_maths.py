"""Generated calls of the engine's own mathematics: elementary functions, angles, distributions, figures."""

from __future__ import annotations

import random

from calls_data import Table, any_float, real, wide

Dice = random.Random
HALF_PI = 1.5707963267948966


def turn(dice: Dice) -> list[object]:
    return [real(dice.choice((dice.uniform(-7, 7), dice.uniform(-800000, 800000), dice.randrange(99) * HALF_PI)))]


def point(dice: Dice) -> list[object]:
    side = [dice.choice((dice.uniform(-5, 5), wide(dice), 0.0, -0.0, 1e-310)) for _ in range(2)]
    return [real(side[0]), real(side[1])]


def powered(dice: Dice) -> list[object]:
    x, y = dice.choice(
        (
            (10 ** dice.uniform(-30, 30), dice.uniform(-8, 8)),
            (dice.uniform(0.5, 2), wide(dice, 0, 2)),
            (float(dice.randrange(-9, 9)), float(dice.randrange(0, 9))),
        )
    )
    return [real(x), real(y)]


def freedom(dice: Dice) -> object:
    return dice.choice((None, *[real(nu) for nu in (1, 2, 3, 5, 10, 27, 100, 999, 1001, 1.5, 9.7, 1e6)]))


def chance(dice: Dice) -> object:
    return real(dice.choice((dice.uniform(0, 1), 10 ** dice.uniform(-11, -1))))


def counted(dice: Dice) -> list[object]:
    n = dice.randrange(1, 10 ** dice.randrange(1, 5))
    return [dice.randrange(0, n + 1), n]


def numeral(dice: Dice) -> str:
    whole = "".join(dice.choice("0123456789") for _ in range(dice.randrange(1, 25)))
    part = "".join(dice.choice("0123456789") for _ in range(dice.randrange(0, 25)))
    text = dice.choice(("", "-", "+")) + whole + ("." + part if part else "")
    text += dice.choice(("", "", f"e{dice.randrange(-330, 300)}"))
    return dice.choice(
        (
            text,
            text,
            text,
            text,
            dice.choice(
                (
                    ".5",
                    "5.",
                    "1,5",
                    "1e",
                    "0x10",
                    "nan",
                    " 1",
                    "1_0",
                    "１",
                    "",
                    "--1",
                    "2.4703282292062328e-324",
                    "1e309",
                )
            ),
        )
    )


def places(dice: Dice) -> list[object]:
    return [real(any_float(dice)), dice.randrange(0, 8)]


MATHS: Table = {
    "elementary.exp": lambda dice: [real(dice.uniform(-750, 712))],
    "elementary.expm1": lambda dice: [real(dice.choice((dice.uniform(-45, 45), wide(dice, -20, 0))))],
    "elementary.log": lambda dice: [real(10 ** dice.uniform(-323, 308))],
    "elementary.log1p": lambda dice: [real(dice.choice((dice.uniform(-1, 3), wide(dice, -20, -1))))],
    "elementary.log10": lambda dice: [
        real(dice.choice((10 ** dice.uniform(-307, 308), 10.0 ** dice.randrange(-20, 20))))
    ],
    "elementary.power": powered,
    "elementary.erf": lambda dice: [real(dice.uniform(-7, 7))],
    "elementary.erfc": lambda dice: [real(dice.uniform(-7, 28))],
    "elementary.stirling_rest": lambda dice: [real(dice.uniform(0.25, 20))],
    "elementary.lgamma": lambda dice: [real(dice.choice((10 ** dice.uniform(-10, 20), dice.uniform(0.01, 12))))],
    "angles.refuse": lambda dice: [dice.choice(("sin", "acos")), real(wide(dice)), "|x| <= " + str(dice.randrange(9))],
    "angles.product_rest": lambda dice: (lambda a, b: [real(a), real(b), real(a * b)])(wide(dice), wide(dice)),
    "angles.nearest": lambda dice: [real(dice.choice((dice.uniform(-9, 9), wide(dice, 0, 15), 2.5, -0.5)))],
    "angles.sin": turn,
    "angles.cos": turn,
    "angles.atan": lambda dice: [real(wide(dice))],
    "angles.atan2": point,
    "angles.asin": lambda dice: [real(dice.uniform(-1.01, 1.01))],
    "angles.acos": lambda dice: [real(dice.uniform(-1.01, 1.01))],
    "distributions.normal_density": lambda dice: [real(dice.uniform(-40, 40))],
    "distributions.normal_cdf": lambda dice: [real(dice.uniform(-38, 8))],
    "distributions.normal_quantile": lambda dice: [
        real(dice.choice((dice.uniform(0, 1), 10 ** dice.uniform(-300, 0))))
    ],
    "distributions.beta_cdf": lambda dice: [
        real(dice.uniform(0, 1)),
        real(10 ** dice.uniform(-0.5, 3)),
        real(10 ** dice.uniform(-0.5, 3)),
    ],
    "distributions.beta_quantile": lambda dice: [
        chance(dice),
        real(1 + 10 ** dice.uniform(-1, 4)),
        real(1 + 10 ** dice.uniform(-1, 4)),
    ],
    "distributions.student_cdf": lambda dice: [real(dice.uniform(-8, 8)), freedom(dice)],
    "distributions.student_quantile": lambda dice: [chance(dice), freedom(dice)],
    "distributions.coverage_factor": lambda dice: [freedom(dice), real(dice.choice((0.95, 0.9545, 0.99)))],
    "distributions.clopper_pearson": lambda dice: [*counted(dice), real(0.05)],
    "distributions.upper_bound": lambda dice: [*counted(dice), real(0.95)],
    "distributions.clean_pulses_needed": lambda dice: [real(10 ** dice.uniform(-5, -0.1)), real(0.95)],
    "distributions.wilson": lambda dice: [*counted(dice), real(0.95)],
    "figures.fixed": places,
    "figures.signed_fixed": places,
    "figures.printed": lambda dice: [real(any_float(dice)), dice.randrange(-3, 8)],
    "figures.significant": lambda dice: [real(any_float(dice)), dice.randrange(1, 16)],
    "figures.round12": lambda dice: [real(any_float(dice))],
    "figures.round_half_up_text": lambda dice: [real(any_float(dice)), dice.randrange(-3, 8)],
    "figures.decimal_text": lambda dice: [real(any_float(dice))],
    "figures.engineering": lambda dice: [real(any_float(dice)), dice.randrange(1, 16)],
    "figures.grouped": lambda dice: [
        dice.choice((numeral(dice), f"{dice.randrange(10**9)}.{dice.randrange(10**7)} V"))
    ],
    "figures.value_with_uncertainty": lambda dice: [
        real(wide(dice, -3, 3)),
        real(10 ** dice.uniform(-6, 3)),
        dice.choice(("", "Ω")),
    ],
    "figures.from_ratio": lambda dice: [dice.randrange(-(2**52), 2**52), dice.randrange(1, 2**52)],
    "figures.parse_decimal": lambda dice: [numeral(dice)],
}
