"""The desk as a process: answers on loopback, stops cleanly, starts again with what it had, refuses damage."""

from __future__ import annotations

import http.client
import json
import os
import signal
import socket
import sqlite3
import subprocess
import sys
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from contextlib import contextmanager
from pathlib import Path

import pytest
from devices_at_hand import Phone

HERE = Path(__file__).resolve().parent


def start(folder: Path, port: int = 0) -> subprocess.Popen[str]:
    environment = {**os.environ, "PYTHONPATH": f"{HERE}:{HERE.parent.parent}"}
    return subprocess.Popen([sys.executable, str(HERE / "serving.py"), str(folder), str(port)], text=True,
                            stdout=subprocess.PIPE, stderr=subprocess.PIPE, env=environment)


@contextmanager
def served(folder: Path) -> Iterator[tuple[subprocess.Popen[str], int]]:
    process = start(folder)
    try:
        assert process.stdout is not None
        yield process, int(process.stdout.readline().rstrip("/\n").rpartition(":")[2])
    finally:
        if process.poll() is None:
            process.kill()
        process.communicate()


def ask(port: int, method: str, path: str, body: str = "", **headers: str) -> tuple[int, bytes]:
    connection = http.client.HTTPConnection("127.0.0.1", port, timeout=20)
    try:
        connection.request(method, path, body or None, {"Content-Type": "application/json", **headers})
        answer = connection.getresponse()
        return answer.status, answer.read()
    finally:
        connection.close()


@pytest.mark.parametrize("how", [signal.SIGINT, signal.SIGTERM])
def test_it_answers_until_told_to_stop_and_ends_with_zero(tmp_path, how):
    with served(tmp_path / "w") as (process, port):
        assert ask(port, "GET", "/api/ping")[0] == 200
        process.send_signal(how)
        _, talk = process.communicate(timeout=20)
    assert process.returncode == 0
    assert f"http://127.0.0.1:{port}/phone/" in talk
    assert talk.rstrip().endswith("stopped; everything is on disk")
    assert "Traceback" not in talk


def test_what_a_phone_sent_is_there_after_the_desk_was_killed(tmp_path):
    phone = Phone()
    head = phone.head()
    body = json.dumps({"text": phone.texts[0], "head": {"seq": 1, "hash": head.hash, "signature": head.signature}})
    with served(tmp_path / "w") as (process, port):
        assert ask(port, "POST", "/api/enrol", body)[0] == 200
        process.kill()
        process.wait()
    with served(tmp_path / "w") as (_, port):
        held = json.loads(ask(port, "GET", "/api/events")[1])["events"]
    assert phone.hashes[0] in [one["hash"] for one in held]


def test_the_real_server_refuses_another_host_and_another_page(tmp_path):
    with served(tmp_path / "w") as (_, port):
        assert ask(port, "GET", "/api/ping", Host="evil.example")[0] == 421
        assert ask(port, "GET", "/api/ping", Host=f"127.0.0.1:{port + 1}")[0] == 421
        assert ask(port, "POST", "/api/events", "{}", Origin="http://evil.example")[0] == 403
        assert ask(port, "POST", "/api/events", "{}", Origin=f"http://127.0.0.1:{port}")[0] == 422


def test_phones_that_send_at_once_all_get_in(tmp_path):
    def send(port: int, phone: Phone) -> None:
        for last in range(1, 13):
            phone.note(str(last))
            head = phone.head()
            body = {"device": phone.device, "events": phone.texts if last == 1 else phone.texts[-1:],
                    "head": {"seq": head.seq, "hash": head.hash, "signature": head.signature}}
            status, said = ask(port, "POST", "/api/events", json.dumps(body))
            assert (status, json.loads(said)["ack"]) == (200, last + 1)
            assert ask(port, "GET", "/jobs/")[0] == 200

    phones = [Phone() for _ in range(6)]
    with served(tmp_path / "w") as (_, port):
        with ThreadPoolExecutor(6) as pool:
            for done in [pool.submit(send, port, phone) for phone in phones]:
                done.result()
        held = [one["hash"] for one in json.loads(ask(port, "GET", "/api/events")[1])["events"]]
    assert len(held) == len(set(held)) == 6 * 13 + 1
    assert {digest for phone in phones for digest in phone.hashes} <= set(held)


def test_an_answer_without_a_body_arrives(tmp_path):
    with served(tmp_path / "w") as (_, port):
        assert ask(port, "HEAD", "/api/ping") == (200, b"")


def test_it_listens_on_loopback_only(tmp_path):
    with served(tmp_path / "w") as (process, port):
        table = Path(f"/proc/{process.pid}/net/tcp").read_text().splitlines()[1:]
    listening = {line.split()[1] for line in table if line.split()[3] == "0A"}
    assert f"0100007F:{port:04X}" in listening
    assert f"00000000:{port:04X}" not in listening


def test_a_taken_port_is_named(tmp_path):
    with socket.socket() as other:
        other.bind(("127.0.0.1", 0))
        other.listen()
        port = other.getsockname()[1]
        process = start(tmp_path / "w", port)
        _, talk = process.communicate(timeout=20)
    assert process.returncode != 0
    assert f"port {port} of this machine cannot be used" in talk


def test_a_damaged_journal_is_not_served(tmp_path):
    with served(tmp_path / "w") as (process, _):
        process.send_signal(signal.SIGTERM)
        process.communicate(timeout=20)
    connection = sqlite3.connect(tmp_path / "w" / "journal.db")
    triggers = [name for (name,) in connection.execute("select name from sqlite_master where type = 'trigger'")]
    connection.execute(f"drop trigger {triggers[0]}")
    connection.commit()
    connection.close()
    process = start(tmp_path / "w")
    _, talk = process.communicate(timeout=20)
    assert process.returncode != 0
    assert "the journal is damaged, so the desk does not start" in talk
    assert triggers[0] in talk
