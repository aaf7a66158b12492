"""The journal's Merkle tree: heads, proofs and issued heads, checked with the engine's verification."""

from __future__ import annotations

from pathlib import Path

import pytest
from journal.devices_at_hand import NOW, Phone, verify

from fieldcheck.engine import chain
from fieldcheck.engine.errors import NotFound, ProofError
from fieldcheck.journal import tree
from fieldcheck.journal.hashing import run
from fieldcheck.journal.journal import Journal


@pytest.fixture
def journal(tmp_path: Path) -> Journal:
    return Journal.open(tmp_path, create=True, verify=verify)


def grown(journal: Journal, phone: Phone, count: int) -> None:
    first = len(phone.texts) + 1 if journal.last_seq(phone.device) else 1
    for n in range(count):
        phone.note(f"note {n}")
    journal.append_batch(*phone.batch(first), now=NOW)


def test_the_head_is_the_root_over_the_exact_texts_at_every_size(journal: Journal) -> None:
    assert journal.tree_head().root == run(chain.root([])) and journal.tree_head().size == 0
    phone = Phone()
    for count in (1, 3, 7, 12):
        grown(journal, phone, count)
        texts = [event.text for event in journal.events()]
        head = journal.tree_head()
        assert (head.size, head.root) == (len(texts), run(chain.root(texts)))
    for size in range(len(texts) + 1):
        assert journal.tree_head(size).root == run(chain.root(texts[:size]))
    with pytest.raises(NotFound):
        journal.tree_head(len(texts) + 1)


def test_a_tree_grown_in_chunks_is_the_same(journal: Journal, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(tree, "CHUNK", 3)
    grown(journal, Phone(), 20)
    assert journal.tree_head().root == run(chain.root([event.text for event in journal.events()]))


def test_proofs_show_inclusion_and_growth(journal: Journal) -> None:
    phone = Phone()
    grown(journal, phone, 8)
    early = journal.tree_head()
    grown(journal, phone, 9)
    late = journal.tree_head()
    for text, digest in zip(phone.texts, phone.hashes, strict=True):
        index, proof = journal.inclusion_proof(digest, late.size)
        run(chain.check_inclusion(run(chain.leaf_digest(text)), index, late.size, proof, late.root))
    proof = journal.consistency_proof(early.size, late.size)
    run(chain.check_consistency(early.size, early.root, late.size, late.root, proof))
    with pytest.raises(ProofError):
        journal.inclusion_proof(phone.hashes[-1], early.size)
    with pytest.raises(NotFound):
        journal.inclusion_proof("0" * 64, late.size)
    with pytest.raises(NotFound):
        journal.consistency_proof(early.size, late.size + 1)


def test_an_issued_head_is_noted_beside_the_database(journal: Journal) -> None:
    grown(journal, Phone(), 2)
    issued = journal.issue_tree_head(NOW)
    line = (journal.folder / "tree-heads.txt").read_text()
    assert line == f"3 {issued.root} 2026-12-01T10:00:00.000Z\n"
    assert tree.issued(journal.folder) == [issued]
