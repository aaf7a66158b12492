"""What a record proves by its attachment: hashes, signatures and Merkle proofs; how they are written and read.

Written form: every tree node stands once in `nodes`; a proof is a list of places in it. Trees: RFC 6962, section 2.1;
checking of proofs: RFC 9162, 2.1.3.2 and 2.1.4.2 (engine.chain).
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from fieldcheck.engine import chain
from fieldcheck.engine.errors import ProofError
from fieldcheck.journal.hashing import run
from fieldcheck.journal.journal import Journal

Data = dict[str, Any]  # JSON of many kinds


class Nodes:
    """Hashes by place, each kept once."""

    def __init__(self) -> None:
        self.hashes: list[str] = []
        self._places: dict[str, int] = {}

    def places(self, proof: Iterable[str]) -> list[int]:
        """The places of a proof's hashes."""
        for one in proof:
            if one not in self._places:
                self._places[one] = len(self.hashes)
                self.hashes.append(one)
        return [self._places[one] for one in proof]


def tree_proofs(journal: Journal, size: int, root: str, hashes: Sequence[str], earlier: Sequence[Data]) -> Data:
    """{"size", "root", "nodes", "inclusion": {event hash: {"index", "path"}}, "consistency": [...]}.

    hashes: of the events that the record carries, all among the journal's first `size`. earlier: [{"number", "size",
    "root"}] of the tree heads issued to this customer before.
    """
    nodes = Nodes()
    inclusion: Data = {}
    for digest in hashes:
        index, path = journal.inclusion_proof(digest, size)
        inclusion[digest] = {"index": index, "path": nodes.places(path)}
    consistency = [
        {**one, "path": nodes.places(journal.consistency_proof(one["size"], size))} for one in earlier
    ]
    return {"size": size, "root": root, "nodes": nodes.hashes, "inclusion": inclusion, "consistency": consistency}


def check_tree(tree: Data, texts: Mapping[str, str]) -> None:
    """Every event stands in the tree, and every earlier tree only grew into it. Raises ProofError naming which not.

    texts: event hash -> exact text.
    """
    nodes = tree["nodes"]
    for digest, text in texts.items():
        proof = tree["inclusion"].get(digest)
        if proof is None:
            raise ProofError("it has no proof that it stands in the journal", digest)
        path = [nodes[place] for place in proof["path"]]
        try:
            run(chain.check_inclusion(run(chain.leaf_digest(text)), proof["index"], tree["size"], path, tree["root"]))
        except ProofError as error:
            raise ProofError(error.what, digest) from error
    for one in tree["consistency"]:
        path = [nodes[place] for place in one["path"]]
        try:
            run(chain.check_consistency(one["size"], one["root"], tree["size"], tree["root"], path))
        except ProofError as error:
            raise ProofError(error.what, one["number"]) from error


def root_signed(signing: Data, events: Sequence[tuple[Data, str]]) -> str:
    """The RFC 6962 root over those events of a job that a signing covers.

    signing: the event object; its `heads` name each device's last sequence, its own among them (else all that the
    signing device wrote before). events: (object, exact text) of the job's events.
    """
    heads = signing["data"]["heads"]
    own = heads.get(signing["device"], signing["seq"] - 1)
    covered = []
    for event, text in events:
        last = own if event["device"] == signing["device"] else heads.get(event["device"], 0)
        if event["seq"] <= last:
            covered.append((event, text))
    return str(run(chain.root(chain.job_order(covered))))
