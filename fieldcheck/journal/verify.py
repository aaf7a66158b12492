"""Does the journal still hold what was accepted? Every finding is one plain sentence; none means it does."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from pathlib import Path
from urllib.parse import quote

from fieldcheck.engine.chain import event_digest, head_message, read_event, signing_message
from fieldcheck.engine.errors import EventError, FieldcheckError
from fieldcheck.journal import blobs, merkle, tree
from fieldcheck.journal.batches import Verifier, public_key_of
from fieldcheck.journal.database import FILE, JournalError, expected_objects, schema_faults
from fieldcheck.journal.forms import Event, TreeHead
from fieldcheck.journal.hashing import run, sha256
from fieldcheck.keys.devices import verify as verify_signature

LISTED = 20         # the rest of one kind of finding is counted


@dataclass
class _Chain:
    """What the walk through the events knows of one device."""

    seq: int = 0
    hash: str = ""
    public_key: str = ""
    hashes: dict[int, str] = field(default_factory=dict)


def verify(folder: Path, known: Iterable[TreeHead] = (), check: Verifier | None = None) -> list[str]:
    """What is wrong with the journal in a folder, as sentences, worst first; an empty list when nothing is.

    Reads only, and opens journals that Journal.open refuses. known: tree heads from outside (records, other copies);
    those that the folder noted as issued are looked at anyway. check: verifies signatures. Costs one pass over all
    events. Refuses (JournalError) a folder without a journal.
    """
    path = folder / FILE
    if not path.is_file():
        raise JournalError("there is no journal here", str(folder), "name the workshop's folder")
    connection = sqlite3.connect(f"file:{quote(str(path))}?mode=ro", uri=True)
    try:
        faults = schema_faults(connection)
        missing = {name for kind, name in expected_objects() if kind == "table"} - _tables(connection)
        if missing:
            return faults
        return [*faults, *_contents(connection, folder, known, check or verify_signature)]
    except sqlite3.DatabaseError as error:
        return [f"The database file is damaged: {error}."]
    finally:
        connection.close()


def _contents(connection: sqlite3.Connection, folder: Path, known: Iterable[TreeHead], check: Verifier) -> list[str]:
    chains: dict[str, _Chain] = {}
    leaves: list[str] = []
    found = _short(list(_events(connection, chains, leaves)))
    found += _short(list(_end(connection)))
    found += _short(list(_heads(connection, chains, check)))
    found += _short(list(_signatures(connection, chains, check)))
    found += _short(list(_tree(connection, leaves)))
    found += _short(list(_issued(folder, known, leaves)))
    found += _short(list(_parts(connection)))
    found += _short(list(_blobs(connection, folder)))
    return found


def _short(sentences: list[str]) -> list[str]:
    if len(sentences) <= LISTED:
        return sentences
    return [*sentences[:LISTED], f"{len(sentences) - LISTED} more of this kind follow."]


def _tables(connection: sqlite3.Connection) -> set[str]:
    return {name for (name,) in connection.execute("select name from sqlite_master where type = 'table'")}


def _events(connection: sqlite3.Connection, chains: dict[str, _Chain], leaves: list[str]) -> Iterator[str]:
    rows = connection.execute("select cursor, hash, device, seq, job, type, text from events order by cursor")
    expected = 1
    for cursor, stored, device, seq, job, type, text in rows:
        if cursor != expected:
            last = cursor - 1
            yield (f"Event {expected} of the journal is missing." if last == expected
                   else f"Events {expected} to {last} of the journal are missing.")
        expected = cursor + 1
        leaves.append(merkle.leaf_hash(text))
        where = f"Event {cursor} of the journal (event {seq} of device {device})"
        digest = run(event_digest(text))
        if digest != stored:
            yield f"{where} was altered: its text no longer has the hash it was stored under."
        try:
            event = read_event(text)
        except EventError as error:
            yield f"{where} cannot be read: {error.what}."
            continue
        if (event["device"], event["seq"], event["job"], event["type"]) != (device, seq, job, type):
            yield f"{where} is filed under another device, sequence, job or type than its text says."
        yield from _link(chains.setdefault(device, _Chain()), event, digest, where)


def _link(chain: _Chain, event: Event, digest: str, where: str) -> Iterator[str]:
    if event["seq"] != chain.seq + 1:
        yield f"{where} comes where event {chain.seq + 1} of that device is expected."
    elif event["prev"] != chain.hash:
        yield f"{where} does not follow the event before it."
    if event["seq"] == 1:
        try:
            chain.public_key = public_key_of(event)
        except FieldcheckError:
            yield f"{where} does not enrol its device."
    chain.seq, chain.hash = event["seq"], digest
    chain.hashes[chain.seq] = digest


def _end(connection: sqlite3.Connection) -> Iterator[str]:
    (last,) = connection.execute("select coalesce(max(cursor), 0) from events").fetchone()
    row = connection.execute("select seq from sqlite_sequence where name = 'events'").fetchone()
    given = 0 if row is None else int(row[0])
    if given > last:
        yield f"The journal ends at event {last}, but {given} were stored: its end was cut off."


def _heads(connection: sqlite3.Connection, chains: dict[str, _Chain], check: Verifier) -> Iterator[str]:
    newest: dict[str, int] = {}
    for device, seq, digest, signature in connection.execute(
        "select device, seq, hash, signature from heads order by device, seq"
    ):
        newest[device] = seq
        chain = chains.get(device, _Chain())
        if not check(chain.public_key, head_message(device, seq, digest).encode(), signature):
            yield f"The signature of device {device} over its head at event {seq} is not its own."
        held = chain.hashes.get(seq)
        if held is None:
            yield f"Device {device} signed its chain up to event {seq}, which is not here: its end was cut off."
        elif held != digest:
            yield f"Device {device} signed another event {seq} than the one that is here."
    for device, chain in chains.items():
        if chain.seq > newest.get(device, 0):
            yield f"Nothing that device {device} signed covers its events after {newest.get(device, 0)}."


def _signatures(connection: sqlite3.Connection, chains: dict[str, _Chain], check: Verifier) -> Iterator[str]:
    rows = connection.execute(
        "select e.device, e.seq, e.text, s.signature from events e left join signatures s on s.event = e.hash "
        "where e.type = 'job.signed' order by e.cursor"
    )
    for device, seq, text, signature in rows:
        where = f"The signing in event {seq} of device {device}"
        if signature is None:
            yield f"{where} has lost its signature."
        elif not check(chains.get(device, _Chain()).public_key, signing_message(text).encode(), signature):
            yield f"{where} carries a signature that is not over its text."


def _tree(connection: sqlite3.Connection, leaves: list[str]) -> Iterator[str]:
    stored = {(level, position): digest for level, position, digest in connection.execute("select * from tree")}
    size = sum(1 for level, _ in stored if level == 0)
    fresh = _nodes(leaves[:size])
    wrong = sum(1 for place, digest in stored.items() if fresh.get(place) != digest) + len(fresh.keys() - stored.keys())
    if wrong:
        nodes = "1 node" if wrong == 1 else f"{wrong} nodes"
        yield f"The stored Merkle tree differs from the events in {nodes}."


def _nodes(leaves: list[str]) -> dict[tuple[int, int], str]:
    nodes: dict[tuple[int, int], str] = {}
    for level, position, digest in merkle.new_nodes(0, leaves, lambda level, position: nodes[level, position]):
        nodes[level, position] = digest
    return nodes


def _issued(folder: Path, known: Iterable[TreeHead], leaves: list[str]) -> Iterator[str]:
    heads = list(known)
    try:
        heads += tree.issued(folder)
    except FieldcheckError as error:
        yield f"The list of issued tree heads cannot be read: {error.where}: {error.what}."
    nodes = _nodes(leaves) if heads else {}
    for head in dict.fromkeys(heads):
        if head.size > len(leaves):
            yield (f"A tree head over {head.size} events was issued, but only {len(leaves)} are here: "
                   "the journal's end was cut off.")
        elif merkle.root(0, head.size, lambda level, position: nodes[level, position]) != head.root:
            yield f"The first {head.size} events are not those of the tree head that was issued over them."


def _parts(connection: sqlite3.Connection) -> Iterator[str]:
    for digest, text in connection.execute("select sha256, text from parts order by sha256"):
        if sha256(text.encode()) != digest:
            yield f"The rulebook part {digest} was altered."


def _blobs(connection: sqlite3.Connection, folder: Path) -> Iterator[str]:
    for digest, size in connection.execute("select sha256, size from blobs order by sha256"):
        path = blobs.path_of(folder, digest)
        if not path.is_file():
            yield f"The blob {digest} of {size} bytes is missing."
        elif sha256(path.read_bytes()) != digest:
            yield f"The blob {digest} was altered."
