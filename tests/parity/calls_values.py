"""Generated calls of units, entries, values with uncertainty, budgets, meters and formulas."""

from __future__ import annotations

import random
from typing import Any

from calls_data import (
    Data,
    Table,
    as_data,
    call,
    listed,
    measured,
    named,
    real,
    summed,
    tupled,
    value_or_measured,
    wide,
)

from fieldcheck.engine import units

Dice = random.Random
NAMES = list(units.quantity_names())
DIMENSIONS = ("ohm", "V", "A", "W", "s", "K", "V2", "A2s", "m2")
METER: dict[str, Any] = {
    "id": "m1",
    "tag": "M1",
    "name": "bench",
    "calibrated": "2026-03-01",
    "due": "2027-03-01",
    "checked": True,
    "rated": {"low": "18", "high": "28", "tempco": "0.1"},
    "functions": [
        {
            "function": "DC voltage",
            "quantity": "voltage",
            "ranges": [
                {"name": "2 V", "upto": "2 V", "resolution": "0.1 mV", "gain": "0.05 %", "counts": "3"},
                {"name": "20 V", "upto": "20 V", "resolution": "1 mV", "gain": "0.05 %", "counts": "3"},
                {"name": "dial", "upto": "100 V", "class": "1.5 %", "full_scale": "100 V", "division": "2 V"},
            ],
        },
        {
            "function": "ohms",
            "quantity": "resistance",
            "leads": "0.02 ohm",
            "ranges": [
                {"name": "200 ohm", "upto": "200 ohm", "resolution": "0.1 ohm", "gain": "0.8 %", "counts": "2"},
                {"name": "2 kohm", "upto": "2 kohm", "gain": "0.8 %"},
            ],
        },
    ],
}
TYPED = (
    "120",
    "-0,5",
    "2.75 kΩ",
    "2k75",
    "4R7",
    "R47",
    "1.5e3 ohm",
    "72 °F",
    "OL",
    ">200 M",
    "<0.1",
    "1,234",
    "1:23.4",
    "1.2 1.3; 1.4",
    "120 121 119",
    "5 mV",
    "0.47 A",
    "12 mm",
    "3 %",
    "",
    "x",
    "😀",
    "__proto__",
    "1 2 3 4 V",
)


def symbol(dice: Dice, name: str = "") -> str:
    """A unit of the quantity `name`, or of any."""
    return dice.choice([key.partition("@")[0] for key in units.quantity(name or dice.choice(NAMES)).units])


def unit(dice: Dice) -> Data:
    return call("units.unit", symbol(dice))


def dimension(dice: Dice) -> Data:
    if dice.random() < 0.1:
        return ["x", "unit_table.POINT"]
    if dice.random() < 0.4:
        return ["a", call("units.unit", dice.choice(("ohm", "V", "A", "W", "s", "K", "m2"))), "dimension"]
    return tupled([dice.randrange(-2, 3) * 2 for _ in range(5)])


def pair(dice: Dice) -> list[Data]:
    first = dimension(dice)
    return [first, first if dice.random() < 0.7 else dimension(dice)]


def letters(dice: Dice) -> str:
    return "".join(dice.choice("0123456789.,;: -+<>eEkKmMRLΩµ°\u2009\u2212OLVA") for _ in range(dice.randrange(1, 9)))


def reading_text(dice: Dice, size: float = 1.0) -> str:
    return f"{dice.uniform(0.05, 1.9) * size:.{dice.randrange(2, 5)}f}"


def read(dice: Dice, quantity: str = "voltage", count: int | None = None) -> Data:
    text = " ".join(reading_text(dice) for _ in range(count or dice.randrange(1, 5)))
    return call("entry.read", text, quantity)


def typed(dice: Dice) -> list[Data]:
    """What a thumb types: figures with a unit that fits, then whatever else."""
    name = dice.choice(NAMES)
    fitting = f"{dice.randrange(1, 10**6)}e{dice.randrange(-6, 4)} {symbol(dice, name)}"
    return [
        dice.choice((fitting, fitting, fitting, dice.choice(TYPED), letters(dice))),
        name,
        named("decimal", dice.choice(("either", "point", "comma"))),
    ]


def readings(dice: Dice) -> list[Data]:
    ohms = dice.random() < 0.4
    function, quantity = ("ohms", "resistance") if ohms else ("DC voltage", "voltage")
    ranges = (None, None, "2 kohm") if ohms else (None, None, "20 V", "dial")
    return [
        read(dice, quantity),
        dice.choice((None, call("meters.meter", as_data(METER)))),
        function,
        dice.choice(ranges),
        dice.choice((None, real(dice.uniform(5, 40)))),
        "slot " + str(dice.randrange(3)),
        ohms and dice.random() < 0.5,
    ]


def bounded(dice: Dice) -> list[Data]:
    text = dice.choice(("OL", ">1.5", "<0.1", "1.2", ">120 mV", "<1 V", "OL", f">{dice.randrange(9)}"))
    return [
        call("entry.read", text, "voltage"),
        dice.choice((None, call("meters.meter", as_data(METER)))),
        "DC voltage",
        dice.choice((None, "2 V", "20 V")),
    ]


