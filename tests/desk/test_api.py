"""The phone's API: enrol, push, pull, blobs, parts; each refusal has the one error shape."""

from __future__ import annotations

import hashlib
import json
from pathlib import Path
from typing import Any

import pytest
from devices_at_hand import JOB, Key, Phone, identity
from flask.testing import FlaskClient
from small_rulebook import small_rulebook

from fieldcheck.desk.app import create_app
from fieldcheck.desk.guard import BATCH_BYTES


def head_of(phone: Phone, seq: int | None = None) -> dict[str, Any]:
    head = phone.head(seq)
    return {"seq": head.seq, "hash": head.hash, "signature": head.signature}


def enrol(desk: FlaskClient, phone: Phone) -> Any:
    return desk.post("/api/enrol", json={"text": phone.texts[0], "head": head_of(phone, 1)})


def push(desk: FlaskClient, phone: Phone, first: int = 1, last: int | None = None, **other: Any) -> Any:
    last = last or len(phone.texts)
    body = {"device": phone.device, "events": phone.texts[first - 1: last], "head": head_of(phone, last),
            "signatures": phone.signatures}
    return desk.post("/api/events", json={**body, **other})


@pytest.fixture
def phone(desk: FlaskClient) -> Phone:
    phone = Phone()
    assert enrol(desk, phone).json["ack"] == 1
    return phone


def is_error(answer: Any, status: int) -> dict[str, Any]:
    """Checks the one shape of errors and gives its error."""
    assert answer.status_code == status, answer.text
    assert answer.mimetype == "application/json"
    body = json.loads(answer.data)
    assert body["ok"] is False and body["status"] == status
    assert {"what", "where", "mend"} <= set(body["error"]) <= {"what", "where", "mend", "code"}
    assert body["error"]["what"]
    return body["error"]


# ---- enrol and push


def test_a_phone_enrols_and_its_first_event_is_held(desk, phone):
    found = desk.get("/api/events").json["events"]
    assert {"hash": phone.hashes[0], "text": phone.texts[0]} in found


def test_enrolling_twice_stores_once(desk, phone):
    assert enrol(desk, phone).json == {"ok": True, "stored": 0, "duplicates": 1, "ack": 1}


def test_what_is_pushed_comes_back_letter_for_letter(desk, phone):
    phone.note("Grüße — 10 µΩ \U0001f527")
    assert push(desk, phone, 2).json == {"ok": True, "stored": 1, "duplicates": 0, "ack": 2}
    texts = [one["text"] for one in desk.get("/api/events").json["events"]]
    assert texts.count(phone.texts[1]) == 1
    assert identity(texts[-1]) == phone.hashes[1]


def test_the_same_push_twice_stores_once(desk, phone):
    phone.note("one")
    push(desk, phone, 2)
    assert push(desk, phone, 1).json == {"ok": True, "stored": 0, "duplicates": 2, "ack": 2}


def test_a_gap_is_refused_and_says_how_far_it_got(desk, phone):
    phone.note("one")
    phone.note("two")
    answer = push(desk, phone, 3)
    assert is_error(answer, 409)["code"] == "gap"
    assert answer.json["ack"] == 1


def test_a_forked_chain_is_refused(desk, phone):
    other = Phone(phone.key)
    other.device, other.texts, other.hashes = phone.device, phone.texts[:1], phone.hashes[:1]
    phone.note("one")
    other.note("another")
    push(desk, phone, 2)
    answer = push(desk, other, 2)
    assert is_error(answer, 409)["code"] == "fork"
    assert answer.json["ack"] == 2


def test_an_altered_event_is_refused(desk, phone):
    phone.note("one")
    answer = push(desk, phone, 2, events=[phone.texts[1].replace("one", "won")])
    assert is_error(answer, 409)["code"] == "altered"


