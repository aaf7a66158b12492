"""The server that ships, Hypercorn, in a thread of the test: what a browser meets here it meets at the desk."""

from __future__ import annotations

import asyncio
import threading
from collections.abc import Iterator
from contextlib import contextmanager

from flask import Flask
from hypercorn.asyncio import serve

from fieldcheck.desk.server import configuration, listen, never_empty


@contextmanager
def opened(app: Flask) -> Iterator[int]:
    """The port on which the desk answers; closed, and the thread ended, on leaving."""
    stop = threading.Event()

    async def stopped() -> None:
        while not stop.is_set():
            await asyncio.sleep(0.05)

    with listen(0) as socket:
        port = socket.getsockname()[1]
        config = configuration(socket)      # which takes the socket over
        config.graceful_timeout = 0.2       # a test's browser is gone by then
        answering = serve(never_empty(app.wsgi_app), config, shutdown_trigger=stopped, mode="wsgi")
        thread = threading.Thread(target=asyncio.run, args=(answering,), daemon=True)
        thread.start()
        try:
            yield port
        finally:
            stop.set()
            thread.join(10)
