"""platform.js in a real browser: the chain under its lock, two tabs at once, keys, digests, blobs, network.

References: hashlib for SHA-256 (FIPS 180-4), `cryptography` for ECDSA P-256 (FIPS 186-5).
"""

from __future__ import annotations

import hashlib
import json
from typing import TYPE_CHECKING, Any

import pytest
from cryptography.exceptions import InvalidSignature
from cryptography.hazmat.primitives.asymmetric import ec
from cryptography.hazmat.primitives.asymmetric.utils import encode_dss_signature
from cryptography.hazmat.primitives.hashes import SHA256

if TYPE_CHECKING:
    from playwright.sync_api import BrowserContext, Page

pytestmark = pytest.mark.browser

# Appends n events as the phone does: under the lock, read the head, make the event, append.
APPEND_MANY = """async ([device, n]) => {
  for (let i = 0; i < n; i++) await platform.withLock(async () => {
    const head = JSON.parse(await platform.head(device))
    const text = JSON.stringify({device, seq: head.seq + 1, prev: head.hash})
    const hash = await platform.sha256('fieldcheck event 1\\n' + text)
    await platform.append(text, device, head.seq + 1, head.hash, hash, 'job1', '')
  })
  return ''
}"""


def call(page: Page, name: str, *args: Any) -> Any:
    """What the promise of platform.<name>(...args) gives; a refusal arrives as {"refused": message}."""
    return page.evaluate(
        "([name, args]) => platform[name](...args).catch(error => ({refused: error.message}))", [name, list(args)]
    )


def test_an_event_its_head_and_its_draft_move_together(page: Page) -> None:
    call(page, "putDraft", "step 1", "2.7")
    assert call(page, "append", "text 1", "dev", 1, "", "h1", "job1", "step 1") == "h1"
    assert json.loads(call(page, "head", "dev")) == {"seq": 1, "hash": "h1"}
    assert call(page, "getDraft", "step 1") == ""
    assert json.loads(call(page, "eventsOf", "job1")) == [["h1", "text 1"]]
    assert json.loads(call(page, "eventsOf", "job2")) == []


@pytest.mark.parametrize(("seq", "prev"), [(1, ""), (2, "other"), (3, "h1"), (2, "")])
def test_a_head_that_moved_refuses_and_changes_nothing(page: Page, seq: int, prev: str) -> None:
    call(page, "append", "text 1", "dev", 1, "", "h1", "job1", "")
    call(page, "putDraft", "step 2", "typed")
    assert call(page, "append", "text x", "dev", seq, prev, "hx", "job1", "step 2") == {"refused": "head moved"}
    assert json.loads(call(page, "head", "dev")) == {"seq": 1, "hash": "h1"}
    assert json.loads(call(page, "eventsOf", "job1")) == [["h1", "text 1"]]
    assert call(page, "getDraft", "step 2") == "typed"


def test_an_event_already_there_is_never_overwritten(page: Page) -> None:
    """add, not put: a foreign event under the same device and number breaks the whole transaction off."""
    call(page, "addForeign", json.dumps([{"device": "dev", "seq": 1, "job": "j", "hash": "h0", "text": "first"}]))
    call(page, "putDraft", "d", "typed")
    refused = call(page, "append", "second", "dev", 1, "", "h1", "j", "d")
    assert refused["refused"].startswith("ConstraintError: ")
    assert json.loads(call(page, "eventsOf", "j")) == [["h0", "first"]]
    assert json.loads(call(page, "head", "dev")) == {"seq": 0, "hash": ""}
    assert call(page, "getDraft", "d") == "typed"


def test_two_tabs_make_one_unbroken_chain(context: BrowserContext, page: Page, address: str) -> None:
    other = context.new_page()
    other.goto(address, wait_until="load")
    heard = "window.heard = []; platform.onChange(job => window.heard.push(job))"
    page.evaluate(heard)
    start = f"args => {{ window.busy = ({APPEND_MANY})(args) }}"
    page.evaluate(start, ["dev", 25])
    other.evaluate(start, ["dev", 25])
    page.evaluate("window.busy")
    other.evaluate("window.busy")
    texts = [json.loads(text) for _, text in json.loads(call(page, "eventsOf", "job1"))]
    hashes = [sha for sha, _ in json.loads(call(page, "eventsOf", "job1"))]
    assert [event["seq"] for event in texts] == list(range(1, 51))
    assert [event["prev"] for event in texts] == ["", *hashes[:-1]]
    assert hashes[-1] == json.loads(call(other, "head", "dev"))["hash"]
    assert page.evaluate("window.heard.length") == 25  # the other tab's, not its own


