"""What this phone knows: every event folded, the rulebooks, who works here, and what is half done."""

from browser import window
from javascript import JSON

from fieldcheck.engine import events, texts

platform = window.platform

state = events.State()
own = {"device": "", "person": "", "seq": 0, "waiting": 0}
"""device, person: ids; seq: last sequence of this device in `state`; waiting: events on their way to the disk."""
seen = {}
""""job|device" -> last sequence known from another device in a stream ("|device": the workshop's)."""
rules = {}
"""digest -> index; "part <sha>" -> compiled part."""
benches = {}
""""job item" -> the item in hand (app.bench.Bench)."""


def _natively(text):
    """The value by the browser's own reader where it is sure to be what texts.read gives, else None."""
    return JSON.parse(text) if platform.isPlain(text) else None


texts.quick.append(_natively)


def json(text):
    """A JSON text of ours as lists, dicts, texts and whole numbers."""
    return texts.read(text, 1 << 30)


async def load():
    """Reads all that is on this phone."""
    own["device"] = await platform.device()
    own["person"] = await platform.getSetting("person")
    await load_events()


async def load_events():
    """Takes in the events on the disk that are not in memory yet; True when there were any."""
    rows = window.JSON.parse(await platform.events())
    fresh = False
    for row in rows:
        if str(row[0]) not in state.known:
            add(str(row[0]), str(row[1]))
            fresh = True
    return fresh


def add(digest, text):
    """Takes one event into the fold and into what this device has seen."""
    event = state.add(digest, text)
    if event.device == own["device"]:
        own["seq"] = max(own["seq"], event.seq)
    else:
        name = event.job + "|" + event.device
        seen[name] = max(seen.get(name, 0), event.seq)
    return event


def forget_benches(job=""):
    """The items of a job (or of all) are built again from their events when next looked at."""
    for name in list(benches):
        if job == "" or name.startswith(job + " "):
            del benches[name]


def seen_field(job):
    """The `seen` field of a new event of this device."""
    result = {"job": {}, "workshop": {}}
    for name in sorted(seen):
        stream, _, device = name.partition("|")
        if stream == "":
            result["workshop"][device] = seen[name]
        elif stream == job:
            result["job"][device] = seen[name]
    return result


def next_order(job):
    """Place in causal order that the next event of this device in a stream will have."""
    known = seen_field(job)
    weight = own["seq"] + own["waiting"] + 1
    for device in known["job"]:
        weight += max(known["job"][device], known["workshop"].get(device, 0))
    for device in known["workshop"]:
        if device not in known["job"]:
            weight += known["workshop"][device]
    return (weight, own["device"], own["seq"] + own["waiting"] + 1)


# ---- rulebooks --------------------------------------------------------------------------------------------------

async def index(digest):
    """The rulebook's index of that digest, or None when this phone does not hold it."""
    if digest not in rules:
        text = await platform.getPart(digest)
        if not text:
            return None
        rules[digest] = json(text)
    return rules[digest]


async def current_index():
    """(digest, index) of the rulebook last received, or ("", None)."""
    digest = await platform.getSetting("rulebook")
    return digest, (await index(digest) if digest else None)


async def part(digest, procedure):
    """The compiled procedure of a rulebook, or None when this phone does not hold it."""
    found = await index(digest)
    if found is None:
        return None
    for one in found["procedures"]:
        if one["id"] == procedure:
            name = "part " + one["part"]
            if name not in rules:
                text = await platform.getPart(one["part"])
                if not text:
                    return None
                rules[name] = json(text)
            return rules[name]
    return None


# ---- small things remembered ------------------------------------------------------------------------------------

async def remember(name, value):
    """Keeps a small value (as event texts may hold) under a name."""
    await platform.putSetting(name, texts.write(value))


async def recall(name):
    """The value kept under a name, or None."""
    text = await platform.getSetting(name)
    return json(text) if text else None


def person_name(person):
    """The name of a person, or ""."""
    found = state.workshop.get("person", person) if person else None
    return found["name"] if found else ""


def today():
    """ISO date of this phone's clock, local."""
    return local_time(platform.wall())[:10]


def offset(milliseconds):
    """Minutes of local time from UTC at an instant."""
    return -int(window.Date.new(milliseconds).getTimezoneOffset())


def utc_text(milliseconds):
    """2026-12-01T10:00:00.000Z"""
    return str(window.Date.new(milliseconds).toISOString())


def local_time(milliseconds):
    """The same form, without Z, in local time."""
    return str(window.Date.new(milliseconds + offset(milliseconds) * 60000).toISOString())[:-1]


def instant(at):
    """Milliseconds since 1970 of an event's time."""
    return int(window.Date.parse(at))
