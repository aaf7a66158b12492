"""Lists derived from the events, and that a rebuild gives the same ones."""

from __future__ import annotations

from pathlib import Path

import pytest
from journal.devices_at_hand import JOB, NOW, Key, verify

from fieldcheck.engine.errors import NotFound
from fieldcheck.journal import projections
from fieldcheck.journal.journal import Journal

EQUIPMENT, ITEM, PERSON = "e" * 26, "m" * 26, "p" * 26


@pytest.fixture
def journal(tmp_path: Path) -> Journal:
    journal = Journal.open(tmp_path, create=True, signer=Key(), verify=verify)
    journal.enrol_own("Desk", "test", "0", NOW)
    for type, data, job in (
        ("workshop.named", {"name": "Invented Works", "address": "1 Nowhere"}, ""),
        ("person.entered", {"person": PERSON, "name": "A. Nobody", "competences": ["contacts"], "active": True}, ""),
        ("equipment.entered", {"equipment": EQUIPMENT, "kind": "contact-set", "name": "First",
                               "identities": [{"scheme": "tag", "value": "7"}]}, ""),
        ("equipment.entered", {"equipment": EQUIPMENT, "kind": "contact-set", "name": "Renamed"}, ""),
        ("job.opened", {"number": "J-1", "place": "bench", "items": [
            {"item": ITEM, "equipment": EQUIPMENT, "kind": "contact-set", "procedure": "contacts", "depth": "full"}]},
         JOB),
        ("job.handed", {"device": "d" * 26, "person": PERSON}, JOB),
        ("outcome.given", {"item": ITEM, "outcome": "serviceable", "reason": ""}, JOB),
        ("job.signed", {"person": PERSON}, JOB),
        ("record.issued", {"number": "R-1", "sha256": "0" * 64}, JOB),
    ):
        journal.append_own(type, data, job, now=NOW)
    return journal


def test_the_last_entry_of_a_thing_wins(journal: Journal) -> None:
    (equipment,) = projections.rows(journal, "equipment")
    assert (equipment["id"], equipment["name"], equipment["data"]["name"]) == (EQUIPMENT, "Renamed", "Renamed")
    assert equipment["identities"] == '[{"scheme": "tag", "value": "7"}]'
    (person,) = projections.rows(journal, "person")
    assert (person["active"], person["data"]["competences"]) == (1, ["contacts"])


def test_a_job_is_followed_to_its_record(journal: Journal) -> None:
    (job,) = projections.rows(journal, "job")
    assert (job["number"], job["state"], job["person"], job["data"]["place"]) == ("J-1", "recorded", PERSON, "bench")
    (item,) = projections.rows(journal, "item")
    assert (item["job"], item["procedure"], item["outcome"]) == (JOB, "contacts", "serviceable")
    (record,) = projections.rows(journal, "record")
    assert (record["id"], record["job"]) == ("R-1", JOB)


def test_a_rebuild_gives_the_same_lists(journal: Journal) -> None:
    before = {name: projections.rows(journal, name) for name in projections.TABLES}
    assert sum(len(rows) for rows in before.values()) == 7
    journal.db.conn.execute("delete from list_equipment")
    assert projections.rebuild(journal) == 10
    assert {name: projections.rows(journal, name) for name in projections.TABLES} == before
    assert projections.refresh(journal) == 0


def test_an_unknown_list_is_refused(journal: Journal) -> None:
    with pytest.raises(NotFound, match='there is no list "events"'):
        projections.rows(journal, "events")
