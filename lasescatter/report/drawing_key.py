"""The key under a site drawing."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

from lasescatter.limits.verdict import BELOW, Verdict
from lasescatter.report import symbols
from lasescatter.report.ink import DARK, FAINT, GREY, cut, write

if TYPE_CHECKING:
    from matplotlib.axes import Axes

Sign = Literal["beam", "load", "start", "mirror", "stop", "endless", "towards", "away", "observer", "reach"]

ROW = 4.1
"""[mm]"""
_COLUMNS = 3
_COLUMN = 52.0
_LEFT = 15.0
_SIZE = 6.3
LISTED_OBSERVERS = 12
"""Longer lists are left to the report's table."""


@dataclass(frozen=True)
class Entry:
    """One sign and what it means."""

    sign: Sign
    text: str
    ink: str = DARK
    dash: Any = "-"
    hatch: str = ""
    verdict: Verdict = BELOW


def _list_rows(unnamed: list[tuple[int, str]]) -> int:
    if not unnamed:
        return 0
    return len(unnamed) if len(unnamed) <= LISTED_OBSERVERS else 1


def key_height(entries: list[Entry], unnamed: list[tuple[int, str]]) -> float:
    """Height that the key takes. [mm]"""
    return ROW * (math.ceil(len(entries) / _COLUMNS) + _list_rows(unnamed)) + 1.5


def draw_key(axes: Axes, entries: list[Entry], unnamed: list[tuple[int, str]], top: float) -> None:
    """Draw the key downwards from a height; axes in millimetres."""
    rows = math.ceil(len(entries) / _COLUMNS)
    for place, entry in enumerate(entries):
        column, row = divmod(place, rows)
        x, y = _LEFT + column * _COLUMN, top - (row + 0.5) * ROW
        _sign(axes, entry, x, y)
        write(axes, x + 10, y, cut(entry.text, _SIZE, _COLUMN - 12), fontsize=_SIZE, va="center")
    y = top - (rows + 0.5) * ROW
    if len(unnamed) > LISTED_OBSERVERS:
        first, last = unnamed[0][0], unnamed[-1][0]
        write(axes, _LEFT, y, f"{first} to {last}: names and places are in the report's list of observers",
              fontsize=_SIZE, va="center")  # fmt: skip
        return
    for number, name in unnamed:
        write(axes, _LEFT, y, cut(f"{number}  {name}", _SIZE, _COLUMNS * _COLUMN), fontsize=_SIZE, va="center")
        y -= ROW


def _sign(axes: Axes, entry: Entry, x: float, y: float) -> None:
    middle = (x + 4.0, y)
    if entry.sign == "beam":
        symbols.stroke(axes, (x, y), (x + 8, y), entry.ink, entry.dash)
        symbols.arrow(axes, (x + 5.4, y), (1.0, 0.0), entry.ink)
    elif entry.sign == "load":
        from matplotlib.patches import Rectangle

        corner = (x, y - 1.4)
        axes.add_patch(Rectangle(corner, 8, 2.8, facecolor="none", edgecolor=FAINT, hatch=entry.hatch, linewidth=0))
        axes.add_patch(
            Rectangle(corner, 8, 2.8, facecolor="none", edgecolor=GREY, linewidth=0.8, linestyle=(0, (4, 1.5)))
        )
    elif entry.sign == "start":
        axes.plot([middle[0]], [y], marker="o", markersize=3.4, color=DARK)
    elif entry.sign == "mirror":
        symbols.plate(axes, (middle[0], y + 0.4), (0.0, 1.0), filled=False)
    elif entry.sign == "stop":
        symbols.plate(axes, (middle[0], y + 0.75), (0.0, 1.0), filled=True)
    elif entry.sign == "endless":
        symbols.stroke(axes, (x, y), (x + 7, y), DARK, "-")
        symbols.endless(axes, (x + 8, y), (1.0, 0.0), DARK)
    elif entry.sign in ("towards", "away"):
        symbols.through_paper(axes, middle, entry.sign == "towards", DARK)
    elif entry.sign == "reach":
        symbols.reach_ring(axes, middle, 1.5)
    else:
        symbols.observer(axes, middle, 0.0, entry.verdict)
