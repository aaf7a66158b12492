"""What every view shares: the journal, the rulebook, and the fold of all events, kept up to date."""

from __future__ import annotations

import logging
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from datetime import datetime
from pathlib import Path
from typing import Any, Protocol

from fieldcheck import __version__
from fieldcheck.engine import events, texts
from fieldcheck.engine.errors import EventError, NotFound
from fieldcheck.journal.database import FILE, JournalError
from fieldcheck.journal.journal import Journal
from fieldcheck.keys.devices import DeviceKey, load_device_key, make_device_key

DESK_KEY = Path("keys", "desk.pem")
READ_AT_ONCE = 2000


class Rulebook(Protocol):
    """What the desk needs of a compiled rulebook: texts only."""

    @property
    def index(self) -> str:
        """Its index, exact text."""

    @property
    def digest(self) -> str:
        """SHA-256 of the index."""

    @property
    def parts(self) -> dict[str, str]:
        """SHA-256 -> exact text of each procedure's part."""


def open_journal(data: Path) -> Journal:
    """The journal of a workshop's folder with the desk's own key; made, and the desk enrolled, when it is new."""
    journal = Journal.open(data, create=True, signer=_desk_key(data))
    try:
        journal.own_device()
    except JournalError:
        journal.enrol_own("Desk", "desk", __version__, datetime.now().astimezone())
    return journal


def _desk_key(data: Path) -> DeviceKey:
    path = data / DESK_KEY
    if path.exists():
        return load_device_key(path)
    if (data / FILE).exists():
        raise JournalError("the desk's key is missing", str(path), "restore it from the backup of this folder")
    data.mkdir(parents=True, exist_ok=True)
    return make_device_key(path)


class Workshop:
    """An open workshop.  One object serves all threads.

    index: the rulebook's index as an object; part(sha256) and procedure(id) give compiled parts, each read once.
    """

    def __init__(self, journal: Journal, rulebook: Rulebook) -> None:
        self.journal = journal
        self.rulebook = rulebook
        self.index: dict[str, Any] = texts.read(rulebook.index, None)
        for text in (rulebook.index, *rulebook.parts.values()):
            journal.put_part(text)
        self._lock = threading.RLock()
        self._state = events.State()
        self._cursor = 0
        self.unreadable: dict[str, str] = {}
        self._parts: dict[str, dict[str, Any]] = {}

    @contextmanager
    def reading(self) -> Iterator[Any]:
        """The State (engine.events) of all events so far; nobody changes it while the block runs."""
        with self._lock:
            self._catch_up()
            yield self._state

    def _catch_up(self) -> None:
        while True:
            stored = self.journal.events(self._cursor, limit=READ_AT_ONCE)
            for one in stored:
                self._take(one.hash, one.text)
                self._cursor = one.cursor
            if len(stored) < READ_AT_ONCE:
                return

    def _take(self, digest: str, text: str) -> None:
        """One event into the state; one that no fold can read is set aside, so that it cannot hold up the rest."""
        try:
            self._state.add(digest, text)
        except EventError as error:
            if digest not in self.unreadable:
                self.unreadable[digest] = str(error)
                logging.getLogger(__name__).warning("event set aside hash=%s", digest)

    def part(self, digest: str) -> dict[str, Any]:
        """A compiled part by its SHA-256, of this rulebook or of an earlier one."""
        known = self._parts.get(digest)
        if known is None:
            known = self._parts[digest] = texts.read(self.journal.part(digest), None)
        return known

    def procedure(self, procedure: str, rulebook: str = "") -> dict[str, Any]:
        """The compiled part of a procedure, in the rulebook with that digest (the present one when it is "")."""
        index = self.part(rulebook) if rulebook and rulebook != self.rulebook.digest else self.index
        for one in index["procedures"]:
            if one["id"] == procedure:
                return self.part(one["part"])
        raise NotFound(f'the rulebook has no procedure "{procedure}"', f"rulebook {rulebook or self.rulebook.digest}")

    def plates(self, kind: str) -> list[dict[str, Any]]:
        """The nameplate questions of a kind."""
        return list(self.index["kinds"].get(kind, {}).get("nameplate", ()))

    @property
    def functions(self) -> dict[str, str]:
        """Every function that a meter may be set to, with its quantity."""
        return dict(self.index["meter_functions"])

    @property
    def bases(self) -> list[tuple[str, str]]:
        """(id, words) of every base oil that the compatibility tables know."""
        return [(one["id"], one["label"]) for one in self.index["materials"]["bases"]]

    @property
    def cursor(self) -> int:
        """The journal's last cursor that the state holds."""
        return self._cursor
