"""The Merkle tree of a journal's events: brought up to date when asked, so that appending does not pay for it."""

from __future__ import annotations

import os
import sqlite3
from collections.abc import Callable
from datetime import datetime
from pathlib import Path

from sqlite_utils import Database

from fieldcheck.engine.errors import NotFound, ProofError
from fieldcheck.journal import merkle
from fieldcheck.journal.database import exclusive
from fieldcheck.journal.forms import TreeHead, stamp

ISSUED = "tree-heads.txt"
CHUNK = 1000


def bring_up_to_date(db: Database) -> int:
    """Put the events that the tree does not hold yet into it; the number of leaves it has then."""
    connection: sqlite3.Connection = db.conn
    while True:
        size = leaves(connection)
        if connection.execute("select 1 from events where cursor > ? limit 1", (size,)).fetchone() is None:
            return size
        with exclusive(db):
            size = leaves(connection)
            rows = connection.execute(
                "select text from events where cursor > ? order by cursor limit ?", (size, CHUNK)
            ).fetchall()
            hashes = [merkle.leaf_hash(text) for (text,) in rows]
            nodes = list(merkle.new_nodes(size, hashes, looker(connection)))
            connection.executemany("insert into tree (level, position, hash) values (?, ?, ?)", nodes)


def leaves(connection: sqlite3.Connection) -> int:
    """How many leaves the tree holds."""
    (top,) = connection.execute("select max(position) from tree where level = 0").fetchone()
    return 0 if top is None else int(top) + 1


def looker(connection: sqlite3.Connection) -> Callable[[int, int], str]:
    """The look-up of full subtrees that fieldcheck.journal.merkle asks for."""

    def look(level: int, position: int) -> str:
        row = connection.execute(
            "select hash from tree where level = ? and position = ?", (level, position)
        ).fetchone()
        if row is None:
            raise ProofError("the stored tree has a hole", f"tree level {level}, position {position}")
        return str(row[0])

    return look


def head(db: Database, size: int | None = None) -> TreeHead:
    """The head over the first `size` events, or over all of them."""
    held = bring_up_to_date(db)
    if size is None:
        size = held
    if not 0 <= size <= held:
        raise NotFound(f"the journal never had a tree of {size} events", "", f"it holds {held}")
    return TreeHead(size, merkle.root(0, size, looker(db.conn)))


def inclusion(db: Database, event_hash: str, size: int) -> tuple[int, list[str]]:
    """(index of the event's leaf from 0, hashes that lead from it to the root over the first `size` events)."""
    bring_up_to_date(db)
    row = db.conn.execute("select cursor from events where hash = ?", (event_hash,)).fetchone()
    if row is None:
        raise NotFound("there is no such event", f"event {event_hash}")
    index = int(row[0]) - 1
    return index, merkle.inclusion(index, size, looker(db.conn))


def consistency(db: Database, first: int, second: int) -> list[str]:
    """Hashes that show that the tree of `first` events only grew into that of `second`."""
    held = bring_up_to_date(db)
    if second > held:
        raise NotFound(f"the journal never had a tree of {second} events", "", f"it holds {held}")
    return merkle.consistency(first, second, looker(db.conn))


def note_issued(folder: Path, issued: TreeHead, now: datetime) -> None:
    """Keep a head that left the house in a file beside the database, so that a shortened journal shows."""
    with open(folder / ISSUED, "a", encoding="ascii") as file:
        file.write(f"{issued.size} {issued.root} {stamp(now)}\n")
        file.flush()
        os.fsync(file.fileno())


def issued(folder: Path) -> list[TreeHead]:
    """The heads that left the house, oldest first; refuses (ProofError) a file that is not in this form."""
    path = folder / ISSUED
    if not path.exists():
        return []
    heads = []
    for number, line in enumerate(path.read_text(encoding="ascii", errors="replace").splitlines(), 1):
        parts = line.split(" ")
        if len(parts) != 3 or not parts[0].isdecimal():
            raise ProofError("the line is not a size, a root and a time", f"{ISSUED}:{number}")
        heads.append(TreeHead(int(parts[0]), parts[1]))
    return heads
