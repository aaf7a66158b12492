"""The phone's files, as the build laid them out: an index and a/ with names that carry their content's hash."""

from __future__ import annotations

import mimetypes
from pathlib import Path

from flask import Blueprint, current_app, redirect, send_from_directory, url_for
from flask.typing import ResponseReturnValue

from fieldcheck.engine.errors import NotFound

bp = Blueprint("phone", __name__, url_prefix="/phone")

KEY = "FIELDCHECK_PHONE"
PACKAGE = Path(__file__).resolve().parent.parent
INSTALLED = PACKAGE / "_data" / "phone"
CHECKOUT = PACKAGE.parent / "webui" / "dist"

mimetypes.add_type("application/manifest+json", ".webmanifest")
mimetypes.add_type("text/javascript", ".js")


def folder() -> Path:
    """Where the phone's files are: in the installed package, else in the checkout."""
    return INSTALLED if INSTALLED.is_dir() else CHECKOUT


@bp.get("/")
def index() -> ResponseReturnValue:
    """The phone's one page; asked for anew each time, so that an update is seen."""
    return _file("index.html", "no-cache")


@bp.get("")
def without_slash() -> ResponseReturnValue:
    """The page's links are relative to the folder."""
    return redirect(url_for("phone.index"))


@bp.get("/a/<path:name>")
def hashed(name: str) -> ResponseReturnValue:
    """A file that never changes under its name."""
    return _file(f"a/{name}", "public, max-age=31536000, immutable")


@bp.get("/<path:name>")
def other(name: str) -> ResponseReturnValue:
    """What must keep a plain name."""
    return _file(name, "no-cache")


def _file(name: str, cache: str) -> ResponseReturnValue:
    root: Path = current_app.config[KEY]
    if not (root / "index.html").is_file():
        raise NotFound("the phone has not been built", "", "run: python webui/build.py")
    answer = send_from_directory(root, name)
    answer.headers["Cache-Control"] = cache
    return answer
