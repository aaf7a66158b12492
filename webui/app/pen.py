"""Writes events: under the origin's one lock, hashed, on the disk, then in the fold.

No event exists before its transaction is complete; killed before that, nothing happened and the draft is still there.
"""

from browser import window

from fieldcheck.engine import events

from . import store

platform = window.platform
ALPHABET = "0123456789abcdefghjkmnpqrstvwxyz"
after_writing = []
"""Functions called with each event that this phone has written."""


async def new_id():
    """128 random bits as 26 characters."""
    number = int(await platform.random(16), 16)
    out = []
    for _ in range(26):
        out.append(ALPHABET[number & 31])
        number = number >> 5
    return "".join(reversed(out))


async def digest_of(text):
    """The identity of an event."""
    return await platform.sha256("fieldcheck event 1\n" + text)


async def write(job, kind, data, draft="", sign=False):
    """Makes one event of this device; returns the folded Event.

    job: id or "" (workshop); draft: name of the draft that it settles; sign: it is a signing, and this device's
    signature over its exact text is kept beside it.
    """
    store.own["waiting"] += 1
    made = {}

    async def locked():
        made["row"] = await _append(job, kind, data, draft, sign)
        return ""

    try:
        await platform.withLock(locked)
    finally:
        store.own["waiting"] -= 1
    event = store.add(made["row"][0], made["row"][1])
    for act in after_writing:
        act(event)
    return event


async def _append(job, kind, data, draft, sign):
    device = store.own["device"]
    head = window.JSON.parse(await platform.head(device))
    if int(head.seq) > store.own["seq"] and store.own["seq"] > 0:
        await store.load_events()           # another page of this phone has written meanwhile
    now = platform.wall()
    prev = str(head.hash)
    text = events.make(device, int(head.seq) + 1, prev, store.utc_text(now), store.offset(now), store.own["person"],
                       job, store.seen_field(job), kind, data)
    digest = await digest_of(text)
    signature = await platform.sign("fieldcheck signing 1\n" + text) if sign else ""
    await platform.append(text, device, int(head.seq) + 1, prev, digest, job, draft, signature)
    return digest, text
