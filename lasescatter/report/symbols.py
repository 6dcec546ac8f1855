"""Signs of the site drawings: legs with their direction, mirrors, stops, observers. All in millimetres."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

from lasescatter.limits.verdict import ABOVE, BELOW, Verdict
from lasescatter.report.ink import DARK, GREY
from lasescatter.report.labels import Rect
from lasescatter.report.site_view import Point

if TYPE_CHECKING:
    from matplotlib.axes import Axes

STOP_HATCH = "/" * 9
MARKER = 2.3
"""Size of an observer's marker. [mm]"""


LEAST_RING = 0.6 * MARKER
"""A reach that is smaller on the sheet is hidden by the observer's mark. [mm]"""
_LEAST_LEADER = 1.6


def leader(axes: Axes, at: Point, rect: Rect, gap: float) -> None:
    """A thin line from a mark to a label that lies away from it."""
    near = (min(max(at[0], rect.left), rect.right), min(max(at[1], rect.bottom), rect.top))
    if math.dist(at, near) > gap + _LEAST_LEADER:
        axes.plot([at[0], near[0]], [at[1], near[1]], color=GREY, linewidth=0.45, zorder=3.5)


def _unit(vector: Point) -> Point:
    size = math.hypot(*vector)
    return (vector[0] / size, vector[1] / size) if size > 0 else (1.0, 0.0)


def stroke(axes: Axes, start: Point, end: Point, ink: str, dash: Any, width: float = 1.1) -> None:
    """A leg of a beam."""
    axes.plot([start[0], end[0]], [start[1], end[1]], color=ink, linestyle=dash, linewidth=width, zorder=4,
              solid_capstyle="butt", dash_capstyle="butt")  # fmt: skip


def arrow(axes: Axes, tip: Point, along: Point, ink: str, size: float = 2.4) -> None:
    """A filled head that points along a direction."""
    u = _unit(along)
    base = (tip[0] - size * u[0], tip[1] - size * u[1])
    side = (-0.36 * size * u[1], 0.36 * size * u[0])
    corners = [tip, (base[0] + side[0], base[1] + side[1]), (base[0] - side[0], base[1] - side[1])]
    axes.fill([p[0] for p in corners], [p[1] for p in corners], color=ink, linewidth=0, zorder=6)


def through_paper(axes: Axes, at: Point, towards_reader: bool, ink: str) -> None:
    """A leg that runs square to the paper: a ring with a dot towards the reader, with a cross away."""
    axes.plot([at[0]], [at[1]], marker="o", markersize=6, markerfacecolor="white", markeredgecolor=ink, zorder=6)
    inner = "." if towards_reader else "x"
    axes.plot([at[0]], [at[1]], marker=inner, markersize=3.4, color=ink, zorder=7)


def endless(axes: Axes, at: Point, along: Point, ink: str) -> None:
    """The mark of a leg that goes on past the drawing: a head and two strokes across."""
    u = _unit(along)
    arrow(axes, at, along, ink, 2.8)
    for back in (4.2, 5.4):
        x, y = at[0] - back * u[0], at[1] - back * u[1]
        dx, dy = 1.5 * (-u[1] + 0.4 * u[0]), 1.5 * (u[0] + 0.4 * u[1])
        axes.plot([x - dx, x + dx], [y - dy, y + dy], color=ink, linewidth=1.0, zorder=6)


def plate(axes: Axes, at: Point, normal: Point, filled: bool) -> None:
    """A mirror (open) or stop (hatched, unlike an observer's mark): a plate seen from its edge.

    Its lit face lies at the point.

    `normal` is the part in the paper of the lit side's unit normal; where it is short the plate is
    seen face on and drawn as a square.
    """
    tilt = math.hypot(*normal)
    hatch = STOP_HATCH if filled else ""
    if tilt < 0.35:
        from matplotlib.patches import Rectangle

        axes.add_patch(Rectangle((at[0] - 1.3, at[1] - 1.3), 2.6, 2.6, facecolor="white", edgecolor=DARK,
                                 hatch=hatch, linewidth=0.9, zorder=5))  # fmt: skip
        return
    n = _unit(normal)
    half, thick = (3.0, 1.5) if filled else (2.8, 0.8)
    side = (-n[1] * half, n[0] * half)
    back = (-n[0] * thick, -n[1] * thick)
    corners = [
        (at[0] + side[0], at[1] + side[1]),
        (at[0] - side[0], at[1] - side[1]),
        (at[0] - side[0] + back[0], at[1] - side[1] + back[1]),
        (at[0] + side[0] + back[0], at[1] + side[1] + back[1]),
    ]
    axes.fill([p[0] for p in corners], [p[1] for p in corners], facecolor="white", hatch=hatch,
              edgecolor=DARK, linewidth=0.8, zorder=5)  # fmt: skip


MARKS: dict[Verdict, dict[str, Any]] = {
    BELOW: {"marker": "o", "markerfacecolor": "white"},
    ABOVE: {"marker": "s", "markerfacecolor": DARK},
    "not established": {"marker": "D", "fillstyle": "left", "markerfacecolor": DARK, "markerfacecoloralt": "white"},
}


def observer(axes: Axes, at: Point, reach: float, verdict: Verdict) -> None:
    """An observer, the verdict told by shape and filling, with the reach as a dotted ring to scale."""
    size = MARKER * 72 / 25.4 * (0.85 if verdict != BELOW else 1.0)
    axes.plot([at[0]], [at[1]], linestyle="none", markersize=size, markeredgecolor=DARK, markeredgewidth=0.9, zorder=8,
              **MARKS[verdict])  # fmt: skip
    if reach > LEAST_RING:
        reach_ring(axes, at, reach)


def reach_ring(axes: Axes, at: Point, reach: float) -> None:
    """Where the head can get."""
    from matplotlib.patches import Circle

    axes.add_patch(Circle(at, reach, fill=False, edgecolor=GREY, linewidth=0.6, linestyle=(0, (1, 1.6)), zorder=7))
