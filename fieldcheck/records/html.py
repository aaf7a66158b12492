"""The document as HTML: templates decide nothing, every text is escaped and drawable, pictures come as assets."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import segno
from jinja2 import Environment, FileSystemLoader, StrictUndefined
from markupsafe import Markup

from fieldcheck.engine import scale
from fieldcheck.records.document import Document
from fieldcheck.records.typefaces import printable

TEMPLATES = Path(__file__).parent / "templates"
INK = "#1B1D1F"
METALS = {"pass": "#0E5A4B", "conditional pass": "#6B4E00", "conditional fail": "#6B4E00", "fail": "#8A2B12",
          "not judged": "#4A4F55"}
_KINDS = ((b"\xff\xd8\xff", "jpg"), (b"\x89PNG\r\n\x1a\n", "png"), (b"GIF8", "gif"))
_VIEW = re.compile(r'viewBox="\s*(-?[\d.]+)[\s,]+(-?[\d.]+)[\s,]+([\d.]+)[\s,]+([\d.]+)\s*"')
_STROKE = re.compile(r'\s(?:d|points)="([MLQCTSHVZmlqctshvz\d\s.,eE+-]*)"')
_MOST_STROKES, _LONGEST_STROKE = 200, 40_000


@dataclass(frozen=True)
class Page:
    """What the renderer takes: html, css, and the bytes of pictures by asset name."""

    html: str
    css: str
    assets: dict[str, bytes]


def page(document: Document, blobs: Mapping[str, bytes]) -> Page:
    """The document set in HTML. blobs: bytes by SHA-256 of what `document.blobs()` names; what is missing is said."""
    assets: dict[str, bytes] = {}
    environment = _environment(document, blobs, assets)
    text = environment.get_template("record.html").render(doc=document, qr=Markup(_qr(document)))
    return Page(text, (TEMPLATES / "record.css").read_text(encoding="utf-8"), assets)


def qr_text(number: str, digest: str) -> str:
    """What the square code says: record number and SHA-256 of record.json, in capitals so that it stays small."""
    return f"{number} {digest.upper()}"


def _environment(document: Document, blobs: Mapping[str, bytes], assets: dict[str, bytes]) -> Environment:
    environment = Environment(
        loader=FileSystemLoader(TEMPLATES), autoescape=True, undefined=StrictUndefined, trim_blocks=True,
        lstrip_blocks=True, finalize=_drawable,
    )
    environment.globals["sign"] = lambda statement: Markup(_sign(statement))
    environment.filters["drawing"] = lambda svg: Markup(_drawing(svg))
    environment.filters["grouped"] = _grouped
    environment.globals["strokes"] = lambda digest: _strokes_or_note(blobs.get(digest))
    environment.globals["picture"] = lambda digest: _picture(digest, blobs.get(digest), assets)
    return environment


def _drawable(value: Any) -> Any:
    """Text that the bundled faces can draw; our own markup passes as it is."""
    if isinstance(value, Markup) or not isinstance(value, str):
        return value
    return printable(value)


def _grouped(digits: str, size: int = 8) -> str:
    """Hexadecimal digits in groups, for the eye."""
    return " ".join(digits[start: start + size] for start in range(0, len(digits), size))


def _drawing(svg: str) -> str:
    """A scale in the record's ink and face, without the empty edge that the phone needs; figures stay legible."""
    words = svg.partition("<title>")[2].partition("</title>")[0]
    return (svg.replace("currentColor", INK).replace('viewBox="0 0 320 88"', 'viewBox="0 15 320 71"', 1)
            .replace('font-size="11"', 'font-size="12.5"').replace("<svg ", '<svg font-family="Roboto" ', 1)
            .replace('role="img"', f'role="img" aria-label="{words}"', 1))


def _sign(statement: str) -> str:
    svg: str = scale.sign(statement).replace("currentColor", METALS[statement])
    return svg.replace('role="img"', f'role="img" aria-label="{statement}"', 1)


def _qr(document: Document) -> str:
    code = segno.make(qr_text(document.number, document.proofs.digest), error="m", micro=False)
    svg: str = code.svg_inline(border=2, omitsize=True, dark=INK, light=None, svgclass="qr", lineclass=None)
    words = "Square code with record number and SHA-256 of the attached data"
    return svg.replace("<svg ", f'<svg role="img" aria-label="{words}" ', 1)


def _strokes_or_note(blob: bytes | None) -> Markup:
    svg = strokes(blob) if blob is not None else ""
    return Markup(svg) if svg else Markup('<span class="quiet">drawn on the phone; not shown here</span>')


def strokes(blob: bytes) -> str:
    """A drawn signature drawn again from its strokes alone; "" when the blob is not one. A file from a phone is
    never placed in the document itself: an SVG can hold more than lines."""
    try:
        text = blob.decode("ascii")
    except UnicodeDecodeError:
        return ""
    view = _VIEW.search(text)
    found = _STROKE.findall(text)[:_MOST_STROKES]
    if view is None or not found:
        return ""
    lines = []
    for one in found:
        path = one.strip()[:_LONGEST_STROKE]
        path = path if path[:1] in ("M", "m") else "M" + path
        lines.append(f'<path d="{path}" fill="none" stroke="{INK}" stroke-width="2"/>')
    box = " ".join(view.groups())
    return (f'<svg class="strokes" viewBox="{box}" role="img" aria-label="drawn signature" '
            f'xmlns="http://www.w3.org/2000/svg">{"".join(lines)}</svg>')


def _picture(digest: str, blob: bytes | None, assets: dict[str, bytes]) -> str:
    """The asset name of a photograph, "" when there are no bytes of a kind that can be set."""
    if blob is None:
        return ""
    kind = next((kind for start, kind in _KINDS if blob.startswith(start)), "")
    if not kind and blob[:4] == b"RIFF" and blob[8:12] == b"WEBP":
        kind = "webp"
    if not kind:
        return ""
    name = f"photograph-{digest[:16]}.{kind}"
    assets[name] = blob
    return name
