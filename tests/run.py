"""All checks of fieldcheck with one command: `python3 tests/run.py [--full] [arguments for pytest]`.

Sets itself up first (system packages, Chromium, virtual environment), then runs lint, types, import layers and every
test.  The last line is `N passed, N failed`; any failure exits with 1.
Without --full the long tests run in their short form, and the line of each says what it samples.
"""

import os
import re
import subprocess
import sys
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parent.parent / "demo"))

import bootstrap

REPO = bootstrap.REPO

LONG_FORMS = (
    "entry parser: 1,000,000 random texts (short form: some thousands)",
    "record: 600 random bit flips (short form: 60)",
    "parity: 3,000 generated calls in three runtimes (short form: the same table, thinned)",
)


def checks() -> list[tuple[str, list[str]]]:
    """Name and command of each check that is not a test."""
    python = str(bootstrap.PYTHON)
    return [
        ("lint (ruff)", [python, "-m", "ruff", "check", "."]),
        ("types (mypy --strict)", [python, "-m", "mypy"]),
        ("import layers (import-linter)", [str(bootstrap.PYTHON.parent / "lint-imports")]),
        ("rules (fieldcheck rules check)", [python, "-m", "fieldcheck", "rules", "check"]),
    ]


def run_checks() -> tuple[int, int]:
    """Runs them in turn; shows the output of those that fail.  (passed, failed)."""
    passed = failed = 0
    for name, command in checks():
        started = time.monotonic()
        done = subprocess.run(command, cwd=REPO, capture_output=True, text=True, check=False)
        good = done.returncode == 0
        passed, failed = passed + good, failed + (not good)
        print(f"{'passed' if good else 'FAILED'}  {name}  {time.monotonic() - started:.0f} s", flush=True)
        if not good:
            print(done.stdout + done.stderr, flush=True)
    return passed, failed


def run_tests(arguments: list[str], full: bool) -> tuple[int, int]:
    """Runs pytest on two cores.  (passed, failed); errors count as failed, and so does a run without any test."""
    marks = [] if full else ["-m", "not full"]
    command = [str(bootstrap.PYTHON), "-m", "pytest", "-n", "2", "--dist", "loadgroup", *marks, *arguments]
    print("tests: pytest " + " ".join(command[3:]), flush=True)
    for line in LONG_FORMS:
        print(("  full:  " if full else "  short: ") + line, flush=True)
    process = subprocess.Popen(command, cwd=REPO, stdout=subprocess.PIPE, text=True)
    last = ""
    assert process.stdout is not None
    for line in process.stdout:
        print(line, end="", flush=True)
        if re.search(r"\d+ (passed|failed|error)", line):
            last = line
    process.wait()
    counts = {word: int(number) for number, word in re.findall(r"(\d+) (passed|failed|error|skipped)", last)}
    if counts.get("skipped"):
        print(f"skipped tests: {counts['skipped']}", flush=True)
    failed = counts.get("failed", 0) + counts.get("error", 0)
    if process.returncode not in (0, 1) or not counts or (process.returncode and not failed):
        failed += 1
    return counts.get("passed", 0), failed


def main(arguments: list[str]) -> int:
    """Set-up, checks, tests, and the closing line."""
    if not bootstrap.is_inside():
        bootstrap.install_packages(bootstrap.RECORD_PACKAGES + bootstrap.TEST_PACKAGES)
        bootstrap.install_program("tests")
        bootstrap.again_inside(str(Path(__file__).resolve()), arguments)
    full = "--full" in arguments
    arguments = [one for one in arguments if one != "--full"]
    os.environ.pop("FIELDCHECK_DATA", None)
    passed, failed = run_checks()
    more_passed, more_failed = run_tests(arguments, full)
    print(f"{passed + more_passed} passed, {failed + more_failed} failed", flush=True)
    return 1 if failed + more_failed else 0


if __name__ == "__main__":
    raise SystemExit(main(sys.argv[1:]))
