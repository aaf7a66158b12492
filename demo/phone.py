"""A phone in plain Python: it enrols, pulls, writes events and pushes them through the real phone's HTTP API."""

import hashlib
import json
import urllib.error
import urllib.request
from datetime import UTC, datetime, timedelta

from cryptography.hazmat.primitives.asymmetric import ec

from fieldcheck.engine import chain, events, outcomes, procedures, texts, work
from fieldcheck.journal.forms import new_id
from fieldcheck.journal.hashing import run
from fieldcheck.keys.devices import DeviceKey


class Phone:
    """One device.  address: the desk's, as http://127.0.0.1:8470/; clock: the invented time, which each event moves."""

    def __init__(self, address: str, name: str, clock: datetime) -> None:
        self.address = address.rstrip("/")
        self.key = DeviceKey(ec.generate_private_key(ec.SECP256R1()))
        self.device = new_id()
        self.name = name
        self.clock = clock
        self.person = ""
        self.state = events.State()
        self.seq = 0
        self.head = ""
        self.unsent: list[str] = []
        self.signatures: dict[str, str] = {}
        self.cursor = 0
        self.index: dict = {}
        self.parts: dict[str, dict] = {}

    # ---- the wire

    def ask(self, method: str, path: str, body: object = None) -> dict:
        """One call of the API; a refusal becomes an error that shows what the desk said."""
        data = body if isinstance(body, bytes) else None if body is None else json.dumps(body).encode()
        kind = "application/octet-stream" if isinstance(body, bytes) else "application/json"
        request = urllib.request.Request(self.address + path, data, {"Content-Type": kind}, method=method)
        try:
            with urllib.request.urlopen(request, timeout=30) as answer:
                found: dict = json.loads(answer.read())
                return found
        except urllib.error.HTTPError as error:
            raise RuntimeError(f"{method} {path}: {error.read().decode()}") from error

    def enrol(self) -> None:
        """Makes this device's first event and hands it over."""
        self.write("", "device.enrolled", {"device": self.device, "name": self.name, "public_key": self.key.public_hex,
                                           "platform": "demo", "app_version": "demo"})
        text = self.unsent.pop()
        self.ask("POST", "/api/enrol", {"text": text, "head": self._signed_head()})

    def pull(self) -> None:
        """Takes in everything that the desk has and this phone has not."""
        while True:
            answer = self.ask("GET", f"/api/events?after={self.cursor}&job=all")
            for one in answer["events"]:
                self.state.add(one["hash"], one["text"])
            self.cursor = answer["cursor"]
            if not answer.get("more"):
                return

    def push(self) -> None:
        """Hands over what has not been handed over."""
        if self.unsent:
            self.ask("POST", "/api/events", {"device": self.device, "events": self.unsent, "head": self._signed_head(),
                                             "signatures": self.signatures})
            self.unsent, self.signatures = [], {}

    def rulebook(self) -> dict:
        """The index of the rulebook, fetched once."""
        if not self.index:
            answer = self.ask("GET", "/api/rulebook")
            self.index = {"digest": answer["digest"], **texts.read(answer["index"], None)}
        return self.index

    def part(self, procedure: str) -> dict:
        """A compiled procedure, fetched once and checked against its digest."""
        if procedure not in self.parts:
            digest = next(one["part"] for one in self.rulebook()["procedures"] if one["id"] == procedure)
            with urllib.request.urlopen(f"{self.address}/api/rulebook/part/{digest}", timeout=30) as answer:
                data = answer.read()
            assert hashlib.sha256(data).hexdigest() == digest, "the part is not the one that the index names"
            self.parts[procedure] = texts.read(data.decode(), None)
        return self.parts[procedure]

    def _signed_head(self) -> dict:
        message = chain.head_message(self.device, self.seq, self.head).encode()
        return {"seq": self.seq, "hash": self.head, "signature": self.key.sign(message)}

    # ---- the pen

    def write(self, job: str, kind: str, data: dict) -> str:
        """Makes one event and takes it into this phone's state; returns its hash."""
        self.clock += timedelta(seconds=20)
        at = self.clock.astimezone(UTC).strftime("%Y-%m-%dT%H:%M:%S.000Z")
        seen = events.seen_by(self.state.known.values(), self.device, job)
        self.seq += 1
        text = events.make(self.device, self.seq, self.head, at, 60, self.person, job, seen, kind, data)
        self.head = run(chain.event_digest(text))
        self.state.add(self.head, text)
        self.unsent.append(text)
        if kind == "job.signed":
            self.signatures[self.head] = self.key.sign(chain.signing_message(text).encode())
        return self.head

    def blob(self, data: bytes) -> str:
        """Hands over a drawing or photograph; returns its digest."""
        digest = hashlib.sha256(data).hexdigest()
        self.ask("PUT", f"/api/blobs/{digest}", data)
        return digest

    def flow(self, job: str, item: str) -> tuple[work.Work, procedures.Flow]:
        """The item's work and path as this phone sees it now."""
        found = self.state.jobs[job]
        one = found.items[item]
        made = work.of_item(self.state, found, one, self.part(one.procedure), found.opened.at[:10])
        return made, procedures.Flow(made)

    def sign(self, job: str, name: str, summary: str, blob: str) -> None:
        """The technician's signing event over everything this phone knows of the job."""
        known = self.state.jobs[job].events
        ordered = sorted(known, key=lambda event: (event.device, event.seq))
        heads: dict[str, int] = {}
        for event in ordered:
            heads[event.device] = event.seq
        root = run(chain.root([event.text for event in ordered]))
        self.write(job, "job.signed", {
            "person": self.person, "meaning": "performed", "name": name, "rulebook": self.rulebook()["digest"],
            "summary_sha256": hashlib.sha256(summary.encode()).hexdigest(), "root": root, "heads": heads, "blob": blob,
        })


