"""Ratios of one run, each the median of nine rounds: `python tests/benchmarks/run.py [NAME ...]`.

NAME: propagation, verdict, append, record, start, take; all of them when none is named. Wants a quiet machine, but
both sides of each ratio are taken in turn, so that a busy one widens the range more than it moves the median.
"""

from __future__ import annotations

import importlib
import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from benchmarks import paths
from benchmarks.ratios import Row, table

SUBJECTS = ("propagation", "verdict", "append", "record", "start", "take")


def rows(name: str, tiny: bool = False) -> list[Row]:
    """The rows of one subject. tiny: one round, to see that it runs; its figures mean nothing."""
    paths.add()
    found: list[Row] = importlib.import_module(f"benchmarks.{name}").rows(tiny)
    return found


def main(names: list[str]) -> int:
    """Prints the table. 0: every goal met; 1: one was missed; 2: an unknown name."""
    unknown = [name for name in names if name not in SUBJECTS]
    if unknown:
        print(f"there is no benchmark {unknown[0]}; there are: {', '.join(SUBJECTS)}", file=sys.stderr)
        return 2
    found: list[Row] = []
    for name in names or SUBJECTS:
        print(f"{name} ...", file=sys.stderr, flush=True)
        found += rows(name)
    print(table(found))
    return 1 if any(row.met is False for row in found) else 0


if __name__ == "__main__":
    raise SystemExit(main(sys.argv[1:]))
