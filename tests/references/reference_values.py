"""How the reference tests compare, and the house's own list of check values (checks.json, numbered as the checks are).

A figure of more than twelve significant digits is compared to a relative 1e-12, a shorter one to half its last digit.
"""

from __future__ import annotations

import json
import subprocess
from pathlib import Path
from typing import Any

FOLDER = Path(__file__).resolve().parent
CHECKS: dict[str, dict[str, Any]] = {row["id"]: row for row in json.loads((FOLDER / "checks.json").read_text("utf-8"))}


def agrees(got: float, printed: str) -> bool:
    """Whether `got` is what the page prints: "0.1779773" to half its last digit, 13 digits or more to 1e-12."""
    number = printed.lower().partition("e")
    digits = number[0].lstrip("-").replace(".", "").lstrip("0")
    wanted = float(printed)
    if len(digits) > 12:
        return abs(got - wanted) <= 1e-12 * abs(wanted)
    places = len(number[0].partition(".")[2])
    step = 10.0 ** (int(number[2] or "0") - places)
    return abs(got - wanted) <= 0.5000001 * step


def check(got: float, printed: str) -> None:
    """Assert it, saying both."""
    assert agrees(got, printed), f"got {got!r}, printed {printed}"


def simulated(netlist: str, folder: Path) -> dict[str, float]:
    """The measurements that ngspice prints for a netlist, by name (batch mode, ngspice of Debian)."""
    path = folder / "circuit.cir"
    path.write_text(netlist, "utf-8")
    done = subprocess.run(["ngspice", "-b", str(path)], capture_output=True, text=True, timeout=60, check=False)
    found = {}
    for line in done.stdout.splitlines():
        name, equals, rest = line.partition("=")
        words = rest.split()
        if equals and words and len(name.split()) == 1:
            try:
                found[name.strip()] = float(words[0])
            except ValueError:
                continue
    assert found, done.stdout + done.stderr
    return found
