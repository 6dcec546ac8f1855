"""Typefaces of the report and what happens to text before it is set in them.

Everything a user wrote goes through `printable` (what can be shown) and, inside flowing text, through
`markup` (nothing in it is read as a tag). The typefaces are the DejaVu files that matplotlib ships.
"""

from __future__ import annotations

import re
import unicodedata
from functools import lru_cache
from xml.sax.saxutils import escape

SANS = "Report-Sans"
BOLD = "Report-Sans-Bold"
OBLIQUE = "Report-Sans-Oblique"
MONO = "Report-Mono"

FACES = {
    SANS: "DejaVuSans.ttf",
    BOLD: "DejaVuSans-Bold.ttf",
    OBLIQUE: "DejaVuSans-Oblique.ttf",
    MONO: "DejaVuSansMono.ttf",
}

_SPACES = re.compile(r"[\t\n\r\x0b\x0c\x85]+")
_SPACE_RUN = re.compile(r" (?= )|^ | $")
# Written from right to left; setting them from left to right would misspell them.
_RIGHT_TO_LEFT = {"R", "AL", "AN", "RLE", "RLO", "RLI"}
# Control, format, surrogate, private use, unassigned, line and paragraph separators.
_UNSETTABLE = {"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"}


@lru_cache(maxsize=1)
def register_faces() -> None:
    """Make the typefaces known to reportlab; needed once before anything is set."""
    import matplotlib
    from reportlab.pdfbase import pdfmetrics
    from reportlab.pdfbase.ttfonts import TTFont

    for name, file in FACES.items():
        pdfmetrics.registerFont(TTFont(name, f"{matplotlib.get_data_path()}/fonts/ttf/{file}"))
    pdfmetrics.registerFontFamily(SANS, normal=SANS, bold=BOLD, italic=OBLIQUE, boldItalic=BOLD)


@lru_cache(maxsize=1)
def _covered() -> frozenset[int]:
    """Code points that every face of the report has."""
    from reportlab.pdfbase import pdfmetrics

    register_faces()
    found = [frozenset(pdfmetrics.getFont(name).face.charToGlyph) for name in FACES]
    return frozenset.intersection(*found)


def code_point(character: str) -> str:
    """A character by its number, for example "[U+6F22]"."""
    return f"[U+{ord(character):04X}]"


def _unsettable(character: str) -> bool:
    return unicodedata.category(character) in _UNSETTABLE or unicodedata.bidirectional(character) in _RIGHT_TO_LEFT


def plain(text: str) -> str:
    """Text for a terminal or a text file: control, format and right-to-left characters by their number."""
    text = _SPACES.sub(" ", unicodedata.normalize("NFC", text))
    if text.isascii() and text.isprintable():
        return text
    return "".join(code_point(c) if _unsettable(c) else c for c in text)


@lru_cache(maxsize=4096)
def printable(text: str) -> str:
    """Text as the report's typefaces can show it.

    A character that they lack, that steers the text instead of showing, or that runs from right to left
    is written as its code point. Those above U+FFFF too: the PDF's own character map has no room for them.
    """
    text = plain(text)
    if text.isascii():
        return text
    covered = _covered()
    return "".join(c if ord(c) in covered and ord(c) <= 0xFFFF else code_point(c) for c in text)


def markup(text: str, limit: int | None = None) -> str:
    """User text for a flowing paragraph: printable, nothing in it read as a tag, runs of spaces kept."""
    shown = printable(text)
    if limit is not None:
        shown = shortened(shown, limit)
    return escape(_SPACE_RUN.sub("\u00a0", shown))


def shortened(text: str, limit: int) -> str:
    """Text cut to `limit` characters."""
    return text if len(text) <= limit else text[: max(1, limit - 1)] + "…"


def both_ends(text: str, limit: int) -> str:
    """Text cut to `limit` characters in its middle: names often differ at their end only."""
    if len(text) <= limit:
        return text
    tail = (limit - 3) // 2
    return f"{text[: limit - 3 - tail].rstrip()} … {text[len(text) - tail :].lstrip()}"


def abridged(text: str, limit: int) -> str:
    """Text cut to `limit` characters, with its true length where it was cut."""
    if len(text) <= limit:
        return text
    tail = f"… ({len(text)} characters)"
    return text[: max(1, limit - len(tail))] + tail


def fitted(text: str, face: str, size: float, width: float) -> str:
    """Printable text cut to a width. [pt]"""
    from reportlab.pdfbase.pdfmetrics import stringWidth

    register_faces()
    if stringWidth(text, face, size) <= width:
        return text
    low, high = 0, len(text)
    while low < high:
        middle = (low + high + 1) // 2
        if stringWidth(text[:middle] + "…", face, size) <= width:
            low = middle
        else:
            high = middle - 1
    return text[:low] + "…"