def test_without_the_lock_the_head_check_still_holds(context: BrowserContext, page: Page, address: str) -> None:
    other = context.new_page()
    other.goto(address, wait_until="load")
    race = """async tab => { let won = 0
      for (let seq = 1; seq <= 30; seq++) {
        const head = JSON.parse(await platform.head('dev'))
        await platform.append(tab, 'dev', head.seq + 1, head.hash, tab + seq, 'j', '').then(() => won++, () => 0)
      }
      return won }"""
    page.evaluate(f"tab => {{ window.busy = ({race})(tab) }}", "a")
    other.evaluate(f"tab => {{ window.busy = ({race})(tab) }}", "b")
    won = page.evaluate("window.busy") + other.evaluate("window.busy")
    assert won == len(json.loads(call(page, "eventsOf", "j"))) == json.loads(call(page, "head", "dev"))["seq"] >= 30


def test_foreign_events_come_once_and_a_fork_is_refused_whole(page: Page) -> None:
    one = {"device": "far", "seq": 1, "job": "j", "hash": "f1", "text": "t1"}
    two = {"device": "far", "seq": 2, "job": "j", "hash": "f2", "text": "t2"}
    assert json.loads(call(page, "addForeign", json.dumps([one]))) == ["f1"]
    assert json.loads(call(page, "addForeign", json.dumps([one, two]))) == ["f2"]
    assert json.loads(call(page, "unsent")) == []
    three = {**two, "seq": 3, "hash": "f3"}
    fork = call(page, "addForeign", json.dumps([three, {**two, "hash": "other"}]))
    assert fork == {"refused": "fork at far 2"}
    assert json.loads(call(page, "eventsOf", "j")) == [["f1", "t1"], ["f2", "t2"]]


def test_what_is_unsent_is_known_in_order_until_it_is_marked(page: Page) -> None:
    page.evaluate(APPEND_MANY, ["dev", 12])
    unsent = json.loads(call(page, "unsent"))
    assert [row["seq"] for row in unsent] == list(range(1, 13))
    assert set(unsent[0]) == {"device", "seq", "job", "hash", "text", "signature"}
    call(page, "markSent", json.dumps([row["hash"] for row in unsent[:10]] + ["unknown"]))
    assert [row["seq"] for row in json.loads(call(page, "unsent"))] == [11, 12]
    call(page, "addForeign", json.dumps([unsent[10]]))  # the server has it: that says so too
    assert [row["seq"] for row in json.loads(call(page, "unsent"))] == [12]
    assert len(json.loads(call(page, "events"))) == 12


def test_the_device_signs_with_a_key_that_cannot_leave(page: Page) -> None:
    assert call(page, "sign", "x") == {"refused": "no device"}
    public = call(page, "makeDevice", "device1")
    assert len(public) == 130 and public.startswith("04")
    assert call(page, "makeDevice", "device2") == public  # one profile is one device
    assert call(page, "device") == "device1" and call(page, "publicKey") == public
    text = "fieldcheck head 1\ndevice1\n7\nΩ"
    raw = bytes.fromhex(call(page, "sign", text))
    assert len(raw) == 64
    der = encode_dss_signature(int.from_bytes(raw[:32], "big"), int.from_bytes(raw[32:], "big"))
    key = ec.EllipticCurvePublicKey.from_encoded_point(ec.SECP256R1(), bytes.fromhex(public))
    key.verify(der, text.encode(), ec.ECDSA(SHA256()))
    with pytest.raises(InvalidSignature):
        key.verify(der, text.encode() + b" ", ec.ECDSA(SHA256()))
    exported = page.evaluate("""async () => {
      const db = await new Promise(done => {
        const r = indexedDB.open('fieldcheck'); r.onsuccess = () => done(r.result) })
      const key = await new Promise(done => {
        const r = db.transaction('keys').objectStore('keys').get('device1'); r.onsuccess = () => done(r.result) })
      return crypto.subtle.exportKey('pkcs8', key.privateKey).catch(error => error.name) }""")
    assert exported == "InvalidAccessError"


