"""The journal: every event that was accepted, in order, for ever. Only this package knows SQL."""

from __future__ import annotations

import sqlite3
import threading
from collections.abc import Mapping, Sequence
from datetime import datetime
from pathlib import Path
from typing import Any

from sqlite_utils import Database

from fieldcheck.engine.chain import head_message, signing_message
from fieldcheck.engine.errors import NotFound, ProofError
from fieldcheck.engine.texts import read, write
from fieldcheck.journal import blobs, tree
from fieldcheck.journal.batches import (
    Link,
    Verifier,
    check_head,
    check_signings,
    new_links,
    public_key_of,
    read_batch,
)
from fieldcheck.journal.database import FILE, JournalError, check_schema, connect, exclusive, prepare
from fieldcheck.journal.forms import (
    Ack,
    Event,
    Head,
    Refused,
    Signer,
    Stored,
    TreeHead,
    new_id,
    offset_minutes,
    stamp,
)
from fieldcheck.journal.hashing import sha256
from fieldcheck.keys.devices import verify as verify_signature

COLUMNS = "cursor, hash, device, seq, job, type, received, text"
INSERT_EVENT = "insert into events (hash, device, seq, job, type, received, text) values (?, ?, ?, ?, ?, ?, ?)"
INSERT_HEAD = "insert or ignore into heads (device, seq, hash, signature) values (?, ?, ?, ?)"
INSERT_SIGNATURE = "insert or ignore into signatures (event, signature) values (?, ?)"


