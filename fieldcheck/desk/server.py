"""Runs the desk on this machine only: one process, Hypercorn, until it is told to stop."""

from __future__ import annotations

import asyncio
import logging
import socket
import sys
from collections.abc import Callable, Iterable, Iterator
from pathlib import Path
from typing import Any

from hypercorn.asyncio import serve as run_hypercorn
from hypercorn.config import Config

from fieldcheck.desk.app import create_app
from fieldcheck.desk.guard import BLOB_BYTES
from fieldcheck.desk.workshop import Rulebook
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.journal.database import FILE, JournalError
from fieldcheck.journal.verify import verify

LOOPBACK = "127.0.0.1"
SECONDS_TO_FINISH = 5.0
SECONDS_KEPT_OPEN = 75.0

Wsgi = Callable[[dict[str, Any], Callable[..., Any]], Iterable[bytes]]  # WSGI environments hold values of any kind


def serve(
    data: Path, port: int, ready: Callable[[str], None] | None = None, rulebook: Rulebook | None = None
) -> None:
    """Serve desk and phone on 127.0.0.1 until SIGINT or SIGTERM; addresses are told on standard error.

    port: 0 takes a free one.  ready: called with the desk's address once the port is ours (requests wait in it).
    rulebook: compiled already, else the one that ships with the program.
    Refuses (JournalError) a damaged journal and (FieldcheckError) a port that is taken.
    """
    refuse_damage(data)
    with listen(port) as door:
        logging.basicConfig(stream=sys.stderr, level=logging.INFO, format="%(asctime)s %(name)s %(message)s")
        app = create_app(data, rulebook)
        address = f"http://{LOOPBACK}:{door.getsockname()[1]}/"
        _say(f"desk   {address}\nphone  {address}phone/\nworkshop {data}\nstop with Ctrl-C")
        if ready is not None:
            ready(address)
        asyncio.run(run_hypercorn(never_empty(app.wsgi_app), configuration(door), mode="wsgi"))
    _say("stopped; everything is on disk")


def _say(text: str) -> None:
    print(text, file=sys.stderr, flush=True)


def refuse_damage(data: Path) -> None:
    """Refuses (JournalError) to work on a journal that does not hold what it accepted."""
    if not (data / FILE).exists():
        return
    findings = verify(data)
    if findings:
        listed = " ".join(findings[:3])
        raise JournalError(f"the journal is damaged, so the desk does not start: {listed}", str(data / FILE),
                           "keep the folder as it is, run `fieldcheck journal verify`, and restore a backup")


def listen(port: int) -> socket.socket:
    """The one socket of this desk, on loopback; refuses (FieldcheckError) a port that is taken."""
    door = socket.socket(socket.AF_INET, socket.SOCK_STREAM)
    try:
        door.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
        door.bind((LOOPBACK, port))
        door.listen(100)        # taken from here on, and requests wait until the workshop is open
    except (OSError, OverflowError) as error:
        door.close()
        raise FieldcheckError(f"port {port} of this machine cannot be used: {error}", "--port",
                              "stop the other program, or name another port with --port") from error
    return door


def configuration(door: socket.socket) -> Config:
    """Hypercorn for this socket alone."""
    config = Config()
    config.bind = [f"fd://{door.detach()}"]       # Hypercorn closes it
    config.accesslog = None
    config.errorlog = logging.getLogger("hypercorn")
    config.errorlog.setLevel(logging.WARNING)
    config.include_server_header = False
    config.graceful_timeout = SECONDS_TO_FINISH
    # A phone asks every few seconds: a connection closed for idleness just then would be a reset in its console.
    config.keep_alive_timeout = SECONDS_KEPT_OPEN
    config.wsgi_max_body_size = BLOB_BYTES + 1      # one more, so that the desk itself says that it is too large
    return config


def never_empty(app: Wsgi) -> Wsgi:
    """Hypercorn sends the head of an answer with its first piece, so an answer without any would never leave."""
    def answer(environ: dict[str, Any], start: Callable[..., Any]) -> Iterable[bytes]:
        pieces = app(environ, start)
        return _with_one(pieces)
    return answer


def _with_one(pieces: Iterable[bytes]) -> Iterator[bytes]:
    try:
        yield b""
        yield from pieces
    finally:
        close = getattr(pieces, "close", None)
        if close is not None:
            close()
