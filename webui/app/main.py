"""Starts the phone: the frame, the routes, the present screen."""

import sys

from browser import aio, window

from . import dom, outbox, pen, store
from .markup import NOTHING, Html, h, join, key
from .screens import jobs

platform = window.platform
SUPPLIES = {"isolated": "isolated", "low voltage live": "low", "mains live": "mains"}


class Faults:
    """Takes the place of sys.stderr: Brython writes there the traceback of whatever was not caught."""

    def write(self, text):
        window.fieldcheckFailed(text)

    def flush(self):
        pass


class Main:
    """The present screen and how to get to another."""

    def __init__(self):
        self.screen = None
        self.loaded = {}
        self.going = 0

    async def arrive(self):
        """Shows the screen that the address names."""
        self.going += 1
        turn = self.going
        place = dom.place()
        screen = await self.screen_for(place)
        if turn != self.going:
            return                          # another address came meanwhile
        if isinstance(screen, str):
            dom.go(screen, True)
            return
        if self.screen is not None:
            self.screen.leave()
        screen.main = self
        self.screen = screen
        self.draw()
        dom.scroll_up()
        screen.shown()
        await platform.putSetting("place", str(window.location.hash))

    async def screen_for(self, place):
        """The Screen of an address, or the address (text) to go to instead."""
        if not store.own["person"] and store.state.workshop.entries["person"] and place[:1] != ["who"]:
            return "#/who"
        if not place:
            return jobs.Jobs(place)
        if place[0] == "who":
            return jobs.Who(place)
        if "routes" not in self.loaded:
            await platform.loadChunk("engine")
            await platform.loadChunk("screens")
            from .screens import routes
            self.loaded["routes"] = routes
        return await self.loaded["routes"].screen_for(place)

    def draw(self):
        """Puts the whole of the present screen on the page."""
        screen = self.screen
        body = screen.body()
        self.top()
        dom.fill("main", body)
        self.foot()
        dom.title((screen.name + ", " if screen.name else "") + "fieldcheck")

    def top(self):
        """The band along the top: supply state and open entries."""
        screen = self.screen
        if not screen.supply:
            dom.fill("top", h("p.quiet", {"id": "quiet"}, outbox.status["text"]))
            return
        entries = screen.entries
        words = "nothing open" if entries == 0 else str(entries) + (" entry open" if entries == 1 else " entries open")
        dom.fill("top", h("div.band." + SUPPLIES[screen.supply], h("span.plate", screen.supply),
                          h("span.plate" + (".open" if entries else ""), words)))

    def foot(self):
        """The ruler and the one wide key."""
        screen = self.screen
        thumb = screen.thumb
        parts = [screen.ruler or NOTHING]
        if thumb is not None:
            parts.append(key(thumb[0], thumb[1], cls="thumb", id="thumb"))
        dom.fill("foot", join(parts))

    def quiet(self):
        """The quiet line changed."""
        dom.text("quiet", outbox.status["text"])

    def changed(self):
        """Events came from elsewhere: what shows them is drawn again, but never under somebody's thumb."""
        if self.screen is not None and self.screen.stale_on_change:
            aio.run(self.arrive())

    # ---- what the page reports

    def do(self, name, arg):
        """A key was pressed."""
        act = getattr(self.screen, "on_" + name.replace("-", "_"), None)
        if act is not None:
            result = act(arg)
            if hasattr(result, "send"):
                aio.run(result)

    def typed(self, name, text):
        self.screen.typed(name, text)

    def key(self, name, repeated):
        return self.screen is not None and self.screen.on_key(name, repeated)

    def file(self, name, file):
        result = self.screen.on_file(name, file)
        if hasattr(result, "send"):
            aio.run(result)

    def pointer(self, kind, x, y):
        self.screen.pointer(kind, x, y)

    def arrived(self):
        aio.run(self.arrive())


def refresh(*_):
    """Another page of this phone wrote something."""
    async def read():
        if await store.load_events():
            store.forget_benches()
            main.changed()
    aio.run(read())


main = Main()


def start():
    """The program."""
    sys.stderr = Faults()
    dom.handlers.update({"do": main.do, "typed": main.typed, "key": main.key, "file": main.file,
                         "pointer": main.pointer, "place": main.arrived, "seen": outbox.run_once})
    dom.start()
    dom.fill("main", Html('<p class="quiet">Opening</p>'))
    outbox.listeners.append(main.changed)
    outbox.told.append(main.quiet)

    def written(event):
        outbox.hand_over()
    pen.after_writing.append(written)
    platform.onChange(refresh)
    aio.run(begin())


async def begin():
    """Reads what is here, goes back to where one was, then talks with the desk."""
    await store.load()
    if not dom.place():
        where = await platform.getSetting("place")
        if str(where).startswith("#/job"):
            dom.go(where, True)
    await main.arrive()
    window.performance.mark("fieldcheck usable")
    outbox.start()
