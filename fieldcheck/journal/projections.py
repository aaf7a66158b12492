"""Tables for searching and lists, derived from the events and rebuilt from them at any time.

Simple form: the last event in the journal's own order wins. The fold of the engine (causal order, conflicts)
decides what a record says; nothing here is ever put into one.
"""

from __future__ import annotations

import json
from collections.abc import Callable
from typing import Any

from sqlite_utils import Database

from fieldcheck.engine.errors import NotFound
from fieldcheck.engine.texts import read
from fieldcheck.journal.database import exclusive
from fieldcheck.journal.forms import Event
from fieldcheck.journal.journal import Journal

Row = dict[str, Any]    # column -> text, integer or None, as SQLite keeps them
NAME = "lists"
CHUNK = 1000

TABLES: dict[str, dict[str, type]] = {
    "workshop": {"id": str, "name": str, "address": str},
    "device": {"id": str, "name": str, "platform": str, "app_version": str, "enrolled": str},
    "person": {"id": str, "name": str, "competences": str, "active": int},
    "customer": {"id": str, "name": str, "address": str, "decimal_mark": str},
    "site": {"id": str, "customer": str, "name": str, "address": str},
    "equipment": {"id": str, "kind": str, "name": str, "site": str, "customer": str, "identities": str,
                  "joined_into": str},
    "meter": {"id": str, "tag": str, "name": str, "due": str},
    "lubricant": {"id": str, "name": str, "type": str},
    "job": {"id": str, "number": str, "customer": str, "site": str, "place": str, "reason": str, "due": str,
            "rulebook": str, "device": str, "person": str, "state": str, "opened": str, "signed": str},
    "item": {"id": str, "job": str, "equipment": str, "kind": str, "procedure": str, "depth": str, "outcome": str,
             "reason": str, "next_due": str},
    "record": {"id": str, "job": str, "sha256": str, "supersedes": str, "issued": str},
}


def rebuild(journal: Journal) -> int:
    """Drop the lists and make them again from every event; how many events were read."""
    db = journal.db
    with exclusive(db) as connection:
        for name in TABLES:
            connection.execute(f"drop table if exists list_{name}")
        connection.execute("delete from progress where name = ?", (NAME,))
        _make_tables(db)
    return refresh(journal)


def refresh(journal: Journal) -> int:
    """Bring the lists up to the last event; how many events were read. Cheap when there is nothing new."""
    db = journal.db
    count = 0
    while journal.events(_cursor(db), limit=1):
        with exclusive(db) as connection:
            _make_tables(db)
            stored = journal.events(_cursor(db), limit=CHUNK)
            for event in stored:
                _apply(db, read(event.text))
            if stored:
                connection.execute(
                    "insert into progress (name, cursor) values (?, ?) "
                    "on conflict (name) do update set cursor = excluded.cursor",
                    (NAME, stored[-1].cursor),
                )
            count += len(stored)
    return count


def rows(journal: Journal, name: str) -> list[Row]:
    """All rows of one list, brought up to date; `data` is the last event's data as an object."""
    if name not in TABLES:
        raise NotFound(f'there is no list "{name}"', "", f"one of {', '.join(TABLES)}")
    refresh(journal)
    if not journal.db[f"list_{name}"].exists():
        return []
    found = [dict(row) for row in journal.db.query(f"select * from list_{name} order by rowid")]
    for row in found:
        row["data"] = json.loads(row["data"])
    return found


def _cursor(db: Database) -> int:
    row = db.conn.execute("select cursor from progress where name = ?", (NAME,)).fetchone()
    return 0 if row is None else int(row[0])


def _make_tables(db: Database) -> None:
    for name, columns in TABLES.items():
        db.table(f"list_{name}").create({**columns, "data": str}, pk="id", strict=True, if_not_exists=True)


def _put(db: Database, name: str, id: str, values: Row, data: Row | None = None) -> None:
    """Write what is known of one thing and leave the other columns as they are."""
    known = {column: _plain(values[column]) for column in TABLES[name] if values.get(column) is not None}
    known["id"] = id
    if data is not None:
        known["data"] = json.dumps(data, ensure_ascii=False)
    names = ", ".join(known)
    places = ", ".join("?" for _ in known)
    changes = ", ".join(f"{column} = excluded.{column}" for column in known)
    db.conn.execute(
        f"insert into list_{name} ({names}) values ({places}) on conflict (id) do update set {changes}",
        tuple(known.values()),
    )


def _plain(value: object) -> object:
    """What a column can hold: lists and objects as JSON."""
    return json.dumps(value, ensure_ascii=False) if isinstance(value, (list, dict)) else value


def _apply(db: Database, event: Event) -> None:
    type_, data = event["type"], event["data"]
    kind, _, what = type_.partition(".")
    if what == "entered" and kind in TABLES and isinstance(data.get(kind), str):
        _put(db, kind, data[kind], data, data)
    elif type_ in HANDLERS:
        HANDLERS[type_](db, event, data)


def _named(db: Database, event: Event, data: Row) -> None:
    _put(db, "workshop", "workshop", data, data)


def _enrolled(db: Database, event: Event, data: Row) -> None:
    _put(db, "device", event["device"], {**data, "enrolled": event["at"]}, data)


def _joined(db: Database, event: Event, data: Row) -> None:
    _put(db, "equipment", data["other"], {"joined_into": data["keep"]}, None)


def _opened(db: Database, event: Event, data: Row) -> None:
    _put(db, "job", event["job"], {**data, "state": "open", "opened": event["at"]}, data)
    for item in data.get("items", []):
        _put(db, "item", item["item"], {**item, "job": event["job"]}, item)


def _handed(db: Database, event: Event, data: Row) -> None:
    _put(db, "job", event["job"], {"device": data.get("device"), "person": data.get("person")})


def _item_added(db: Database, event: Event, data: Row) -> None:
    _put(db, "item", data["item"], {**data, "job": event["job"]}, data)


def _outcome(db: Database, event: Event, data: Row) -> None:
    _put(db, "item", data["item"], {**data, "job": event["job"]})


def _signed(db: Database, event: Event, data: Row) -> None:
    _put(db, "job", event["job"], {"state": "signed", "signed": event["at"]})


def _issued(db: Database, event: Event, data: Row) -> None:
    _put(db, "record", data["number"], {**data, "job": event["job"], "issued": event["at"]}, data)
    _put(db, "job", event["job"], {"state": "recorded"})


HANDLERS: dict[str, Callable[[Database, Event, Row], None]] = {
    "workshop.named": _named,
    "device.enrolled": _enrolled,
    "equipment.joined": _joined,
    "job.opened": _opened,
    "job.handed": _handed,
    "item.added": _item_added,
    "outcome.given": _outcome,
    "job.signed": _signed,
    "record.issued": _issued,
}
