"""Generated calls of event texts, chains, proofs and the fold: a small job on two devices, with one conflict."""

from __future__ import annotations

import json
import random
from typing import Any

from calls_data import Data, Table, as_data, call, kept, listed

from fieldcheck.engine import event as event_module

Dice = random.Random
METER: dict[str, Any] = {
    "tag": "M1",
    "name": "bench",
    "calibrated": "2026-01-01",
    "due": "2027-01-01",
    "checked": True,
    "functions": [
        {
            "function": "ohms",
            "quantity": "resistance",
            "leads": "0.1 ohm",
            "ranges": [
                {"name": "200 ohm", "upto": "200 ohm", "resolution": "0.1 ohm", "gain": "0.8 %", "counts": "2"},
                {"name": "20 kohm", "upto": "20 kohm", "resolution": "10 ohm", "gain": "0.8 %", "counts": "2"},
            ],
        }
    ],
}


DEVICES = ("0123456789abcdefghjkmnpqrs", "1123456789abcdefghjkmnpqrs")
JOB, ITEM = "2123456789abcdefghjkmnpqrs", "3123456789abcdefghjkmnpqrs"
PERSON = "4123456789abcdefghjkmnpqrs"


def digest(number: int) -> str:
    return ("0" * 64 + str(number))[-64:]


def made(device: int, seq: int, job: str, kind: str, data: dict[str, Any], seen_seq: int = 0) -> str:
    seen: dict[str, Any] = {"job": {}, "workshop": {}}
    if seen_seq:
        seen["job" if job else "workshop"] = {DEVICES[1 - device]: seen_seq}
    prev = "" if seq == 1 else digest(100 * device + seq - 1)
    return str(
        event_module.make(DEVICES[device], seq, prev, "2026-12-01T10:00:00.000Z", 60, PERSON, job, seen, kind, data)
    )


def history() -> list[tuple[str, str]]:
    """(hash, text) of a small job on two devices, with one conflict and its decision."""
    answer = {"item": ITEM, "step": "r", "round": 0, "index": "", "kind": "measure"}
    told: list[tuple[int, int, str, str, dict[str, Any], int]] = [
        (0, 1, "", "device.enrolled", {"device": DEVICES[0], "name": "desk", "public_key": "aa"}, 0),
        (0, 2, "", "meter.entered", {**METER, "meter": "m1"}, 0),
        (
            0,
            3,
            "",
            "equipment.entered",
            {
                "equipment": "e1",
                "kind": "trial",
                "name": "lamp",
                "identities": [],
                "nameplate": {"rated": {"text": "1", "unit": "A"}},
            },
            0,
        ),
        (
            0,
            4,
            JOB,
            "job.opened",
            {
                "number": "2026-0001",
                "customer": "c",
                "site": "s",
                "place": "bench",
                "reason": "season",
                "rulebook": "",
                "items": [{"item": ITEM, "equipment": "e1", "kind": "trial", "procedure": "trial", "depth": "routine"}],
            },
            0,
        ),
        (1, 1, "", "device.enrolled", {"device": DEVICES[1], "name": "phone", "public_key": "bb"}, 3),
        (1, 2, JOB, "conditions.taken", {"ambient": {"text": "23", "unit": "degC"}}, 4),
        (1, 3, JOB, "answer.given", {**answer, "value": {"text": "100.1", "unit": "ohm", "meter": "m1"}}, 4),
        (0, 5, JOB, "answer.given", {**answer, "value": {"text": "130", "unit": "ohm", "meter": "m1"}}, 0),
        (1, 4, JOB, "defect.found", {"item": ITEM, "what": "frayed lead", "level": "watch"}, 4),
        (
            1,
            5,
            JOB,
            "decision.made",
            {"between": [digest(5), digest(103)], "keep": digest(103), "reason": "read twice"},
            5,
        ),
        (1, 6, JOB, "step.left", {"item": ITEM, "step": "final", "round": 0, "index": "", "reason": "no access"}, 5),
        (
            1,
            7,
            JOB,
            "outcome.given",
            {"item": ITEM, "outcome": "unserviceable", "reason": "limit", "restrictions": ""},
            5,
        ),
    ]
    return [
        (digest(100 * device + seq), made(device, seq, job, kind, data, seen))
        for device, seq, job, kind, data, seen in told
    ]


HISTORY = history()


def an_event(dice: Dice) -> Data:
    return kept(f"event {dice.randrange(len(HISTORY))}")


def some_events(dice: Dice) -> Data:
    return listed([kept(f"event {n}") for n in dice.sample(range(len(HISTORY)), dice.randrange(1, 9))])


def json_text(dice: Dice) -> str:
    value = dice.choice(([1, "Ω😀", None, True], {"a": [dice.randrange(10**6)], "b": "\n\t"}, "x", -5, {}, [[]]))
    text = json.dumps(value, ensure_ascii=False, separators=(",", ":"))
    return dice.choice((text, text, text, text[:-1], "[1.5]", '{"a":1,"a":2}', "[9007199254740992]"))


