"""Event form, chains and Merkle trees. Roots: RFC 6962/9162 reference leaves, checks 16.4."""

from __future__ import annotations

import hashlib
from typing import Any

import pytest

from fieldcheck.engine import chain
from fieldcheck.engine.errors import EventError, ProofError
from fieldcheck.engine.texts import read, write
from fieldcheck.journal import merkle
from fieldcheck.journal.hashing import digest_of, run

# checks 16.4 (READ [S72]): leaves in hexadecimal and the roots of the first n of them.
LEAVES = ["", "00", "10", "2021", "3031", "40414243", "5051525354555657", "606162636465666768696a6b6c6d6e6f"]
ROOTS = {
    0: "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855",
    1: "6e340b9cffb37a989ca544e6bb780a2c78901d3fb33738768511a30617afa01d",
    2: "fac54203e7cc696cf0dfcb42c92a1d9dbaf70ad9e621f4bd8d98662f00e3c125",
    3: "aeb6bcfe274b70a14fb067a5e5578264db0fa9b51af5e0ba159158f329e06e77",
    4: "d37ee418976dd95753c1c73862b9398fa2a2cf9b4ff0fdfe8b30cd95209614b7",
    5: "4e3bbb1f7b478dcfe71fb631631519a3bca12c9aefca1612bfce4c13a86264d4",
    6: "76e67dadbcdf1e10e1b74ddc608abd2f98dfb16fbce75277b5232a127f2087ef",
    8: "5dc9da79a70659a9ad559cb701ded9a2ab9d823aad2f4960cfe370eff4604328",
}
# All eight leaves are ASCII, so each is also the UTF-8 of a text.
LEAF_TEXTS = [bytes.fromhex(leaf).decode("ascii") for leaf in LEAVES]
DEVICE = "0123456789abcdefghjkmnpqrs"
OTHER = "zzzzzzzzzzzzzzzzzzzzzzzzzz"


@pytest.mark.parametrize("size", ROOTS)
def test_roots_are_those_of_the_published_reference_tree(size: int) -> None:
    assert run(chain.root(LEAF_TEXTS[:size])) == ROOTS[size]
    nodes = tree_of(LEAF_TEXTS)
    assert merkle.root(0, size, lambda level, position: nodes[level, position]) == ROOTS[size]


def tree_of(texts: list[str]) -> dict[tuple[int, int], str]:
    nodes: dict[tuple[int, int], str] = {}
    leaves = [run(chain.leaf_digest(text)) for text in texts]
    for level, position, digest in merkle.new_nodes(0, leaves, lambda level, position: nodes[level, position]):
        nodes[level, position] = digest
    return nodes


def plain_root(texts: list[str]) -> str:
    """RFC 6962, 2.1, as the page defines it, word for word."""
    if not texts:
        return hashlib.sha256(b"").hexdigest()
    if len(texts) == 1:
        return hashlib.sha256(b"\x00" + texts[0].encode()).hexdigest()
    k = 1
    while 2 * k < len(texts):
        k *= 2
    both = bytes.fromhex(plain_root(texts[:k]) + plain_root(texts[k:]))
    return hashlib.sha256(b"\x01" + both).hexdigest()


def test_every_proof_of_every_tree_up_to_33_leaves_is_accepted() -> None:
    texts = [f"event {n} Ω" for n in range(33)]
    nodes = tree_of(texts)

    def look(level: int, position: int) -> str:
        return nodes[level, position]

    roots = [plain_root(texts[:size]) for size in range(34)]
    for size in range(34):
        assert run(chain.root(texts[:size])) == roots[size] == merkle.root(0, size, look)
        for n in range(size):
            proof = merkle.inclusion(n, size, look)
            run(chain.check_inclusion(nodes[0, n], n, size, proof, roots[size]))
        for n in range(size + 1):
            run(chain.check_consistency(n, roots[n], size, roots[size], merkle.consistency(n, size, look)))


def test_every_altered_proof_is_refused() -> None:
    texts = [f"event {n}" for n in range(13)]
    nodes = tree_of(texts)

    def look(level: int, position: int) -> str:
        return nodes[level, position]

    whole, earlier = plain_root(texts), plain_root(texts[:6])
    wrong = digest_of(("text", "wrong"))
    path, growth = merkle.inclusion(4, 13, look), merkle.consistency(6, 13, look)
    assert len(path) == 4 and len(growth) >= 3
    for proof in altered(path, wrong):
        with pytest.raises(ProofError):
            run(chain.check_inclusion(nodes[0, 4], 4, 13, proof, whole))
    for index, size in ((5, 13), (4, 14), (13, 13), (-1, 13)):
        with pytest.raises(ProofError):
            run(chain.check_inclusion(nodes[0, 4], index, size, path, whole if size == 13 else wrong))
    for proof in altered(growth, wrong):
        with pytest.raises(ProofError):
            run(chain.check_consistency(6, earlier, 13, whole, proof))
    for first, old, second, new in ((6, wrong, 13, whole), (6, earlier, 13, wrong), (7, earlier, 13, whole),
                                    (14, earlier, 13, whole), (13, wrong, 13, whole)):
        with pytest.raises(ProofError):
            run(chain.check_consistency(first, old, second, new, growth if first in (6, 7) else []))