class Journal:
    """An open journal. One object serves all threads; each thread gets its own connection."""

    def __init__(self, folder: Path, signer: Signer | None = None, verify: Verifier | None = None) -> None:
        self.folder = folder
        self.signer = signer
        self._verify = verify or verify_signature
        self._threads = threading.local()
        self._keys: dict[str, str] = {}

    @classmethod
    def open(
        cls, folder: Path, create: bool = False, signer: Signer | None = None, verify: Verifier | None = None
    ) -> Journal:
        """The journal in a folder. create: make it when there is none. signer: the desk's own key, to write with.

        Refuses (JournalError) a folder without a journal, and one whose guards against changes were taken away.
        """
        if create:
            folder.mkdir(parents=True, exist_ok=True)
        elif not (folder / FILE).is_file():
            raise JournalError("there is no journal here", str(folder), "name the workshop's folder, or create one")
        journal = cls(folder, signer, verify)
        prepare(journal.db)
        check_schema(journal.db, str(folder / FILE))
        journal._begin_first_epoch()
        return journal

    @property
    def db(self) -> Database:
        """This thread's connection."""
        db: Database | None = getattr(self._threads, "db", None)
        if db is None:
            db = self._threads.db = connect(self.folder / FILE)
        return db

    def close(self) -> None:
        """Close this thread's connection; it opens again when it is needed."""
        db: Database | None = self._threads.__dict__.pop("db", None)
        if db is not None:
            db.conn.close()

    # ---- writing

    def append_batch(
        self, device: str, texts: Sequence[str], head: Head, signatures: Mapping[str, str], now: datetime
    ) -> Ack:
        """Store what is new of a device's events; what is acknowledged is on disk. The same batch twice is stored once.

        texts: consecutive events of the device, the last of which is the signed head. signatures: event hash ->
        signature, for signing events. Raises Refused, having stored nothing.
        """
        try:
            links = read_batch(device, texts)
            if not links:
                return Ack(0, 0, self.last_seq(device))
            key = self._key_for(device, links[0].event)
            check_head(device, links, head, key, self._verify)
            check_signings(links, signatures, key, self._verify)
        except Refused as refused:
            refused.ack = self.last_seq(device)
            raise
        with exclusive(self.db) as connection:
            fresh, last = new_links(connection, device, links)
            if not fresh:
                return Ack(0, len(links), last)
            self._insert(connection, fresh, head, signatures, now)
        return Ack(len(fresh), len(links) - len(fresh), head.seq)

    def _insert(
        self, connection: sqlite3.Connection, links: Sequence[Link], head: Head, signatures: Mapping[str, str],
        now: datetime,
    ) -> None:
        received = stamp(now)
        rows = [
            (link.hash, link.event["device"], link.event["seq"], link.event["job"], link.event["type"], received,
             link.text)
            for link in links
        ]
        connection.executemany(INSERT_EVENT, rows)
        connection.execute(INSERT_HEAD, (rows[0][1], head.seq, head.hash, head.signature))
        signed = [(link.hash, signatures[link.hash]) for link in links if link.event["type"] == "job.signed"]
        connection.executemany(INSERT_SIGNATURE, signed)

    def _key_for(self, device: str, first: Event) -> str:
        key = self._keys.get(device)
        if key is None:
            row = self.db.conn.execute("select text from events where device = ? and seq = 1", (device,)).fetchone()
            if row is not None:
                key = self._keys[device] = public_key_of(read(row[0]))
            elif first["seq"] == 1:
                key = public_key_of(first)      # not remembered before it is stored
            else:
                raise Refused("unknown device", 0, "it has not enrolled", f"device {device}", "enrol the device")
        return key

    def enrol_own(self, name: str, platform: str, app_version: str, now: datetime) -> str:
        """Make the desk a new device with its own chain under `signer`; its identity. Earlier ones write no more."""
        device = new_id()
        data = {"device": device, "name": name, "public_key": self._own_signer().public_hex, "platform": platform,
                "app_version": app_version}
        with exclusive(self.db) as connection:
            connection.execute("insert into own_devices (device) values (?)", (device,))
            self._append_own(connection, device, "device.enrolled", data, "", "", now)
        return device

    def own_device(self) -> str:
        """The desk's own device; refuses (JournalError) when none has enrolled."""
        row = self.db.conn.execute("select device from own_devices order by number desc limit 1").fetchone()
        if row is None:
            raise JournalError("the desk has not enrolled as a device", str(self.folder), "enrol it first")
        return str(row[0])

    def append_own(
        self, type: str, data: Mapping[str, Any], job: str = "", person: str = "", now: datetime | None = None
    ) -> Stored:
        """Write one event as the desk's own device. job, person: identities, or ""."""
        device = self.own_device()
        with exclusive(self.db) as connection:
            return self._append_own(connection, device, type, data, job, person, now or datetime.now().astimezone())

    def _append_own(
        self, connection: sqlite3.Connection, device: str, type: str, data: Mapping[str, Any], job: str, person: str,
        now: datetime,
    ) -> Stored:
        signer = self._own_signer()
        row = connection.execute(
            "select seq, hash from events where device = ? order by seq desc limit 1", (device,)
        ).fetchone()
        seq, prev = (1, "") if row is None else (row[0] + 1, row[1])
        seen = {"job": self._last_of_others(connection, job, device) if job else {},
                "workshop": self._last_of_others(connection, "", device)}
        text = write({"v": 1, "device": device, "seq": seq, "prev": prev, "at": stamp(now),
                      "offset": offset_minutes(now), "person": person, "job": job, "seen": seen, "type": type,
                      "data": dict(data)})
        link = read_batch(device, [text])[0]
        head = Head(seq, link.hash, signer.sign(head_message(device, seq, link.hash).encode()))
        signatures = {link.hash: signer.sign(signing_message(text).encode())} if type == "job.signed" else {}
        self._insert(connection, [link], head, signatures, now)
        (cursor,) = connection.execute("select max(cursor) from events").fetchone()
        return Stored(cursor, link.hash, device, seq, job, type, stamp(now), text)

    def _own_signer(self) -> Signer:
        if self.signer is None:
            raise JournalError("the journal was opened without the desk's key", str(self.folder))
        return self.signer

    @staticmethod
    def _last_of_others(connection: sqlite3.Connection, job: str, device: str) -> dict[str, int]:
        return dict(connection.execute(
            "select device, max(seq) from events where job = ? and device <> ? group by device order by device",
            (job, device),
        ))

    # ---- reading

    def last_seq(self, device: str) -> int:
        """The last sequence held of a device, 0 when none is."""
        row = self.db.conn.execute("select max(seq) from events where device = ?", (device,)).fetchone()
        return int(row[0] or 0)

    def events(self, after: int = 0, job: str = "all", limit: int = 1000) -> list[Stored]:
        """Events after a cursor, in the journal's order. job: its identity (the workshop's stream comes along),
        "" for the workshop's stream alone, or "all"."""
        where = "" if job == "all" else "and job in ('', ?)"
        given = (after, limit) if job == "all" else (after, job, limit)
        rows = self.db.conn.execute(
            f"select {COLUMNS} from events where cursor > ? {where} order by cursor limit ?", given
        )
        return [Stored(*row) for row in rows]

    def texts_of(self, job: str, workshop: bool = True) -> list[tuple[str, str]]:
        """(hash, text) of every event of a job, with the workshop's stream or without, by device and sequence."""
        rows = self.db.conn.execute(
            "select hash, text from events where job = ? or (job = '' and ?) order by device, seq", (job, workshop)
        )
        return [(digest, text) for digest, text in rows]

    def event(self, digest: str) -> Stored:
        """One event by its hash; refuses (NotFound) one that is not here."""
        row = self.db.conn.execute(f"select {COLUMNS} from events where hash = ?", (digest,)).fetchone()
        if row is None:
            raise NotFound("there is no such event", f"event {digest}")
        return Stored(*row)

    def enrolment(self, device: str) -> Stored:
        """The first event of a device, which names its key; refuses (NotFound) an unknown device."""
        row = self.db.conn.execute(f"select {COLUMNS} from events where device = ? and seq = 1", (device,)).fetchone()
        if row is None:
            raise NotFound("there is no such device", f"device {device}")
        return Stored(*row)

    def signature(self, digest: str) -> str:
        """The device's signature over the exact text of a signing event, given that event's hash."""
        row = self.db.conn.execute("select signature from signatures where event = ?", (digest,)).fetchone()
        if row is None:
            raise NotFound("there is no signature over this event", f"event {digest}")
        return str(row[0])

    def epoch(self) -> str:
        """The present epoch; a cursor of an earlier one means nothing in it."""
        row = self.db.conn.execute("select epoch from epochs order by number desc limit 1").fetchone()
        return str(row[0])

    def _begin_first_epoch(self) -> None:
        if self.db.conn.execute("select 1 from epochs").fetchone() is None:
            with exclusive(self.db) as connection:
                connection.execute(
                    "insert into epochs (epoch, since) select ?, ? where not exists (select 1 from epochs)",
                    (new_id(), stamp(datetime.now().astimezone())),
                )

    # ---- blobs and rulebook parts

    def put_blob(self, digest: str, data: bytes, now: datetime) -> None:
        """Keep a file under its SHA-256; refuses (ProofError) bytes that do not have it. Twice is once."""
        blobs.write(self.folder, digest, data)
        self.db.conn.execute(
            "insert or ignore into blobs (sha256, size, received) values (?, ?, ?)", (digest, len(data), stamp(now))
        )

    def blob(self, digest: str) -> bytes:
        """The bytes of a blob; refuses (NotFound) an unknown one, (ProofError) altered bytes."""
        return blobs.read(self.folder, digest)

    def put_part(self, text: str) -> str:
        """Keep a rulebook index or part for ever; its SHA-256."""
        digest = sha256(text.encode())
        self.db.conn.execute("insert or ignore into parts (sha256, text) values (?, ?)", (digest, text))
        return digest

    def part(self, digest: str) -> str:
        """The exact text of an index or part; refuses (NotFound) an unknown one, (ProofError) an altered one."""
        row = self.db.conn.execute("select text from parts where sha256 = ?", (digest,)).fetchone()
        if row is None:
            raise NotFound("there is no such rulebook part", f"part {digest}")
        text = str(row[0])
        if sha256(text.encode()) != digest:
            raise ProofError("the rulebook part was altered", f"part {digest}")
        return text

    # ---- the Merkle tree

    def tree_head(self, size: int | None = None) -> TreeHead:
        """The head over the first `size` events, or over all."""
        return tree.head(self.db, size)

    def issue_tree_head(self, now: datetime) -> TreeHead:
        """The present head, to go into a record; kept outside the database too, where `verify` looks for it."""
        issued = tree.head(self.db)
        tree.note_issued(self.folder, issued, now)
        return issued

    def inclusion_proof(self, event_hash: str, size: int) -> tuple[int, list[str]]:
        """(leaf index from 0, proof) of an event in the tree over the first `size` events."""
        return tree.inclusion(self.db, event_hash, size)

    def consistency_proof(self, first: int, second: int) -> list[str]:
        """Proof that the tree of `first` events only grew into that of `second`."""
        return tree.consistency(self.db, first, second)
