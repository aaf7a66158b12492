"""Generated calls of an item under work: an invented procedure with a step of most kinds."""

from __future__ import annotations

import random
from typing import Any

from calls_data import Data, Table, as_data, call, kept, listed, summed, value_or_measured, wide
from calls_events import HISTORY, ITEM, JOB, METER
from trial_part import PART

from fieldcheck.engine import texts

Dice = random.Random
WORKS = 20


def run_of(dice: Dice) -> dict[str, Any]:
    """A filled-in run: some whole, some in the middle, with readings on both sides of the limits."""
    met = dice.random() < 0.5
    cells = dice.randrange(1, 3)
    meter = {"meter": dice.choice(("M1", "M1", "M1", None))}
    answers: list[dict[str, Any]] = [{"step": "cover_off", "done": True}]
    answers.append(
        {"step": "r", "text": " ".join(f"{dice.uniform(90, 118 if met else 140):.1f}" for _ in range(2)), **meter}
    )
    for row in range(1, cells + 1):
        answers.append({"step": "cell", "index": f"{row}/forward", "text": f"{dice.uniform(90, 110):.1f}", **meter})
        answers.append(
            {
                "step": "cell",
                "index": f"{row}/reverse",
                **meter,
                "text": dice.choice(
                    (f"{dice.uniform(900, 1400):.0f}", f"{dice.uniform(8, 15):.2f} kΩ", ">20 kΩ", "OL")
                ),
            }
        )
    answers.append({"step": "look", "choice": dice.choice(("clean", "worn"))})
    answers.append(
        {"step": "taps", "start": "F", "seen": dice.choice((["N", "R", "N", "F"], ["N", "N", "R"], ["R", "N"]))}
    )
    if dice.random() < 0.5:
        answers.append({"step": "brush", "round": 1, "done": True})
        answers.append({"step": "r", "round": 1, "text": f"{dice.uniform(80, 125):.1f}", **meter})
    if dice.random() < 0.7:
        answers.append({"step": "final", "text": f"{dice.uniform(80, 155):.1f}", **meter})
        answers.append({"step": "cover_on", "done": True})
    given = answers[: dice.choice((1, 3, 99, 99, 99))]
    left = [{"step": "final", "round": 0, "reason": "no access"}] if dice.random() < 0.2 else []
    return {
        "procedure": "trial",
        "depth": dice.choice(("routine", "routine", "full")),
        "on": "2026-06-01",
        "nameplate": {
            "rated": dice.choice(("1 A", "unknown")),
            "cells": dice.choice((str(cells), str(cells), "unknown")),
            "metal": dice.choice(("brass", "unknown")),
        },
        "meters": [METER],
        "conditions": dice.choice(({"ambient": "23.4 °C"}, {})),
        "left": left,
        "answers": [{key: one for key, one in answer.items() if one is not None} for answer in given],
        "defects": [{"what": "frayed lead", "level": dice.choice(("watch", "stop use"))}]
        if dice.random() < 0.2
        else [],
    }


def prelude() -> list[list[Data]]:
    """What the calls below stand on, kept under names: the part, works and flows, events and the state they give."""
    dice = Dice("works")
    cases: list[list[Data]] = [["let", ["part", call("texts.read", texts.write(PART), None)]]]
    for number in range(WORKS):
        run = texts.write(run_of(dice))
        cases.append(["let", [f"run {number}", call("texts.read", run, None)]])
        cases.append(["let", [f"work {number}", call("assess.fill", kept("part"), kept(f"run {number}"))]])
        cases.append(["let", [f"flow {number}", call("procedures.Flow", kept(f"work {number}"))]])
    for number, (name, text) in enumerate(HISTORY):
        cases.append(["let", [f"event {number}", call("event.Event", name, text)]])
    pairs = listed([as_data(one) for one in HISTORY])
    cases.append(["let", ["state", call("events.fold", pairs)]])
    cases.append(["let", ["job", ["i", ["a", kept("state"), "jobs"], JOB]]])
    cases.append(["let", ["item", ["i", ["a", kept("job"), "items"], ITEM]]])
    return cases


def a_work(dice: Dice) -> Data:
    return kept(f"work {dice.randrange(WORKS)}")


def a_flow(dice: Dice) -> Data:
    return kept(f"flow {dice.randrange(WORKS)}")


