"""The wheel, built from a copy of this checkout and installed elsewhere, is a whole fieldcheck: rules and phone inside.

The normal run installs it into a virtual environment that borrows this one's dependencies; the `full` mark lets pip
install everything from the package index into an empty one.
"""

from __future__ import annotations

import json
import os
import re
import shutil
import signal
import subprocess
import sys
import sysconfig
import urllib.request
import venv
import zipfile
from collections.abc import Iterator
from pathlib import Path

import pytest

REPO = Path(__file__).resolve().parent.parent
SHIPPED = ("fieldcheck", "rules", "webui")
BESIDE = ("pyproject.toml", "README.md", "LICENSE", ".gitignore")
NOT_COPIED = shutil.ignore_patterns("__pycache__", "*.pyc", "dist", ".cache", "_data")


def copied(folder: Path) -> Path:
    """A copy of what the wheel is made from, so that nothing of this checkout is used or changed."""
    for name in SHIPPED:
        shutil.copytree(REPO / name, folder / name, ignore=NOT_COPIED)
    for name in BESIDE:
        shutil.copy(REPO / name, folder / name)
    return folder


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The wheel as `pip install .` builds it, with the build requirements of this environment."""
    source = copied(tmp_path_factory.mktemp("source"))
    out = tmp_path_factory.mktemp("wheel")
    command = [sys.executable, "-m", "build", "--wheel", "--no-isolation", "--outdir", str(out), str(source)]
    done = subprocess.run(command, capture_output=True, text=True, check=False, cwd=out)
    assert done.returncode == 0, done.stdout + done.stderr
    return next(out.glob("fieldcheck-*.whl"))


@pytest.fixture(scope="module")
def installed(wheel: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """bin/ of a virtual environment with the wheel alone; the dependencies come from this environment."""
    place = tmp_path_factory.mktemp("environment")
    venv.create(place, with_pip=False, symlinks=True)
    python = place / "bin" / "python"
    done = subprocess.run([sys.executable, "-m", "pip", "--python", str(python), "install", "--quiet", "--no-deps",
                           "--no-index", str(wheel)], capture_output=True, text=True, check=False, cwd=place)
    assert done.returncode == 0, done.stderr
    packages = next(place.glob("lib/python*/site-packages"))
    (packages / "borrowed.pth").write_text(sysconfig.get_paths()["purelib"] + "\n", encoding="utf-8")
    return place / "bin"


def run(bin_folder: Path, *arguments: str, home: Path) -> subprocess.CompletedProcess[str]:
    """A program of the environment, in an empty home and with nothing of this checkout on its path."""
    environment = {"PATH": f"{bin_folder}:/usr/bin:/bin", "HOME": str(home), "LANG": "C.UTF-8"}
    return subprocess.run([str(bin_folder / arguments[0]), *arguments[1:]], capture_output=True, text=True, check=False,
                          cwd=home, env=environment)


def test_rules_and_phone_are_inside_the_wheel(wheel: Path) -> None:
    names = set(zipfile.ZipFile(wheel).namelist())
    for path in (REPO / "rules").rglob("*.toml"):
        assert f"fieldcheck/_data/rules/{path.relative_to(REPO / 'rules')}" in names
    assert {"fieldcheck/_data/phone/index.html", "fieldcheck/_data/phone/manifest.json"} <= names
    listed = json.loads(zipfile.ZipFile(wheel).read("fieldcheck/_data/phone/manifest.json"))["files"]
    assert {f"fieldcheck/_data/phone/{name}" for name in listed} <= names
    assert len([name for name in names if re.match(r"fieldcheck/_data/phone/a/core\.[0-9a-f]{12}\.js", name)]) == 1


def test_everything_in_the_package_is_inside_the_wheel_and_nothing_else(wheel: Path) -> None:
    names = set(zipfile.ZipFile(wheel).namelist())
    there = {path.relative_to(REPO).as_posix() for path in (REPO / "fieldcheck").rglob("*")
             if path.is_file() and "__pycache__" not in path.parts and "_data" not in path.parts}
    assert there <= names
    other = [name for name in names - there if not name.startswith("fieldcheck/_data/") and ".dist-info/" not in name]
    assert other == []


def test_the_installed_program_is_that_of_the_wheel(installed: Path, tmp_path: Path) -> None:
    said = run(installed, "python", "-c", "import fieldcheck, sys; print(fieldcheck.__file__)", home=tmp_path).stdout
    assert said.startswith(str(installed.parent)) and str(REPO) not in said


def check_program(bin_folder: Path, home: Path) -> None:
    """Version, rules with their cases, numbers and a procedure, from the shipped files alone."""
    from fieldcheck import __version__

    said = run(bin_folder, "fieldcheck", "--version", home=home)
    assert (said.stdout, said.returncode) == (f"fieldcheck, version {__version__}\n", 0), said.stderr
    said = run(bin_folder, "fieldcheck", "rules", "check", home=home)
    assert said.returncode == 0, said.stdout + said.stderr
    said = run(bin_folder, "fieldcheck", "rules", "show", "contact-cleaning", home=home)
    assert said.returncode == 0 and len(said.stdout) > 1000, said.stderr
    said = run(bin_folder, "fieldcheck", "functions", "peak_of_sine", "v_rms=12±0.1 V", home=home)
    assert said.stdout.startswith("16.97 ± 0.28 V"), said.stderr  # 12 sqrt(2) = 16.97; 1.96 * 0.1 sqrt(2) = 0.277


def check_server(bin_folder: Path, home: Path) -> None:
    """`fieldcheck serve` hands out the phone of the wheel and its rulebook, from an empty workshop."""
    environment = {"PATH": f"{bin_folder}:/usr/bin:/bin", "HOME": str(home), "LANG": "C.UTF-8"}
    command = [str(bin_folder / "fieldcheck"), "serve", "--port", "0", "--data", str(home / "workshop")]
    process = subprocess.Popen(command, stderr=subprocess.PIPE, text=True, cwd=home, env=environment)
    try:
        said = addresses(process)
        with urllib.request.urlopen(said["phone"], timeout=30) as answer:
            page = answer.read().decode()
        first = re.search(r'src="([^"]*a/brython\.[0-9a-f]{12}\.js)"', page)
        assert first is not None
        with urllib.request.urlopen(said["phone"] + first.group(1), timeout=30) as answer:
            assert len(answer.read()) > 100_000
        with urllib.request.urlopen(said["desk"] + "api/rulebook", timeout=30) as answer:
            assert "contact-cleaning" in json.loads(answer.read())["index"]
    finally:
        process.send_signal(signal.SIGINT)
        process.wait(timeout=30)


def addresses(process: subprocess.Popen[str]) -> dict[str, str]:
    """The addresses that the server tells on standard error, once its port is open."""
    said: dict[str, str] = {}
    seen = ""
    for line in lines_of(process):
        seen += line
        found = re.match(r"(desk|phone)\s+(http://127\.0\.0\.1:\d+/\S*)", line)
        if found:
            said[found.group(1)] = found.group(2)
        if line.startswith("stop with"):
            return said
    raise AssertionError(seen)


def lines_of(process: subprocess.Popen[str]) -> Iterator[str]:
    assert process.stderr is not None
    yield from process.stderr


def test_the_installed_program_works_elsewhere(installed: Path, tmp_path: Path) -> None:
    check_program(installed, tmp_path)


def test_the_installed_desk_serves_the_phone_of_the_wheel(installed: Path, tmp_path: Path) -> None:
    check_server(installed, tmp_path)


@pytest.mark.full
def test_pip_install_into_an_empty_environment(tmp_path: Path) -> None:
    """As a person does it: pip fetches build requirements and dependencies from the index that this machine uses."""
    source = copied(tmp_path / "source")
    place = tmp_path / "environment"
    venv.create(place, with_pip=True, symlinks=True)
    allowed = {key: value for key, value in os.environ.items() if key.startswith(("PIP_", "SSL_", "REQUESTS_"))
               or key.lower() in ("http_proxy", "https_proxy", "no_proxy")}
    done = subprocess.run([str(place / "bin" / "python"), "-m", "pip", "install", "--quiet", str(source)],
                          capture_output=True, text=True, check=False, cwd=tmp_path,
                          env={"PATH": "/usr/bin:/bin", "HOME": os.environ.get("HOME", str(tmp_path)), **allowed})
    assert done.returncode == 0, done.stderr
    check_program(place / "bin", tmp_path)
    check_server(place / "bin", tmp_path)
