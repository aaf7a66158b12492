"""The journal's Merkle tree: full subtrees kept in a table, roots and proofs made from them.

A node (level, position) covers the leaves [position * 2^level, (position + 1) * 2^level) and is kept once all of
them exist, so that a root or a proof costs a few look-ups however long the journal is (RFC 6962, section 2.1).
"""

from __future__ import annotations

from collections.abc import Callable, Iterable

from fieldcheck.engine.errors import ProofError
from fieldcheck.journal.hashing import digest_of

Look = Callable[[int, int], str]        # (level, position) -> hash of a full subtree
Node = tuple[int, int, str]


def leaf_hash(text: str) -> str:
    """Hash of an event's leaf: SHA-256(00 || text bytes)."""
    return digest_of(("text", "\x00" + text))


def node_hash(left: str, right: str) -> str:
    """Hash of an inner node: SHA-256(01 || left || right)."""
    return digest_of(("hex", "01" + left + right))


def new_nodes(size: int, leaves: Iterable[str], look: Look) -> Iterable[Node]:
    """The full subtrees that come about when leaf hashes are put behind the first `size` leaves."""
    fresh: dict[tuple[int, int], str] = {}
    for leaf in leaves:
        level, position, digest = 0, size, leaf
        yield level, position, digest
        while position & 1:
            left = fresh.pop((level, position - 1), None) or look(level, position - 1)
            digest = node_hash(left, digest)
            level, position = level + 1, position >> 1
            yield level, position, digest
        fresh[level, position] = digest         # the left half of a subtree that is not yet full
        size += 1


def root(start: int, end: int, look: Look) -> str:
    """Root of the leaves [start, end); of none, the hash of nothing."""
    count = end - start
    if count == 0:
        return digest_of(("text", ""))
    level = count.bit_length() - 1
    if count == 1 << level and start % count == 0:
        return look(level, start >> level)
    split = start + _split(count)
    return node_hash(root(start, split, look), root(split, end, look))


def _split(count: int) -> int:
    """The largest power of two smaller than count."""
    return 1 << ((count - 1).bit_length() - 1)


def inclusion(index: int, size: int, look: Look) -> list[str]:
    """Hashes that lead from leaf `index` (from 0) to the root of the first `size` leaves (RFC 6962, 2.1.1)."""
    if not 0 <= index < size:
        raise ProofError(f"there is no leaf {index} in a tree of {size}")
    return _path(index, 0, size, look)


def _path(index: int, start: int, end: int, look: Look) -> list[str]:
    if end - start == 1:
        return []
    split = start + _split(end - start)
    if index < split:
        return [*_path(index, start, split, look), root(split, end, look)]
    return [*_path(index, split, end, look), root(start, split, look)]


def consistency(first: int, second: int, look: Look) -> list[str]:
    """Hashes that show that the first `first` leaves are the beginning of `second` (RFC 6962, 2.1.2)."""
    if not 0 <= first <= second:
        raise ProofError(f"a tree of {first} leaves cannot grow into one of {second}")
    return [] if first in (0, second) else _growth(first, 0, second, True, look)


def _growth(first: int, start: int, end: int, whole: bool, look: Look) -> list[str]:
    if first == end:
        return [] if whole else [root(start, end, look)]
    split = start + _split(end - start)
    if first <= split:
        return [*_growth(first, start, split, whole, look), root(split, end, look)]
    return [*_growth(first, split, end, False, look), root(start, split, look)]