def test_a_wrong_head_signature_is_refused_and_nothing_is_stored(desk, phone):
    phone.note("one")
    answer = push(desk, phone, 2, head={**head_of(phone), "signature": "0" * 128})
    assert is_error(answer, 409)["code"] == "signature"
    assert phone.texts[1] not in [one["text"] for one in desk.get("/api/events").json["events"]]


def test_another_devices_key_does_not_sign_for_this_one(desk, phone):
    phone.note("one")
    phone.key = Key()
    assert is_error(push(desk, phone, 2), 409)["code"] == "signature"


def test_a_device_that_never_enrolled_is_refused(desk):
    stranger = Phone()
    stranger.note("one")
    assert is_error(push(desk, stranger, 2), 409)["code"] == "unknown device"


@pytest.mark.parametrize(("body", "word"), [
    ({}, "device"), ({"device": "d", "events": "x"}, "events"), ({"device": "d", "events": []}, "1 to"),
    ({"device": "d", "events": ["x"] * 1001}, "1001"), ({"device": "d", "events": ["x"], "head": []}, "head"),
    ({"device": "d", "events": ["x"], "head": {"seq": True}}, "seq"),
    ({"device": "d", "events": ["x"], "signatures": {"a": 1}}, "signatures"),
])
def test_a_misshapen_push_is_told_what_is_wrong(desk, body, word):
    assert word in is_error(desk.post("/api/events", json=body), 422)["what"] or body == {}


@pytest.mark.parametrize("data", [b"", b"{", b"[]", b"\xff", b"[" * 100000])
def test_a_body_that_is_no_object_is_refused(desk, data):
    is_error(desk.post("/api/events", data=data, content_type="application/json"), 422)


def test_an_enrolment_must_be_a_first_event(desk, phone):
    phone.note("one")
    is_error(desk.post("/api/enrol", json={"text": phone.texts[1], "head": head_of(phone)}), 422)


# ---- pull


def test_a_pull_goes_on_from_its_cursor(desk, phone):
    first = desk.get("/api/events").json
    phone.note("one")
    push(desk, phone, 2)
    second = desk.get(f"/api/events?after={first['cursor']}&epoch={first['epoch']}").json
    assert [one["hash"] for one in second["events"]] == [phone.hashes[1]]
    assert desk.get(f"/api/events?after={second['cursor']}").json["events"] == []


def test_a_cursor_of_another_epoch_starts_from_zero(desk, phone):
    cursor = desk.get("/api/events").json["cursor"]
    assert len(desk.get(f"/api/events?after={cursor}&epoch=other").json["events"]) == 2


def test_a_pull_of_one_job_brings_the_workshops_stream_and_no_other_job(desk, phone):
    phone.note("one")
    phone.write("answer.given", {"item": "i", "step": "s", "round": 0, "index": "", "kind": "note",
                                 "value": {"text": "of another job"}}, job="k" * 26)
    push(desk, phone, 2)
    found = desk.get(f"/api/events?job={JOB}").json["events"]
    assert [one["hash"] for one in found if one["hash"] in phone.hashes] == phone.hashes[:2]


def test_a_long_journal_comes_in_pieces(desk, phone):
    for number in range(1100):
        phone.note(str(number))
    push(desk, phone, 2, 1000)
    push(desk, phone, 1001)
    first = desk.get("/api/events").json
    second = desk.get(f"/api/events?after={first['cursor']}").json
    assert (first["more"], second["more"]) == (True, False)
    assert len(first["events"]) + len(second["events"]) == 1102


@pytest.mark.parametrize("after", ["x", "-1", "1.5", "９", "1" * 16])
def test_a_cursor_that_is_no_number_is_refused(desk, after):
    is_error(desk.get("/api/events", query_string={"after": after}), 422)


# ---- blobs, parts, jobs, ping


