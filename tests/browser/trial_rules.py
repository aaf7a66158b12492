"""A hand-made rulebook with every kind of step, so that the phone is tested apart from the rules that ship."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from typing import Any

from fieldcheck.engine import texts

LIVE = "low voltage live"


def step(name: str, kind: str, phase: str, supply: str, title: str, text: str, **more: Any) -> dict[str, Any]:
    base = {"id": name, "kind": kind, "phase": phase, "supply": supply, "title": title, "text": text, "why": "",
            "depth": "both", "hold": False, "optional": False, "abort": [], "opens": None, "restores": None,
            "when": None, "drawing": None, "cautions": []}
    base.update(more)
    return base


def entry_of(**more: Any) -> dict[str, Any]:
    return {"since": "2026-01-01", "at_least": None, "at_most": None, "tag": "PRACTICE", "note": "",
            "cite": {"source": "practice", "clause": "", "edition": ""}, **more}


def limit(name: str, label: str, value: str, unit: str, entry: dict[str, Any], **more: Any) -> dict[str, Any]:
    base = {"id": name, "label": label, "value": value, "unit": unit, "each": False, "rule": "guarded", "guard": "1",
            "coverage": "95 %", "safety": False, "depth": "both", "when": None, "corrective": [], "entries": [entry],
            "missing": label}
    base.update(more)
    return base


PART: dict[str, Any] = {
    "format": 1, "id": "trial", "title": "Trial of a contact", "kind": "contact-set", "trade": ["millivolt-drop test"],
    "purpose": "Shows every kind of step.",
    "minutes": {"routine": {"work": 12, "wait": 3}, "full": {"work": 30, "wait": 10}},
    "supply": {"isolated": "Pull the plug and short the input for ten seconds.",
               LIVE: "Switch on the workshop's isolated, current-limited, fused supply."},
    "cautions": [
        {"id": "plug", "signal": "warning", "title": "Pull the plug first",
         "text": "Work on open equipment only with the plug in sight. Local codes and licensed practice come first.",
         "when": ["isolated"]},
        {"id": "hot", "signal": "caution", "title": "Parts may be hot", "text": "Let a loaded contact cool.",
         "when": [LIVE]},
    ],
    "nameplate": [
        {"id": "rated", "label": "Rated current", "text": "On the plate.", "quantity": "current", "unit": "A",
         "choices": None, "unknown": {"then": "default", "text": "1", "unit": "A", "tag": "PRACTICE", "note": ""}},
        {"id": "drum", "label": "Drum", "text": "Count the segments.", "quantity": "", "unit": "",
         "choices": [{"id": "four", "label": "Four positions"}, {"id": "three", "label": "Three positions"}],
         "unknown": {"then": "not judged", "text": "", "unit": "", "tag": "PRACTICE", "note": ""}},
    ],
    "steps": [
        step("cover_off", "action", "prepare", "isolated", "Take the cover off", "Take the cover off and lay it aside.",
             opens={"id": "cover", "text": "cover off"}),
        step("r", "measure", "as found", LIVE, "Contact resistance", "Touch the probes to the finger and its stud.",
             quantity="resistance", unit="mohm", meter="resistance", repeats=1, drawing="four-wire",
             why="The first reading shows what the customer had.",
             abort=[{"text": "current", "quantity": "current", "at_most": "2", "unit": "A"}]),
        step("three", "measure", "as found", LIVE, "Drop, three times", "Move the contact to and fro between readings.",
             quantity="voltage", unit="mV", meter="DC voltage", repeats=3),
        step("fingers", "table", "as found", LIVE, "Each finger", "One reading a finger, in the order found.",
             rows={"labels": ["F", "R"]}, columns=[
                 {"id": "drop", "title": "Drop", "quantity": "voltage", "unit": "mV", "meter": "DC voltage"},
                 {"id": "run", "title": "Time", "quantity": "time", "unit": "s", "meter": None, "timing": True}]),
        step("track", "choice", "as found", LIVE, "Wear track", "Look at the track with a lens.",
             choices=[{"id": "even", "label": "Even"}, {"id": "uneven", "label": "Uneven"}]),
        step("drum_run", "sequence", "as found", LIVE, "Eight pulses", "Pulse eight times; tap what the drum shows.",
             layout={"from": "drum", "layouts": {"four": {"positions": ["F", "N1", "R", "N2"]},
                                                 "three": {"positions": ["F", "N", "R"]}}}, pulses=4),
        step("coast", "timing", "as found", LIVE, "Coast-down", "Start when the supply goes off, stop at standstill.",
             quantity="time", unit="s"),
        step("brush", "action", "service", "isolated", "Brush with alcohol", "A bristle brush and isopropyl alcohol.",
             corrective=True, tries=2, repeats_steps=["r"]),
        step("seen", "photograph", "close", "isolated", "Photograph", "The contact after the work."),
        step("remark", "note", "close", "isolated", "Remarks", "What the next person should know."),
        step("cover_on", "action", "close", "isolated", "Put the cover on", "Put the cover on.", restores="cover"),
        step("done", "confirm", "close", "isolated", "Covers on and tight", "All screws in.", hold=True),
    ],
    "values": [{"id": "drop", "label": "Drop at rated current", "formula": ["*", ["name", "r"], ["name", "rated"]],
                "formula_text": "r * rated", "quantity": "voltage", "unit": "mV", "each": None}],
    "limits": [
        limit("resistance", "Contact resistance", "r", "mohm", entry_of(at_most=["num", "0.05"]), corrective=["brush"]),
        limit("drop_limit", "Drop at rated current", "drop", "mV", entry_of(at_most=["num", "0.1"])),
        limit("finger", "Drop of a finger", "fingers.drop", "mV", entry_of(at_most=["num", "0.03"]), each=True,
              bounds="nothing"),
        limit("coasting", "Coast-down", "coast", "s", entry_of(at_least=["num", "0.2"]), bounds="nothing"),
    ],
    "cases": [],
}

METERS: list[dict[str, Any]] = [
    {"tag": "M1", "name": "bench meter", "calibrated": "2026-01-01", "due": "2099-01-01", "checked": True,
     "certificate": "C 1", "functions": [
         {"function": "resistance", "quantity": "resistance", "ranges": [
             {"name": "1 ohm", "upto": "1 ohm", "resolution": "0.1 mohm", "gain": "0.5 %", "counts": "2"}]},
         {"function": "DC voltage", "quantity": "voltage", "ranges": [
             {"name": "100 mV", "upto": "100 mV", "resolution": "0.01 mV", "gain": "0.1 %", "counts": "3"}]}]},
    {"tag": "M2", "name": "hand meter", "calibrated": "2020-01-01", "due": "2021-01-01", "checked": True,
     "certificate": "C 2", "functions": [
         {"function": "DC voltage", "quantity": "voltage", "ranges": [
             {"name": "2 V", "upto": "2 V", "resolution": "1 mV", "gain": "1 %", "counts": "2"}]}]},
]


@dataclass(frozen=True)
class TrialRulebook:
    """As the compiler's own: exact texts and their digests."""

    index: str
    digest: str
    parts: dict[str, str]


def rulebook(part: dict[str, Any] | None = None) -> TrialRulebook:
    """The rulebook that holds one hand-made procedure."""
    made = part or PART
    text = texts.write(made)
    name = hashlib.sha256(text.encode()).hexdigest()
    index = texts.write({
        "format": 1, "procedures": [{"id": made["id"], "title": made["title"], "kind": made["kind"], "part": name,
                                     "minutes": made["minutes"], "trade": made["trade"]}],
        "cautions": {}, "sources": {}, "materials": {}, "kinds": {made["kind"]: {"title": "Contact set", "trade": []}},
    })
    return TrialRulebook(index, hashlib.sha256(index.encode()).hexdigest(), {name: text})
