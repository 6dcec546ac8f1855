"""House style of the printed report: inks, paragraph styles, tables. Everything reads in grey."""

from __future__ import annotations

from functools import lru_cache
from typing import TYPE_CHECKING, Any

from lasescatter.limits.verdict import ABOVE, BELOW, Verdict
from lasescatter.report.typography import BOLD, MONO, OBLIQUE, SANS, markup, register_faces

if TYPE_CHECKING:
    from reportlab.lib.styles import ParagraphStyle
    from reportlab.platypus import Flowable, Table

INK = "#1b1b1e"
DEEP = "#2a3550"
RULE = "#8b8b86"
PALE = "#ecebe6"
TINT = "#f4f3ef"

MM = 72 / 25.4

TALLEST_ROW = 560.0
"""With its head, a taller row would not fit on a page of either size. [pt]"""


@lru_cache(maxsize=1)
def paragraph_styles() -> dict[str, ParagraphStyle]:
    """Named paragraph styles."""
    from reportlab.lib.colors import HexColor
    from reportlab.lib.styles import ParagraphStyle

    register_faces()
    body = ParagraphStyle(
        "body",
        fontName=SANS,
        bulletFontName=SANS,
        fontSize=8.6,
        leading=11.6,
        textColor=HexColor(INK),
        spaceAfter=3,
        splitLongWords=1,
    )
    deep = HexColor(DEEP)
    variants: dict[str, dict[str, Any]] = {
        "kind": {"fontSize": 8, "leading": 10, "textColor": deep, "spaceAfter": 1},
        "title": {"fontName": BOLD, "fontSize": 16, "leading": 19.5, "textColor": deep, "spaceAfter": 5},
        "section": {
            "fontName": BOLD, "fontSize": 12, "leading": 15, "textColor": deep, "spaceBefore": 9, "spaceAfter": 4,
            "keepWithNext": 1,
        },
        "subsection": {
            "fontName": BOLD, "fontSize": 9.2, "leading": 12, "spaceBefore": 6, "spaceAfter": 2.5, "keepWithNext": 1,
        },
        "note": {"fontSize": 7.4, "leading": 9.8, "spaceAfter": 3},
        "cell": {"fontSize": 7.3, "leading": 9.1, "spaceAfter": 0},
        "cell number": {"fontSize": 7.3, "leading": 9.1, "spaceAfter": 0, "alignment": 2},
        "cell bold": {"fontName": BOLD, "fontSize": 7.3, "leading": 9.1, "spaceAfter": 0},
        "head": {"fontName": BOLD, "fontSize": 7, "leading": 8.6, "spaceAfter": 0},
        "head number": {"fontName": BOLD, "fontSize": 7, "leading": 8.6, "spaceAfter": 0, "alignment": 2},
        "verdict": {"fontName": BOLD, "fontSize": 11.5, "leading": 15, "spaceAfter": 0},
        "item": {"leftIndent": 11, "bulletIndent": 1, "spaceAfter": 1, "fontSize": 8, "leading": 10.6},
        "small item": {"leftIndent": 11, "bulletIndent": 1, "spaceAfter": 0.5, "fontSize": 7.4, "leading": 9.4},
        "caution": {"leftIndent": 18, "bulletIndent": 0, "spaceAfter": 3},
        "equation": {"leftIndent": 14, "fontSize": 9, "leading": 14.5, "spaceAfter": 1},
        "mono": {"fontName": MONO, "fontSize": 6.9, "leading": 8.8, "spaceAfter": 0},
        "aside": {"fontName": OBLIQUE, "fontSize": 7.4, "leading": 9.8},
    }  # fmt: skip
    made = {"body": body}
    made.update({name: ParagraphStyle(name, parent=body, **values) for name, values in variants.items()})
    return made


def paragraph(text: str, style: str = "body", bullet: str | None = None) -> Flowable:
    """A paragraph of our own markup; user text must have gone through `markup` first."""
    from reportlab.platypus import Paragraph

    return Paragraph(text, paragraph_styles()[style], bulletText=bullet)


def words(text: str, style: str = "cell", limit: int | None = 400) -> Flowable:
    """A paragraph of user text: nothing in it is read as markup."""
    return paragraph(markup(text, limit), style)


def heads(*texts: str, numeric_from: int = 99) -> list[Flowable]:
    """A head row; columns from `numeric_from` on are set flush right."""
    return [paragraph(text, "head number" if i >= numeric_from else "head") for i, text in enumerate(texts)]


def number_cell(text: str) -> Flowable:
    """A cell set flush right that may break over lines."""
    return paragraph(markup(text), "cell number")


