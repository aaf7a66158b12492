-- The journal, first form. These statements are its documentation, and what opening compares the file with.
-- Nothing of what was accepted is ever updated or deleted: the triggers say so, `verify` proves it.

-- Every event, in the order in which this journal accepted it; `text` is what its device wrote, to the byte.
-- The other columns repeat what stands in the text, for searching.
create table events (
    cursor integer primary key autoincrement,
    hash text not null unique,
    device text not null,
    seq integer not null,
    job text not null,
    type text not null,
    received text not null,
    text text not null,
    unique (device, seq)
) strict;

create index events_of_job on events (job, device, seq);

-- Every head that a device signed: one for each batch.
create table heads (
    device text not null,
    seq integer not null,
    hash text not null,
    signature text not null,
    primary key (device, seq)
) strict, without rowid;

-- Signatures over the exact text of signing events.
create table signatures (
    event text primary key,
    signature text not null
) strict, without rowid;

-- Photographs and drawn signatures; the bytes lie in blobs/ab/<sha256>.
create table blobs (
    sha256 text primary key,
    size integer not null,
    received text not null
) strict, without rowid;

-- Every rulebook index and part that a job ever used.
create table parts (
    sha256 text primary key,
    text text not null
) strict, without rowid;

-- A restore from backup begins a new epoch: the cursors of the one before mean nothing in it.
create table epochs (
    number integer primary key,
    epoch text not null unique,
    since text not null
) strict;

-- The desk's own devices; the last one writes.
create table own_devices (
    number integer primary key,
    device text not null unique
) strict;

-- Full subtrees of the Merkle tree over the texts in cursor order: derived, filled when a root or proof is asked for.
create table tree (
    level integer not null,
    position integer not null,
    hash text not null,
    primary key (level, position)
) strict, without rowid;

-- How far each projection has followed the events.
create table progress (
    name text primary key,
    cursor integer not null
) strict, without rowid;

create trigger events_are_never_changed before update on events
begin select raise(abort, 'events are never changed: append a correction'); end;

create trigger events_are_never_deleted before delete on events
begin select raise(abort, 'events are never deleted: append a correction'); end;

create trigger heads_are_never_changed before update on heads
begin select raise(abort, 'signed heads are never changed'); end;

create trigger heads_are_never_deleted before delete on heads
begin select raise(abort, 'signed heads are never deleted'); end;

create trigger signatures_are_never_changed before update on signatures
begin select raise(abort, 'signatures are never changed'); end;

create trigger signatures_are_never_deleted before delete on signatures
begin select raise(abort, 'signatures are never deleted'); end;

create trigger blobs_are_never_changed before update on blobs
begin select raise(abort, 'blobs are never changed'); end;

create trigger blobs_are_never_deleted before delete on blobs
begin select raise(abort, 'blobs are never deleted'); end;

create trigger parts_are_never_changed before update on parts
begin select raise(abort, 'rulebook parts are never changed'); end;

create trigger parts_are_never_deleted before delete on parts
begin select raise(abort, 'rulebook parts are never deleted'); end;

create trigger epochs_are_never_changed before update on epochs
begin select raise(abort, 'epochs are never changed'); end;

create trigger epochs_are_never_deleted before delete on epochs
begin select raise(abort, 'epochs are never deleted'); end;

create trigger own_devices_are_never_changed before update on own_devices
begin select raise(abort, 'devices are never changed'); end;

create trigger own_devices_are_never_deleted before delete on own_devices
begin select raise(abort, 'devices are never deleted'); end;
