"""Generated calls of the physics: each function of the registry, and what stands beside them."""

from __future__ import annotations

import random
from typing import Any

from calls_data import Data, Maker, Table, as_data, listed, named, real, tupled, value_or_measured

from fieldcheck.engine.physics import breakers
from fieldcheck.engine.physics.registry import REGISTRY, Function, Parameter

Dice = random.Random
RANGES = {
    "resistance": (1, 3000),
    "voltage": (0.1, 20),
    "current": (3.1, 15),
    "time": (1, 100),
    "temperature": (0, 120),
    "temperature difference": (225, 240),
    "ratio": (0.05, 0.95),
    "count": (0, 40),
    "area": (1e-7, 4e-6),
    "length": (1e-5, 1e-3),
    "viscosity": (5e-6, 4e-4),
    "resistivity": (1e-8, 3e-7),
    "let-through": (100, 5000),
    "force": (0.1, 2),
    "pressure": (1e8, 1e9),
    "angle": (0.1, 3),
    "penetration": (0.02, 0.05),
}
NARROWER = {
    "r_forward": (5, 100),
    "r_reverse": (200, 3000),
    "i_limit": (1, 3),
    "i_preload": (0, 0.9),
    "preloads": (0, 0.9),
    "index": (60, 140),
    "t_trip": (110, 150),
    "t_rated": (20, 40),
    "t_ambient": (0, 35),
    "t_start": (20, 90),
    "t_end": (140, 260),
    "r_settled": (1, 10),
    "resistances": (11, 20),
    "starts": (0, 0.015),
    "lengths": (0.0001, 0.003),
    "after": (0, 0.01),
    "t1": (35, 45),
    "t2": (95, 105),
    "nu1": (3e-5, 4e-4),
    "nu2": (5e-6, 2e-5),
    "nu_40": (3e-5, 3e-4),
    "nu_100": (5e-6, 2e-5),
    "l_40": (6e-4, 9e-4),
    "h_40": (1e-4, 3e-4),
    "tau": (20, 90),
    "r_hot": (1500, 3000),
    "r_cold": (1000, 1500),
    "t_cold": (10, 30),
    "r_leads": (0.01, 0.5),
    "v_threshold": (0.05, 0.3),
    "rate": (1e-4, 0.2),
    "i_saturation": (1e-6, 1e-3),
    "n_vt": (0.03, 0.2),
    "v_open": (0.2, 9),
    "failures": (0, 4),
    "pulses": (40, 400),
    "cells": (1, 8),
}
WORDS = {
    "metal": ("copper", "iron", "aluminium", "tin"),
    "build": ("solid", "flexible"),
    "insulation": ("copper pvc", "aluminium xlpe"),
    "grade": ("00", "000", "1", "2"),
    "start": ("F", "N"),
    "end": ("F", "N", "R"),
    "base": ("mineral", "ester", "silicone", "nothing"),
    "material": ("brass", "nylon", "styrene", "nothing"),
}
DRUMS = (("F", "N", "R", "N"), ("F", "N", "R"), ("F", "R"), ("1", "2", "3", "4", "5", "6", "7", "8"))
AREAS = (0.5e-6, 0.75e-6, 1e-6, 1.5e-6, 2.5e-6, 4e-6)


def argument(parameter: Parameter, dice: Dice) -> Data:
    """One argument of a registry function, in SI."""
    name = parameter.name
    if parameter.kind == "text":
        return dice.choice(WORDS[name])
    low, high = NARROWER.get(name) or RANGES[parameter.quantity]
    if parameter.kind == "list":
        return listed([value_or_measured(dice, dice.uniform(low, high)) for _ in range(dice.randrange(2, 6))])
    if parameter.quantity == "count" and name == "grade":
        return real(dice.choice((22, 32, 46, 68, 100)))
    if parameter.quantity == "count":
        return real(dice.randrange(int(low), int(high)))
    return value_or_measured(dice, dice.uniform(low, high))


