"""Who may ask, and what every answer carries: Host, Origin, sizes, Content-Security-Policy.

The desk answers on loopback only, yet any web page open in the same browser can send requests there, and a name
that resolves to 127.0.0.1 can pose as it.  So the Host must be one of ours, and a write must come from our own page
(Origin, Sec-Fetch-Site) or from a program that is no browser and sends neither.
"""

from __future__ import annotations

from flask import Flask, Response, request
from werkzeug.exceptions import Forbidden, MisdirectedRequest

NAMES = ("127.0.0.1", "localhost", "[::1]")
READS = ("GET", "HEAD", "OPTIONS")
FORM_BYTES = 1 << 20
BATCH_BYTES = 8 << 20
BLOB_BYTES = 32 << 20
RECORD_BYTES = 30 << 20

POLICY = "; ".join((
    "default-src 'none'", "script-src 'self'", "style-src 'self'", "img-src 'self' blob: data:",
    "media-src 'self' blob:", "connect-src 'self'", "font-src 'self'", "manifest-src 'self'", "worker-src 'self'",
    "form-action 'self'", "base-uri 'none'", "frame-ancestors 'none'",
))
HEADERS = {
    "Content-Security-Policy": POLICY,
    "X-Content-Type-Options": "nosniff",
    "Referrer-Policy": "same-origin",
    "Cross-Origin-Opener-Policy": "same-origin",
    "Cross-Origin-Embedder-Policy": "require-corp",
    "Cross-Origin-Resource-Policy": "same-origin",
    "Permissions-Policy": "camera=(self), microphone=(self), geolocation=(), usb=(), payment=()",
}


def install(app: Flask) -> None:
    """Puts the checks before every request and the headers on every answer."""
    app.before_request(check)
    app.after_request(dressed)


def own_hosts() -> set[str]:
    """The Host values under which this server may be asked, at the port where the request came in."""
    port = int(request.environ.get("SERVER_PORT") or 80)
    hosts = {f"{name}:{port}" for name in NAMES}
    return hosts | set(NAMES) if port == 80 else hosts


def check() -> None:
    """Refuses a request for another host, a write from another page, and a body too large for where it goes."""
    host = request.headers.get("Host", "").lower()
    if host not in own_hosts():
        raise MisdirectedRequest(f'this desk does not answer as "{host[:80]}": use http://127.0.0.1')
    site = request.headers.get("Sec-Fetch-Site", "")
    if request.method not in READS:
        origin = request.headers.get("Origin")
        if origin is not None and origin.lower() != f"http://{host}":
            raise Forbidden("this came from another page: write from the desk's own pages")
        if site not in ("", "same-origin"):
            raise Forbidden("this came from another page: write from the desk's own pages")
    elif site in ("cross-site", "same-site") and request.headers.get("Sec-Fetch-Mode") != "navigate":
        raise Forbidden("another page asked for this: open it in the desk itself")
    request.max_content_length = _limit(request.path)


def _limit(path: str) -> int:
    if path.startswith("/api/blobs/"):
        return BLOB_BYTES
    if path == "/records/verify":
        return RECORD_BYTES
    return BATCH_BYTES if path.startswith("/api/") else FORM_BYTES


def dressed(answer: Response) -> Response:
    """Adds the headers that every answer carries; what changes is never kept by a cache."""
    for name, value in HEADERS.items():
        answer.headers.setdefault(name, value)
    answer.headers.setdefault("Cache-Control", "no-store")
    answer.headers.pop("Date", None)        # the server adds its own
    return answer