class Hands:
    """Plays one item: follows the path that the engine lays out and answers from a script.

    script: step id -> list of answers, one for each time the step comes up (the last is used again); an answer is a
    text, a list of repeats, a dict of cell -> text, or {"left": reason}.  Meters: function -> meter id.
    """

    def __init__(self, phone: Phone, job: str, item: str, script: dict, meters: dict[str, str]) -> None:
        self.phone = phone
        self.job = job
        self.item = item
        self.script = script
        self.meters = meters
        self.times: dict[str, int] = {}

    def play(self) -> None:
        """Answers step after step until the path ends."""
        for _ in range(400):
            made, flow = self.phone.flow(self.job, self.item)
            if flow.current is None:
                return
            self.answer(made, flow.current)
        raise RuntimeError("the path of an item does not end")

    def answer(self, made: work.Work, instance: procedures.Instance) -> None:
        """One step as the script says; what it does not mention is confirmed or done."""
        step = instance.step
        given = self._next(step["id"] if step["id"] != "nameplate" else "nameplate." + instance.index)
        if isinstance(given, dict) and "left" in given:
            self._write("step.left", step["id"], instance.round, instance.index, {"reason": given["left"]})
            return
        for index in instance.missing:
            value = self._value(step, index, given)
            self._write("answer.given", step["id"], instance.round, index, {
                "kind": step["kind"], "value": value, "statement": "", "printed": ""})

    def _next(self, step: str) -> object:
        answers = self.script.get(step)
        if answers is None:
            return None
        place = self.times.get(step, 0)
        self.times[step] = place + 1
        return answers[min(place, len(answers) - 1)]

    def _value(self, step: dict, index: str, given: object) -> dict:
        kind = step["kind"]
        if kind in ("confirm", "action"):
            return {"done": True, **(given if isinstance(given, dict) else {})}
        if kind == "note":
            return {"text": str(given or "nothing to add")}
        if kind == "choice":
            return {"choice": str(given or step["choices"][0]["id"])}
        if kind == "nameplate":
            return {"unknown": True} if given is None else self._plate(step["field"], str(given))
        if kind == "photograph":
            return {"blob": self.phone.blob(photograph()), "caption": step["title"]}
        if kind == "sequence":
            assert isinstance(given, dict), f"the script has no run for {step['id']}"
            return dict(given)
        return self._reading(step, index, given)

    @staticmethod
    def _plate(field: dict, text: str) -> dict:
        return {"choice": text} if field.get("choices") else {"text": text, "unit": field.get("unit") or ""}

    def _reading(self, step: dict, index: str, given: object) -> dict:
        column = step
        text = given
        if step["kind"] == "table":
            assert isinstance(given, dict), f"the script has no table for {step['id']}"
            name = index.rpartition("/")[2]
            column = next(one for one in step["columns"] if one["id"] == name)
            text = given[index] if index in given else given[name]
        assert text is not None, f"the script has no reading for {step['id']}"
        value: dict = dict(text) if isinstance(text, dict) else {"texts": text} if isinstance(text, list) else {
            "text": str(text)}
        value["unit"] = column.get("unit") or ""
        function = column.get("meter")
        if function and function in self.meters:
            value.update({"meter": self.meters[function], "function": function})
        return value

    def _write(self, kind: str, step: str, number: int, index: str, more: dict) -> None:
        self.phone.write(self.job, kind, {"item": self.item, "step": step, "round": number, "index": index, **more})

    def outcome(self, note: str) -> str:
        """Gives the best outcome that the engine allows."""
        made, flow = self.phone.flow(self.job, self.item)
        best, _reasons, _allowed = outcomes.bounded(made, flow)
        self.phone.write(self.job, "outcome.given", {"item": self.item, "outcome": best, "reason": note,
                                                     "restrictions": "", "next_due": "2027-12-01"})
        return best


def photograph() -> bytes:
    """A small invented picture: a grey plate with a bright finger on it."""
    from io import BytesIO

    from PIL import Image, ImageDraw

    picture = Image.new("RGB", (1200, 900), (96, 92, 86))
    draw = ImageDraw.Draw(picture)
    draw.rectangle((300, 380, 900, 520), fill=(184, 150, 88))
    draw.ellipse((820, 400, 920, 500), fill=(210, 190, 150))
    for x in range(320, 880, 40):
        draw.line((x, 385, x + 18, 515), fill=(150, 118, 66), width=3)
    out = BytesIO()
    picture.save(out, "JPEG", quality=85)
    return out.getvalue()


def drawn_signature(points: list[tuple[int, int]]) -> bytes:
    """A signature as strokes, the form in which the phone keeps it."""
    path = " ".join(("M" if i == 0 else "L") + f"{x} {y}" for i, (x, y) in enumerate(points))
    return (f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 600 200"><path d="{path}" fill="none" '
            f'stroke="currentColor" stroke-width="3"/></svg>').encode()
