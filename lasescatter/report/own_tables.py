"""Files that the site file names, as they are: sizes, indices and matrices of the user's own, for the reviewer."""

from __future__ import annotations

from typing import Any

from lasescatter.assessment.outcome import Assessment
from lasescatter.report.styles import paragraph, paragraph_styles
from lasescatter.report.typography import markup, printable

MOST_LINES = 240
"""Longer files are cut."""
_WIDTH = 116
"""Characters of a row on paper."""
_HEIGHT = 40
"""Lines that stand under one another before the next column begins."""
_GAP = 3


def own_tables(assessment: Assessment) -> list[Any]:
    """Every file's text, line by line with its numbers."""
    story: list[Any] = []
    for name, text in assessment.scene.files.items():
        story += _table(name, text if isinstance(text, str) else "")
    if not story:
        return []
    return [
        paragraph("Files that the site file names", "subsection"),
        paragraph(
            "As read, line by line, down the columns; the number before the colon is that of the line and not in the "
            "file. Mass, number and effective radius of a load with such sizes follow from them.",
            "note",
        ),
        *story,
    ]


def _table(name: str, text: str) -> list[Any]:
    from reportlab.platypus import XPreformatted

    lines = text.splitlines()
    head = f"<b>{markup(name, 200)}</b>, {len(lines)} lines"
    if len(lines) > MOST_LINES:
        head += f"; the first {MOST_LINES} are printed, the full text is in the record"
    shown = paper_lines(lines[:MOST_LINES])
    style = paragraph_styles()["mono"]
    return [paragraph(head, "note"), *(XPreformatted(markup_of_row(row), style) for row in shown)]


def markup_of_row(row: str) -> str:
    """A row of the fixed-width face; spaces kept."""
    from xml.sax.saxutils import escape

    return escape(row)


def paper_lines(lines: list[str]) -> list[str]:
    """Numbered lines in as many columns as fit; a line too long for the paper goes on in the next row."""
    cells: list[str] = []
    room = _WIDTH - 6
    for number, line in enumerate(lines, start=1):
        whole = printable(line.replace("\t", "    "))
        parts = [whole[i : i + room] for i in range(0, len(whole), room)] or [""]
        cells += [f"{number:>4}: {parts[0]}", *(f"      {part}" for part in parts[1:])]
    widest = max((len(cell) for cell in cells), default=1)
    columns = max(1, min(4, (_WIDTH + _GAP) // (widest + _GAP)))
    rows: list[str] = []
    for start in range(0, len(cells), columns * _HEIGHT):
        block = cells[start : start + columns * _HEIGHT]
        height = -(-len(block) // columns)
        rows += [
            (" " * _GAP).join(f"{cell:<{widest}}" for cell in block[row::height]).rstrip() for row in range(height)
        ]
    return rows
