"""Every attack on the journal is found, and told in the sentences that the attack expects."""

from __future__ import annotations

import hashlib
from collections.abc import Callable
from pathlib import Path

import pytest
from journal.devices_at_hand import JOB, NOW, Phone, verify
from tamper.attacks import ATTACKS, Scene, truncated_tail_without_a_trace_in_the_file

from fieldcheck.journal.database import FILE
from fieldcheck.journal.forms import TreeHead
from fieldcheck.journal.journal import Journal
from fieldcheck.journal.verify import verify as verify_journal


@pytest.fixture
def scene(tmp_path: Path) -> Scene:
    journal = Journal.open(tmp_path / "shop", create=True, verify=verify)
    phone, other = Phone(), Phone()
    for n in range(2):
        phone.note(f"note {n}")
        other.note(f"note {n}")
    phone.write("job.signed", {"meaning": "performed"}, job=JOB)
    phone.note("note 3")
    phone.note("note 4")
    journal.append_batch(*phone.batch(), now=NOW)
    journal.append_batch(*other.batch(), now=NOW)
    blob = hashlib.sha256(b"photograph").hexdigest()
    journal.put_blob(blob, b"photograph", NOW)
    part = journal.put_part('{"limit":"1"}')
    journal.issue_tree_head(NOW)
    journal.close()
    return Scene(journal.folder, phone, other, blob, part)


def test_an_honest_journal_has_no_findings(scene: Scene) -> None:
    assert verify_journal(scene.folder, check=verify) == []


def test_taking_the_guards_away_and_putting_them_back_alone_changes_nothing(scene: Scene) -> None:
    with scene.unguarded():
        pass
    assert verify_journal(scene.folder, check=verify) == []


@pytest.mark.parametrize("attack", ATTACKS, ids=lambda attack: attack.__name__)
def test_an_attack_is_found(scene: Scene, attack: Callable[[Scene], list[str]]) -> None:
    expected = attack(scene)
    assert verify_journal(scene.folder, check=verify) == expected


def test_a_head_kept_elsewhere_finds_what_nothing_in_the_folder_shows(scene: Scene) -> None:
    journal = Journal.open(scene.folder, verify=verify)
    kept = journal.tree_head()
    journal.close()
    truncated_tail_without_a_trace_in_the_file(scene)
    (scene.folder / "tree-heads.txt").unlink()
    assert verify_journal(scene.folder, check=verify) == []
    sentence = "A tree head over 9 events was issued, but only 6 are here: the journal's end was cut off."
    assert verify_journal(scene.folder, [kept], check=verify) == [sentence]
    sentence = "The first 6 events are not those of the tree head that was issued over them."
    assert verify_journal(scene.folder, [TreeHead(6, "0" * 64)], check=verify) == [sentence]


def test_a_damaged_list_of_issued_heads_is_told(scene: Scene) -> None:
    with open(scene.folder / "tree-heads.txt", "a") as file:
        file.write("nine\n")
    sentence = ("The list of issued tree heads cannot be read: tree-heads.txt:2: "
                "the line is not a size, a root and a time.")
    assert verify_journal(scene.folder, check=verify) == [sentence]


def test_a_file_that_is_no_database_is_told(scene: Scene) -> None:
    for file in scene.folder.glob(FILE + "*"):
        file.unlink()
    (scene.folder / FILE).write_bytes(b"not a database, but long enough to be looked at" * 100)
    assert verify_journal(scene.folder, check=verify) == ["The database file is damaged: file is not a database."]
