"""Attacks on a journal, one function each: what somebody with the file and a SQLite shell might do.

Each gets a Scene and returns the sentences that verify must print, exactly and no others.
"""

from __future__ import annotations

import sqlite3
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

from journal.devices_at_hand import Key, Phone, identity

from fieldcheck.engine.texts import read, write
from fieldcheck.journal.database import FILE, schema_text, statements


@dataclass
class Scene:
    """A journal of two phones: `phone` has events 1 to 6 (the fourth is a signing), `other` 7 to 9."""

    folder: Path
    phone: Phone
    other: Phone
    blob: str
    part: str

    @contextmanager
    def unguarded(self) -> Iterator[sqlite3.Connection]:
        """The database with its triggers taken away for a while and put back as if nothing had been."""
        connection = sqlite3.connect(self.folder / FILE, isolation_level=None)
        triggers = [text for text in statements(schema_text()) if "create trigger" in text]
        names = [row[0] for row in connection.execute("select name from sqlite_master where type = 'trigger'")]
        for name in names:
            connection.execute(f"drop trigger {name}")
        yield connection
        for text in triggers:
            connection.execute(text[text.index("create trigger"):])
        connection.close()


def altered_text(text: str) -> str:
    return text.replace("note 1", "nota 1")


def one_bit_in_body(scene: Scene) -> list[str]:
    with scene.unguarded() as db:
        (text,) = db.execute("select text from events where cursor = 3").fetchone()
        flipped = text.replace("note 1", "note 0")      # "1" and "0" differ in one bit
        db.execute("update events set text = ? where cursor = 3", (flipped,))
    where = f"Event 3 of the journal (event 3 of device {scene.phone.device})"
    return [
        f"{where} was altered: its text no longer has the hash it was stored under.",
        f"Event 4 of the journal (event 4 of device {scene.phone.device}) does not follow the event before it.",
        "The stored Merkle tree differs from the events in 4 nodes.",
        "The first 9 events are not those of the tree head that was issued over them.",
    ]


def one_bit_in_the_last_body(scene: Scene) -> list[str]:
    with scene.unguarded() as db:
        (text,) = db.execute("select text from events where cursor = 9").fetchone()
        db.execute("update events set text = ? where cursor = 9", (text.replace("note 1", "note 0"),))
    where = f"Event 9 of the journal (event 3 of device {scene.other.device})"
    return [
        f"{where} was altered: its text no longer has the hash it was stored under.",
        f"Device {scene.other.device} signed another event 3 than the one that is here.",
        "The stored Merkle tree differs from the events in 1 node.",
        "The first 9 events are not those of the tree head that was issued over them.",
    ]


def truncated_tail(scene: Scene) -> list[str]:
    with scene.unguarded() as db:
        db.execute("delete from events where cursor > 7")
        db.execute("delete from tree where (position + 1) << level > 7")
    return [
        "The journal ends at event 7, but 9 were stored: its end was cut off.",
        f"Device {scene.other.device} signed its chain up to event 3, which is not here: its end was cut off.",
        "A tree head over 9 events was issued, but only 7 are here: the journal's end was cut off.",
    ]


def truncated_tail_without_a_trace_in_the_file(scene: Scene) -> list[str]:
    with scene.unguarded() as db:
        db.execute("delete from events where cursor > 6")
        db.execute("delete from tree where (position + 1) << level > 6")
        db.execute("delete from heads where device = ?", (scene.other.device,))
        db.execute("update sqlite_sequence set seq = 6 where name = 'events'")
    return ["A tree head over 9 events was issued, but only 6 are here: the journal's end was cut off."]


def swapped_neighbours(scene: Scene) -> list[str]:
    with scene.unguarded() as db:
        db.execute("update events set cursor = 100 where cursor = 2")
        db.execute("update events set cursor = 2 where cursor = 3")
        db.execute("update events set cursor = 3 where cursor = 100")
    device = scene.phone.device
    return [
        f"Event 2 of the journal (event 3 of device {device}) comes where event 2 of that device is expected.",
        f"Event 3 of the journal (event 2 of device {device}) comes where event 4 of that device is expected.",
        f"Event 4 of the journal (event 4 of device {device}) comes where event 3 of that device is expected.",
        "The stored Merkle tree differs from the events in 6 nodes.",
        "The first 9 events are not those of the tree head that was issued over them.",
    ]


