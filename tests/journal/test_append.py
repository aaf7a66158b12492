"""What enters the journal, what is refused with which code, and that nothing of a refused batch stays."""

from __future__ import annotations

import sqlite3
import threading
from dataclasses import replace
from pathlib import Path

import pytest
from journal.devices_at_hand import JOB, NOW, Key, Phone, verify

from fieldcheck.engine.chain import is_id
from fieldcheck.engine.errors import NotFound, ProofError
from fieldcheck.engine.texts import read
from fieldcheck.journal import batches
from fieldcheck.journal.database import JournalError
from fieldcheck.journal.forms import Ack, Refused, new_id
from fieldcheck.journal.journal import Journal
from fieldcheck.journal.verify import verify as verify_journal
from fieldcheck.keys.devices import make_device_key


@pytest.fixture
def journal(tmp_path: Path) -> Journal:
    return Journal.open(tmp_path / "shop", create=True, signer=Key(), verify=verify)


@pytest.fixture
def phone() -> Phone:
    phone = Phone()
    for n in range(5):
        phone.note(f"note {n} Ω")
    return phone


def refusal(journal: Journal, *batch: object) -> Refused:
    before = journal.events()
    with pytest.raises(Refused) as caught:
        journal.append_batch(*batch, now=NOW)       # type: ignore[arg-type]
    assert journal.events() == before
    return caught.value


def test_a_batch_is_stored_as_its_exact_texts_and_acknowledged(journal: Journal, phone: Phone) -> None:
    assert journal.append_batch(*phone.batch(), now=NOW) == Ack(6, 0, 6)
    stored = journal.events()
    assert [event.text for event in stored] == phone.texts
    assert [event.hash for event in stored] == phone.hashes
    assert [event.cursor for event in stored] == [1, 2, 3, 4, 5, 6]
    assert {event.received for event in stored} == {"2026-12-01T10:00:00.000Z"}
    assert verify_journal(journal.folder, check=verify) == []


def test_the_same_events_twice_are_stored_once(journal: Journal, phone: Phone) -> None:
    assert journal.append_batch(*phone.batch(1, 4), now=NOW) == Ack(4, 0, 4)
    assert journal.append_batch(*phone.batch(1, 4), now=NOW) == Ack(0, 4, 4)
    assert journal.append_batch(*phone.batch(3, 6), now=NOW) == Ack(2, 2, 6)
    assert journal.append_batch(*phone.batch(2, 3), now=NOW) == Ack(0, 2, 6)
    assert [event.text for event in journal.events()] == phone.texts


def test_an_empty_batch_only_asks_what_is_held(journal: Journal, phone: Phone) -> None:
    journal.append_batch(*phone.batch(1, 2), now=NOW)
    assert journal.append_batch(phone.device, [], phone.head(2), {}, NOW) == Ack(0, 0, 2)


def test_a_gap_is_refused_and_says_what_is_missing(journal: Journal, phone: Phone) -> None:
    journal.append_batch(*phone.batch(1, 2), now=NOW)
    refused = refusal(journal, *phone.batch(4, 6))
    assert (refused.code, refused.ack, refused.what) == ("gap", 2, "event 3 is missing")
    device, texts, head, signatures = phone.batch(3, 6)
    refused = refusal(journal, device, [texts[0], *texts[2:]], head, signatures)
    assert (refused.code, refused.ack, refused.what) == ("gap", 2, "event 4 was expected here")


def test_an_altered_event_is_refused(journal: Journal, phone: Phone) -> None:
    device, texts, head, signatures = phone.batch()
    for at in range(1, len(texts)):
        changed = [*texts[:at], texts[at].replace("note", "nota"), *texts[at + 1:]]
        assert refusal(journal, device, changed, head, signatures).code == "altered"
    assert refusal(journal, device, [*texts[:3], "{}"], head, signatures).code == "altered"
    assert refusal(journal, new_id(), texts, head, signatures).code == "altered"
    assert refusal(journal, device, texts[:4], head, signatures).code == "altered"


def test_a_wrong_head_signature_refuses_the_whole_batch(journal: Journal, phone: Phone) -> None:
    device, texts, head, signatures = phone.batch()
    stranger = Key().sign(f"fieldcheck head 1\n{device}\n{head.seq}\n{head.hash}".encode())
    for signature in (stranger, phone.head(5).signature, "", "zz", head.signature[:-2]):
        refused = refusal(journal, device, texts, replace(head, signature=signature), signatures)
        assert (refused.code, refused.ack) == ("signature", 0)


def test_a_device_that_did_not_enrol_is_unknown(journal: Journal, phone: Phone) -> None:
    assert refusal(journal, *phone.batch(2, 6)).code == "unknown device"