def tree_proof(dice: Dice) -> list[Data]:
    size = dice.randrange(1, 9)
    index = dice.randrange(0, size)
    proof, node, last, asked = [], index, size - 1, 0
    while last:
        if node % 2 or node != last:
            proof.append(digest(500 + len(proof)))
            asked += 1
        node, last = node // 2, last // 2
    return [
        digest(400),
        index,
        size,
        listed(proof[: dice.choice((None, None, None, 0))]),
        digest(asked) if asked else digest(400),
    ]


def growth(dice: Dice) -> list[Data]:
    first, second = sorted((dice.randrange(0, 9), dice.randrange(0, 9)))
    if dice.random() < 0.5:
        return [0 if dice.random() < 0.5 else first, digest(1), second, digest(1), listed([])]
    return [4, digest(dice.choice((400, 401))), 8, digest(dice.choice((1, 2))), listed([digest(500)])]


def event_text(dice: Dice) -> str:
    text = dice.choice(HISTORY)[1]
    return text.replace(*dice.choice((*[("", "")] * 4, ("26-12", "26_12"), ('"v":1', '"v":2'), (":60,", ":6000,"))))


def fields(dice: Dice) -> Data:
    return call(
        "texts.read", dice.choice(HISTORY)[1].replace(*dice.choice((("", ""), ("taken", "given"), ("what", "that"))))
    )


def next_event(dice: Dice) -> list[Data]:
    kind, data = dice.choice(
        (
            ("defect.found", {"item": ITEM, "what": "Ω", "level": "watch"}),
            ("part.used", {}),
            ("set.declared", {"item": ITEM, "step": "r", "round": 0, "n": dice.randrange(9)}),
        )
    )
    return [
        DEVICES[0],
        dice.randrange(2, 99),
        digest(7),
        "2026-12-01T10:00:00.000Z",
        dice.randrange(-600, 600),
        PERSON,
        JOB,
        as_data({"job": {DEVICES[1]: 4}, "workshop": {}}),
        kind,
        as_data(data),
    ]


def chain_of(dice: Dice) -> list[Data]:
    """Texts of one device whose `prev` are the made-up digests with which the runner answers."""
    found = [
        event_module.make(
            DEVICES[0],
            n,
            "" if n == 1 else digest(n - 1 + dice.choice((0, 0, 0, 0, 9))),
            "2026-12-01T10:00:00.000Z",
            0,
            "",
            "",
            {"job": {}, "workshop": {}},
            "workshop.named",
            {"name": "Ω", "address": "x"},
        )
        for n in range(1, dice.randrange(2, 6))
    ]
    return [listed(found)]


def ordered(dice: Dice) -> list[Data]:
    picked = dice.sample(HISTORY, dice.randrange(1, 6))
    return [listed([["t", call("texts.read", text), text] for _, text in picked])]


EVENTS: Table = {
    "texts.size": lambda dice: [json_text(dice)],
    "texts.write": lambda dice: [
        as_data(json.loads('{"a":[1,"Ω😀\\n",null,true]}'))
        if dice.random() < 0.3
        else as_data([dice.randrange(10**9), "x" * dice.randrange(5), {"b": None}])
    ],
    "texts.read": lambda dice: [json_text(dice)],
    "chain.event_digest": lambda dice: [event_text(dice)],
    "chain.head_message": lambda dice: [DEVICES[0], dice.randrange(1, 99), digest(dice.randrange(99))],
    "chain.signing_message": lambda dice: [event_text(dice)],
    "chain.is_id": lambda dice: [dice.choice((*DEVICES, DEVICES[0][:-1], DEVICES[0].upper(), "", "i" * 26, None))],
    "chain.is_digest": lambda dice: [dice.choice((digest(7), "f" * 64, "F" * 64, "0" * 63, "", None))],
    "chain.read_event": lambda dice: [event_text(dice)],
    "chain.checked": lambda dice: [call("texts.read", dice.choice((dice.choice(HISTORY)[1], event_text(dice))))],
    "chain.check_device_chain": chain_of,
    "chain.leaf_digest": lambda dice: [event_text(dice)],
    "chain.node_digest": lambda dice: [digest(dice.randrange(99)), digest(dice.randrange(99))],
    "chain.root": lambda dice: [listed([f"leaf {n}" for n in range(dice.randrange(0, 12))])],
    "chain.root_of_peaks": lambda dice: [listed([digest(n) for n in range(dice.randrange(0, 6))])],
    "chain.job_order": ordered,
    "chain.check_inclusion": tree_proof,
    "chain.check_consistency": growth,
    "event.check_kind": lambda dice: [fields(dice)],
    "event.make": next_event,
    "events.precedes": lambda dice: [an_event(dice), an_event(dice)],
    "events.latest": lambda dice: [some_events(dice)],
    "events.by_order": lambda dice: [an_event(dice)],
    "events.insert": lambda dice: [some_events(dice), an_event(dice)],
    "events.slot_key": lambda dice: [dice.choice(("r", "cell")), dice.randrange(5), dice.choice(("", "1/forward"))],
    "events.fold": lambda dice: [
        listed([as_data(one) for one in dice.sample(HISTORY, dice.randrange(1, len(HISTORY)))])
    ],
    "events.seen_by": lambda dice: [some_events(dice), dice.choice(DEVICES), dice.choice((JOB, ""))],
}
