"""The text that the pages of a PDF show, read back through each face's own map to Unicode (ISO 32000-1, 9.10.3).

Only as much of PDF as our own records use: text shown by Tj and TJ with two-byte codes and a ToUnicode map.
"""

from __future__ import annotations

import io
import re
from typing import Any

import pikepdf

_BLOCK = re.compile(rb"begin(bfchar|bfrange)(.*?)end\1", re.DOTALL)
_HEX = re.compile(rb"<([0-9A-Fa-f]*)>")
Codes = dict[int, str]


def pages_text(pdf: bytes) -> list[str]:
    """One text a page, without any white space: what breaks over lines or is set in pieces is then found whole."""
    with pikepdf.open(io.BytesIO(pdf), attempt_recovery=False) as document:
        return [squeezed(_shown(page)) for page in document.pages]


def squeezed(text: str) -> str:
    """A text without white space and soft hyphens."""
    return "".join(text.replace("\u00ad", "").split())


def _shown(page: Any) -> str:
    codes = {str(name): _codes(font) for name, font in page.Resources.get("/Font", {}).items()}
    out: list[str] = []
    _read(page, page.Resources, codes, out)
    return "".join(out)


def _read(stream: Any, resources: Any, codes: dict[str, Codes], out: list[str]) -> None:
    current: Codes = {}
    for instruction in pikepdf.parse_content_stream(stream):
        operands: Any = instruction.operands
        name = str(instruction.operator)
        if name == "Tf":
            current = codes.get(str(operands[0]), {})
        elif name == "Tj":
            out.append(_decoded(operands[0], current))
        elif name == "TJ":
            out += [_decoded(piece, current) for piece in operands[0] if isinstance(piece, pikepdf.String)]
        elif name == "Do":
            inner = resources.get("/XObject", {}).get(str(operands[0]))
            if inner is not None and inner.get("/Subtype") == "/Form":
                own = inner.get("/Resources", resources)
                fonts = {str(key): _codes(font) for key, font in own.get("/Font", {}).items()}
                _read(inner, own, fonts or codes, out)


def _decoded(shown: Any, codes: Codes) -> str:
    data = bytes(shown)
    return "".join(codes.get(int.from_bytes(data[place: place + 2], "big"), "") for place in range(0, len(data), 2))


def _codes(font: Any) -> Codes:
    """code -> text of a face."""
    found: Codes = {}
    if "/ToUnicode" not in font:
        return found
    for kind, body in _BLOCK.findall(font.ToUnicode.read_bytes()):
        given = [bytes.fromhex(digits.decode()) for digits in _HEX.findall(body)]
        if kind == b"bfchar":
            for code, text in zip(given[::2], given[1::2], strict=True):
                found[int.from_bytes(code, "big")] = text.decode("utf-16-be")
        else:
            for first, last, text in zip(given[::3], given[1::3], given[2::3], strict=True):
                start, end = int.from_bytes(first, "big"), int.from_bytes(last, "big")
                for place in range(start, end + 1):
                    found[place] = chr(ord(text.decode("utf-16-be")) + place - start)
    return found