def test_a_device_cannot_enrol_another_or_twice(journal: Journal, phone: Phone) -> None:
    other = Phone()
    other.texts[0] = other.texts[0].replace(f'"data":{{"device":"{other.device}"', f'"data":{{"device":"{new_id()}"')
    from journal.devices_at_hand import identity

    other.hashes[0] = identity(other.texts[0])
    assert refusal(journal, *other.batch()).code == "unknown device"
    phone.write("device.enrolled", read(phone.texts[0])["data"])
    assert refusal(journal, *phone.batch()).what == "a device's first event enrols it, and no later one does"


def test_a_chain_written_twice_is_a_fork(journal: Journal, phone: Phone) -> None:
    journal.append_batch(*phone.batch(1, 3), now=NOW)
    twin = Phone(phone.key)
    twin.device, twin.texts, twin.hashes = phone.device, phone.texts[:2], phone.hashes[:2]
    twin.note("another third event")
    assert refusal(journal, *twin.batch(1, 3)).code == "fork"
    twin.note("and a fourth")
    assert refusal(journal, *twin.batch(4, 4)).what == "it follows another event than the one held here"
    assert refusal(journal, *twin.batch(4, 4)).code == "fork"


def test_a_signing_needs_the_devices_signature_over_its_exact_text(journal: Journal, phone: Phone) -> None:
    signing = phone.write("job.signed", {"person": "p" * 26, "meaning": "performed"}, job=JOB)
    device, texts, head, _ = phone.batch()
    assert refusal(journal, device, texts, head, {}).code == "signature"
    assert refusal(journal, device, texts, head, {signing: head.signature}).code == "signature"
    journal.append_batch(*phone.batch(), now=NOW)
    signature = journal.signature(signing)
    assert verify(phone.key.public_hex, b"fieldcheck signing 1\n" + texts[-1].encode(), signature)
    with pytest.raises(NotFound):
        journal.signature(phone.hashes[0])


def test_the_desk_writes_its_own_chain_and_says_what_it_had_seen(journal: Journal, phone: Phone) -> None:
    desk = journal.enrol_own("Desk", "test", "0", NOW)
    assert is_id(desk) and journal.own_device() == desk
    opened = journal.append_own("job.opened", {"number": "1"}, JOB, "", NOW)
    journal.append_batch(*phone.batch(), now=NOW)
    handed = journal.append_own("job.handed", {"device": phone.device}, JOB, "", NOW)
    assert read(opened.text)["seen"] == {"job": {}, "workshop": {}}
    assert read(handed.text)["seen"] == {"job": {phone.device: 6}, "workshop": {phone.device: 1}}
    assert read(handed.text)["prev"] == opened.hash and handed.seq == 3
    assert journal.events()[-1] == handed == journal.event(handed.hash)
    assert verify_journal(journal.folder, check=verify) == []


def test_the_desks_real_key_signs_what_the_real_verification_accepts(tmp_path: Path, phone: Phone) -> None:
    key = make_device_key(tmp_path / "keys" / "desk.pem")
    journal = Journal.open(tmp_path / "shop", create=True, signer=key)
    journal.enrol_own("Desk", "test", "0", NOW)
    signing = journal.append_own("job.signed", {}, JOB, now=NOW)
    journal.append_batch(*phone.batch(), now=NOW)
    assert read(journal.enrolment(journal.own_device()).text)["data"]["public_key"] == key.public_hex
    assert verify(key.public_hex, b"fieldcheck signing 1\n" + signing.text.encode(), journal.signature(signing.hash))
    assert verify_journal(journal.folder) == []


def test_a_journal_without_the_desks_key_does_not_write(tmp_path: Path) -> None:
    with pytest.raises(JournalError, match="without the desk's key"):
        Journal.open(tmp_path, create=True).enrol_own("Desk", "test", "0", NOW)
    with pytest.raises(JournalError, match="has not enrolled"):
        Journal.open(tmp_path).append_own("workshop.named", {}, now=NOW)


def test_four_threads_lose_nothing(journal: Journal) -> None:
    journal.enrol_own("Desk", "test", "0", NOW)
    phones = [Phone() for _ in range(4)]
    faults: list[BaseException] = []

    def work(phone: Phone) -> None:
        try:
            for n in range(15):
                phone.note(f"note {n}")
                journal.append_batch(*phone.batch(max(1, n)), now=NOW)      # overlaps what was sent before
                journal.append_own("workshop.named", {"name": f"{n}"}, now=NOW)
        except BaseException as fault:
            faults.append(fault)
        finally:
            journal.close()

    threads = [threading.Thread(target=work, args=(phone,)) for phone in phones]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert faults == []
    assert len(journal.events()) == 1 + 4 * (16 + 15)
    for phone in phones:
        held = [event.text for event in journal.events() if event.device == phone.device]
        assert held == phone.texts
    assert journal.last_seq(journal.own_device()) == 61
    assert verify_journal(journal.folder, check=verify) == []