def ruled(
    rows: list[list[Any]],
    widths: list[float],
    numeric: tuple[int, ...] = (),
    extra: list[tuple[Any, ...]] | None = None,
    head_rows: int = 1,
    dense: bool = False,
    tied: tuple[int, ...] = (),
) -> Table:
    """A table under one head that is repeated on every page. Widths in mm.

    `dense` sets columns of plain numbers close, with a tint under every other five rows. `tied` are rows that
    stay with the next one: no line and no page break between them. Columns of `numeric` are set flush right.
    """
    from reportlab.lib.colors import HexColor
    from reportlab.platypus import TableStyle

    style: list[tuple[Any, ...]] = [
        ("FONT", (0, 0), (-1, -1), SANS, 7.3, 9.1),
        ("TEXTCOLOR", (0, 0), (-1, -1), HexColor(INK)),
        ("VALIGN", (0, 0), (-1, -1), "TOP"),
        ("LEFTPADDING", (0, 0), (-1, -1), 2.5),
        ("RIGHTPADDING", (0, 0), (-1, -1), 2.5),
        ("TOPPADDING", (0, 0), (-1, -1), 1.6),
        ("BOTTOMPADDING", (0, 0), (-1, -1), 2.2),
        ("LINEABOVE", (0, 0), (-1, 0), 0.8, HexColor(DEEP)),
        ("LINEBELOW", (0, -1), (-1, -1), 0.6, HexColor(DEEP)),
    ]
    if head_rows:
        style += [
            ("BACKGROUND", (0, 0), (-1, head_rows - 1), HexColor(PALE)),
            ("LINEBELOW", (0, head_rows - 1), (-1, head_rows - 1), 0.6, HexColor(DEEP)),
            ("VALIGN", (0, 0), (-1, head_rows - 1), "BOTTOM"),
        ]
    if not dense:
        style += [
            ("LINEBELOW", (0, row), (-1, row), 0.25, HexColor(RULE))
            for row in range(head_rows, len(rows) - 1)
            if row not in tied
        ]
    else:
        style += [
            ("BACKGROUND", (0, row), (-1, min(row + 4, len(rows) - 1)), HexColor(TINT))
            for row in range(head_rows + 5, len(rows), 10)
        ]
        style += [
            ("FONT", (0, head_rows), (-1, -1), SANS, 6.3, 7.3),
            ("TOPPADDING", (0, head_rows), (-1, -1), 0),
            ("BOTTOMPADDING", (0, head_rows), (-1, -1), 0.2),
            ("TOPPADDING", (0, head_rows), (-1, head_rows), 1.5),
        ]
    style += [("ALIGN", (column, head_rows), (column, -1), "RIGHT") for column in numeric]
    # A number flush right before words flush left: 3 mm between them.
    style += [
        ("LEFTPADDING", (column + 1, 0), (column + 1, -1), 6.0)
        for column in numeric
        if column + 1 < len(widths) and column + 1 not in numeric
    ]
    style += [("NOSPLIT", (0, row), (-1, row + 1)) for row in tied]
    return _whole_row_table()(
        rows,
        colWidths=[width * MM for width in widths],
        repeatRows=head_rows,
        hAlign="LEFT",
        style=TableStyle(style + (extra or [])),
        spaceBefore=2,
        spaceAfter=6,
    )


@lru_cache(maxsize=1)
def _whole_row_table() -> type[Table]:
    """A table that breaks inside a row only where the row is taller than a page."""
    from reportlab.platypus import Table

    class WholeRows(Table):
        def split(self, availWidth: float, availHeight: float) -> list[Flowable]:
            self._calc(availWidth, availHeight)
            self.splitInRow = int(max(self._rowHeights, default=0.0) > TALLEST_ROW)
            found: list[Flowable] = super().split(availWidth, availHeight)
            return found

    return WholeRows


def verdict_words(verdict: Verdict) -> str:
    """A verdict as our markup: told apart by words and weight, not by colour."""
    if verdict == ABOVE:
        return f'<font name="{BOLD}" backColor="{INK}" color="white">&nbsp;{verdict}&nbsp;</font>'
    if verdict == BELOW:
        return verdict
    return f'<font name="{BOLD}"><u>{verdict}</u></font>'


def answer_words(verdict: Verdict) -> str:
    """Whether one row's ratio is at most 1: yes, no or open, as our markup."""
    from lasescatter.report.standing import ANSWERS

    word = ANSWERS[verdict]
    if verdict == ABOVE:
        return f'<font name="{BOLD}" backColor="{INK}" color="white">&nbsp;{word}&nbsp;</font>'
    return word if verdict == BELOW else f'<font name="{BOLD}"><u>{word}</u></font>'
