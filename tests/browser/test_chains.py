"""Two chains of the house checks typed on the phone: the same digits on the glass, at the desk, in `assess --json`, in
the record's data and in its text.

Source: house checks 6.7, A: four-wire reversal, V+ 1.0423, V- -1.0331 V at 0.05 % + 3 counts of 0.1 mV, I 0.4500 A at
0.2 % + 2 counts of 0.1 mA, 23.4 +- 0.5 C: R20 2.275599069406747, U (k = 2) 0.008456205312949104 ohm.
C: pull-in 4.02 4.11 3.98 4.07 4.04 V at 0.7 % + 2 counts of 10 mV: 4.044, U95 0.07293843179768968 V.
"""

from __future__ import annotations

import json
import subprocess
import sys
import urllib.request
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pikepdf
import pytest
from bench_scripts import CHAIN_A, CHAIN_C
from hand import Hand, until
from invented_bench import bench, meters
from test_five_procedures import record_of, slot_of, text_of
from worker import Plan, Worker, begin, close

if TYPE_CHECKING:
    from desk_at_hand import Desk

pytestmark = pytest.mark.browser
NUMBER = "2026-0008"


def plain(text: str) -> str:
    return " ".join(text.split())


def run_of(desk: Desk, procedure: str, depth: str) -> dict[str, Any]:
    """The run that was typed, in the form of `fieldcheck assess`."""
    answers, plates, left = [], {}, []
    for one in desk.events("answer.given"):
        data = one["data"]
        value = data["value"]
        if data["step"] == "nameplate":
            plates[data["index"]] = "unknown" if "unknown" in value else value.get("choice") or value["text"] + (
                " " + value["unit"] if value.get("unit") else "")
            continue
        if data["kind"] == "photograph":
            value = {"done": True}
        kept = {name: value[name] for name in value if name not in ("consumables", "remark", "laps", "wall")}
        answers.append({"step": data["step"], "round": data["round"], "index": data["index"], **kept})
    taken = desk.events("conditions.taken")[0]["data"]
    return {"procedure": procedure, "depth": depth, "on": desk.events("job.opened")[0]["at"][:10], "nameplate": plates,
            "meters": [{"id": desk.ids[key], **given} for key, given in meters().items()], "answers": answers,
            "left": left, "conditions": {name: taken[name]["text"] + " " + taken[name]["unit"]
                                         for name in ("ambient", "humidity", "voltage", "frequency")}}


def assessed(run: dict[str, Any], folder: Path) -> str:
    """What `fieldcheck assess --json` says of a run."""
    (folder / "run.json").write_text(json.dumps(run, ensure_ascii=False), encoding="utf-8")
    made = subprocess.run([sys.executable, "-m", "fieldcheck", "assess", str(folder / "run.json"), "--json"],
                          capture_output=True, text=True, check=False)
    assert made.returncode in (0, 1) and made.stdout, made.stderr
    json.loads(made.stdout)
    return plain(made.stdout)


def page_of(desk: Desk, path: str) -> str:
    base = desk.address.removesuffix("/phone/")
    with urllib.request.urlopen(base + path, timeout=30) as answer:
        return plain(str(answer.read(), "utf-8"))


@pytest.mark.parametrize(
    ("procedure", "depth", "script", "slot", "printed"),
    [("contact-cleaning", "full", CHAIN_A, "circuit_drop|0|circuit/i", "2.2756 ± 0.0085 Ω"),
     ("sequencer-step", "routine", CHAIN_C, "pull_in|0|", "4.044 ± 0.073 V")], ids=["A", "C"])
def test_a_chain_gives_the_same_digits_everywhere(
    procedure: str, depth: str, script: Any, slot: str, printed: str, hand: Hand, tmp_path: Path, phone_build: Path
) -> None:
    with bench(tmp_path / "workshop", phone_build, [(NUMBER, procedure, depth)]) as desk:
        begin(hand, desk, NUMBER)
        worker = Worker(hand, desk, procedure, Plan(script))
        worker.work()
        assert [one for one in worker.said[slot] if printed in one], worker.said[slot]
        close(worker, "serviceable")
        until(lambda: desk.events("job.signed"), "the signing at the desk")
        shown = {slot_of(one["data"]): one["data"]["printed"] for one in desk.events("answer.given")
                 if "printed" in one["data"]}
        assert plain(shown[slot]).startswith(printed)
        assert printed in page_of(desk, f"/jobs/{desk.ids['job ' + NUMBER]}")
        assert printed in assessed(run_of(desk, procedure, depth), tmp_path)
        record = record_of(tmp_path / "workshop", NUMBER)
    with pikepdf.open(record) as pdf:
        data = str(pdf.attachments["record.json"].get_file().read_bytes(), "utf-8")
    assert printed in plain(data)
    assert printed in text_of(record)
