"""The journal's quick reader gives what engine.texts.read gives, and refuses what it refuses with the same words.

Reference: engine.texts.read, which is itself held to Python's json and to the phone by tests/engine and tests/parity.
"""

from __future__ import annotations

import json
from typing import Any

import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from fieldcheck.engine import texts
from fieldcheck.engine.errors import EventError
from fieldcheck.journal import quick

EVENT = ('{"v":1,"device":"d","seq":12,"offset":-60,"seen":{"job":{},"workshop":{"e":3}},"data":{"text":"0,5 Ω",'
         '"flags":[true,false,null],"deep":[[{"a":[]}]]}}')
SPICE = ['"', "\\", "{", "}", "[", "]", ":", ",", " ", "\n", "\x1f", "-0", "0", "01", "1.5", "1e3", "NaN", "Infinity",
         "9007199254740991", "9007199254740992", "-9007199254740993", "123456789012345", "true", "null", "tru", "é",
         "\ud800", "\U0001f527", "\\u0041", "\\ud83d\\udd27", "\\ud800", '"__proto__":1', '"hasOwnProperty":1',
         '"a":1,"a":2', '"é":1', "\ufeff", "\u2028", "\xa0", "[" * 40, "]" * 40]

values = st.recursive(
    st.none() | st.booleans() | st.integers(-(2**53) - 2, 2**53 + 2) | st.text(max_size=8) | st.floats(),
    lambda inner: st.lists(inner, max_size=4) | st.dictionaries(st.text(max_size=4) | st.sampled_from("abc"), inner,
                                                                max_size=4),
    max_leaves=12,
)
dumped = st.builds(
    lambda value, ascii_only, gap: json.dumps(value, ensure_ascii=ascii_only, separators=(f",{gap}", ":")),
    values, st.booleans(), st.sampled_from(["", "", "", " "]),
)
mixed = st.lists(st.sampled_from(SPICE) | st.sampled_from(["{", '"a":', "1", ",", "}"]), max_size=9).map("".join)


@st.composite
def spoiled(draw: Any) -> str:
    """An event's text with something put in, cut out or doubled."""
    text = draw(st.sampled_from([EVENT]) | dumped)
    at = draw(st.integers(0, len(text)))
    end = draw(st.integers(at, min(len(text), at + 4)))
    return str(text[:at] + draw(st.sampled_from(["", *SPICE])) + text[end:])


def result(reader: Any, text: object) -> object:
    """What a reader says, types included: True is not 1 here."""
    try:
        return "read", repr(reader(text))
    except EventError as error:
        return "refused", error.what, error.where, error.mend


@settings(max_examples=1500, deadline=None)
@given(dumped | mixed | spoiled())
@example(EVENT)
@example('{"a":1,"a":1}')
@example("[" * 33 + "]" * 33)
@example("[" * 32 + "]" * 32)
@example("[-0]")
@example("[9007199254740992]")
@example("[1.0]")
@example('["\ud83d\udd27"]')
@example('{"__proto__":{}}')
@example('{"é":1}')
@example('["é"] ')
@example('"' + "é" * 40000 + '"')
@example('"' + "a" * 70000 + '"')
def test_both_readers_say_the_same(text: str) -> None:
    assert result(quick.read, text) == result(texts.read, text)


def test_every_forbidden_key_is_left_to_the_slow_reader() -> None:
    assert set(texts.FORBIDDEN_KEYS) == {"__proto__", "hasOwnProperty"}, "quick.read names them too"


def test_what_is_no_text_is_refused_alike() -> None:
    assert result(quick.read, 5) == result(texts.read, 5)  # type: ignore[comparison-overlap]
    assert result(quick.read, b"{}") == result(texts.read, b"{}")


def test_the_usual_event_never_reaches_the_slow_reader(monkeypatch: pytest.MonkeyPatch) -> None:
    expected = texts.read(EVENT)
    monkeypatch.setattr(texts, "read", lambda text: pytest.fail("the slow reader was asked"))
    assert quick.read(EVENT) == expected