def some_values(dice: Dice) -> list[Data]:
    size = 10.0 ** dice.randrange(-3, 3)
    return [listed([value_or_measured(dice, size * dice.uniform(0.5, 2)) for _ in range(dice.randrange(1, 7))])]


def repeats(dice: Dice, count: int | None = None) -> Data:
    return listed([real(round(dice.gauss(5, 0.01), 3)) for _ in range(count or dice.randrange(2, 9))])


def pair_of_repeats(dice: Dice) -> list[Data]:
    n = dice.randrange(2, 8)
    return [repeats(dice, n), repeats(dice, n)]


def correlated(dice: Dice) -> Data:
    """{(name, name): r} as the engine takes it, or none."""
    if dice.random() < 0.5:
        return None
    return ["c", "pairs", *[tupled(["influence 0", "influence 1"]), real(dice.uniform(-1, 1))]]


def one(low: float, high: float) -> Any:
    """A maker of one argument between two numbers, with uncertainty more often than not."""
    return lambda dice: [value_or_measured(dice, dice.uniform(low, high))]


def tree(dice: Dice, depth: int = 0) -> list[Any]:
    """A formula over v_plus, v_minus, i, column and bound."""
    kind = dice.randrange(10)
    if depth > 3 or kind < 3:
        return dice.choice((["name", "v_plus"], ["name", "v_minus"], ["name", "i"], ["num", reading_text(dice)]))
    if kind < 6:
        return [dice.choice("+-*/"), tree(dice, depth + 1), tree(dice, depth + 1)]
    if kind == 6:
        return ["neg", tree(dice, depth + 1)]
    if kind == 7:
        return ["call", dice.choice(("sqrt", "exp", "atan", "abs", "log")), [tree(dice, depth + 2)], {}]
    if kind == 8:
        return [
            "if",
            [dice.choice(("<", ">=", "==")), tree(dice, depth + 2), tree(dice, depth + 2)],
            tree(dice, depth + 2),
            tree(dice, depth + 2),
        ]
    return dice.choice(
        (
            ["call", "median", [["name", "column"]], {}],
            ["name", "column"],
            ["name", "bound"],
            ["call", "four_wire_resistance", [["name", "v_plus"], ["name", "v_minus"]], {"i": ["name", "i"]}],
            ["name", "absent"],
        )
    )


def evaluated(dice: Dice) -> list[Data]:
    given = [
        "d",
        ["v_plus", summed(dice, 3)],
        ["v_minus", measured(dice, -1.03)],
        ["i", summed(dice, 2)],
        ["column", some_values(dice)[0]],
        ["bound", call("formulas.Bound", dice.choice("<>"), dice.choice((None, measured(dice, 2.0))))],
    ]
    return [as_data(tree(dice)), ["c", "lookup", given]]


