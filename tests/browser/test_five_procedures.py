"""Each procedure that ships, from the list of jobs to the signature, by touch at 390 x 844; then its record."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path
from typing import TYPE_CHECKING

import pytest
from bench_scripts import PLANS
from hand import Hand
from invented_bench import NUMBER, bench
from worker import Worker, begin, close

if TYPE_CHECKING:
    from desk_at_hand import Desk

pytestmark = pytest.mark.browser


def record_text(desk: Desk, folder: Path, number: str = NUMBER) -> str:
    """The text of the job's record, made by the command, blanks joined."""
    made = subprocess.run([sys.executable, "-m", "fieldcheck", "record", "make", number, "--data",
                           str(desk.shop.folder)], capture_output=True, text=True, check=False)
    assert made.returncode == 0, made.stderr
    out = folder / "record.txt"
    subprocess.run(["pdftotext", "-layout", made.stdout.strip(), str(out)], check=True)
    return " ".join(out.read_text(encoding="utf-8").split())


@pytest.mark.parametrize("procedure", list(PLANS))
def test_a_procedure_is_worked_from_the_list_to_the_record(procedure, hand: Hand, tmp_path: Path, phone_build: Path):
    import time
    t = time.time()
    with bench(tmp_path / "workshop", phone_build, [(NUMBER, procedure, "routine")]) as desk:
        begin(hand, desk, NUMBER)
        worker = Worker(hand, desk, procedure, PLANS[procedure])
        worker.work()
        print(procedure, worker.screens, time.time() - t)
        for one, said in worker.said.items(): print("   ", one, said)
        print(hand.text())
        close(hand, "serviceable")
        print(time.time() - t)
        text = record_text(desk, tmp_path)
        print(time.time() - t)
        Path("/tmp/T_" + procedure + ".txt").write_text(text)