def the(table: str, dice: Dice) -> tuple[Data, dict[str, Any]]:
    """One of the part's steps, limits or nameplate fields: (as data, itself)."""
    number = dice.randrange(len(PART[table]))
    return ["i", ["i", kept("part"), table], number], PART[table][number]


def key_and_row(one: dict[str, Any], dice: Dice) -> list[Data]:
    row = str(dice.randrange(1, 3)) if one.get("each") else ""
    return [one["id"] + ("/" + row if row else ""), row]


def limit_at(dice: Dice) -> list[Data]:
    data, one = the("limits", dice)
    return [a_work(dice), data, *key_and_row(one, dice), dice.randrange(0, 2)]


def judged(dice: Dice) -> list[Data]:
    work, *rest = limit_at(dice)
    return [work, call("judging.judge", work, *rest)]


def lookup(dice: Dice, work: Data) -> Data:
    return call("readings.Lookup", work, 0)


def name_text(dice: Dice) -> list[Data]:
    work = a_work(dice)
    return [work, lookup(dice, work), dice.choice(("r", "rated", "drop", "final", "misses", "ambient"))]


def instance(dice: Dice) -> Data:
    return ["i", ["a", a_flow(dice), "instances"], dice.randrange(4)]


def work_and_instance(dice: Dice) -> list[Data]:
    number = dice.randrange(WORKS)
    return [kept(f"work {number}"), ["i", ["a", kept(f"flow {number}"), "instances"], dice.randrange(4)]]


def with_flow(dice: Dice) -> list[Data]:
    number = dice.randrange(WORKS)
    return [kept(f"work {number}"), kept(f"flow {number}")]


def when(dice: Dice) -> Data:
    return as_data(
        dice.choice(
            (
                None,
                {"field": "metal", "is": ["brass"]},
                {"field": "look", "is": ["worn"]},
                {"field": "metal", "is": ["zinc"]},
            )
        )
    )


def answer(dice: Dice) -> dict[str, Any]:
    return dice.choice(
        (
            {"step": "r", "text": dice.choice(("12.3", "12 volts", "1 2 Ω", "OL"))},
            {"step": "cell", "index": dice.choice(("1/forward", "1/sideways")), "text": "5 k"},
            {"step": "trip", "text": f"{dice.uniform(1, 99):.2f} s"},
        )
    )


def checked(dice: Dice) -> list[Data]:
    given = answer(dice)
    places = {one["id"]: number for number, one in enumerate(PART["steps"])}
    return [a_work(dice), ["i", ["i", kept("part"), "steps"], places[given["step"]]], as_data(given)]


def part_limit(dice: Dice) -> list[Data]:
    return [kept("part"), the("limits", dice)[0]]


