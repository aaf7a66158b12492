"""The faces that every record is set in, and which characters they can draw.

They are bundled (licences beside them in fonts/) and the only ones in sight while rendering: a face borrowed from
the machine would change the bytes from one machine to the next. A character that no face covers would be drawn as
an empty box, which a reader cannot tell from another and PDF/A-3 forbids (ISO 19005-3, 6.2.11.8, as the checker
numbers it); `printable` writes its code point instead, while record.json keeps the exact text.
"""

from __future__ import annotations

import functools
import unicodedata
from pathlib import Path

FOLDER = Path(__file__).parent / "fonts"
# family, weight, style, file; text is set in the first family, what it lacks in the second
FACES = (
    ("Roboto", 400, "normal", "Roboto-Regular.ttf"),
    ("Roboto", 500, "normal", "Roboto-Medium.ttf"),
    ("Roboto", 400, "italic", "Roboto-Italic.ttf"),
    ("DejaVu Sans", 400, "normal", "DejaVuSans.ttf"),
)
STACK = 'Roboto, "DejaVu Sans"'
_FALLBACK = "DejaVu Sans"
_LAYOUT = "\n\r\t"
_INVISIBLE = ("Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp")  # controls, bidirectional overrides, surrogates, unassigned
_SOFT_HYPHEN = "\u00ad"


def face_rules() -> str:
    """CSS that declares the bundled faces and sets everything in them, monospaced elements included."""
    rules = [
        f'@font-face {{ font-family: "{family}"; font-weight: {weight}; font-style: {style};'
        f" src: url(asset:fonts/{file}) }}"
        for family, weight, style, file in FACES
    ]
    rules.append(f"html, code, pre, kbd, samp {{ font-family: {STACK} }}")
    return "\n".join(rules)


def uncovered(text: str) -> list[str]:
    """The characters of `text` that no bundled face draws, or that would be invisible, each once, in order."""
    return sorted({character for character in text if not _drawn(character)})


def printable(text: str) -> str:
    """`text` with every character that cannot be drawn written as its code point, such as [U+6C34].

    Line breaks and tabs stay; controls, invisible marks and lone surrogates are spelled out too, so that nothing
    in a record reads other than it is.
    """
    return "".join([character if _drawn(character) else f"[U+{ord(character):04X}]" for character in text])


def _drawn(character: str) -> bool:
    if character in _LAYOUT or character == _SOFT_HYPHEN:
        return True
    return ord(character) in _covered() and unicodedata.category(character) not in _INVISIBLE


@functools.cache
def _covered() -> frozenset[int]:
    """Code points drawn whatever the weight and style: by every face of the first family, or by the fallback."""
    from fontTools.ttLib import TTFont  # type: ignore[import-untyped]  # the library ships no types

    first: frozenset[int] | None = None
    fallback: frozenset[int] = frozenset()
    for family, _, _, file in FACES:
        with TTFont(FOLDER / file, lazy=True) as font:
            points = frozenset(font.getBestCmap())
        if family == _FALLBACK:
            fallback |= points
        else:
            first = points if first is None else first & points
    return (first or frozenset()) | fallback
