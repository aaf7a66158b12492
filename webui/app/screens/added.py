"""Equipment that nobody had registered, added on the spot."""

from .. import dom, pen, store
from ..markup import address, field, h, join, options
from ..screen import Screen


class Added(Screen):
    """Name, workshop tag, procedure and depth."""

    name = "Add equipment"
    stale_on_change = False

    def __init__(self, place, job, index):
        Screen.__init__(self, place)
        self.job = job
        self.index = index
        self.thumb = ("Add it", "add")

    def body(self):
        rows = [(one["id"], one["title"]) for one in self.index["procedures"]]
        depths = [("routine", "Routine"), ("full", "Full")]
        return h("div.screen", h("p.path", "Job " + self.job.opened.data["number"]), h("h1", "Add equipment"),
                 field("What it is", "what"), field("Workshop tag", "tag"), field("Owner's number", "owner"),
                 field("Serial number", "serial"),
                 options("Procedure", "procedure", rows, ""), options("Depth", "depth", depths, "full"),
                 h("p.refusal", {"id": "refusal", "role": "alert"}, ""))

    async def on_add(self, arg):
        what, chosen = dom.value("what").strip(), dom.chosen("procedure")
        if not what or not chosen:
            dom.fill("refusal", join(["Say what it is and choose its procedure."]))
            return
        kind = [one["kind"] for one in self.index["procedures"] if one["id"] == chosen][0]
        schemes = (("workshop tag", "tag"), ("owner's object number", "owner"), ("serial number", "serial"))
        identities = [{"scheme": scheme, "value": dom.value(name).strip()} for scheme, name in schemes
                      if dom.value(name).strip()]
        equipment = await pen.new_id()
        item = await pen.new_id()
        data = self.job.opened.data
        depth = dom.chosen("depth")
        await pen.write("", "equipment.entered", {
            "equipment": equipment, "kind": kind, "name": what, "identities": identities, "site": data["site"],
            "customer": data["customer"], "nameplate": {}, "remarks": "entered on the spot"})
        await pen.write(self.job.id, "item.added", {"item": item, "equipment": equipment, "kind": kind,
                                                    "procedure": chosen, "depth": depth})
        store.forget_benches(self.job.id)
        dom.go(address(["job", self.job.id]), True)
