"""A small invented document with everything a record has: pictures, drawing, Greek letters, table, attachments."""

from __future__ import annotations

import io
from datetime import UTC, datetime

from PIL import Image

WHEN = datetime(2026, 12, 1, 10, 0, tzinfo=UTC)
DATA = '{"reading":"0.50","unit":"Ω","note":"взято 水"}\n'.encode()
CSS = """
@page { size: A4; margin: 20mm; @bottom-center { content: "page " counter(page) " of " counter(pages) } }
h1 { font-weight: 500 } th { text-align: left }
"""
DRAWING = """<svg xmlns="http://www.w3.org/2000/svg" width="200" height="40" viewBox="0 0 200 40">
<line x1="5" y1="20" x2="195" y2="20" stroke="#222" stroke-width="2"/>
<text x="60" y="12" font-size="10" font-family="Roboto">0.5 Ω ✓</text></svg>"""
HTML = f"""<!doctype html><html lang="en"><head><meta charset="utf-8"><title>Record FC-1</title>
<meta name="author" content="Invented Workshop"></head><body>
<h1>Contact set K3 <b>✓</b></h1>
<p>U = 1.2 mΩ, τ = 90 s, Δϑ ≤ 30 K, ⌀ 4 mm, −5 °C, <i>μ</i> → ∞ and <code>k²S²</code></p>
<table><thead><tr><th>as found</th><th>as left</th></tr></thead>
<tbody><tr><td>0.52 Ω</td><td>0.11 Ω</td></tr></tbody></table>
<p><img src="asset:photo.jpg" alt="photograph" width="120"><img src="asset:mark.png" alt="signature" width="60">
<img src="asset:scale.svg" alt="scale"></p>{DRAWING.replace("<svg ", '<svg role="img" aria-label="scale" ')}
</body></html>"""


def picture(kind: str, mode: str = "RGB") -> bytes:
    """A small picture; JPEG gradients are not flat, so that scaling would interpolate."""
    image = Image.linear_gradient("L").resize((400, 300)).convert(mode)
    if mode == "RGBA":
        image.putalpha(Image.linear_gradient("L").resize((400, 300)))
    held = io.BytesIO()
    image.save(held, kind)
    return held.getvalue()


def assets() -> dict[str, bytes]:
    return {"photo.jpg": picture("JPEG"), "mark.png": picture("PNG", "RGBA"), "scale.svg": DRAWING.encode()}


ATTACHMENTS = [
    ("record.json", DATA, "the record's data", "application/json"),
    ("events.txt", b"one\ntwo\n", "the exact events", "text/plain"),
]
