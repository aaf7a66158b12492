"""What is hashed and signed, in which order, and what a proof must show: the same on the desk and on the phone.

The engine cannot hash. Everything here that needs a digest is a generator: it yields a request and is sent the
SHA-256 of it as 64 lower-case hexadecimal digits. A request is `("text", text)`, the UTF-8 bytes of a text, or
`("hex", digits)`, the bytes that pairs of hexadecimal digits name. The desk answers with hashlib
(fieldcheck.journal.hashing.run), the phone with WebCrypto. What a generator returns is its result.

Merkle trees follow RFC 6962, section 2.1, and the verification of proofs RFC 9162, sections 2.1.3.2 and 2.1.4.2.
"""

from fieldcheck.engine.errors import EventError, ProofError
from fieldcheck.engine.texts import read

EVENT_PREFIX = "fieldcheck event 1\n"
HEAD_PREFIX = "fieldcheck head 1\n"
SIGNING_PREFIX = "fieldcheck signing 1\n"

FIELDS = ("v", "device", "seq", "prev", "at", "offset", "person", "job", "seen", "type", "data")
ALPHABET = "0123456789abcdefghjkmnpqrstvwxyz"
HEX = "0123456789abcdef"
TIME_FORM = "0000-00-00T00:00:00.000Z"
OFFSET_LIMIT = 1080     # minutes: no time zone is further than 18 hours from UTC


# ---- what is hashed and signed

def event_digest(text):
    """Generator: the identity of an event, the SHA-256 of "fieldcheck event 1\\n" and its exact text."""
    digest = yield ("text", EVENT_PREFIX + text)
    return digest


def head_message(device, seq, digest):
    """The text that a device signs for the head of its chain: its last sequence and that event's hash."""
    return HEAD_PREFIX + device + "\n" + str(seq) + "\n" + digest


def signing_message(text):
    """The text that a device signs for a signing event: a prefix and the event's exact text."""
    return SIGNING_PREFIX + text


# ---- the form of one event

def is_id(text):
    """26 characters of the house's base 32: 128 random bits."""
    return isinstance(text, str) and len(text) == 26 and text.strip(ALPHABET) == ""


def is_digest(text):
    """64 lower-case hexadecimal digits."""
    return isinstance(text, str) and len(text) == 64 and text.strip(HEX) == ""


def read_event(text):
    """The event that a text holds, as an object whose eleven fields stand in order and have the right form.

    Raises EventError naming the field. What stands in `data` is judged by the fold, not here.
    """
    return checked(read(text))


def checked(event):
    """What was read from an event's text, once its fields are seen to be right; raises EventError as read_event."""
    if not isinstance(event, dict) or tuple(event.keys()) != FIELDS:
        raise EventError(
            "an event has the fields " + ", ".join(FIELDS) + ", in this order", "", "use the writer of the house"
        )
    _need(event["v"] is not True and event["v"] == 1, "v", "is not 1, the only format of events")
    _need(is_id(event["device"]), "device", "is not an identity of 26 characters")
    seq = event["seq"]
    _need(_is_integer(seq) and seq >= 1, "seq", "is not an integer from 1 up")
    first = seq == 1
    _need(event["prev"] == "" if first else is_digest(event["prev"]), "prev",
          "is not empty in the first event" if first else "is not the hash of an event")
    _need(_is_time(event["at"]), "at", "is not a time like 2026-12-01T10:00:00.000Z")
    offset = event["offset"]
    _need(_is_integer(offset) and -OFFSET_LIMIT <= offset <= OFFSET_LIMIT, "offset", "is not a number of minutes")
    _need(event["person"] == "" or is_id(event["person"]), "person", "is not an identity")
    _need(event["job"] == "" or is_id(event["job"]), "job", "is not an identity")
    _need(_is_seen(event["seen"], event["device"]), "seen", "does not give the last sequences of other devices")
    _need(isinstance(event["type"], str) and event["type"] != "", "type", "is not a text")
    _need(isinstance(event["data"], dict), "data", "is not an object")
    return event


def _need(right, field, fault):
    if not right:
        raise EventError('the field "' + field + '" ' + fault, field)


def _is_integer(value):
    return isinstance(value, int) and value is not True and value is not False


def _is_time(text):
    if not isinstance(text, str) or len(text) != len(TIME_FORM):
        return False
    for digit in "123456789":           # a dozen slices would cost the phone more than reading the whole event
        text = text.replace(digit, "0")
    return text == TIME_FORM


def _is_seen(seen, device):
    if not isinstance(seen, dict) or tuple(seen.keys()) != ("job", "workshop"):
        return False
    for stream in ("job", "workshop"):
        if not isinstance(seen[stream], dict):
            return False
        for other in seen[stream]:
            if not is_id(other) or other == device or not _is_integer(seen[stream][other]) or seen[stream][other] < 1:
                return False
    return True


# ---- the chain of one device

