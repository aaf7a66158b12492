"""Event texts, chains and proofs come out the same in CPython and in the shipped phone code."""

from __future__ import annotations

import random
from pathlib import Path
from typing import Any

import texts_runner
from parity_answers import answers
from v8 import run_in_v8

DEVICE = "0123456789abcdefghjkmnpqrs"
AWKWARD = ["", "12,5 mΩ", "😀", 'a"b\\c', "\n\t\x00\x1f\x7f", "\u2028", "é😀\\", "\\u0041", "\ufeff x \u00a0",
           "hasOwnProperty"]
BROKEN = [
    '{"a":1,"a":2}', '{"Ω":1}', '["😀",1.5]', "[1e3]", "[9007199254740992]", "[-9007199254740991,0,-1]", "[-0]", "[01]",
    '{"a"}', "[1,]", "[] ", " []", '["a\nb"]', '"abc', "[", '["\\x"]', '["\\ud83d"]', '["\\ud83d\\ude00\\u00e9\\/"]',
    '{"__proto__":1}', '{"hasOwnProperty":1}', '{"constructor":{"toString":[]}}', "[" * 40, "tru", "[truefalse]", "nul",
    "[null,true,false]", "[-]", "{,}", '{"a":}', "[1 2]", '["\\u12"]', '["\\ud83d\\u0041"]', '["\\ude00"]', "]", "",
]


def generated(random_: random.Random, depth: int = 0) -> Any:
    kind = random_.randrange(8 if depth < 4 else 5)
    if kind < 3:
        return "".join(random_.choice('ab"\\\n\x01é€😀 {}[]:,0') for _ in range(random_.randrange(8)))
    if kind == 3:
        return random_.choice([0, 1, -1, 9007199254740991, random_.randrange(-(2**53) + 1, 2**53)])
    if kind == 4:
        return random_.choice([True, False, None])
    if kind == 5:
        return [generated(random_, depth + 1) for _ in range(random_.randrange(4))]
    return {random_.choice("abcdef"): generated(random_, depth + 1) for _ in range(random_.randrange(4))}


def cases() -> list[Any]:
    random_ = random.Random(3)
    values: list[Any] = [*AWKWARD, AWKWARD, {"a": AWKWARD}, *[generated(random_) for _ in range(150)]]
    event = ('{"v":1,"device":"' + DEVICE + '","seq":1,"prev":"","at":"2026-12-01T10:00:00.000Z","offset":-300,'
             '"person":"","job":"","seen":{"job":{},"workshop":{"zzzzzzzzzzzzzzzzzzzzzzzzzz":3}},"type":"workshop.named",'
             '"data":{"name":"Ω😀"}}')
    return [
        *[["write", [value]] for value in values],
        *[["reread", [value]] for value in values],
        *[["length", [text]] for text in AWKWARD],
        *[["read", [text]] for text in BROKEN],
        *[["read file", [text]] for text in BROKEN],
        ["read file", ['{\n "a": [1,\t2 ],\r\n "b": {}\n}\n']],
        *[["event", [event.replace(*change)]] for change in (
            ("", ""), ("26-12", "26_12"), (":1,", ":2,"), ("-300", "-3000"), (":3}", ":0}"), ("zzz", "ZZZ"))],
        *[["requests", [f"leaf {n} Ω" for n in range(count)]] for count in range(12)],
        ["chain", [event, event.replace('"seq":1,"prev":""', '"seq":2,"prev":"' + "0" * 63 + '1"')]],
        ["chain", [event, event]],
        *[["inclusion", ["c" * 64, index, 7, ["d" * 64, "e" * 64, "f" * 64]]] for index in range(8)],
        *[["consistency", [first, 7, ["d" * 64, "e" * 64, "f" * 64, "a" * 64]]] for first in range(9)],
    ]


def test_texts_chains_and_proofs_are_the_same_on_the_phone(phone_build: Path) -> None:
    table = cases()
    expected = answers(texts_runner.run, table)
    assert len({*expected}) > 200, "the table asks for many different answers"
    found = run_in_v8(table, "texts_runner", phone_build)
    differing = [(case, want, got) for case, want, got in zip(table, expected, found, strict=True) if want != got]
    assert differing == [], differing