VALUES: Table = {
    "unit_table.print_form": lambda dice: [symbol(dice)],
    "units.multiply": pair,
    "units.divide": pair,
    "units.power": lambda dice: [dimension(dice), dice.randrange(-3, 4)],
    "units.root": lambda dice: [dimension(dice)],
    "units.add": pair,
    "units.subtract": pair,
    "units.compare": pair,
    "units.unit": lambda dice: [dice.choice((symbol(dice), symbol(dice), symbol(dice), "ohms", "xV"))],
    "units.quantity": lambda dice: [dice.choice((*NAMES, "resistence", "hasOwnProperty"))],
    "units.quantity_names": lambda dice: [],
    "units.normal": lambda dice: [dice.choice((symbol(dice), "kΩ", "° C", "mm²/s", "µV", "k\u2126", "ohms"))],
    "units.parse_unit": lambda dice: (
        lambda name: [dice.choice((symbol(dice, name), symbol(dice, name), symbol(dice, name), "kΩ", "")), name]
    )(dice.choice((*NAMES, "resistance"))),
    "units.unit_names": lambda dice: [dice.choice(NAMES)],
    "units.default_unit": lambda dice: [dice.choice(NAMES)],
    "units.symbol_text": lambda dice: [unit(dice)],
    "units.to_base": lambda dice: [real(wide(dice, -3, 4)), unit(dice)],
    "units.from_base": lambda dice: [real(wide(dice, -3, 4)), unit(dice)],
    "units.span_to_base": lambda dice: [real(wide(dice, -3, 4)), unit(dice)],
    "units.span_from_base": lambda dice: [real(wide(dice, -3, 4)), unit(dice)],
    "units.exact_base": lambda dice: [
        dice.randrange(-(10**9), 10**9),
        dice.randrange(-12, 9),
        unit(dice),
        dice.random() < 0.5,
    ],
    "units.dimension_name": lambda dice: [dimension(dice)],
    "units.nearest": lambda dice: [dice.choice(("resistence", "volt", "x", "temprature", "")), listed(NAMES)],
    "entry.read": typed,
    "entry.echo": lambda dice: [call("entry.read", *typed(dice)) if dice.random() < 0.4 else read(dice)],
    "numerals.quoted": lambda dice: [letters(dice) * dice.randrange(1, 9)],
    "numerals.characters": lambda dice: [letters(dice)],
    "numerals.pieces": lambda dice: [
        call(
            "numerals.characters", dice.choice((letters(dice), reading_text(dice), "4R7 k", "1.2 1.3; 1.4 V", "1:23.4"))
        ),
        dice.choice(("", "RkM")),
        dice.choice(("either", "point", "comma")),
        dice.random() < 0.5,
    ],
    "numerals.decimals": lambda dice: [
        dice.choice(
            (
                reading_text(dice),
                "1,234",
                "1,5",
                "1,234.5",
                "1.234,5",
                "12.34.5",
                f"{dice.randrange(99)},{dice.randrange(999)}",
            )
        ),
        dice.choice(("either", "point", "comma")),
    ],
    "carrier.merged": lambda dice: [
        as_data({f"k{dice.randrange(5)}": dice.randrange(9)}),
        as_data({f"k{dice.randrange(5)}": dice.randrange(9)}),
    ],
    "carrier.scaled": lambda dice: [summed(dice, 3), real(wide(dice, -2, 2)), real(wide(dice, -2, 2))],
    "carrier.linear": lambda dice: [
        summed(dice, 2),
        real(wide(dice, -2, 2)),
        summed(dice, 3),
        real(wide(dice, -2, 2)),
        real(wide(dice, -2, 2)),
    ],
    "carrier.influence": lambda dice: [
        real(wide(dice, -3, 3)),
        real(dice.choice((-1.0, 0.0, 1.0, 1.0, 1.0)) * dice.random()),
        "name",
        dice.choice((None, None, 1, 4, 0)),
        dice.choice((None, "family")),
    ],
    "carrier.value_of": one(-3, 3),
    "measured.sqrt": one(-0.5, 9),
    "measured.exp": one(-20, 20),
    "measured.log": one(-0.2, 9),
    "measured.log10": one(-0.2, 9),
    "measured.power": lambda dice: [
        value_or_measured(dice, dice.uniform(0.1, 9)),
        value_or_measured(dice, dice.uniform(-3, 3)),
    ],
    "measured.sin": one(-9, 9),
    "measured.cos": one(-9, 9),
    "measured.atan": one(-9, 9),
    "measured.asin": one(-1.1, 1.1),
    "measured.acos": one(-1.1, 1.1),
    "measured.minimum": some_values,
    "measured.maximum": some_values,
    "measured.median": some_values,
    "measured.mean": some_values,
    "measured.spread": some_values,
    "measured.through": lambda dice: [
        ["x", dice.choice(("elementary.exp", "elementary.erf", "angles.sin"))],
        listed([value_or_measured(dice, dice.uniform(-2, 2))]),
    ],
    "measured.standard_deviation": lambda dice: [repeats(dice)],
    "measured.mean_of_repeats": lambda dice: [repeats(dice), "drop"],
    "measured.correlation_of_repeats": pair_of_repeats,
    "budgets.combined": lambda dice: [summed(dice, 4), correlated(dice)],
    "budgets.effective_dof": lambda dice: [summed(dice, 4), correlated(dice)],
    "budgets.budget": lambda dice: [summed(dice, 5), correlated(dice)],
    "budgets.coverage_factor": lambda dice: [
        dice.choice((None, *[real(x) for x in (1, 4, 9.7, 27, 1e5)])),
        dice.choice(("95 %", "99 %", "k = 2", "95.45 %", "much")),
    ],
    "budgets.expanded": lambda dice: [summed(dice, 4), dice.choice(("95 %", "k = 2")), correlated(dice)],
    "meters.meter": lambda dice: [
        as_data(
            {
                **METER,
                "rated": {"low": reading_text(dice, 10), "high": "30"},
                **dice.choice(({}, {}, {}, {"functions": [{"function": "x", "quantity": "voltage"}]})),
            }
        )
    ],
    "meters.meter_state": lambda dice: [
        dice.choice(
            (
                None,
                call(
                    "meters.meter",
                    as_data({**METER, "due": dice.choice(("", "2027-03-01")), "checked": dice.random() < 0.7}),
                ),
            )
        ),
        f"202{dice.randrange(5, 9)}-0{dice.randrange(1, 9)}-15",
    ],
    "meters.function_of": lambda dice: [
        call("meters.meter", as_data(METER)),
        dice.choice(("ohms", "DC voltage", "AC")),
    ],
    "meters.range_of": lambda dice: [
        call("meters.meter", as_data(METER)),
        "DC voltage",
        dice.choice((None, None, "2 V", "20 V", "9 V")),
        real(10 ** dice.uniform(-2, 2.2)),
    ],
    "meters.numbers_of": lambda dice: [read(dice)],
    "meters.reading_value": readings,
    "meters.reading_list": readings,
    "meters.bound_of": bounded,
    "meters.stopwatch_value": lambda dice: [read(dice, "time"), "trip"],
    "formulas.names_in": lambda dice: [as_data(tree(dice))],
    "formulas.evaluate": evaluated,
    "formulas.truth": lambda dice: [dice.choice((True, False, True, False, True, 1, "yes"))],
    "formulas.text": lambda dice: [as_data(tree(dice))],
}
