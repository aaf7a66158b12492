"""Talks with the desk while the page is visible: enrols this phone, fetches what is new, hands over what is not yet.

Nothing here is in the way of the work: without the desk everything stays on the phone and says so in a quiet line.
"""

from browser import aio, window

from fieldcheck.engine import texts

from . import dom, pen, store

platform = window.platform
EVERY = 4000            # milliseconds between two rounds while the page is visible
BATCH = 100             # events a request
status = {"text": "", "busy": False, "refused": ""}
listeners = []
"""Called without arguments after events came from the desk."""
told = []
"""Called without arguments when the quiet line changes."""


async def ask(method, url, body=""):
    """(status, object) of one request; status 0 when nobody answers."""
    answer = window.JSON.parse(await platform.fetchJson(method, url, body, ""))
    code = int(answer.status)
    text = str(answer.text).strip()
    if code == 0 or not text.startswith("{"):
        return code, None
    return code, store.json(text)


def hand_over():
    """Starts a round soon: something was written."""
    dom.later(50, run_once)


def run_once(*_):
    """One round in the background; never two at once."""
    if not status["busy"]:
        status["busy"] = True
        aio.run(_round_and_rest())


async def _round_and_rest():
    try:
        await round_trip()
    finally:
        status["busy"] = False
    await tell()


def start():
    """Keeps going: a round now and one every few seconds while somebody looks."""
    def again(*_):
        if dom.visible():
            run_once()
        dom.later(EVERY, again)
    again()


async def tell():
    """Puts the quiet line into words."""
    left = len(window.JSON.parse(await platform.unsent()))
    if status["refused"]:
        words = "Not taken by the desk: " + status["refused"]
    elif left == 0:
        words = "Handed over"
    else:
        words = str(left) + " not yet handed over"
    if words != status["text"]:
        status["text"] = words
        for act in told:
            act()


async def round_trip():
    """Enrol where needed, send photographs, then the events that name them; pull, fetch rulebooks."""
    if not store.own["device"]:
        if not await enrol():
            return
    await send_blobs()
    if not await push():
        return
    fresh = await pull()
    await fetch_rulebooks()
    if fresh:
        for act in listeners:
            act()


async def enrol():
    """Makes this phone's key and its first event; False when no desk is there yet to take it."""
    code, _ = await ask("GET", "/api/rulebook")
    if code != 200:
        return False
    device = await pen.new_id()
    key = await platform.makeDevice(device)
    store.own["device"] = await platform.device()
    head = window.JSON.parse(await platform.head(store.own["device"]))
    if int(head.seq) == 0:
        await pen.write("", "device.enrolled", {
            "device": store.own["device"], "name": phone_name(), "public_key": key,
            "platform": str(window.navigator.userAgent), "app_version": str(window.fieldcheckChunks.build.version)})
    return True


def phone_name():
    """What this phone is called until the desk gives it a name."""
    return "Phone " + store.own["device"][:4]


async def signed_head(seq, digest):
    """This device's signature over the end of its chain."""
    message = "fieldcheck head 1\n" + store.own["device"] + "\n" + str(seq) + "\n" + digest
    return {"seq": seq, "hash": digest, "signature": await platform.sign(message)}


async def push():
    """Hands over this device's events in order; False when the desk cannot be reached or refuses."""
    unsent = window.JSON.parse(await platform.unsent())
    rows = [row for row in unsent if str(row.device) == store.own["device"]]    # no await inside: it would not wait
    place = 0
    while place < len(rows):
        batch = rows[place:place + BATCH]
        last = batch[-1]
        head = await signed_head(int(last.seq), str(last.hash))
        signatures = {}
        for row in batch:
            if row.signature:
                signatures[str(row.hash)] = str(row.signature)
        if int(batch[0].seq) == 1:
            code, answer = await ask("POST", "/api/enrol", texts_of({"text": str(batch[0].text), "head": await
                                                                     signed_head(1, str(batch[0].hash))}))
            if code not in (200, 201):
                return refused(code, answer)
        code, answer = await ask("POST", "/api/events", texts_of({
            "device": store.own["device"], "events": [str(row.text) for row in batch], "head": head,
            "signatures": signatures}))
        if code not in (200, 201):
            return refused(code, answer)
        await platform.markSent(list_text([str(row.hash) for row in batch]))
        place += len(batch)
    status["refused"] = ""
    return True


