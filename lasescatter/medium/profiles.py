"""A load's shape in space: its value at points, its exact column along segments, where it begins and ends.

A profile is 1 where load or air are as stated, and 0 where there is none of them. Points are arrays (..., 3) in metres.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import product
from typing import Protocol

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lasescatter import scene

Floats = NDArray[np.float64]


class Profile(Protocol):
    """What the integrals ask of a shape."""

    def value(self, points: Floats) -> Floats:
        """Value at points (..., 3), shape (...)."""
        ...

    def column(self, start: Floats, end: Floats) -> Floats:
        """Integral along segments from start (..., 3) to end (..., 3) [m], shape (...)."""
        ...

    def span(self, origin: Floats, direction: Floats, length: float) -> tuple[float, float] | None:
        """First and last distance along a ray where the value is not 0 [m]; None if the ray misses."""
        ...

    def edges(self) -> tuple[Floats, Floats]:
        """Ends of the straight edges of its faces, each (n, 3): sight lines over them kink an integrand."""
        ...

    def shortest_dimension(self) -> float:
        """Least extent [m]; infinite for an unbounded shape."""
        ...

    def greatest_near(self, points: Floats, within: Floats | float) -> Floats:
        """A value that no place within a distance [m] of points (..., 3) exceeds, shape (...)."""
        ...

    def steepness(self) -> float:
        """Greatest relative change of the value per metre inside the shape [m⁻¹]; 0 where it is the same all over."""
        ...


@dataclass(frozen=True)
class Unbounded:
    """The same everywhere."""

    def value(self, points: Floats) -> Floats:
        return np.ones(points.shape[:-1])

    def column(self, start: Floats, end: Floats) -> Floats:
        return np.asarray(np.linalg.norm(np.asarray(end) - np.asarray(start), axis=-1))

    def span(self, origin: Floats, direction: Floats, length: float) -> tuple[float, float] | None:
        return 0.0, length

    def edges(self) -> tuple[Floats, Floats]:
        return np.empty((0, 3)), np.empty((0, 3))

    def shortest_dimension(self) -> float:
        return np.inf

    def greatest_near(self, points: Floats, within: Floats | float) -> Floats:
        return np.ones(points.shape[:-1])

    def steepness(self) -> float:
        return 0.0


@dataclass(frozen=True)
class UprightBox:
    """A box with faces square to the axes, by two opposite corners."""

    low: Floats
    high: Floats

    def value(self, points: Floats) -> Floats:
        inside = np.all((points >= self.low) & (points <= self.high), axis=-1)
        return inside.astype(np.float64)

    def column(self, start: Floats, end: Floats) -> Floats:
        start, end = np.broadcast_arrays(np.asarray(start, dtype=float), np.asarray(end, dtype=float))
        step = end - start
        first, last = self._fractions(start, step)
        chord = np.clip(np.minimum(last, 1.0) - np.maximum(first, 0.0), 0.0, None)
        return np.asarray(chord * np.linalg.norm(step, axis=-1))

    def _fractions(self, start: Floats, step: Floats) -> tuple[Floats, Floats]:
        """Parameters at which start + t·step enters and leaves the slabs; first > last where it misses."""
        # A step so small that the quotient overflows takes for ever to reach the face: infinity is right.
        with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
            near = (self.low - start) / step
            far = (self.high - start) / step
        # A step of 0 along an axis: inside the slab it never leaves, outside it never enters.
        flat = step == 0
        within = (start >= self.low) & (start <= self.high)
        entry = np.where(flat, np.where(within, -np.inf, np.inf), np.minimum(near, far))
        leave = np.where(flat, np.where(within, np.inf, -np.inf), np.maximum(near, far))
        return entry.max(axis=-1), leave.min(axis=-1)

    def span(self, origin: Floats, direction: Floats, length: float) -> tuple[float, float] | None:
        first, last = self._fractions(np.asarray(origin, dtype=float), np.asarray(direction, dtype=float))
        low, high = max(float(first), 0.0), min(float(last), length)
        return (low, high) if high > low else None

    def edges(self) -> tuple[Floats, Floats]:
        corners = np.array(list(product(*zip(self.low, self.high, strict=True))))
        pairs = [(a, b) for a in range(8) for b in range(a + 1, 8) if np.sum(corners[a] != corners[b]) == 1]
        first, second = np.array(pairs).T
        return corners[first], corners[second]

    def shortest_dimension(self) -> float:
        return float(np.min(self.high - self.low))

    def greatest_near(self, points: Floats, within: Floats | float) -> Floats:
        return np.ones(points.shape[:-1])

    def steepness(self) -> float:
        return 0.0


def profile_of(region: scene.Region) -> Profile:
    """The profile of a region of the scene."""
    if isinstance(region, scene.Everywhere):
        return Unbounded()
    return UprightBox(_point(region.low), _point(region.high))


def _point(vector: ArrayLike) -> Floats:
    return np.asarray(vector, dtype=np.float64)
