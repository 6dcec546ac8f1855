"""Finding room for labels on a drawing."""

from __future__ import annotations

import math
from dataclasses import dataclass, field

from lasescatter.report.ink import text_size
from lasescatter.report.site_view import Point


@dataclass(frozen=True)
class Rect:
    """A rectangle on the sheet. [mm]"""

    left: float
    bottom: float
    right: float
    top: float

    def overlap(self, other: Rect) -> float:
        """Shared area. [mm²]"""
        across = min(self.right, other.right) - max(self.left, other.left)
        up = min(self.top, other.top) - max(self.bottom, other.bottom)
        return across * up if across > 0 and up > 0 else 0.0

    def holds(self, point: Point) -> bool:
        return self.left <= point[0] <= self.right and self.bottom <= point[1] <= self.top

    def within(self, other: Rect) -> bool:
        return (
            self.left >= other.left
            and self.right <= other.right
            and self.bottom >= other.bottom
            and self.top <= other.top
        )


@dataclass
class Room:
    """What is taken on a drawing, and the search for what is free."""

    frame: Rect
    taken: list[Rect] = field(default_factory=list)
    strokes: list[Point] = field(default_factory=list)
    """Points along drawn lines, which labels had better not cover."""

    def stroke(self, start: Point, end: Point, step: float = 1.0) -> None:
        """Note a drawn line."""
        count = min(2000, max(1, int(math.dist(start, end) / step)))
        for i in range(count + 1):
            share = i / count
            self.strokes.append((start[0] + share * (end[0] - start[0]), start[1] + share * (end[1] - start[1])))

    def mark(self, centre: Point, radius: float) -> None:
        """Note a drawn mark."""
        x, y = centre
        self.taken.append(Rect(x - radius, y - radius, x + radius, y + radius))

    def place(self, text: str, size: float, anchor: Point, gap: float, forced: bool) -> Point | None:
        """Centre of the text at the best free place around an anchor.

        None where there is none that touches no other label or mark and the label is not forced.
        """
        width, height = text_size(text, size)
        best: tuple[float, Rect] | None = None
        for reach in (gap, gap + 2.0, gap + 4.5, gap + 8.0, gap + 12.0):
            for turn in range(12):
                angle = math.radians(30 + 30 * turn)
                x = anchor[0] + math.cos(angle) * (reach + width / 2)
                y = anchor[1] + math.sin(angle) * (reach + height / 2)
                rect = Rect(x - width / 2 - 0.3, y - height / 2 - 0.2, x + width / 2 + 0.3, y + height / 2 + 0.2)
                if not rect.within(self.frame):
                    continue
                clash = sum(rect.overlap(other) for other in self.taken)
                if clash > 0 and not forced:
                    continue
                crossed = sum(rect.holds(point) for point in self.strokes)
                cost = 20.0 * clash + crossed + 0.4 * (reach - gap) + 0.02 * turn
                if best is None or cost < best[0]:
                    best = cost, rect
            if best is not None and best[0] < 1.0:
                break
        if best is None:
            return None
        rect = best[1]
        self.taken.append(rect)
        return 0.5 * (rect.left + rect.right), 0.5 * (rect.bottom + rect.top)
