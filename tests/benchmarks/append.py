"""Appending to the journal against bare sqlite3 with the same durability: WAL, synchronous=FULL, same tables, indexes.

Both sides get the same events, made beforehand. The bare side inserts rows that are already cut and hashed, and the
head, in one transaction; the journal reads, checks and hashes each text first. Signatures are left out on both sides
(the verifier says yes at once), and so are projections: the journal makes them when they are asked for.
"""

from __future__ import annotations

import sqlite3
import statistics
import tempfile
from functools import partial
from pathlib import Path

from benchmarks.ratios import ROUNDS, Paired, Row, seconds
from devices_at_hand import NOW, Phone

from fieldcheck.engine.texts import read
from fieldcheck.journal.database import schema_text
from fieldcheck.journal.forms import Head, stamp
from fieldcheck.journal.journal import INSERT_EVENT, INSERT_HEAD, Journal

BATCHES = 40         # timed in each round
VALUE = {"text": "23.12", "unit": "mV", "meter": "m" * 26, "function": "DC voltage", "range": "200 mV",
         "statement": "pass", "printed": "23.12 ± 0.06 mΩ"}
GOAL = 0.5
DISK = "/var/tmp" if Path("/var/tmp").is_dir() else None     # /tmp may lie in memory, where syncing is free


def yes(public_key: str, data: bytes, signature: str) -> bool:
    """Stands for a signature that is good."""
    return True


class Silent(Phone):
    """A phone that signs nothing: making its batches must not cost anything here."""

    def batches(self, size: int) -> list[tuple]:  # type: ignore[type-arg]
        """Arguments of append_batch; the first holds the enrolment."""
        found = []
        for first in range(0, len(self.texts), size):
            last = min(first + size, len(self.texts))
            head = Head(last, self.hashes[last - 1], "0" * 128)
            found.append((self.device, self.texts[first:last], head, {}))
        return found


def phone_with(count: int) -> Silent:
    phone = Silent()
    for number in range(count - 1):
        phone.write("answer.given", {"item": "i" * 26, "step": "untouched", "round": 0, "index": f"{number}/v_plus",
                                     "kind": "table", "value": VALUE}, job="j" * 26, seen={"d" * 26: 12})
    return phone


def bare(path: Path) -> sqlite3.Connection:
    """The same file as the journal's, through nothing but sqlite3."""
    connection = sqlite3.connect(path, isolation_level=None)
    connection.execute("pragma journal_mode=wal")
    connection.execute("pragma synchronous=full")
    connection.executescript(schema_text())
    return connection


def bare_batches(phone: Silent, size: int) -> list[tuple[list[tuple[object, ...]], tuple[object, ...]]]:
    """(rows of the events, row of the head) of each batch."""
    found = []
    for device, texts, head, _ in phone.batches(size):
        rows = []
        for text, digest in zip(texts, phone.hashes[head.seq - len(texts): head.seq], strict=True):
            event = read(text)
            rows.append((digest, device, event["seq"], event["job"], event["type"], stamp(NOW), text))
        found.append((rows, (device, head.seq, head.hash, head.signature)))
    return found


def compare(size: int, rounds: int, batches: int) -> Paired:
    """Seconds a batch of `size` events: in each round the medians of `batches` pairs.

    Both write batch by batch in turn: how long a disk takes to sync changes from one moment to the next.
    """
    with tempfile.TemporaryDirectory(dir=DISK) as folder:
        journal = Journal.open(Path(folder) / "shop", create=True, verify=yes)
        connection = bare(Path(folder) / "bare.db")
        found = Paired([], [])
        for _ in range(rounds):
            phone = phone_with((batches + 1) * size)
            mine: list[float] = []
            other: list[float] = []
            for batch, (rows, head) in zip(phone.batches(size), bare_batches(phone, size), strict=True):
                mine.append(seconds(partial(journal.append_batch, *batch, now=NOW)))
                other.append(seconds(partial(insert, connection, rows, head)))
            found.ours.append(statistics.median(mine[1:]))      # the first one enrols
            found.theirs.append(statistics.median(other[1:]))
        held = journal.db.conn.execute("select count(*) from events").fetchone()
        assert held == connection.execute("select count(*) from events").fetchone()
        journal.close()
        connection.close()
        return found


def insert(connection: sqlite3.Connection, rows: list[tuple[object, ...]], head: tuple[object, ...]) -> None:
    """One batch by bare sqlite3."""
    connection.execute("begin immediate")
    connection.executemany(INSERT_EVENT, rows)
    connection.execute(INSERT_HEAD, head)
    connection.execute("commit")


def row(size: int, measured: Paired) -> Row:
    """Speed, not cost: how many times as many events a second as bare sqlite3."""
    turned = Paired(measured.theirs, measured.ours)
    low, high = min(turned.ratios()), max(turned.ratios())
    ours, theirs = (f"{size / sorted(one)[len(one) // 2]:,.0f}" for one in (measured.ours, measured.theirs))
    figure = f"{turned.ratio():.2f} ({low:.2f} to {high:.2f}), {ours} events/s against {theirs}"
    return Row(f"journal append, batches of {size}: speed / bare sqlite3", figure, f">= {GOAL:g}",
               turned.ratio() >= GOAL)


def rows(tiny: bool = False) -> list[Row]:
    rounds = 1 if tiny else ROUNDS
    return [row(size, compare(size, rounds, 2 if tiny else BATCHES)) for size in (1, 20)]