def deleted_from_the_middle(scene: Scene) -> list[str]:
    with scene.unguarded() as db:
        db.execute("delete from events where cursor = 2")
    device = scene.phone.device
    return [
        "Event 2 of the journal is missing.",
        f"Event 3 of the journal (event 3 of device {device}) comes where event 2 of that device is expected.",
        "The stored Merkle tree differs from the events in 15 nodes.",
        "A tree head over 9 events was issued, but only 8 are here: the journal's end was cut off.",
    ]


def trigger_removed(scene: Scene) -> list[str]:
    db = sqlite3.connect(scene.folder / FILE)
    db.execute("drop trigger events_are_never_changed")
    db.close()
    return ["The trigger events_are_never_changed is missing."]


def trigger_made_harmless(scene: Scene) -> list[str]:
    db = sqlite3.connect(scene.folder / FILE)
    db.execute("drop trigger events_are_never_deleted")
    db.execute("create trigger events_are_never_deleted before delete on events begin select 1; end")
    db.close()
    return ["The trigger events_are_never_deleted is not as the journal made it."]


def replaced_past_the_trigger(scene: Scene) -> list[str]:
    """`insert or replace` on a connection without recursive_triggers fires no delete trigger."""
    db = sqlite3.connect(scene.folder / FILE, isolation_level=None)
    row = list(db.execute("select * from events where cursor = 9").fetchone())
    row[-1] = altered_text(row[-1])
    row[1] = identity(row[-1])
    db.execute("insert or replace into events values (?, ?, ?, ?, ?, ?, ?, ?)", row)
    db.close()
    return [
        f"Device {scene.other.device} signed another event 3 than the one that is here.",
        "The stored Merkle tree differs from the events in 1 node.",
        "The first 9 events are not those of the tree head that was issued over them.",
    ]


def replaced_genesis(scene: Scene) -> list[str]:
    with scene.unguarded() as db:
        stranger = read(scene.phone.texts[0])
        stranger["data"]["public_key"] = Key().public_hex
        text = write(stranger)
        db.execute("update events set text = ?, hash = ? where cursor = 1", (text, identity(text)))
    device = scene.phone.device
    return [
        f"Event 2 of the journal (event 2 of device {device}) does not follow the event before it.",
        f"The signature of device {device} over its head at event 6 is not its own.",
        f"The signing in event 4 of device {device} carries a signature that is not over its text.",
        "The stored Merkle tree differs from the events in 4 nodes.",
        "The first 9 events are not those of the tree head that was issued over them.",
    ]


def rehash(db: sqlite3.Connection, device: str, change: Callable[[str], str]) -> None:
    """Change the device's texts and make its chain consistent again, hash by hash."""
    prev = ""
    rows = db.execute("select cursor, text, hash from events where device = ? order by seq", (device,)).fetchall()
    for cursor, text, old in rows:
        event = read(change(text))
        event["prev"] = prev
        text = write(event)
        prev = identity(text)
        db.execute("update events set text = ?, hash = ? where cursor = ?", (text, prev, cursor))
        db.execute("update signatures set event = ? where event = ?", (prev, old))


def rehashed_from_here(scene: Scene) -> list[str]:
    with scene.unguarded() as db:
        rehash(db, scene.phone.device, altered_text)
    device = scene.phone.device
    return [
        f"Device {device} signed another event 6 than the one that is here.",
        f"The signing in event 4 of device {device} carries a signature that is not over its text.",
        "The stored Merkle tree differs from the events in 9 nodes.",
        "The first 9 events are not those of the tree head that was issued over them.",
    ]


