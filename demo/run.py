"""The demo, from an empty machine to a signed record: `python3 demo/run.py [--once] [--fresh] [--data DIR]`.

Makes a virtual environment in this clone, installs what it needs, builds the phone, creates an invented workshop, plays
one whole job through the same HTTP API that the phone uses, makes the signed PDF, verifies it, prints its path and a
summary, then serves desk and phone on this machine.  A second run finds all that done and takes seconds.
"""

import argparse
import os
import shutil
import subprocess
import sys
import time
import urllib.error
import urllib.request
from pathlib import Path

import bootstrap
from bootstrap import say


def arguments(given: list[str]) -> argparse.Namespace:
    """What was asked for."""
    parser = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    parser.add_argument("--once", action="store_true", help="stop after the record")
    parser.add_argument("--fresh", action="store_true", help="start from an empty workshop")
    parser.add_argument("--data", help="where the workshop lives (else FIELDCHECK_DATA, else demo/workshop)")
    parser.add_argument("--port", type=int, default=8470, help="port on this machine")
    return parser.parse_args(given)


def folder_of(asked: argparse.Namespace) -> Path:
    """The workshop's folder; --fresh empties it, but only if it holds a workshop and nothing strange."""
    data = Path(asked.data or os.environ.get("FIELDCHECK_DATA") or bootstrap.REPO / "demo" / "workshop").expanduser()
    if asked.fresh and data.exists():
        if any(data.iterdir()) and not (data / "journal.db").exists():
            say(f"{data} holds no workshop, so it is left alone: name another folder with --data")
            raise SystemExit(2)
        shutil.rmtree(data)
    data.mkdir(parents=True, exist_ok=True)
    return data.resolve()


def build_phone() -> None:
    """Translates the phone's Python and lays out its files; seconds when nothing changed."""
    started = time.monotonic()
    subprocess.run([sys.executable, str(bootstrap.REPO / "webui" / "build.py")], check=True, stdout=sys.stderr)
    say(f"phone built in {time.monotonic() - started:.1f} s")


def start_desk(data: Path, port: int) -> subprocess.Popen[bytes]:
    """The desk as its own process, ready to answer."""
    desk = subprocess.Popen(
        [sys.executable, "-m", "fieldcheck", "serve", "--data", str(data), "--port", str(port)], cwd=bootstrap.REPO,
        stderr=subprocess.DEVNULL,
    )
    address = f"http://127.0.0.1:{port}/api/ping"
    for _ in range(200):
        if desk.poll() is not None:
            break
        try:
            with urllib.request.urlopen(address, timeout=2) as answer:
                answer.read()
            return desk
        except (urllib.error.URLError, OSError):
            time.sleep(0.1)
    desk.kill()
    say(f"The desk did not start on port {port}. Start it by itself to see why:\n"
        f"    fieldcheck serve --data {data} --port {port}")
    raise SystemExit(2)


def main(given: list[str]) -> int:
    """All of it, each step skipped when it has been done."""
    asked = arguments(given)
    if not bootstrap.is_inside():
        bootstrap.install_packages(bootstrap.RECORD_PACKAGES)
        bootstrap.install_program("phone")
        bootstrap.again_inside(str(Path(__file__).resolve()), given)
    import season

    data = folder_of(asked)
    build_phone()
    season.create_workshop(data)
    desk = start_desk(data, asked.port)
    try:
        record = season.record_of(data) or season.play(data, f"http://127.0.0.1:{asked.port}")
        verified = season.verify(data, record)
        print(f"record   {record}\nverified {verified}")
        for line in season.summary(data):
            print("  " + line)
        if asked.once:
            return 0
        print(f"desk     http://127.0.0.1:{asked.port}/\nphone    http://127.0.0.1:{asked.port}/phone/", flush=True)
        say("Stop with Ctrl-C.")
        desk.wait()
    except KeyboardInterrupt:
        say("stopped")
    finally:
        desk.terminate()
        desk.wait(20)
    return 0


if __name__ == "__main__":
    raise SystemExit(main(sys.argv[1:]))