def check_device_chain(texts, seq=0, prev="", device=""):
    """Generator: follow one device's events, one after the other, from what is known of it.

    texts: exact texts in order. seq, prev, device: last sequence, its hash and the device already known; without
    them the chain starts at its first event. Returns [(hash, event object), ...].
    Raises EventError at the first event that is malformed, of another device, or does not follow the one before.
    """
    links = []
    for text in texts:
        event = read_event(text)
        where = "event " + str(event["seq"]) + " of device " + event["device"]
        if device == "":
            device = event["device"]
        if event["device"] != device:
            raise EventError("it is of another device than " + device, where)
        if event["seq"] != seq + 1:
            raise EventError("event " + str(seq + 1) + " was expected here", where)
        if event["prev"] != prev:
            raise EventError("it does not follow the event before it", where)
        prev = yield ("text", EVENT_PREFIX + text)
        seq = event["seq"]
        links.append((prev, event))
    return links


# ---- Merkle trees

def leaf_digest(text):
    """Generator: hash of one leaf, SHA-256(00 || text bytes)."""
    digest = yield ("text", "\x00" + text)
    return digest


def node_digest(left, right):
    """Generator: hash of an inner node, SHA-256(01 || left || right)."""
    digest = yield ("hex", "01" + left + right)
    return digest


def root(leaf_texts):
    """Generator: the RFC 6962 root over leaves in the order given; of none, the hash of nothing."""
    peaks = [(0, "")]                   # (number of leaves, root) of full subtrees, largest first, behind a stop
    for text in leaf_texts:
        digest = yield ("text", "\x00" + text)
        yield from _grow(peaks, digest)
    result = yield from root_of_peaks([digest for leaves, digest in peaks[1:]])
    return result


def _grow(peaks, digest):
    leaves = 1
    while peaks[-1][0] == leaves:
        left = peaks.pop()
        digest = yield ("hex", "01" + left[1] + digest)
        leaves = leaves + leaves
    peaks.append((leaves, digest))


def root_of_peaks(digests):
    """Generator: the root of a tree from its full subtrees, largest first."""
    if not digests:
        digest = yield ("text", "")
        return digest
    result = digests[-1]
    for digest in reversed(digests[:-1]):
        result = yield ("hex", "01" + digest + result)
    return result


def job_order(events):
    """The events of a job as their texts are put under a signature: sorted by device and sequence.

    events: [(event object, text), ...]. Returns the texts.
    """
    keyed = [(event["device"], event["seq"], text) for event, text in events]
    keyed.sort(key=_device_and_seq)
    return [text for device, seq, text in keyed]


def _device_and_seq(keyed):
    return (keyed[0], keyed[1])


def check_inclusion(leaf, index, size, proof, expected):
    """Generator: does the leaf with this hash stand at `index` (from 0) of the tree with `size` leaves?

    proof: hashes from the leaf up. expected: root of the tree. Returns None; raises ProofError (RFC 9162, 2.1.3.2).
    """
    if index < 0 or index >= size:
        raise ProofError("there is no leaf " + str(index) + " in a tree of " + str(size))
    node, last = index, size - 1
    digest = leaf
    for sibling in proof:
        if last == 0:
            raise ProofError("the inclusion proof is too long")
        if node & 1 == 1 or node == last:
            digest = yield ("hex", "01" + sibling + digest)
            while node & 1 == 0 and node != 0:
                node, last = node >> 1, last >> 1
        else:
            digest = yield ("hex", "01" + digest + sibling)
        node, last = node >> 1, last >> 1
    if last != 0:
        raise ProofError("the inclusion proof is too short")
    if digest != expected:
        raise ProofError("the inclusion proof leads to another root")


def check_consistency(first, first_root, second, second_root, proof):
    """Generator: did the tree with `first` leaves only grow into the one with `second`?

    proof: hashes as RFC 6962, 2.1.2, orders them. Returns None; raises ProofError (RFC 9162, 2.1.4.2).
    """
    if first < 0 or first > second:
        raise ProofError("a tree of " + str(first) + " leaves cannot grow into one of " + str(second))
    if first == second or first == 0:
        if proof or (first == second and first_root != second_root):
            raise ProofError("the consistency proof does not fit two trees of equal or no size")
        return
    path = list(proof)
    if first & (first - 1) == 0:        # a power of two: its root is a node of the larger tree
        path = [first_root] + path
    if not path:
        raise ProofError("the consistency proof is too short")
    node, last = first - 1, second - 1
    while node & 1 == 1:
        node, last = node >> 1, last >> 1
    old = new = path[0]
    for sibling in path[1:]:
        if last == 0:
            raise ProofError("the consistency proof is too long")
        if node & 1 == 1 or node == last:
            old = yield ("hex", "01" + sibling + old)
            new = yield ("hex", "01" + sibling + new)
            while node & 1 == 0 and node != 0:
                node, last = node >> 1, last >> 1
        else:
            new = yield ("hex", "01" + new + sibling)
        node, last = node >> 1, last >> 1
    if last != 0:
        raise ProofError("the consistency proof is too short")
    if old != first_root:
        raise ProofError("the consistency proof does not start from the earlier root")
    if new != second_root:
        raise ProofError("the consistency proof does not lead to the later root")
