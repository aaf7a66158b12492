"""Document to PDF/A-3b, in a child process that has no network, few files, little memory and little time.

The child (`render`) does the work; this module starts it and carries its answer or its error back. WeasyPrint is
loaded only there: it changes settings of the image library for the whole process, and on a machine without Pango
its very import fails.
"""

from __future__ import annotations

import json
import os
import pickle
import subprocess
import sys
import tempfile
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import NamedTuple

from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.records.typefaces import printable, uncovered

__all__ = ["Attachment", "printable", "render", "uncovered"]

TIMEOUT_S = 90.0
PACKAGE_ROOT = Path(__file__).resolve().parents[2]
# No directory: the bundled faces, handed over by the style sheet, are the only ones that exist.
NO_SYSTEM_FONTS = '<?xml version="1.0"?><fontconfig><cachedir>{cache}</cachedir></fontconfig>'
KEPT = ("PATH", "LD_LIBRARY_PATH", "SYSTEMROOT")


class Attachment(NamedTuple):
    """A file carried inside the PDF; its relationship to the document is /Data."""

    name: str
    content: bytes
    description: str
    mime: str


@dataclass(frozen=True)
class Order:
    """All that the child is told. when: UTC, whole seconds."""

    html: str
    css: str
    attachments: tuple[Attachment, ...]
    when: datetime
    assets: Mapping[str, bytes]
    timeout_s: float


def render(
    html: str,
    css: str,
    attachments: Iterable[tuple[str, bytes, str, str]],
    when: datetime,
    assets: Mapping[str, bytes],
    timeout_s: float = TIMEOUT_S,
) -> bytes:
    """The unsealed PDF/A-3b of a document; the same input gives the same bytes.

    html: whole document with `lang` and `title`, user text already escaped and passed through `printable`, each
    picture with its `alt`; it may refer to `asset:NAME` alone, NAME a key of `assets`. css: placed after our own
    declaration of the bundled faces. attachments: (name, bytes, description, media type), names unique.
    when: date of the document and of its attachments, with time zone.
    Raises FieldcheckError when the document asks for anything else, holds a character that no face covers, a
    picture cannot be drawn, Pango is missing, or time or memory run out.
    """
    if when.tzinfo is None:
        raise FieldcheckError("the date of a document needs its time zone", "when", "pass a datetime in UTC")
    ordered = tuple(sorted(Attachment(*attachment) for attachment in attachments))
    names = [attachment.name for attachment in ordered]
    if len(set(names)) != len(names):
        raise FieldcheckError("two attachments have one name", ", ".join(names))
    moment = when.astimezone(UTC).replace(microsecond=0)
    order = Order(html, css, ordered, moment, dict(assets), timeout_s)
    with tempfile.TemporaryDirectory(prefix="record-") as folder:
        answer = _run(pickle.dumps(order), Path(folder), timeout_s)
    return _pdf_of(answer)


def _run(order: bytes, folder: Path, timeout_s: float) -> subprocess.CompletedProcess[bytes]:
    fonts = folder / "fonts.conf"
    fonts.write_text(NO_SYSTEM_FONTS.format(cache=folder / "cache"), encoding="utf-8")
    surroundings = {name: os.environ[name] for name in KEPT if name in os.environ}
    surroundings |= {
        "FONTCONFIG_FILE": str(fonts),
        "HOME": str(folder),
        "TMPDIR": str(folder),
        "PYTHONPATH": str(PACKAGE_ROOT),
        "PYTHONDONTWRITEBYTECODE": "1",
        "LC_ALL": "C.UTF-8",
        "TZ": "UTC",
    }
    command = [sys.executable, "-m", "fieldcheck.records.render"]
    try:
        return subprocess.run(
            command, input=order, capture_output=True, timeout=timeout_s, env=surroundings, cwd=folder, check=False
        )
    except subprocess.TimeoutExpired as error:
        raise FieldcheckError(
            "the document took too long to draw", f"{timeout_s:g} s", "use fewer or smaller pictures"
        ) from error


def _pdf_of(answer: subprocess.CompletedProcess[bytes]) -> bytes:
    """First line of the child's answer: JSON, an error's what, where and mend, or {}; then the PDF."""
    head, _, pdf = answer.stdout.partition(b"\n")
    try:
        error = json.loads(head)
    except ValueError:
        last = answer.stderr.decode("utf-8", "replace").strip().splitlines()[-1:]
        raise FieldcheckError(
            "the process that draws the document broke off",
            f"exit {answer.returncode}",
            "".join(last) or "it may have run out of memory: use fewer or smaller pictures",
        ) from None
    if error:
        raise FieldcheckError(str(error["what"]), str(error["where"]), str(error["mend"]))
    return pdf
