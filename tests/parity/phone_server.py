"""A tiny server of one folder on loopback, with the Content-Security-Policy that the phone must live under."""

from __future__ import annotations

import functools
import http.server
import sys
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

POLICY = (
    "default-src 'none'; script-src 'self'; style-src 'self'; img-src 'self' blob: data:; connect-src 'self'; "
    "manifest-src 'self'; worker-src 'self'; font-src 'self'; form-action 'self'; base-uri 'none'; "
    "frame-ancestors 'none'"
)


class Handler(http.server.SimpleHTTPRequestHandler):
    """Serves files; POST answers with what was sent, so that a test of the network needs no other server."""

    asked: list[str]

    def __init__(self, *args: Any, asked: list[str], **kwargs: Any) -> None:
        self.asked = asked
        super().__init__(*args, **kwargs)

    def do_GET(self) -> None:
        self.asked.append(self.path)
        super().do_GET()

    def do_POST(self) -> None:
        self.asked.append(self.path)
        body = self.rfile.read(int(self.headers["Content-Length"]))
        self.send_response(200)
        self.send_header("Content-Length", str(len(body)))
        self.end_headers()
        self.wfile.write(body)

    do_PUT = do_POST

    def end_headers(self) -> None:
        self.send_header("Content-Security-Policy", POLICY)
        self.send_header("X-Content-Type-Options", "nosniff")
        super().end_headers()

    def log_message(self, format: str, *args: Any) -> None:
        """Silent."""


class Server(http.server.ThreadingHTTPServer):
    """A page that closes in the middle of an answer is nothing to talk about."""

    def handle_error(self, request: Any, client_address: Any) -> None:
        if not isinstance(sys.exc_info()[1], ConnectionError):
            super().handle_error(request, client_address)


@contextmanager
def serving(folder: Path) -> Iterator[tuple[str, list[str]]]:
    """Serves `folder`; gives its address and the growing list of paths that were asked for."""
    asked: list[str] = []
    handler = functools.partial(Handler, directory=str(folder), asked=asked)
    with Server(("127.0.0.1", 0), handler) as server:
        threading.Thread(target=server.serve_forever, daemon=True).start()
        yield f"http://127.0.0.1:{server.server_port}", asked
        server.shutdown()
