"""The SQLite file of the journal: connecting, its schema, and the one way to write to it."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from functools import cache
from importlib.resources import files
from pathlib import Path

from sqlite_utils import Database, Migrations

from fieldcheck.engine.errors import FieldcheckError

FILE = "journal.db"
BUSY_SECONDS = 20.0

migrations = Migrations("fieldcheck journal")


class JournalError(FieldcheckError):
    """The journal's folder or file is not what it should be."""

    def __init__(self, what: str, where: str = "", mend: str = "") -> None:
        FieldcheckError.__init__(self, what, where, mend)


def connect(path: Path) -> Database:
    """A connection for the thread that asks: every commit is on disk before it returns (WAL, synchronous=FULL).

    No transaction begins by itself (isolation_level None); writers use `exclusive`.
    """
    connection = sqlite3.connect(path, timeout=BUSY_SECONDS, isolation_level=None)
    connection.execute("pragma journal_mode=wal")
    connection.execute("pragma synchronous=full")
    connection.execute("pragma foreign_keys=on")
    # Without this, `insert or replace` deletes a row past the trigger that forbids it.
    connection.execute("pragma recursive_triggers=on")
    return Database(connection, strict=True)


@contextmanager
def exclusive(db: Database) -> Iterator[sqlite3.Connection]:
    """One transaction that holds the write lock from its first statement; rolled back on any exception.

    `db.atomic()` alone begins deferred: of two writers that both read the head first, one is refused.
    """
    connection: sqlite3.Connection = db.conn
    connection.execute("begin immediate")
    try:
        yield connection
        connection.execute("commit")
    except BaseException:
        if connection.in_transaction:
            connection.execute("rollback")
        raise


def schema_text() -> str:
    return files("fieldcheck.journal").joinpath("schema.sql").read_text(encoding="utf-8")


def statements(script: str) -> Iterator[str]:
    """The statements of a script one by one; `executescript` would end the transaction it runs in."""
    gathered = ""
    for line in script.splitlines(keepends=True):
        gathered += line
        if sqlite3.complete_statement(gathered):
            yield gathered.strip()
            gathered = ""


@migrations(name="0001 first form")
def first_form(db: Database) -> None:
    for statement in statements(schema_text()):
        db.conn.execute(statement)


def prepare(db: Database) -> None:
    """Bring a new or older file to this form; several processes may try at once."""
    if not migrations.pending(db):
        return
    with exclusive(db):
        migrations.apply(db)


@cache
def expected_objects() -> dict[tuple[str, str], str]:
    """(kind, name) -> statement of every table, index and trigger that the schema makes."""
    connection = sqlite3.connect(":memory:")
    try:
        connection.executescript(schema_text())
        return _objects(connection)
    finally:
        connection.close()


def _objects(connection: sqlite3.Connection) -> dict[tuple[str, str], str]:
    rows = connection.execute("select type, name, sql from sqlite_master where sql is not null")
    return {(kind, name): sql for kind, name, sql in rows if not name.startswith("sqlite_")}


def schema_faults(connection: sqlite3.Connection) -> list[str]:
    """One sentence for each table, index or trigger of the schema that is missing or was altered."""
    found = _objects(connection)
    faults = []
    for (kind, name), sql in expected_objects().items():
        actual = found.get((kind, name))
        if actual is None:
            faults.append(f"The {kind} {name} is missing.")
        elif actual != sql:
            faults.append(f"The {kind} {name} is not as the journal made it.")
    return faults


def check_schema(db: Database, where: str) -> None:
    """Refuse (JournalError) to work on a file whose guards were taken away."""
    faults = schema_faults(db.conn)
    if faults:
        raise JournalError(
            "the journal's guards are not in place: " + " ".join(faults),
            where,
            "run the journal's verify, keep the file as evidence, and restore a backup",
        )