def altered(proof: list[str], wrong: str) -> list[list[str]]:
    changed = [[*proof[:n], wrong, *proof[n + 1:]] for n in range(len(proof))]
    return [*changed, proof[:-1], proof[1:], [*proof, wrong], list(reversed(proof)), []]


def event(**changes: Any) -> dict[str, Any]:
    whole = {"v": 1, "device": DEVICE, "seq": 1, "prev": "", "at": "2026-12-01T10:00:00.000Z", "offset": 60,
             "person": "", "job": "", "seen": {"job": {}, "workshop": {OTHER: 3}}, "type": "workshop.named",
             "data": {"name": "x"}}
    return {**whole, **changes}


def test_the_identity_of_an_event_is_the_digest_of_its_prefix_and_text() -> None:
    text = write(event())
    expected = hashlib.sha256(b"fieldcheck event 1\n" + text.encode()).hexdigest()
    assert run(chain.event_digest(text)) == expected
    assert chain.head_message(DEVICE, 1, expected) == f"fieldcheck head 1\n{DEVICE}\n1\n{expected}"
    assert chain.signing_message(text) == "fieldcheck signing 1\n" + text


@pytest.mark.parametrize(
    ("changes", "field"),
    [
        ({"v": 2}, "v"), ({"v": True}, "v"), ({"device": "short"}, "device"), ({"device": "I" * 26}, "device"),
        ({"seq": 0}, "seq"), ({"seq": "1"}, "seq"), ({"prev": "a" * 64}, "prev"), ({"seq": 2}, "prev"),
        ({"at": "2026-12-01 10:00:00.000Z"}, "at"), ({"at": "2026-12-01T10:00:00Z"}, "at"),
        ({"offset": 5000}, "offset"), ({"offset": True}, "offset"), ({"person": "Ann"}, "person"),
        ({"job": "7"}, "job"),
        ({"seen": {}}, "seen"), ({"seen": {"job": {}, "workshop": {DEVICE: 1}}}, "seen"),
        ({"seen": {"job": {OTHER: 0}, "workshop": {}}}, "seen"), ({"type": ""}, "type"), ({"data": []}, "data"),
    ],
)
def test_a_field_of_the_wrong_form_is_named(changes: dict[str, Any], field: str) -> None:
    with pytest.raises(EventError) as caught:
        chain.read_event(write(event(**changes)))
    assert caught.value.where == field


def test_fields_stand_in_one_order() -> None:
    whole = event()
    for wrong in (dict(reversed(whole.items())), {**whole, "more": 1}, []):
        with pytest.raises(EventError, match="in this order"):
            chain.read_event(write(wrong))


def texts_of(count: int) -> list[str]:
    texts: list[str] = []
    prev = ""
    for seq in range(1, count + 1):
        texts.append(write(event(seq=seq, prev=prev)))
        prev = run(chain.event_digest(texts[-1]))
    return texts


def test_a_chain_is_followed_from_its_start_or_from_what_is_known() -> None:
    texts = texts_of(5)
    links = run(chain.check_device_chain(texts))
    assert [link[1]["seq"] for link in links] == [1, 2, 3, 4, 5]
    assert links[4][0] == run(chain.event_digest(texts[4]))
    assert run(chain.check_device_chain(texts[3:], 3, links[2][0], DEVICE)) == links[3:]


@pytest.mark.parametrize(
    ("wreck", "what"),
    [
        (lambda texts: [texts[0], texts[2]], "event 2 was expected here"),
        (lambda texts: [texts[0], texts[2], texts[1]], "event 2 was expected here"),
        (lambda texts: texts[1:], "event 1 was expected here"),
        (lambda texts: [texts[0].replace("10:00", "10:01"), *texts[1:]], "it does not follow the event before it"),
        (lambda texts: [texts[0], texts[1].replace(DEVICE, "1" * 26)], "it is of another device than " + DEVICE),
    ],
)
def test_a_broken_chain_is_refused(wreck: Any, what: str) -> None:
    with pytest.raises(EventError) as caught:
        run(chain.check_device_chain(wreck(texts_of(3))))
    assert caught.value.what == what


def test_events_of_a_job_are_sorted_by_device_and_sequence() -> None:
    texts = [write(event(device=device, seq=seq, prev="" if seq == 1 else "a" * 64, seen={"job": {}, "workshop": {}}))
             for device, seq in ((OTHER, 2), (DEVICE, 10), (OTHER, 1), (DEVICE, 9))]
    ordered = chain.job_order([(read(text), text) for text in texts])
    assert ordered == [texts[3], texts[1], texts[2], texts[0]]
