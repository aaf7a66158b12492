"""An invented compiled procedure with a step of most kinds, for generated calls."""

from typing import Any

PRACTICE = {"source": "practice", "clause": "", "edition": ""}


def step(
    name: str, kind: str, phase: str = "as found", supply: str = "low voltage live", **more: Any
) -> dict[str, Any]:
    return {
        "id": name,
        "kind": kind,
        "phase": phase,
        "supply": supply,
        "title": name.replace("_", " "),
        "text": name,
        "why": "",
        "depth": "both",
        "hold": False,
        **more,
    }


def limit(name: str, value: str, unit: str, **more: Any) -> dict[str, Any]:
    entries = [
        {
            "since": since,
            "at_least": more.pop("at_least", None),
            "at_most": at_most,
            "cite": PRACTICE,
            "tag": "PRACTICE",
            "note": "",
        }
        for since, at_most in more.pop("at_most")
    ]
    return {
        "id": name,
        "label": name.replace("_", " "),
        "value": value,
        "unit": unit,
        "rule": "guarded",
        "guard": "1",
        "probability": "0.95",
        "coverage": "95 %",
        "safety": False,
        "depth": "both",
        "entries": entries,
        **more,
    }


OHMS = {"quantity": "resistance", "unit": "ohm", "meter": "ohms"}
PART: dict[str, Any] = {
    "format": 1,
    "id": "trial",
    "title": "Trial",
    "kind": "trial",
    "supply": {"isolated": "Pull the plug", "low voltage live": "Switch the bench supply on"},
    "nameplate": [
        {
            "id": "rated",
            "label": "Rated current",
            "quantity": "current",
            "unit": "A",
            "choices": None,
            "unknown": {"then": "default", "text": "1", "unit": "A", "tag": "PRACTICE", "note": ""},
        },
        {
            "id": "cells",
            "label": "Cells",
            "quantity": "count",
            "unit": None,
            "choices": None,
            "unknown": {"then": "not judged", "text": "", "tag": "PRACTICE", "note": ""},
        },
        {
            "id": "metal",
            "label": "Metal",
            "quantity": None,
            "choices": [{"id": "brass", "label": "brass"}],
            "unknown": {"then": "worst", "text": "brass", "tag": "PRACTICE", "note": ""},
        },
    ],
    "steps": [
        step("cover_off", "action", "prepare", "isolated", opens={"id": "cover", "text": "cover off"}),
        step("r", "measure", **OHMS, repeats=2, two_wire=True),
        step(
            "cell",
            "table",
            rows={"from": "cells"},
            columns=[{"id": "forward", "title": "Forward", **OHMS}, {"id": "reverse", "title": "Reverse", **OHMS}],
        ),
        step("look", "choice", choices=[{"id": "clean"}, {"id": "worn"}]),
        step("taps", "sequence", layout={"positions": ["F", "N", "R", "N"]}),
        step("trip", "timing", quantity="time", unit="s", depth="full"),
        step(
            "brush",
            "action",
            "service",
            "isolated",
            corrective=True,
            tries=2,
            repeats_steps=["r", "cell"],
            when={"field": "metal", "is": ["brass"]},
        ),
        step("solvent", "action", "service", "isolated", corrective=True, tries=1, repeats_steps=["r"]),
        step("final", "measure", "as left", "isolated", **OHMS, safety=True),
        step("cover_on", "action", "close", "isolated", restores="cover"),
    ],
    "values": [
        {
            "id": "drop",
            "label": "Drop",
            "formula": ["*", ["call", "median", [["name", "r"]], {}], ["name", "rated"]],
            "formula_text": "median(r) * rated",
            "quantity": "voltage",
            "unit": "V",
            "each": None,
        },
        {
            "id": "ratio",
            "label": "Ratio",
            "formula": ["/", ["name", "cell.reverse"], ["name", "cell.forward"]],
            "formula_text": "cell.reverse / cell.forward",
            "quantity": "ratio",
            "unit": "1",
            "each": "cell",
        },
        {
            "id": "misses",
            "label": "Misses",
            "formula": ["call", "sequence_misses", [["name", "taps"]], {}],
            "formula_text": "sequence_misses(taps)",
            "quantity": "count",
            "unit": "1",
            "each": None,
        },
        {
            "id": "loss",
            "label": "Loss at rated current, not judged",
            "formula": ["*", ["name", "drop"], ["name", "rated"]],
            "formula_text": "drop * rated",
            "quantity": "power",
            "unit": "mW",
            "each": None,
        },
        {
            "id": "gap",
            "label": "Reverse less forward, not judged",
            "formula": ["-", ["name", "cell.reverse"], ["name", "cell.forward"]],
            "formula_text": "cell.reverse - cell.forward",
            "quantity": "resistance",
            "unit": "kohm",
            "each": "cell",
        },
    ],
    "limits": [
        limit(
            "drop_limit",
            "drop",
            "V",
            at_most=[("2026-01-01", ["num", "120"]), ("2027-01-01", ["num", "110"])],
            corrective=["brush", "solvent"],
        ),
        limit(
            "ratio_limit",
            "ratio",
            "1",
            at_most=[("2026-01-01", None)],
            at_least=["num", "10"],
            each=True,
            rule="probability",
            corrective=["brush"],
        ),
        limit("no_miss", "misses", "1", at_most=[("2026-01-01", ["num", "0"])], rule="simple", bounds="unserviceable"),
        limit("final_limit", "final", "ohm", at_most=[("2026-01-01", ["num", "150"])], safety=True),
    ],
}