@pytest.mark.parametrize("text", ["", "abc", "Ω µ − \u202f 😀\n", "x" * 70000])
def test_digests_equal_hashlib(page: Page, text: str) -> None:
    expected = hashlib.sha256(text.encode()).hexdigest()
    assert call(page, "sha256", text) == expected
    assert call(page, "sha256hex", text.encode().hex()) == expected
    assert page.evaluate("text => platform.sha256blob(new Blob([text]))", text) == expected


def test_random_is_as_long_as_asked_and_not_twice_the_same(page: Page) -> None:
    one, two = call(page, "random", 16), call(page, "random", 16)
    assert len(one) == len(two) == 32 and one != two


def test_drafts_parts_and_settings_are_kept_over_a_reload(page: Page) -> None:
    call(page, "putDraft", "b", "2")
    call(page, "putDraft", "__proto__", "1")
    call(page, "putPart", "index", '{"format":1}')
    call(page, "putSetting", "buzz", "off")
    page.reload(wait_until="load")
    assert json.loads(call(page, "drafts")) == [["__proto__", "1"], ["b", "2"]]
    assert call(page, "getPart", "index") == '{"format":1}' and call(page, "getSetting", "buzz") == "off"
    call(page, "dropDraft", "b")
    assert call(page, "getDraft", "b") == "" and call(page, "getPart", "none") == ""


def test_a_blob_is_named_by_its_content_shown_and_sent(page: Page) -> None:
    name = page.evaluate("platform.putBlob(new Blob(['photograph']))")
    assert name == hashlib.sha256(b"photograph").hexdigest()
    assert json.loads(call(page, "blobs")) == [name]
    assert call(page, "getBlob", name).startswith("blob:") and call(page, "getBlob", "none") == ""
    assert json.loads(call(page, "sendBlob", name, "/api/blobs/" + name)) == {"status": 200, "text": "photograph"}
    assert call(page, "sendBlob", "none", "/x") == {"refused": "NotFoundError: no blob none"}


def test_requests_tell_status_and_text_and_zero_without_a_server(page: Page) -> None:
    answer = json.loads(call(page, "fetchJson", "POST", "/api/events", '{"a":1}', "{}"))
    assert answer == {"status": 200, "text": '{"a":1}'}
    assert json.loads(call(page, "fetchJson", "GET", "/nowhere", "", ""))["status"] == 404
    page.context.set_offline(True)
    assert json.loads(call(page, "fetchJson", "GET", "/api/ping", "", ""))["status"] == 0
    page.context.set_offline(False)


def test_a_full_phone_says_so_and_keeps_the_draft(page: Page, address: str) -> None:
    """The browser's own quota, cut short through its debugging protocol.

    It is cut before the first write, because the browser goes on for a while with the room that it once found.
    """
    protocol = page.context.new_cdp_session(page)
    protocol.send("Storage.overrideQuotaForOrigin", {"origin": address, "quotaSize": 100_000})
    call(page, "putDraft", "d", "typed")
    refused: Any = ""
    seq = 0
    while refused == "" and seq < 200:
        seq += 1
        answer = call(page, "append", "x" * 20_000, "dev", seq, f"h{seq - 1}" if seq > 1 else "", f"h{seq}", "j", "")
        refused = answer if isinstance(answer, dict) else ""
    assert refused["refused"].startswith("QuotaExceededError: ")
    again = call(page, "append", "x" * 20_000, "dev", seq, f"h{seq - 1}" if seq > 1 else "", f"h{seq}", "j", "d")
    assert again == refused
    assert json.loads(call(page, "head", "dev"))["seq"] == seq - 1 == len(json.loads(call(page, "eventsOf", "j")))
    assert call(page, "getDraft", "d") == "typed"


def test_a_text_is_saved_as_a_file(page: Page) -> None:
    with page.expect_download() as download:
        call(page, "downloadText", "events.txt", "Ω\n")
    assert download.value.suggested_filename == "events.txt"
    assert download.value.path().read_text(encoding="utf-8") == "Ω\n"


def test_clocks_are_numbers(page: Page) -> None:
    first, second = page.evaluate("[platform.monotonic(), platform.monotonic()]")
    assert 0 < first <= second
    assert page.evaluate("Math.abs(platform.wall() - Date.now()) < 1000")
