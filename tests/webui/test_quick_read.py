"""The browser's own JSON reader, which the phone asks first, says what engine.texts.read says or leaves the text to it.

Reference: engine.texts.read in the same page without the quick reader, which tests/parity holds to CPython.
"""

from __future__ import annotations

import random
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest
from phone_server import serving

from fieldcheck.engine import texts

if TYPE_CHECKING:
    from playwright.sync_api import BrowserContext

pytestmark = pytest.mark.browser

EVENT = ('{"v":1,"device":"00000000000000000000000012","seq":12,"offset":-60,"seen":{"job":{},"workshop":{"e":3}},'
         '"data":{"text":"0,5 Ω","flags":[true,false,null],"deep":[[{"a":[]}]],"constructor":1,"toString":[-5,0]}}')
AWKWARD = [
    '{"a":1,"a":2}', '{"a":1,"b":{"a":1,"a":1}}', '{"Ω":1}', "[1.5]", "[1e3]", "[1E3]", "[9007199254740991]",
    "[9007199254740992]", "[-9007199254740993]", "[-0]", "[01]", "[] ", " []", "[1, 2]", '["a\nb"]', '"abc', "[", "",
    '["\\x"]', '["\\ud83d"]', '["\\u00e9"]', '["😀"]', '{"__proto__":1}', '{"hasOwnProperty":1}', '{"2":1,"1":2}',
    '{"2a":1,"1a":2}', '{"":1}', "[" * 32 + "]" * 32, "[" * 33 + "]" * 33, "null", "true", '"Ω"', "-7", "NaN", "[1,]",
    "\ufeff[]", "[\u2028]", '["\u2028\xa0"]', '{"a":[{"b":":::"}]}', '"a:b"', "undefined", EVENT, EVENT + EVENT,
]
SPICE = ['"', "{", "}", "[", "]", ":", ",", " ", "0", "-", ".", "e", "1", "9999999999999999", '"a":1,', "\\", "é"]
# Reads every text with and without the quick reader; what is refused gives its words.
BOTH = """texts => {
  const B = __BRYTHON__, module = B.imported['fieldcheck.engine.texts'], repr = B.builtins.repr
  const read = B.module_getattr(module, 'read'), quick = B.module_getattr(module, 'quick'), held = quick[0]
  const say = text => {
    try { return 'read ' + B.$call(repr, B.$call(read, text)) }
    catch (error) { return 'refused ' + ['what', 'where', 'mend'].map(name => B.$getattr(error, name)).join(' | ') }
  }
  const fast = texts.map(say)
  quick.length = 0
  const slow = texts.map(say)
  quick.push(held)
  return [fast, slow, texts.map(text => platform.isPlain(text))]
}"""


def spoiled(random_: random.Random) -> str:
    """An event's text with something put in or cut out."""
    at = random_.randrange(len(EVENT))
    return EVENT[:at] + random_.choice(["", *SPICE]) + EVENT[at + random_.randrange(3):]


def test_both_readers_of_the_phone_say_the_same(context: BrowserContext, phone_build: Path) -> None:
    random_ = random.Random(5)
    given = [*AWKWARD, *[spoiled(random_) for _ in range(1500)]]
    with serving(phone_build) as (address, _):
        page = context.new_page()
        page.goto(address, wait_until="load")
        found: list[list[Any]] = page.evaluate(BOTH, given)
    fast, slow, plain = found
    for text, one, other in zip(given, fast, slow, strict=True):
        assert one == other, text
    assert plain[given.index(EVENT)], "the usual event is read by the browser"
    assert sum(plain) > 20
    refused = sum(text.startswith("refused") for text in slow)
    assert refused > 500, "most of the spoiled texts are wrong"


def test_the_slow_reader_of_the_page_is_that_of_the_desk() -> None:
    assert texts.quick == [], "on the desk nothing is put before it"