def of_run(dice: Dice) -> dict[str, Any]:
    """A run of a drum with a miss or a double now and then."""
    shown = dice.choice(DRUMS)
    place = dice.randrange(len(shown))
    start = shown[place]
    seen = []
    for _ in range(dice.randrange(2, 9)):
        place = (place + dice.choice((1, 1, 1, 1, 1, 0, 2))) % len(shown)
        seen.append(shown[place])
    return {"layout": list(shown), "start": start, "seen": seen}


def of_counted_run(dice: Dice) -> dict[str, Any]:
    run = of_run(dice)
    return {
        "layout": run["layout"],
        "start": run["start"],
        "pulses": float(dice.randrange(10, 500)),
        "end": run["seen"][-1],
    }


def of_trips(dice: Dice) -> dict[str, Any]:
    """Trips of one breaker with a little scatter; some preloaded."""
    count = dice.randrange(2, 6)
    currents = [dice.uniform(3.6, 12) for _ in range(count)]
    preloads = [dice.choice((0.0, dice.uniform(0.5, 2))) for _ in range(count)]
    times = [
        breakers.trip_time_hot(i, p, 3.0, 60.0) * dice.uniform(0.98, 1.02)
        for i, p in zip(currents, preloads, strict=True)
    ]
    return {
        "currents": listed([real(i) for i in currents]),
        "times": listed([value_or_measured(dice, t) for t in times]),
        "preloads": listed([real(p) for p in preloads]),
    }


def of_cooling(dice: Dice) -> dict[str, Any]:
    """Readings on an exponential that falls to a settled value."""
    settled = dice.uniform(9, 11)
    times = [10.0 * k + dice.uniform(0, 5) for k in range(1, dice.randrange(4, 8))]
    curve = [settled + dice.uniform(2.9, 3.1) * 0.97**t for t in times]
    return {
        "times": as_data(times),
        "resistances": listed([value_or_measured(dice, r) for r in curve]),
        "r_settled": real(settled),
    }


def ordered_lists(dice: Dice) -> dict[str, Any]:
    """Openings of a contact one after the other."""
    at = 0.0
    starts, lengths = [], []
    for _ in range(dice.choice((0, 1, 3, 4, 5, 6))):
        at += dice.uniform(0.0005, 0.004)
        starts.append(at)
        lengths.append(dice.uniform(0.0001, 0.0015))
        at += lengths[-1]
    return {"starts": as_data(starts), "lengths": as_data(lengths)}


def given(function: Function, dice: Dice) -> dict[str, Data]:
    """Arguments of a registry function by name, made to belong together where they must."""
    names = [one.name for one in function.parameters]
    made: dict[str, Data] = {}
    if "seen" in names:
        made = {key: as_data(one) for key, one in of_run(dice).items()}
    elif "layout" in names:
        made = {key: as_data(one) for key, one in of_counted_run(dice).items()}
    elif "currents" in names:
        made = of_trips(dice)
    elif "r_settled" in names:
        made = of_cooling(dice)
    elif "starts" in names:
        made = ordered_lists(dice)
    for one in function.parameters:
        if one.name == "area" and function.name.startswith("iec"):
            made["area"] = real(dice.choice(AREAS))
        elif one.name == "metal" and function.name.startswith(("adiabatic", "withstand")):
            made["metal"] = dice.choice(("copper", "aluminium"))
        elif one.name not in made and not (one.optional and dice.random() < 0.3):
            made[one.name] = argument(one, dice)
    return made


def direct(name: str) -> Maker:
    """Arguments for the physics function itself."""
    return lambda dice: [named(key, one) for key, one in given(REGISTRY[name], dice).items()]


def through_registry(dice: Dice) -> list[Data]:
    name = dice.choice(REGISTRY.keys())
    return [name, ["d", *[[key, one] for key, one in given(REGISTRY[name], dice).items()]]]


def run_arguments(dice: Dice) -> list[Data]:
    return [as_data(one) for one in of_run(dice).values()]


