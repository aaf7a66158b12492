"""Arguments of generated calls as data (see calls_runner.py), and the dice that make them the same every time."""

from __future__ import annotations

import random
import struct
from collections.abc import Callable, Iterator
from typing import Any

Data = Any
Maker = Callable[[random.Random], list[Data]]
Table = dict[str, Maker]


def real(x: float) -> Data:
    """A float by its bits."""
    return ["f", struct.pack(">d", float(x)).hex()]


def listed(values: list[Data]) -> Data:
    return ["l", *values]


def tupled(values: list[Data]) -> Data:
    return ["t", *values]


def as_data(value: Any) -> Data:
    """Plain Python as data: floats by their bits, dicts and lists all the way down."""
    if isinstance(value, float):
        return real(value)
    if isinstance(value, dict):
        return ["d", *[[key, as_data(one)] for key, one in value.items()]]
    if isinstance(value, list):
        return listed([as_data(one) for one in value])
    if isinstance(value, tuple):
        return tupled([as_data(one) for one in value])
    return value


def call(name: str, *arguments: Data) -> Data:
    return ["c", name, *arguments]


def kept(name: str) -> Data:
    return ["v", name]


def named(name: str, argument: Data) -> Data:
    return ["n", name, argument]


def attribute(thing: Data, name: str, *arguments: Data) -> Data:
    return ["a", thing, name, *arguments]


def wide(dice: random.Random, low: float = -20, high: float = 20) -> float:
    """Of either sign, its size spread over decades."""
    return dice.choice((-1, 1)) * 10.0 ** dice.uniform(low, high)


def any_float(dice: random.Random) -> float:
    """Random bits, ties on a five, small whole numbers, and the numbers that stand at some edge."""
    kind = dice.randrange(5)
    if kind == 0:
        found = struct.unpack(">d", dice.randbytes(8))[0]
        return found if found - found == 0.0 else 1.5
    if kind == 1:
        return float(f"{dice.randrange(-99999, 99999)}5e-{dice.randrange(1, 8)}")
    if kind == 2:
        return float(dice.randrange(-5, 6))
    if kind == 3:
        return dice.choice((0.0, -0.0, 5e-324, 1e22, 1e21, 1e16, -1e15, 123456789012345678.0, 2.675, 0.1 + 0.2))
    return wide(dice, -6, 6)


def measured(dice: random.Random, value: float, share: float = 0.02) -> Data:
    """A value with one influence, sometimes with degrees of freedom or in a family."""
    number = dice.randrange(4)
    dof = dice.choice((None, None, 4, 9))
    return [
        "m",
        real(value),
        real(abs(value) * share * dice.uniform(0.1, 1) + 1e-9),
        f"influence {number}",
        dof,
        dice.choice((None, "one range")),
    ]


def value_or_measured(dice: random.Random, value: float) -> Data:
    return measured(dice, value) if dice.random() < 0.6 else real(value)


def summed(dice: random.Random, count: int, size: float = 1.0) -> Data:
    """A Measured of several influences."""
    total = measured(dice, size * dice.uniform(0.5, 2))
    for _ in range(count - 1):
        total = ["o", dice.choice("+-"), total, measured(dice, size * dice.uniform(0.1, 2))]
    return total


def cases_of(table: Table, count: int) -> Iterator[list[Data]]:
    """`count` cases of each function of a table, from dice of its own."""
    for name, maker in table.items():
        dice = random.Random("calls of " + name)
        for _ in range(count):
            yield [name, maker(dice)]