def test_events_can_be_read_after_a_cursor_and_for_one_job(journal: Journal, phone: Phone) -> None:
    other = Phone()
    other.write("answer.given", {}, job="k" * 26)
    journal.append_batch(*phone.batch(), now=NOW)
    journal.append_batch(*other.batch(), now=NOW)
    assert [event.cursor for event in journal.events(after=5)] == [6, 7, 8]
    assert [event.cursor for event in journal.events(job="k" * 26)] == [1, 7, 8]
    assert [event.cursor for event in journal.events(job="")] == [1, 7]
    assert [event.cursor for event in journal.events(limit=2)] == [1, 2]
    assert [text for _, text in journal.texts_of(JOB, workshop=False)] == phone.texts[1:]
    assert {text for _, text in journal.texts_of(JOB)} == {*phone.texts, other.texts[0]}


@pytest.mark.parametrize(
    "statement",
    [
        "update events set text = 'x'", "delete from events", "update heads set seq = 9", "delete from heads",
        "update signatures set signature = ''", "delete from signatures", "update parts set text = ''",
        "delete from parts", "delete from blobs", "update epochs set epoch = 'x'", "delete from own_devices",
        "insert or replace into events select 1, hash, device, seq, job, type, received, 'x' from events where seq = 1",
    ],
)
def test_nothing_is_ever_updated_or_deleted(journal: Journal, phone: Phone, statement: str) -> None:
    phone.write("job.signed", {}, job=JOB)
    journal.enrol_own("Desk", "test", "0", NOW)
    journal.append_batch(*phone.batch(), now=NOW)
    journal.put_part("{}")
    journal.put_blob("ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad", b"abc", NOW)
    with pytest.raises(sqlite3.IntegrityError, match="never"):
        journal.db.conn.execute(statement)


def test_opening_refuses_a_journal_whose_guards_were_taken_away(journal: Journal) -> None:
    journal.db.conn.execute("drop trigger events_are_never_changed")
    with pytest.raises(JournalError) as caught:
        Journal.open(journal.folder)
    assert "The trigger events_are_never_changed is missing." in caught.value.what


def test_opening_refuses_a_guard_that_was_made_harmless(journal: Journal) -> None:
    journal.db.conn.execute("drop trigger events_are_never_deleted")
    journal.db.conn.execute("create trigger events_are_never_deleted before delete on events begin select 1; end")
    with pytest.raises(JournalError, match="events_are_never_deleted is not as the journal made it"):
        Journal.open(journal.folder)


def test_a_folder_without_a_journal_is_refused(tmp_path: Path) -> None:
    with pytest.raises(JournalError, match="there is no journal here"):
        Journal.open(tmp_path)
    with pytest.raises(JournalError, match="there is no journal here"):
        verify_journal(tmp_path)


def test_every_commit_is_on_disk_before_it_is_acknowledged(journal: Journal) -> None:
    pragmas = [journal.db.conn.execute(f"pragma {name}").fetchone()[0] for name in ("journal_mode", "synchronous")]
    assert pragmas == ["wal", 2]


def test_a_failed_append_leaves_no_transaction_open(
    journal: Journal, phone: Phone, monkeypatch: pytest.MonkeyPatch
) -> None:
    def fail(*_: object) -> None:
        raise RuntimeError("power")

    monkeypatch.setattr(Journal, "_insert", fail)
    with pytest.raises(RuntimeError, match="power"):
        journal.append_batch(*phone.batch(), now=NOW)
    monkeypatch.undo()
    assert journal.append_batch(*phone.batch(), now=NOW).stored == 6


def test_an_epoch_lasts_over_opening_again(journal: Journal) -> None:
    assert is_id(journal.epoch())
    assert Journal.open(journal.folder).epoch() == journal.epoch()


def test_blobs_and_parts_come_back_as_they_were_put(journal: Journal) -> None:
    digest = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"      # FIPS 180-2, B.1: "abc"
    journal.put_blob(digest, b"abc", NOW)
    journal.put_blob(digest, b"abc", NOW)
    assert journal.blob(digest) == b"abc"
    assert (journal.folder / "blobs" / "ba" / digest).read_bytes() == b"abc"
    assert journal.put_part("abc") == digest and journal.part(digest) == "abc"
    with pytest.raises(ProofError):
        journal.put_blob(digest, b"abd", NOW)
    for wrong in ("0" * 64, "../../etc/passwd", ""):
        with pytest.raises(NotFound):
            journal.blob(wrong)
    with pytest.raises(NotFound):
        journal.part("0" * 64)
    assert [file.name for file in (journal.folder / "blobs").rglob("*") if file.is_file()] == [digest]


def test_a_new_identity_is_26_characters_and_never_the_same() -> None:
    made = {new_id() for _ in range(1000)}
    assert len(made) == 1000 and all(is_id(text) for text in made)
    assert batches.PREFIX == b"fieldcheck event 1\n"