def test_a_blob_is_kept_under_its_digest(desk):
    data = b"\xff\xd8\xff and the rest"
    name = hashlib.sha256(data).hexdigest()
    assert desk.put(f"/api/blobs/{name}", data=data).json == {"ok": True, "sha256": name}
    assert desk.put(f"/api/blobs/{name}", data=data).status_code == 200
    answer = desk.get(f"/api/blobs/{name}")
    assert (answer.data, answer.mimetype) == (data, "image/jpeg")


def test_a_blob_that_is_no_picture_is_not_shown_as_a_page(desk):
    data = b"<script>alert(1)</script>"
    name = hashlib.sha256(data).hexdigest()
    desk.put(f"/api/blobs/{name}", data=data)
    answer = desk.get(f"/api/blobs/{name}")
    assert answer.mimetype == "application/octet-stream"
    assert answer.headers["Content-Disposition"] == "attachment"


def test_a_blob_under_a_wrong_name_is_refused(desk):
    is_error(desk.put("/api/blobs/" + "0" * 64, data=b"x"), 422)
    is_error(desk.get("/api/blobs/" + "0" * 64), 404)
    is_error(desk.put("/api/blobs/..%2Fx", data=b"x"), 404)


def test_the_rulebook_names_parts_that_are_there_as_exact_texts(desk):
    answer = desk.get("/api/rulebook").json
    assert hashlib.sha256(answer["index"].encode()).hexdigest() == answer["digest"]
    for one in json.loads(answer["index"])["procedures"]:
        text = desk.get(f"/api/rulebook/part/{one['part']}").data
        assert hashlib.sha256(text).hexdigest() == one["part"]
    is_error(desk.get("/api/rulebook/part/" + "0" * 64), 404)


def test_an_earlier_rulebook_stays_readable(tmp_path: Path, phone_folder: Path):
    earlier = small_rulebook()
    create_app(tmp_path / "w", earlier, phone_folder)
    index = earlier.index.replace("Trial contact", "Trial contact, second edition")
    later = earlier._replace(index=index, digest=hashlib.sha256(index.encode()).hexdigest())
    desk = create_app(tmp_path / "w", later, phone_folder).test_client()
    assert desk.get("/api/rulebook").json["digest"] == later.digest
    assert desk.get(f"/api/rulebook/part/{earlier.digest}").text == earlier.index


def test_ping_names_epoch_and_rulebook(desk):
    assert desk.get("/api/ping").json == {"ok": True, "epoch": desk.get("/api/events").json["epoch"],
                                          "rulebook": small_rulebook().digest}


def test_a_second_start_is_the_same_device_and_epoch(tmp_path: Path, phone_folder: Path):
    one = create_app(tmp_path / "w", small_rulebook(), phone_folder).test_client().get("/api/events").json
    two = create_app(tmp_path / "w", small_rulebook(), phone_folder).test_client().get("/api/events").json
    assert one == two and len(one["events"]) == 1


# ---- who may ask


@pytest.mark.parametrize("host", ["evil.example", "127.0.0.1:81", "127.0.0.1.evil.example", "localhost:80@evil", ""])
def test_another_host_name_is_refused(desk, host):
    is_error(desk.get("/api/jobs", headers={"Host": host}), 421)


@pytest.mark.parametrize("host", ["127.0.0.1:8470", "localhost:8470", "[::1]:8470", "LOCALHOST:8470"])
def test_loopback_names_are_answered_at_their_port(desk, host):
    assert desk.get("/api/jobs", base_url="http://127.0.0.1:8470", headers={"Host": host}).status_code == 200


@pytest.mark.parametrize("headers", [
    {"Origin": "http://evil.example"}, {"Origin": "null"}, {"Origin": "https://localhost"},
    {"Origin": "http://localhost:8080"}, {"Sec-Fetch-Site": "cross-site"}, {"Sec-Fetch-Site": "same-site"},
    {"Sec-Fetch-Site": "none"},
])
@pytest.mark.parametrize("path", ["/api/events", "/api/enrol"])
def test_a_write_from_another_page_is_refused(desk, headers, path):
    is_error(desk.post(path, json={}, headers=headers), 403)


