"""A view of the site on paper: what it has to show, its scale, and site points as millimetres on the sheet."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from lasescatter.scene import Box, Scene, Vector

Kind = Literal["plan", "elevation"]
Point = tuple[float, float]

NICE = (1.0, 2.0, 2.5, 5.0)
SCALES = (1.0, 2.0, 2.5, 5.0, 7.5)
MARGIN = 9.0
"""Kept free around what is drawn. [mm]"""
WIDTH = 156.0
"""Of the drawing proper. [mm]"""
LEAST_HEIGHT = 34.0
MOST_HEIGHT = {"plan": 116.0, "elevation": 76.0}
_AXIS_NAMES = ("x", "y", "z")
_HIDDEN = {(0, 1): "seen from above", (0, 2): "seen along +y", (1, 2): "seen along −x"}


@dataclass(frozen=True)
class View:
    """A projection along one axis onto a sheet, 1 : `scale`."""

    kind: Kind
    axes: tuple[int, int]
    """Site axes that run to the right and up."""
    depth: tuple[int, int]
    """Site axis that runs through the paper, and the sign of it that points at the reader."""
    scale: float
    origin: Point
    """Site point (in metres, along `axes`) at the lower left corner."""
    width: float
    """[mm]"""
    height: float
    """[mm]"""

    def paper(self, position: Vector) -> Point:
        """A site point on the sheet. [mm]"""
        x, y = (
            1000.0 * (position[axis] - start) / self.scale for axis, start in zip(self.axes, self.origin, strict=True)
        )
        return x, y

    def holds(self, at: Point) -> bool:
        """Whether a point of the sheet lies on the drawing."""
        return 0 <= at[0] <= self.width and 0 <= at[1] <= self.height

    def shown_part(self, start: Point, end: Point) -> tuple[Point, Point]:
        """The part of a stroke that lies on the drawing; all of it where none does."""
        low, high = 0.0, 1.0
        for first, last, size in zip(start, end, (self.width, self.height), strict=True):
            if last == first:
                continue
            at = sorted(((0.0 - first) / (last - first), (size - first) / (last - first)))
            low, high = max(low, at[0]), min(high, at[1])
        if low >= high:
            return start, end
        first_x, first_y = (a + low * (b - a) for a, b in zip(start, end, strict=True))
        last_x, last_y = (a + high * (b - a) for a, b in zip(start, end, strict=True))
        return (first_x, first_y), (last_x, last_y)

    def direction(self, vector: Vector) -> Point:
        """A direction on the sheet, not normalised: its length is the share that lies in the paper."""
        return vector[self.axes[0]], vector[self.axes[1]]

    def towards_reader(self, vector: Vector) -> float:
        """Share of a direction that comes out of the paper."""
        return self.depth[1] * vector[self.depth[0]]

    @property
    def axis_names(self) -> tuple[str, str]:
        return _AXIS_NAMES[self.axes[0]], _AXIS_NAMES[self.axes[1]]

    @property
    def seen(self) -> str:
        return _HIDDEN[self.axes]


def nice_at_least(value: float, digits: tuple[float, ...] = NICE) -> float:
    """The least digit × 10^k that is not below a value; digits in rising order, from 1."""
    power = math.floor(math.log10(value)) - 1
    for exponent in range(power, power + 4):
        for digit in digits:
            candidate = digit * 10.0**exponent
            if candidate >= value * (1 - 1e-9):
                return candidate
    raise ValueError(f"no round number found at {value!r}")


def _core(scene: Scene) -> list[Vector]:
    """Points that every drawing must show."""
    found: list[Vector] = []
    for beam in scene.beams:
        found.extend(beam.points)
        if beam.leaves_site:
            last, before = beam.points[-1], beam.points[-2]
            found.append(_between(before, last, 1.15))
    for observer in scene.observers:
        for sign in (-1, 1):
            found.append(_shifted(observer.position, sign * observer.reach))
    return found or [(0.0, 0.0, 0.0)]


def _between(first: Vector, last: Vector, share: float) -> Vector:
    x, y, z = (a + share * (b - a) for a, b in zip(first, last, strict=True))
    return x, y, z


def _shifted(position: Vector, step: float) -> Vector:
    x, y, z = position
    return x + step, y + step, z + step


def extent(scene: Scene) -> tuple[Vector, Vector]:
    """Low and high corner of what the drawings show; height 0 always, a face of a load's box
    where it is near the rest."""
    core = _core(scene)
    low = [min(p[axis] for p in core) for axis in range(3)]
    high = [max(p[axis] for p in core) for axis in range(3)]
    near = 0.3 * max(math.dist(low, high), 0.1)
    bounds_low, bounds_high = list(low), list(high)
    for load in scene.loads:
        if isinstance(load.region, Box):
            for axis in range(3):
                # A face farther off than that would only make everything else small.
                if low[axis] - near <= load.region.low[axis]:
                    bounds_low[axis] = min(bounds_low[axis], load.region.low[axis])
                if load.region.high[axis] <= high[axis] + near:
                    bounds_high[axis] = max(bounds_high[axis], load.region.high[axis])
    # Heights are read from the floor.
    bounds_low[2], bounds_high[2] = min(bounds_low[2], 0.0), max(bounds_high[2], 0.0)
    return (bounds_low[0], bounds_low[1], bounds_low[2]), (bounds_high[0], bounds_high[1], bounds_high[2])


def _needed(low: Vector, high: Vector, axes: tuple[int, int], kind: Kind) -> float:
    """Scale at which an extent fits."""
    across, up = ((high[axis] - low[axis]) * 1000.0 for axis in axes)
    return max(across / (WIDTH - 2 * MARGIN), up / (MOST_HEIGHT[kind] - 2 * MARGIN), 1e-3)


FAR = 4.0
"""Times farther off than all the rest: then the rest gets a drawing of its own."""


def near_extent(scene: Scene) -> tuple[Vector, Vector] | None:
    """Corners of the cluster of places, where one that lies far off shrinks it under a quarter of the plan; else None.

    Places are ends of legs and observers, seen from above and ordered by their distance from the median place.
    """
    places = [point for beam in scene.beams for point in beam.points] + [o.position for o in scene.observers]
    if len(places) < 3:
        return None
    centre = [sorted(place[axis] for place in places)[len(places) // 2] for axis in (0, 1)]
    ordered = sorted(places, key=lambda place: math.dist(place[:2], centre))
    far = [math.dist(place[:2], centre) for place in ordered]
    cut = next((i for i in range(2, len(far)) if far[i - 1] > 0 and far[i] > FAR * far[i - 1]), None)
    if cut is None or not _one_thing(scene, ordered[cut:]):
        return None
    low, high = ([side(place[axis] for place in ordered[:cut]) for axis in range(3)] for side in (min, max))
    whole_low, whole_high = extent(scene)
    if math.dist(low[:2], high[:2]) >= 0.25 * math.dist(whole_low[:2], whole_high[:2]):
        return None
    return (low[0], low[1], low[2]), (high[0], high[1], high[2])


def _one_thing(scene: Scene, places: list[Vector]) -> bool:
    """Whether places are those of a single observer or of the ends of a single leg."""
    ends = [set(leg) for beam in scene.beams for leg in zip(beam.points, beam.points[1:], strict=False)]
    return len(places) == 1 or any(set(places) <= leg for leg in ends)


def near_plan(scene: Scene) -> View | None:
    """The plan of that cluster, enlarged."""
    corners = near_extent(scene)
    if corners is None:
        return None
    return _view("plan", (0, 1), nice_at_least(_needed(*corners, (0, 1), "plan"), SCALES), *corners)


def views(scene: Scene) -> dict[Kind, View]:
    """Plan and elevation, at one scale where that serves both."""
    low, high = extent(scene)
    # The elevation looks square at the longer of the two level extents.
    side = (0, 2) if high[0] - low[0] >= high[1] - low[1] else (1, 2)
    shown: dict[Kind, tuple[int, int]] = {"plan": (0, 1), "elevation": side}
    scales = {kind: nice_at_least(_needed(low, high, axes, kind), SCALES) for kind, axes in shown.items()}
    if max(scales.values()) <= 2.5 * min(scales.values()):
        scales = dict.fromkeys(scales, max(scales.values()))
    return {kind: _view(kind, axes, scales[kind], low, high) for kind, axes in shown.items()}


def _view(kind: Kind, axes: tuple[int, int], scale: float, low: Vector, high: Vector) -> View:
    up = (high[axes[1]] - low[axes[1]]) * 1000.0 / scale
    height = min(MOST_HEIGHT[kind], max(LEAST_HEIGHT, up + 2 * MARGIN))
    origin = tuple(
        0.5 * (low[axis] + high[axis]) - 0.5 * size * scale / 1000.0
        for axis, size in zip(axes, (WIDTH, height), strict=True)
    )
    depth = {(0, 1): (2, 1), (0, 2): (1, -1), (1, 2): (0, 1)}[axes]
    return View(kind, axes, depth, scale, (origin[0], origin[1]), WIDTH, height)


def scale_words(scale: float) -> str:
    """For example "1 : 50", or "20 : 1" for what is drawn larger than life."""
    if scale >= 1:
        return f"1 : {scale:,.10g}".replace(",", " ")
    return f"{1 / scale:.10g} : 1"


def ticks(low: float, high: float, wanted: int, least: int = 1) -> list[float]:
    """Round values between two ends, about as many as wanted and no fewer than `least`."""
    for share in range(max(1, wanted), max(1, wanted) + 20 * least):
        found = _multiples(nice_at_least((high - low) / share), low, high)
        if len(found) >= least:
            break
    return found


def _multiples(step: float, low: float, high: float) -> list[float]:
    first = math.ceil(low / step - 1e-9)
    last = math.floor(high / step + 1e-9)
    return [step * i for i in range(first, last + 1)]