def texts_of(body):
    """A request's JSON text; it may be larger than one event."""
    out = []
    for name in body:
        value = body[name]
        if isinstance(value, list):
            shown = list_text(value)
        else:
            shown = texts.write(value)
        out.append(texts.write(name) + ":" + shown)
    return "{" + ",".join(out) + "}"


def list_text(values):
    """JSON text of a list of texts."""
    return "[" + ",".join([texts.write(one) for one in values]) + "]"


def refused(code, answer):
    """Notes why the desk took nothing; False."""
    if code != 0:
        error = (answer or {}).get("error") or {}
        status["refused"] = (error.get("what") if isinstance(error, dict) else "") or "answer " + str(code)
    return False


async def pull():
    """Fetches events that this phone lacks; True when there were any."""
    fresh = False
    mark = await store.recall("cursor") or {"epoch": "", "cursor": 0}
    while True:
        code, answer = await ask("GET", "/api/events?after=" + str(mark["cursor"]) + "&job=all")
        if code != 200 or answer is None:
            return fresh
        if mark["epoch"] not in ("", answer["epoch"]) and mark["cursor"] != 0:
            mark = {"epoch": answer["epoch"], "cursor": 0}      # restored from a backup: all again
            continue
        if answer["events"]:
            fresh = await take_in(answer["events"]) or fresh
        done = answer["cursor"] == mark["cursor"] or not answer["events"]
        mark = {"epoch": answer["epoch"], "cursor": answer["cursor"]}
        await store.remember("cursor", mark)
        if done:
            return fresh


async def take_in(rows):
    """Checks the hash of each event, keeps it, folds it."""
    kept = []
    for row in rows:
        digest = await pen.digest_of(row["text"])
        event = store.state.known.get(digest)
        if event is not None and event.device == store.own["device"]:
            continue
        fields = store.json(row["text"])
        kept.append({"device": fields["device"], "seq": fields["seq"], "job": fields["job"], "hash": digest,
                     "text": row["text"]})
    if not kept:
        return False
    fresh = window.JSON.parse(await platform.addForeign("[" + ",".join([texts_of(one) for one in kept]) + "]"))
    new = [str(one) for one in fresh]
    for one in kept:
        if one["hash"] in new or one["hash"] not in store.state.known:
            store.add(one["hash"], one["text"])
            store.forget_benches(one["job"])
    return bool(new)


async def fetch_rulebooks():
    """The desk's present rulebook, and the one of every open job, whole."""
    known = await platform.getSetting("rulebook")
    if not known or not status.get("looked"):
        code, answer = await ask("GET", "/api/rulebook")
        if code == 200 and answer is not None:
            await keep_rulebook(answer["digest"], answer["index"])
            await platform.putSetting("rulebook", answer["digest"])
            status["looked"] = True
    for job in list(store.state.jobs.values()):
        if job.opened is None:
            continue
        digest = job.opened.data["rulebook"]
        if digest not in store.rules and not await platform.getPart(digest):
            text = await part_text(digest)
            if text:
                await keep_rulebook(digest, text)


async def part_text(digest):
    """The exact text of a part or index, or ""."""
    answer = window.JSON.parse(await platform.fetchJson("GET", "/api/rulebook/part/" + digest, "", ""))
    text = str(answer.text)
    return text if int(answer.status) == 200 and await platform.sha256(text) == digest else ""


async def keep_rulebook(digest, text):
    """Keeps an index once all its parts are here."""
    if await platform.sha256(text) != digest or await platform.getPart(digest):
        return
    for one in store.json(text)["procedures"]:
        if not await platform.getPart(one["part"]):
            found = await part_text(one["part"])
            if not found:
                return
            await platform.putPart(one["part"], found)
    await platform.putPart(digest, text)


async def send_blobs():
    """Photographs and drawn signatures that the desk has not got yet."""
    sent = await store.recall("blobs sent") or []
    for name in window.JSON.parse(await platform.blobs()):
        name = str(name)
        if name not in sent:
            answer = window.JSON.parse(await platform.sendBlob(name, "/api/blobs/" + name, ""))
            if int(answer.status) not in (200, 201, 204):
                return
            sent.append(name)
            await store.remember("blobs sent", sent)