def test_a_write_from_our_own_page_passes(desk):
    phone = Phone()
    answer = desk.post("/api/enrol", json={"text": phone.texts[0], "head": head_of(phone, 1)},
                       headers={"Origin": "http://localhost", "Sec-Fetch-Site": "same-origin"})
    assert answer.status_code == 200


def test_another_page_cannot_load_what_is_here(desk):
    headers = {"Sec-Fetch-Site": "cross-site", "Sec-Fetch-Mode": "no-cors"}
    is_error(desk.get("/api/jobs", headers=headers), 403)


@pytest.mark.parametrize("kind", ["text/plain", "application/x-www-form-urlencoded", "multipart/form-data", ""])
def test_another_content_type_is_refused(desk, kind):
    is_error(desk.post("/api/events", data=b"{}", content_type=kind), 415)


def test_a_body_too_large_is_refused(desk):
    answer = desk.post("/api/events", data=b" " * (BATCH_BYTES + 1), content_type="application/json")
    is_error(answer, 413)


# ---- the shape of errors and the headers, on every route


API_PATHS = ["/api/ping", "/api/rulebook", "/api/rulebook/part/" + "0" * 64, "/api/enrol", "/api/events",
             "/api/blobs/" + "0" * 64, "/api/jobs", "/api/none"]


def test_the_list_of_routes_above_is_whole(desk):
    rules = {rule.rule for rule in desk.application.url_map.iter_rules() if rule.rule.startswith("/api")}
    assert rules == {path.replace("0" * 64, "<digest>") for path in API_PATHS} - {"/api/none"}


@pytest.mark.parametrize("path", API_PATHS)
def test_every_route_refuses_in_the_one_shape(desk, path):
    is_error(desk.get(path, headers={"Host": "evil.example"}), 421)
    is_error(desk.delete(path), 404 if path == "/api/none" else 405)


@pytest.mark.parametrize("path", API_PATHS)
def test_every_route_breaks_in_the_one_shape(desk, path, monkeypatch):
    def broken(*_: object) -> None:
        raise ZeroDivisionError("secret inside")
    monkeypatch.setattr("fieldcheck.desk.guard.own_hosts", broken)
    answer = desk.get(path)
    assert "secret" not in json.dumps(is_error(answer, 500))


@pytest.mark.parametrize("path", [*API_PATHS, "/phone/"])
def test_every_answer_carries_the_policy(desk, path):
    headers = desk.get(path).headers
    assert "script-src 'self';" in headers["Content-Security-Policy"]
    assert "unsafe" not in headers["Content-Security-Policy"]
    assert headers["X-Content-Type-Options"] == "nosniff"


# ---- the phone's files


def test_the_phones_page_is_asked_for_anew_and_hashed_files_are_kept(desk):
    assert desk.get("/phone/").headers["Cache-Control"] == "no-cache"
    assert "immutable" in desk.get("/phone/a/core.0123456789ab.js").headers["Cache-Control"]
    assert desk.get("/phone").headers["Location"] == "/phone/"


@pytest.mark.parametrize("path", ["/phone/a/none.js", "/phone/../workshop/journal.db", "/phone/%2e%2e/journal.db"])
def test_nothing_else_is_handed_out(desk, path):
    assert desk.get(path).status_code == 404


@pytest.mark.parametrize(("kind", "data", "said"), [
    ("answer.dreamt", {}, "is not a kind of event"),
    ("customer.entered", {"customer": "c"}, "lack"),
    ("person.entered", {"person": "p", "name": "n", "competences": 5, "active": True}, "competences"),
])
def test_an_event_that_no_fold_can_read_is_refused_at_the_door_and_the_desk_goes_on(desk, phone, kind, data, said):
    phone.write(kind, data)
    answer = push(desk, phone)
    assert 400 <= answer.status_code < 500 and said in answer.get_json()["error"]["what"]
    assert desk.get("/api/jobs").status_code == 200
