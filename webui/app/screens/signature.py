"""The customer's acknowledgement, and the signing of a job by the person who did it."""

from browser import window

from fieldcheck.engine import chain

from .. import dom, pen, store
from ..markup import NOTHING, address, field, h, join, key, options
from ..screen import Screen
from .jobs import site_text

platform = window.platform
STATES = (("signed", "Received and explained, signed"), ("not present", "Nobody present"), ("declined", "Declined"))


class Pad(Screen):
    """A screen with a pad to draw a signature on: strokes as whole pixels, kept as an SVG text."""

    stale_on_change = False

    def __init__(self, place, job):
        Screen.__init__(self, place)
        self.job = job
        self.strokes = []
        self.drawing = False

    def pad(self, label):
        return h("div.pad-frame", h("p.note", label),
                 h("div.sign-pad", {"id": "pad", "role": "img", "aria-label": label}, NOTHING),
                 h("div.helpers", key("Draw again", "clear", "", "helper")))

    def shown(self):
        if dom.find("pad"):
            dom.follow_pointer("pad")

    def pointer(self, kind, x, y):
        if kind == "down":
            self.strokes.append([(x, y)])
            self.drawing = True
        elif kind == "move" and self.drawing:
            self.strokes[-1].append((x, y))
        elif kind == "up":
            self.drawing = False
        else:
            return
        dom.fill("pad", join_svg(self.strokes))

    def on_clear(self, arg):
        self.strokes = []
        dom.fill("pad", NOTHING)

    async def blob(self):
        """Digest of the drawn signature, kept as a blob; "" when nothing was drawn."""
        if not self.strokes:
            return ""
        text = '<?xml version="1.0"?>' + svg_text(self.strokes)
        made = window.Blob.new([text], {"type": "image/svg+xml"})
        return await platform.putBlob(made)


def svg_text(strokes):
    """The strokes as an SVG of 350 by 160."""
    paths = []
    for stroke in strokes:
        points = [str(x) + " " + str(y) for x, y in stroke]
        if len(points) == 1:
            points.append(points[0])
        paths.append("M" + "L".join(points))
    return ('<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 350 160"><path d="' + "".join(paths)
            + '" fill="none" stroke="currentColor" stroke-width="2" stroke-linecap="round"/></svg>')


def join_svg(strokes):
    from ..markup import Html
    return Html(svg_text(strokes))


class Customer(Pad):
    """The customer's "received and explained"; never that it is safe."""

    name = "Customer"

    def __init__(self, place, job):
        Pad.__init__(self, place, job)
        self.thumb = ("Take", "take")

    def body(self):
        return h("div.screen", h("p.path", "Job " + self.job.opened.data["number"]), h("h1", "Customer"),
                 h("p.do", "The findings were received and explained. Condition at the time of test only."),
                 options("State", "state", STATES, "signed"), field("Name", "name"),
                 self.pad("Customer's signature"), h("p.refusal", {"id": "refusal", "role": "alert"}, ""))

    async def on_take(self, arg):
        state, name = dom.chosen("state"), dom.value("name").strip()
        if state == "signed" and (not name or not self.strokes):
            dom.fill("refusal", join(["A signed acknowledgement needs the name and the signature."]))
            return
        data = {"state": state, "name": name}
        blob = await self.blob()
        if blob and state == "signed":
            data["blob"] = blob
        await pen.write(self.job.id, "customer.acknowledged", data)
        dom.go(address(["job", self.job.id, "sign"]), True)


class Sign(Pad):
    """The summary, and the signature of the person who performed the work."""

    name = "Signature"

    def __init__(self, place, job, benches):
        Pad.__init__(self, place, job)
        self.benches = benches
        self.summary = summary_text(job, benches)
        open_ones = [one for one in benches if one.outcome() is None]
        self.blocked = "Every item needs its outcome first: " + open_ones[0].title() if open_ones else ""
        if job.signing() is None and not self.blocked:
            self.thumb = ("Sign", "sign")
        else:
            self.thumb = ("Back to the job", "job")

    def body(self):
        person = store.person_name(store.own["person"])
        signing = self.job.signing()
        if signing is not None:
            return h("div.screen", h("h1", "Signed"), h("p.state", "Signed by " + signing.data["name"]),
                     h("pre.summary", {"tabindex": "0"}, self.summary))
        return h("div.screen", h("p.path", "Job " + self.job.opened.data["number"]), h("h1", "Signature"),
                 h("p.warn", self.blocked) if self.blocked else NOTHING,
                 h("pre.summary", {"tabindex": "0"}, self.summary),
                 h("p.do", "I performed this work: " + person),
                 self.pad("Signature of " + person), h("p.refusal", {"id": "refusal", "role": "alert"}, ""))

    def on_job(self, arg):
        dom.go(address(["job", self.job.id]))

    async def on_sign(self, arg):
        if not self.strokes:
            dom.fill("refusal", join(["Draw the signature first."]))
            return
        data = {"person": store.own["person"], "meaning": "performed", "name": store.person_name(store.own["person"]),
                "rulebook": self.job.opened.data["rulebook"], "summary_sha256": await platform.sha256(self.summary),
                "root": await root_of(self.job), "heads": heads_of(self.job), "blob": await self.blob()}
        await pen.write(self.job.id, "job.signed", data, "", True)
        dom.go(address(["job", self.job.id]), True)


async def root_of(job):
    """RFC 6962 root over the exact texts of the job's events known here, sorted by device and sequence."""
    events = sorted(job.events, key=place_in_chains)
    work = chain.root([event.text for event in events])
    digest = None
    while True:
        try:
            kind, text = work.send(digest)
        except StopIteration as end:
            return end.value
        digest = await (platform.sha256(text) if kind == "text" else platform.sha256hex(text))


def place_in_chains(event):
    """Sort key of a job's events under a signature."""
    return (event.device, event.seq)


def heads_of(job):
    """The last sequence of each device in the job."""
    heads = {}
    for event in sorted(job.events, key=place_in_chains):
        heads[event.device] = event.seq
    return heads


def summary_text(job, benches):
    """What is signed, in words: one line an item and its verdicts."""
    lines = ["Job " + job.opened.data["number"] + ", " + site_text(job)]
    for bench in benches:
        outcome = bench.outcome() or {}
        lines.append("")
        lines.append(bench.title() + ", " + bench.part["title"] + ", " + bench.item.depth + ": "
                     + (outcome.get("outcome") or "no outcome yet"))
        if outcome.get("restrictions"):
            lines.append("Restrictions: " + outcome["restrictions"])
        lines += limit_lines(bench)
        for one in bench.flow.instances:
            if one.state == "left":
                lines.append("Not done: " + one.step["title"] + " (" + one.reason + ")")
        for one in bench.work.defects:
            lines.append("Defect, " + one["level"] + ": " + one["what"])
    return "\n".join(lines)


def limit_lines(bench):
    """One line a limit: value and statement, as left where there was service."""
    from fieldcheck.engine import judging
    lines = []
    for _, found, left in bench.closing()[1]:
        judged = left or found
        label = judged.limit["label"] + (" " + judged.row if judged.row not in ("", "?") else "")
        value = judging.printed(bench.work, judged)
        lines.append(label + ": " + (value + ", " if value else "") + judged.verdict.statement)
    return lines


