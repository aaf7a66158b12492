"""The reader and writer of event text; the standard library's json is the outside reference."""

from __future__ import annotations

import json
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldcheck.engine.errors import EventError
from fieldcheck.engine.texts import LARGEST, LIMIT, read, write

TEXTS = st.text(st.characters(exclude_categories=["Cs"]), max_size=30)
KEYS = st.text(st.characters(max_codepoint=126, min_codepoint=32), max_size=12).filter(
    lambda key: key not in ("__proto__", "hasOwnProperty")
)
LEAVES = TEXTS | st.integers(-LARGEST, LARGEST) | st.booleans() | st.none()
VALUES = st.recursive(LEAVES, lambda inner: st.lists(inner, max_size=5) | st.dictionaries(KEYS, inner, max_size=5))


def reference(text: str) -> Any:
    """What json reads, with the house's restrictions put on it; ValueError for the rest."""

    def pairs(found: list[tuple[str, Any]]) -> dict[str, Any]:
        keys = [key for key, _ in found]
        bad = not all(key.isascii() for key in keys) or {"__proto__", "hasOwnProperty"} & set(keys)
        if len(set(keys)) != len(keys) or bad:
            raise ValueError("keys")
        return dict(found)

    def integer(digits: str) -> int:
        if digits == "-0" or abs(int(digits)) > LARGEST:
            raise ValueError("integer")
        return int(digits)

    def refuse(digits: str) -> Any:
        raise ValueError("number")

    value = json.loads(text, object_pairs_hook=pairs, parse_int=integer, parse_float=refuse, parse_constant=refuse)
    json.dumps(value, ensure_ascii=False).encode()      # half of a surrogate pair
    return value


@given(VALUES)
def test_what_is_written_is_what_json_writes_and_reads_back_equal(value: Any) -> None:
    text = write(value)
    assert text == json.dumps(value, ensure_ascii=False, separators=(",", ":"))
    assert read(text) == value
    assert json.loads(text) == value


@given(VALUES, st.data())
def test_a_text_changed_anywhere_is_read_as_json_reads_it_or_refused_as_json_refuses_it(
    value: Any, data: st.DataObject
) -> None:
    text = write(value)
    at = data.draw(st.integers(0, len(text)))
    cut = data.draw(st.integers(0, 2))
    put = data.draw(st.text(st.sampled_from('{}[]",:\\u0019-.eE truefalsn/bd8\x01\n'), max_size=3))
    changed = text[:at] + put + text[at + cut:]
    try:
        expected = reference(changed)
    except ValueError:
        for limit in (LIMIT, None):
            with pytest.raises(EventError):
                read(changed, limit)
        return
    assert read(changed, None) == expected
    try:
        found = read(changed)
    except EventError:
        assert any(blank in changed for blank in " \n"), "only blanks may make an event of what a file may hold"
    else:
        assert found == expected


@pytest.mark.parametrize(
    ("text", "what", "where"),
    [
        ('{"a":1,"a":2}', 'the key "a" stands twice', "character 8"),
        ('{"Ω":1}', 'the key "Ω" has letters that are not ASCII', "character 2"),
        ('["😀",1.5]', "a number has a fraction or exponent", "character 6"),
        ("[1e3]", "a number has a fraction or exponent", "character 2"),
        ("[9007199254740992]", "the integer 9007199254740992 is beyond 2^53 - 1", "character 2"),
        ("[-0]", "-0 is not how an integer is written", "character 2"),
        ("[01]", "01 is not how an integer is written", "character 2"),
        ('{"a"}', '"}" stands where ":" is expected', "character 5"),
        ("[1,]", '"]" stands where a value is expected', "character 4"),
        ("[] ", '" " stands where the end of the text is expected', "character 3"),
        ('["a\nb"]', "a control character stands in the text", "character 4"),
        ('"abc', "a text is never closed", "character 5"),
        ("[", 'the text ends where a value or "]" is expected', "character 2"),
        ('["\\x"]', '"\\x" is not an escape', ""),
        ('["\\ud83d"]', "half of a surrogate pair stands in the text", '"\\ud83d"'),
        ('["\ud83d"]', "half of a surrogate pair cannot be written", ""),
        ('{"__proto__":1}', 'the key "__proto__" is not allowed', "character 2"),
        ("[" * 40 + "]" * 40, "more than 32 levels", "character 33"),
        ('"' + "x" * LIMIT + '"', "the text takes 65538 bytes, more than 65536", ""),
    ],
)
def test_a_refused_text_is_told_what_is_wrong_and_where(text: str, what: str, where: str) -> None:
    with pytest.raises(EventError) as caught:
        read(text)
    assert (caught.value.what, caught.value.where) == (what, where)


@pytest.mark.parametrize(
    ("value", "what"),
    [
        (1.5, "a fraction cannot stand in an event"),
        ({"a": 2.0}, "a fraction cannot stand in an event"),
        (LARGEST + 1, "the integer 9007199254740992 is beyond 2^53 - 1"),
        ({"ä": 1}, 'the key "ä" has letters that are not ASCII'),
        ({1: 1}, "a key must be a text"),
        (b"x", "a bytes cannot stand in an event"),
        ("\udc00", "half of a surrogate pair cannot be written"),
        ("Ω" * 33000, "the text takes 66002 bytes, more than 65536"),
    ],
)
def test_what_cannot_stand_in_an_event_is_not_written(value: Any, what: str) -> None:
    with pytest.raises(EventError) as caught:
        write(value)
    assert caught.value.what == what


def test_only_what_must_be_escaped_is_escaped() -> None:
    assert write('"\\/\n\t\r\b\f\x01\x1f\x7fΩ😀') == '"\\"\\\\/\\n\\t\\r\\b\\f\\u0001\\u001f\x7fΩ😀"'


def test_keys_stay_in_the_order_given() -> None:
    assert write({"b": 1, "a": {"d": [], "c": {}}}) == '{"b":1,"a":{"d":[],"c":{}}}'
    assert list(read('{"b":1,"a":2}')) == ["b", "a"]


def test_a_file_of_ours_may_be_long_and_laid_out() -> None:
    value = {"steps": [{"text": "line\nline", "n": n} for n in range(5000)]}
    assert read(json.dumps(value, indent=1), limit=None) == value
