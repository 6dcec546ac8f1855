"""Lines and tables for a terminal: at most 80 columns, wrapped by the cells that characters take."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from rich.console import Console

WIDTH = 80
GAP = 2
"""Cells between the columns of a table."""


class TextPage:
    """Lines wrapped by the cells that their characters take, cut at the console's width or 80."""

    def __init__(self, console: Console) -> None:
        self.console = console
        self.width = max(20, min(WIDTH, console.width))

    def say(self, text: str, indent: int = 0, style: str = "") -> None:
        for line in wrapped(encodable(text, self.console.encoding), self.width, indent):
            self._put(line, style)

    def item(self, text: str) -> None:
        self.say(f"  - {text}", indent=4)

    def gap(self) -> None:
        self.console.print()

    def _put(self, line: str, style: str = "") -> None:
        from rich.text import Text

        self.console.print(Text(line.rstrip(), style=style), soft_wrap=True)

    def table(
        self, head: Sequence[str], rows: Sequence[Sequence[str]], widths: Sequence[int], numeric: int = 99
    ) -> None:
        """Columns of fixed widths under a head; words wrap inside their column.

        Columns from `numeric` on are set flush right. On a console too narrow for the widths each row becomes a
        block of lines, "head: cell".
        """
        if sum(widths) + GAP * (len(widths) - 1) > self.width:
            for row in rows:
                for name, cell in zip(head, row, strict=True):
                    if cell:
                        self.say(f"{name}: {cell}" if name else cell, indent=4)
            return
        self._row(head, widths, numeric, "bold")
        self._put("  ".join("-" * width for width in widths))
        for row in rows:
            self._row(row, widths, numeric)

    def _row(self, texts: Sequence[str], widths: Sequence[int], numeric: int, style: str = "") -> None:
        columns = [
            wrapped(encodable(cell, self.console.encoding), width, 0) for cell, width in zip(texts, widths, strict=True)
        ]
        for depth in range(max(len(column) for column in columns)):
            shown = [column[depth] if depth < len(column) else "" for column in columns]
            cells = zip(shown, widths, strict=True)
            line = (" " * GAP).join(_set(text, width, at >= numeric) for at, (text, width) in enumerate(cells))
            self._put(line, style)


def _set(text: str, width: int, right: bool) -> str:
    """Text filled up to a width in cells."""
    from rich.cells import cell_len

    room = " " * max(0, width - cell_len(text))
    return room + text if right else text + room


def encodable(text: str, encoding: str) -> str:
    """Text with what the terminal cannot take written as code points."""
    try:
        text.encode(encoding)
    except (UnicodeEncodeError, LookupError):
        return text.encode("ascii", "backslashreplace").decode("ascii")
    return text


def wrapped(text: str, width: int, indent: int) -> list[str]:
    """Lines of at most `width` cells; those after the first are indented."""
    from rich.cells import cell_len, chop_cells

    lines: list[str] = []
    head = text[: len(text) - len(text.lstrip(" "))]
    current, empty = head, True
    pad = " " * indent
    for word in text.split():
        for piece in chop_cells(word, width - max(indent, len(head))) if cell_len(word) > width - indent else [word]:
            joined = current + piece if empty else f"{current} {piece}"
            if cell_len(joined) <= width or (empty and current in (head, pad)):
                current, empty = joined, False
            else:
                lines.append(current)
                current, empty = pad + piece, False
    lines.append(current)
    return lines