def rewritten_with_a_key_of_ones_own(scene: Scene) -> list[str]:
    """Consistent throughout: only a head that left the house tells."""
    key = Key()
    with scene.unguarded() as db:
        device = scene.other.device
        rehash(db, device, lambda text: altered_text(text).replace(scene.other.key.public_hex, key.public_hex))
        (last,) = db.execute("select hash from events where device = ? and seq = 3", (device,)).fetchone()
        signature = key.sign(f"fieldcheck head 1\n{device}\n3\n{last}".encode())
        db.execute("update heads set hash = ?, signature = ? where device = ?", (last, signature, device))
        db.execute("delete from tree")
    return ["The first 9 events are not those of the tree head that was issued over them."]


def stranger_added_at_the_end(scene: Scene) -> list[str]:
    text = scene.other.texts[-1]
    event = {**read(text), "seq": 4, "prev": identity(text)}
    forged = write(event)
    db = sqlite3.connect(scene.folder / FILE, isolation_level=None)
    db.execute(
        "insert into events (hash, device, seq, job, type, received, text) values (?, ?, 4, ?, ?, '', ?)",
        (identity(forged), event["device"], event["job"], event["type"], forged),
    )
    db.close()
    return [f"Nothing that device {scene.other.device} signed covers its events after 3."]


def filed_under_another_job(scene: Scene) -> list[str]:
    with scene.unguarded() as db:
        db.execute("update events set job = '' where cursor = 3")
    return [
        f"Event 3 of the journal (event 3 of device {scene.phone.device}) is filed under another device, sequence, "
        "job or type than its text says."
    ]


def signature_taken_away(scene: Scene) -> list[str]:
    with scene.unguarded() as db:
        db.execute("delete from signatures")
    return [f"The signing in event 4 of device {scene.phone.device} has lost its signature."]


def signature_of_another_text(scene: Scene) -> list[str]:
    with scene.unguarded() as db:
        db.execute("update signatures set signature = ?", (scene.phone.key.sign(b"something else"),))
    return [f"The signing in event 4 of device {scene.phone.device} carries a signature that is not over its text."]


def missing_blob(scene: Scene) -> list[str]:
    (scene.folder / "blobs" / scene.blob[:2] / scene.blob).unlink()
    return [f"The blob {scene.blob} of 10 bytes is missing."]


def altered_blob(scene: Scene) -> list[str]:
    (scene.folder / "blobs" / scene.blob[:2] / scene.blob).write_bytes(b"photograpH")
    return [f"The blob {scene.blob} was altered."]


def altered_part(scene: Scene) -> list[str]:
    with scene.unguarded() as db:
        db.execute("update parts set text = '{\"limit\":\"2\"}'")
    return [f"The rulebook part {scene.part} was altered."]


def altered_tree(scene: Scene) -> list[str]:
    db = sqlite3.connect(scene.folder / FILE, isolation_level=None)
    db.execute("update tree set hash = ? where level = 3", ("0" * 64,))
    db.close()
    return ["The stored Merkle tree differs from the events in 1 node."]


def unreadable_text(scene: Scene) -> list[str]:
    with scene.unguarded() as db:
        db.execute("update events set text = 'x' || text where cursor = 9")
    where = f"Event 9 of the journal (event 3 of device {scene.other.device})"
    return [
        f"{where} was altered: its text no longer has the hash it was stored under.",
        f'{where} cannot be read: "x" stands where a value is expected.',
        f"Device {scene.other.device} signed its chain up to event 3, which is not here: its end was cut off.",
        "The stored Merkle tree differs from the events in 1 node.",
        "The first 9 events are not those of the tree head that was issued over them.",
    ]


ATTACKS: list[Callable[[Scene], list[str]]] = [
    one_bit_in_body, one_bit_in_the_last_body, truncated_tail, truncated_tail_without_a_trace_in_the_file,
    swapped_neighbours, deleted_from_the_middle, trigger_removed, trigger_made_harmless, replaced_past_the_trigger,
    replaced_genesis, rehashed_from_here, rewritten_with_a_key_of_ones_own, stranger_added_at_the_end,
    filed_under_another_job, signature_taken_away, signature_of_another_text, missing_blob, altered_blob,
    altered_part, altered_tree, unreadable_text,
]