def trips_arguments(dice: Dice) -> list[Data]:
    return list(of_trips(dice).values())


MATRIX = as_data(
    [
        (base, material, word)
        for base, material, word in (
            ("mineral", "brass", "ok"),
            ("mineral", "nylon", "ok"),
            ("ester", "nylon", "care"),
            ("ester", "styrene", "never"),
            ("silicone", "styrene", "ok"),
            ("mineral", "styrene", "care"),
        )
    ]
)
MATERIALS = ("brass", "nylon", "styrene", "zinc")


def shelf_oil(dice: Dice, number: int = 0) -> dict[str, Any]:
    kind = dice.choice(("oil", "oil", "grease"))
    found: dict[str, Any] = {
        "id": f"lubricant {number}",
        "type": kind,
        "nlgi": dice.choice(("0", "1", "2")),
        "base": dice.choice(("mineral", "ester", "silicone")),
        "v40": dice.uniform(2e-5, 2e-4),
    }
    found.update(dice.choice(({"v100": dice.uniform(4e-6, 1.5e-5)}, {"index": dice.uniform(80, 130)}, {})))
    return found


def some(dice: Dice) -> Data:
    return as_data(dice.sample(MATERIALS, dice.randrange(0, 3)))


def chosen(dice: Dice) -> list[Data]:
    shelf = [shelf_oil(dice, k) for k in range(dice.randrange(1, 5))]
    return [
        as_data(shelf),
        real(dice.choice((20.0, 40.0, dice.uniform(5, 80)))),
        real(dice.choice((2e-5, 5e-5))),
        real(2.5e-4),
        as_data(["1", "2"]),
        MATRIX,
        some(dice),
    ]


def nu(low: float, high: float, dice: Dice) -> Data:
    return value_or_measured(dice, dice.uniform(low, high))


BESIDE: Table = {
    "physics.breaker_fit.fit": trips_arguments,
    "physics.conductors.adiabatic_k": lambda dice: [
        dice.choice(("copper", "aluminium")),
        nu(20, 90, dice),
        nu(140, 260, dice),
    ],
    "physics.lubricants.goes_with": lambda dice: [MATRIX, dice.choice(("mineral", "ester", "silicone")), some(dice)],
    "physics.lubricants.viscosity_on_shelf": lambda dice: [
        as_data(shelf_oil(dice)),
        real(dice.choice((40.0, 25.0, 60.0))),
    ],
    "physics.lubricants.choose": chosen,
    "physics.lubricants.walther_constants": lambda dice: [
        nu(35, 45, dice),
        nu(3e-5, 3e-4, dice),
        nu(95, 105, dice),
        nu(5e-6, 2e-5, dice),
    ],
    "physics.lubricants.nlgi_grade": lambda dice: [nu(0.008, 0.05, dice)],
    "physics.registry.modules_needed": lambda dice: [dice.choice((*REGISTRY.keys(), "nothing"))],
    "physics.registry.call": through_registry,
    "physics.sequencers.drum": lambda dice: [
        dice.choice(
            (
                as_data(of_run(dice)["layout"]),
                as_data(["F"]),
                as_data({"positions": ["a", "b", "c"], "symbols": dice.choice((["F", "N", "R"], []))}),
            )
        )
    ],
    "physics.sequencers.step_cost": lambda dice: [dice.randrange(0, 9)],
    "physics.sequencers.explain": run_arguments,
    "physics.sequencers.more_pulses": run_arguments,
    "physics.sequencers.steps_between": lambda dice: [
        tupled([dice.randrange(8) for _ in range(dice.randrange(1, 9))]),
        dice.randrange(2, 9),
    ],
    "physics.pulses.counted_run": lambda dice: [as_data(one) for one in of_counted_run(dice).values()],
}
PHYSICS: Table = {
    **{f"physics.{REGISTRY[name].module}.{REGISTRY[name].target}": direct(name) for name in REGISTRY},
    **BESIDE,
}
