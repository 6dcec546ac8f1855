"""The page: margins, running head with page n of m, bookmarks, and the places kept free for figures."""

from __future__ import annotations

from dataclasses import dataclass
from functools import partial
from io import BytesIO
from typing import Any

from reportlab.lib.colors import HexColor
from reportlab.lib.pagesizes import A4, LETTER
from reportlab.pdfbase.pdfmetrics import stringWidth
from reportlab.pdfgen.canvas import Canvas
from reportlab.platypus import BaseDocTemplate, Flowable, Frame, PageTemplate, Paragraph

from lasescatter.report.styles import INK, MM, RULE, paragraph_styles
from lasescatter.report.typography import SANS, fitted, markup, printable, register_faces

PAGE_SIZES = {"A4": A4, "Letter": LETTER}
TOP = 21 * MM
FOOT = 15 * MM
COLUMN = 174.0
"""Width of the text column, the same on both page sizes. [mm]"""

_HEAD_SIZE = 7.2


def side(page_width: float) -> float:
    """Margin left and right of the text column. [pt]"""
    return (page_width - COLUMN * MM) / 2


@dataclass(frozen=True)
class Place:
    """Where something lies: of a figure the lower left corner, of a heading the upper left. In points."""

    page: int
    """Counted from 0."""
    x: float
    y: float
    name: str


class FigurePlace(Flowable):
    """Room for a figure that is placed into the page afterwards; remembers where it came to lie."""

    def __init__(self, name: str, width: float, height: float) -> None:
        super().__init__()
        self.name, self.width, self.height = name, width, height
        self.spaceAfter = 7
        self.place: Place | None = None

    def wrap(self, available_width: float, available_height: float) -> tuple[float, float]:
        return self.width, self.height

    def draw(self) -> None:
        x, y = self.canv.absolutePosition(0, 0)
        self.place = Place(self.canv.getPageNumber() - 1, x, y, self.name)


class SectionHead(Paragraph):
    """A numbered heading that also enters the outline; remembers where it came to lie."""

    def __init__(self, number: int, title: str) -> None:
        super().__init__(f"{number}&nbsp;&nbsp;{markup(title)}", paragraph_styles()["section"])
        self.name = f"{number} {title}"
        self.place: Place | None = None

    def draw(self) -> None:
        x, y = self.canv.absolutePosition(0, self.height)
        self.place = Place(self.canv.getPageNumber() - 1, x, y, self.name)
        super().draw()


class _CountedPages(Canvas):
    """Holds the pages back until their number is known, then gives each its running head."""

    def __init__(self, *options: Any, head: str = "", **named: Any) -> None:
        super().__init__(*options, **named)
        self._running_head = head
        self._held: list[dict[str, Any]] = []

    def showPage(self) -> None:
        self._held.append(dict(self.__dict__))
        self._startPage()

    def save(self) -> None:
        for number, state in enumerate(self._held, start=1):
            self.__dict__.update(state)
            self._draw_head(f"page {number} of {len(self._held)}")
            super().showPage()
        super().save()

    def _draw_head(self, tail: str) -> None:
        width, height = self._pagesize
        baseline = height - 13 * MM
        # The head goes before everything else on the page, so that text taken from it starts there.
        drawn: list[str] = self._code
        self._code: list[str] = []
        self.saveState()
        self.setFont(SANS, _HEAD_SIZE)
        self.setFillColor(HexColor(INK))
        left = side(width)
        room = COLUMN * MM - stringWidth(tail, SANS, _HEAD_SIZE) - 12
        self.drawString(left, baseline, fitted(self._running_head, SANS, _HEAD_SIZE, room))
        self.drawRightString(width - left, baseline, tail)
        self.setStrokeColor(HexColor(RULE))
        self.setLineWidth(0.5)
        self.line(left, baseline - 4, width - left, baseline - 4)
        self.restoreState()
        self._code = drawn[:1] + self._code + drawn[1:]


@dataclass(frozen=True)
class Pages:
    """The document without its figures, and where things lie in it."""

    data: bytes
    figures: tuple[Place, ...]
    sections: tuple[Place, ...]


def paginate(story: list[Any], page_size: str, head: str, title: str, author: str, subject: str) -> Pages:
    """Break a story into pages."""
    register_faces()
    width, height = PAGE_SIZES[page_size]
    target = BytesIO()
    document = BaseDocTemplate(
        target,
        pagesize=(width, height),
        initialFontName=SANS,
        invariant=1,
        pageCompression=1,
        title=printable(title),
        author=printable(author),
        subject=printable(subject),
        creator="lasescatter",
        lang="en-GB",
    )
    bare = {"leftPadding": 0, "rightPadding": 0, "topPadding": 0, "bottomPadding": 0}
    frame = Frame(side(width), FOOT, COLUMN * MM, height - TOP - FOOT, **bare)
    document.addPageTemplates([PageTemplate(id="page", frames=[frame])])
    document.build(story.copy(), canvasmaker=partial(_CountedPages, head=printable(head)))
    pieces = _flattened(story)
    return Pages(
        target.getvalue(),
        tuple(piece.place for piece in pieces if isinstance(piece, FigurePlace) and piece.place is not None),
        tuple(piece.place for piece in pieces if isinstance(piece, SectionHead) and piece.place is not None),
    )


def _flattened(story: list[Any]) -> list[Any]:
    from reportlab.platypus import KeepTogether

    found: list[Any] = []
    for piece in story:
        found.extend(_flattened(list(piece._content)) if isinstance(piece, KeepTogether) else [piece])
    return found