WORK: Table = {
    "work.limit_names": part_limit,
    "work.dependencies": lambda dice: [kept("part")],
    "work.of_item": lambda dice: [
        kept("state"),
        kept("job"),
        kept("item"),
        kept("part"),
        f"202{dice.randrange(5, 9)}-06-01",
    ],
    "work.add_meters": lambda dice: [
        call("work.Work", kept("part"), dice.choice(("routine", "full")), "2026-06-01"),
        kept("state"),
    ],
    "work.answer_of": lambda dice: [kept(f"event {dice.choice((6, 7, 10))}")],
    "readings.rows_of": lambda dice: [a_work(dice), the("steps", dice)[0]],
    "readings.columns_of": lambda dice: [the("steps", dice)[0]],
    "readings.index_of": lambda dice: [dice.choice(("1", "2", "")), dice.choice(("forward", ""))],
    "readings.nameplate_field": lambda dice: [a_work(dice), dice.choice(("rated", "cells", "metal", "nothing"))],
    "readings.one_figure": lambda dice: [
        {"text": dice.choice(("1", "2.5", "0.30 A", "1.2 A", "0.5", "3 A", "750 mA", "OL", ">5 A"))},
        "current", "A", "rated current",
    ],
    "readings.nameplate_value": lambda dice: [a_work(dice), dice.choice(("rated", "cells", "metal"))],
    "readings.typed": lambda dice: [
        as_data({"text": dice.choice(("1.5", "2k2", "x", "OL")), "unit": dice.choice(("", "kohm"))}),
        "resistance",
        "ohm",
    ],
    "readings.layout_of": lambda dice: [a_work(dice), ["i", ["i", kept("part"), "steps"], 4]],
    "readings.readings_of": lambda dice: [
        as_data(
            dice.choice(({"text": "1.5 1.6"}, {"texts": ["1.5", "1.6 k"]}, {"texts": ["OL", "OL"]}, {"text": "2k75"},
                         {"texts": ["1", "OL"]}, {"text": "nothing"}))
        ),
        "resistance",
        "ohm",
    ],
    "judging.keys_of": lambda dice: [a_work(dice), the("limits", dice)[0]],
    "judging.table_of": lambda dice: [a_work(dice), ["i", ["i", kept("part"), "limits"], 1]],
    "judging.entry_on": lambda dice: [the("limits", dice)[0], f"202{dice.randrange(4, 9)}-05-01"],
    "judging.holds": lambda dice: [a_work(dice), the("limits", dice)[0]],
    "judging.applies": lambda dice: [a_work(dice), when(dice)],
    "judging.judge": limit_at,
    "judging.is_found_limit": lambda dice: [a_work(dice), the("limits", dice)[0]],
    "judging.display": judged,
    "judging.value_texts": judged,
    "judging.printed": judged,
    "judging.explained": judged,
    "judging.name_text": name_text,
    "judging.unit_of": lambda dice: [
        a_work(dice),
        dice.choice(("r", "rated", "drop", "cell.forward", "nothing", "ambient")),
    ],
    "calculated.free_values": lambda dice: [kept("part")],
    "calculated.calculated": lambda dice: [a_work(dice), dice.randrange(0, 2)],
    "calculated.value_text": lambda dice: [
        dice.choice((value_or_measured(dice, wide(dice, -4, 4)), summed(dice, 3), "F", True)),
        dice.choice(("mohm", "V", "1", "")),
    ],
    "procedures.supply_hold": lambda dice: [
        kept("part"),
        dice.choice(("isolated", "low voltage live")),
        dice.choice((None, "isolated")),
    ],
    "procedures.cells": lambda dice: [a_work(dice), the("steps", dice)[0]],
    "procedures.status": work_and_instance,
    "procedures.included": lambda dice: [a_work(dice), the("steps", dice)[0]],
    "procedures.unmet_limits": lambda dice: [a_work(dice), dice.randrange(0, 2)],
    "procedures.corrective_actions": lambda dice: [a_work(dice), ["i", kept("part"), "steps"], dice.randrange(1, 3)],
    "procedures.used_up": lambda dice: [
        a_work(dice),
        ["i", ["i", kept("part"), "steps"], dice.choice((6, 7))],
        dice.randrange(1, 4),
    ],
    "procedures.slot_for": lambda dice: [instance(dice), dice.choice((None, "1/forward"))],
    "procedures.key_of": lambda dice: [instance(dice), dice.choice((None, "1/forward"))],
    "outcomes.rows": with_flow,
    "outcomes.bounded": with_flow,
    "outcomes.may_choose": lambda dice: [
        *with_flow(dice),
        dice.choice(("serviceable", "unserviceable", "not examined", "x")),
    ],
    "outcomes.taken_again": lambda dice: [judged(dice)[1]],
    "outcomes.called_for": lambda dice: [a_flow(dice)],
    "outcomes.closing": lambda dice: [a_work(dice)],
    "assess.fill": lambda dice: [
        kept("part"),
        as_data({**run_of(dice), "on": dice.choice(("2026-06-01", "2028-06-01"))}),
    ],
    "assess.put": lambda dice: [
        call("assess.fill", kept("part"), as_data(run_of(dice))),
        as_data(answer(dice)),
        call("work.Answer", "measure", as_data({"text": "5"}), 99),
    ],
    "assess.check_answer": checked,
    "assess.plate_value": lambda dice: [the("nameplate", dice)[0], dice.choice(("unknown", "brass", "1 A", "3"))],
    "assess.meter_named": lambda dice: [a_work(dice), dice.choice(("M1", "M1", "M1", "M9")), "r"],
    "assess.assess": lambda dice: [kept("part"), kept(f"run {dice.randrange(WORKS)}"), dice.random() < 0.7],
    "assess.explanations": lambda dice: [kept("part"), kept(f"run {dice.randrange(WORKS)}")],
}
