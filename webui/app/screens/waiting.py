"""Stopwatches that run while something else is worked on: cool-downs and running timings, on every screen."""

from browser import aio, window

from .. import dom, store
from ..markup import address

platform = window.platform
running = {}
"""name -> {"label", "place": [segments], "start": wall ms, "length": ms or 0}"""
ticking = {"timer": None}


async def load():
    """Reads what was running when the page last closed."""
    if not ticking.get("loaded"):
        ticking["loaded"] = True
        for one in await store.recall("waiting") or []:
            running["w " + one["name"]] = one


async def save():
    await store.remember("waiting", [running[name] for name in running])


def begin(name, label, place, length=0, start=0):
    """Starts a stopwatch (or a cool-down of `length` ms) that shows on every screen."""
    running["w " + name] = {"name": name, "label": label, "place": place, "start": start or int(platform.wall()),
                            "length": length}
    aio.run(save())


def end(name):
    """Takes a stopwatch away."""
    if running.pop("w " + name, None) is not None:
        aio.run(save())


def get(name):
    """What is kept under a name, or None."""
    return running.get("w " + name)


def clock(milliseconds):
    """1:23, or 1:02:03 from an hour."""
    seconds = abs(int(milliseconds)) // 1000
    minutes = seconds // 60
    text = str(minutes % 60) + ":" + two(seconds % 60)
    if minutes < 60:
        return text
    return str(minutes // 60) + ":" + two(minutes % 60) + ":" + two(seconds % 60)


def two(number):
    """A whole number with two digits."""
    return ("0" if number < 10 else "") + str(number)


def text_of(one):
    """What a stopwatch shows now: a cool-down counts down, then says done."""
    passed = int(platform.wall()) - one["start"]
    if one["length"]:
        left = one["length"] - passed
        return clock(left + 999) if left > 0 else "ready"
    return clock(passed)


def shown():
    """[(text, address, words, id)] of all that runs, for the ruler."""
    rows = []
    for name in running:
        one = running[name]
        rows.append((text_of(one), address(one["place"]), one["label"] + ", running", "clock-" + one["name"]))
    return rows


def keep_counting(*_):
    """Refreshes the small stopwatches once a second while there are any."""
    dom.cancel(ticking["timer"])
    ticking["timer"] = None
    if not running:
        return
    for name in running:
        one = running[name]
        dom.text("clock-" + one["name"], text_of(one))
    ticking["timer"] = dom.later(1000, keep_counting)
