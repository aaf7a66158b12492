"""Makes this clone ready to run: system packages, a virtual environment, the program in it.

Standard library only, since it runs before anything is installed.  Each step is skipped when it has been done.
"""

import hashlib
import os
import shutil
import subprocess
import sys
import time
from pathlib import Path

REPO = Path(__file__).resolve().parent.parent
VENV = REPO / ".venv"
PYTHON = VENV / "bin" / "python"

RECORD_PACKAGES = ("libpangoft2-1.0-0", "libharfbuzz-subset0")
TEST_PACKAGES = ("chromium", "poppler-utils", "qpdf", "ngspice", "libnss3-tools", "zbar-tools")


def say(text: str) -> None:
    """Talk goes to standard error; results go to standard output."""
    print(text, file=sys.stderr, flush=True)


def missing_packages(names: tuple[str, ...]) -> list[str]:
    """Those Debian packages that are not installed."""
    missing = []
    for name in names:
        asked = subprocess.run(
            ["dpkg-query", "-W", "-f=${Status}", name], capture_output=True, text=True, check=False
        )
        if "install ok installed" not in asked.stdout:
            missing.append(name)
    return missing


def install_packages(names: tuple[str, ...]) -> None:
    """Installs what is missing, as root or through sudo; otherwise prints the one line to run and stops."""
    if shutil.which("dpkg-query") is None:
        say("This is not a Debian system: see README.md for what must be there (Pango, HarfBuzz).")
        return
    wanted = list(names)
    if not shutil.which("python3") or not _has_venv():
        wanted.append("python3-venv")
    missing = missing_packages(tuple(wanted))
    if not missing:
        return
    line = ["apt-get", "install", "-y", "--no-install-recommends", *missing]
    if os.geteuid() == 0:
        prefix: list[str] = []
    elif _may_sudo():
        prefix = ["sudo"]
    else:
        say("Some system packages are missing. Run this line, then start again:\n\n    sudo " + " ".join(line) + "\n")
        raise SystemExit(2)
    say("Installing system packages: " + ", ".join(missing))
    environment = dict(os.environ, DEBIAN_FRONTEND="noninteractive")
    _run([*prefix, "apt-get", "update", "-qq"], "reading the package list", environment)
    _run([*prefix, *line], "installing", environment)


def _may_sudo() -> bool:
    if not shutil.which("sudo"):
        return False
    return subprocess.run(["sudo", "-n", "true"], capture_output=True, check=False).returncode == 0


def _has_venv() -> bool:
    asked = subprocess.run([sys.executable, "-c", "import ensurepip, venv"], capture_output=True, check=False)
    return asked.returncode == 0


def _run(command: list[str], doing: str, environment: dict[str, str] | None = None) -> None:
    """Runs a long command, a dot every two seconds; its output is shown only when it fails."""
    log = REPO / ".venv" / "setup.log" if VENV.exists() else None
    started = time.monotonic()
    with open(log or os.devnull, "w+b") as out:
        process = subprocess.Popen(
            command, stdout=out, stderr=subprocess.STDOUT, env=environment, stdin=subprocess.DEVNULL
        )
        sys.stderr.write("  " + doing + " ")
        while True:
            try:
                process.wait(2)
                break
            except subprocess.TimeoutExpired:
                sys.stderr.write(".")
                sys.stderr.flush()
        sys.stderr.write(f" {time.monotonic() - started:.0f} s\n")
        if process.returncode:
            if log:
                out.seek(0)
                say(out.read().decode(errors="replace")[-3000:])
            say("That failed: " + " ".join(command))
            raise SystemExit(2)


def install_program(extra: str) -> None:
    """Makes the virtual environment and installs this clone in it, with the libraries of an extra of pyproject.toml."""
    if sys.version_info < (3, 11):  # noqa: UP036  (an older Python reads this file before anything is installed)
        say("fieldcheck needs Python 3.11 or newer; this is " + sys.version.split()[0])
        raise SystemExit(2)
    stamp = VENV / f"installed-{extra}"
    wanted = hashlib.sha256((REPO / "pyproject.toml").read_bytes()).hexdigest()
    if stamp.exists() and stamp.read_text() == wanted and PYTHON.exists():
        return
    if not PYTHON.exists():
        _run([sys.executable, "-m", "venv", str(VENV)], "making the virtual environment .venv")
    _run(
        [str(PYTHON), "-m", "pip", "install", "--quiet", "--disable-pip-version-check", "-e", f"{REPO}[{extra}]"],
        "installing fieldcheck and its libraries",
    )
    stamp.write_text(wanted)


def again_inside(script: str, arguments: list[str]) -> None:
    """Runs a script of this clone with the Python of the virtual environment, in place of this process."""
    environment = dict(os.environ, FIELDCHECK_SETUP="done", PYTHONUNBUFFERED="1")
    os.execve(str(PYTHON), [str(PYTHON), script, *arguments], environment)


def is_inside() -> bool:
    """True when this process already runs in the clone's virtual environment."""
    return os.environ.get("FIELDCHECK_SETUP") == "done" and Path(sys.prefix).resolve() == VENV.resolve()
