"""A small invented rulebook: one kind, one procedure with one reading and one limit; nothing of the real rules."""

from __future__ import annotations

import hashlib
from typing import Any, NamedTuple

from fieldcheck.engine import texts


class SmallRulebook(NamedTuple):
    index: str
    digest: str
    parts: dict[str, str]


def sha256(text: str) -> str:
    return hashlib.sha256(text.encode()).hexdigest()


def small_rulebook() -> SmallRulebook:
    """One kind, one procedure with one reading and one limit: enough for the desk, nothing of the real rules."""
    part = texts.write(PART)
    index = texts.write({**INDEX, "procedures": [{**INDEX["procedures"][0], "part": sha256(part)}]})
    return SmallRulebook(index, sha256(index), {sha256(part): part})


PLATE: list[dict[str, Any]] = [
    {"id": "rated_current", "label": "Rated current", "quantity": "current", "unit": "A", "choices": None,
     "unknown": {"then": "not judged", "text": "", "unit": "", "tag": "PRACTICE", "note": ""}, "count": False},
    {"id": "metal", "label": "Contact metal", "quantity": None, "unit": None,
     "choices": [{"id": "silver", "label": "silver"}, {"id": "brass", "label": "brass"}],
     "unknown": {"then": "worst", "text": "", "unit": "", "tag": "PRACTICE", "note": ""}, "count": False},
]
PART: dict[str, Any] = {
    "format": 1, "id": "trial-contact", "title": "Trial contact", "kind": "contact-set", "trade": ["finger"],
    "purpose": "An invented procedure for tests.",
    "minutes": {"routine": {"work": 5, "wait": 0}, "full": {"work": 9, "wait": 2}},
    "supply": {"isolated": "Unplug the item and keep the plug in sight."},
    "cautions": [{"id": "lift", "signal": "CAUTION", "title": "Fingers", "text": "Keep fingers clear.", "when": []}],
    "nameplate": PLATE,
    "steps": [{"id": "drop", "kind": "measure", "phase": "as found", "supply": "isolated", "title": "Resistance",
               "text": "Touch the probes to the finger and its stud", "why": "", "drawing": None, "depth": "both",
               "hold": False, "when": None, "quantity": "resistance", "unit": "mohm", "units": ["mohm", "ohm"],
               "meter": "resistance", "repeats": 1, "optional": False, "cautions": []}],
    "values": [],
    "limits": [{"id": "contact", "label": "Contact resistance", "value": "drop", "unit": "mohm", "each": False,
                "rule": "simple", "guard": "1", "probability": "0.95", "coverage": "95 %", "safety": False,
                "depth": "both", "when": None, "corrective": [], "missing": "the resistance",
                "entries": [{"since": "2026-01-01", "at_least": None, "at_most": ["num", "0.05"],
                             "cite": {"source": "practice", "clause": "", "edition": ""}, "tag": "PRACTICE",
                             "note": ""}]}],
    "cases": [],
}
INDEX: dict[str, Any] = {
    "format": 1,
    "procedures": [{"id": "trial-contact", "title": "Trial contact", "kind": "contact-set", "part": "",
                    "minutes": PART["minutes"], "trade": ["finger"]}],
    "cautions": {"lift": {"signal": "CAUTION", "title": "Fingers", "text": "Keep fingers clear."}},
    "sources": {}, "overlay": [], "meter_functions": {"resistance": "resistance", "DC voltage": "voltage"},
    "materials": {"materials": [], "bases": [{"id": "mineral", "label": "Mineral oil", "note": ""}]},
    "kinds": {"contact-set": {"title": "Contact set", "trade": ["finger"], "nameplate": PLATE}},
}
