"""Air that thins with height: the U.S. Standard Atmosphere 1976 as a shape in space."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from lasescatter import scene, standard_atmosphere
from lasescatter.assumptions import Assumption
from lasescatter.medium.profiles import Floats, Profile, Unbounded

STANDARD_AIR = Assumption(
    name="Air thins with height as in the U.S. Standard Atmosphere 1976, over a flat earth",
    direction="either",
    size="weather moves the density at a height by some per cent, by up to a fifth in the cold; at the same distance "
    "a round earth has air thinner by 1 % at 34 km and 10 % at 107 km along a level beam; vapour has the share of "
    "z = 0 at all heights, which is low aloft by 1 % at most in air of 20 °C",
    source="U.S. Standard Atmosphere 1976; distance²/(2 × earth's radius) over a scale height of 9 km; weather: common "
    "practice, no source",
)

# Shorter rises than this are integrated by Gauss–Legendre with three points, whose error is then below 1e-15: the
# difference of two columns would lose digits. [m]
_SHORT_RISE = 50.0
_X = np.sqrt(0.6)


@dataclass(frozen=True)
class StandardAtmosphere:
    """Density over that at z = 0 of the site; above 86 km there is nothing.

    Heights below z = 0 have values above 1. Below −5 km of altitude the density stays as it is there.
    """

    ground_altitude: float
    """Altitude of z = 0 above sea level. [m]"""

    @cached_property
    def _at_ground(self) -> float:
        return float(standard_atmosphere.at_altitude(self.ground_altitude)[2])

    def value(self, points: Floats) -> Floats:
        altitude = np.asarray(points, dtype=float)[..., 2] + self.ground_altitude
        return np.asarray(standard_atmosphere.density(altitude) / self._at_ground)

    def column(self, start: Floats, end: Floats) -> Floats:
        start, end = np.broadcast_arrays(np.asarray(start, dtype=float), np.asarray(end, dtype=float))
        rise = end[..., 2] - start[..., 2]
        low = np.minimum(start[..., 2], end[..., 2]) + self.ground_altitude
        high = np.maximum(start[..., 2], end[..., 2]) + self.ground_altitude
        short = np.abs(rise) <= _SHORT_RISE
        mean = np.empty(rise.shape)
        mean[short] = _short_mean(low[short], high[short])
        low, high = low[~short], high[~short]
        mean[~short] = (standard_atmosphere.overhead(low) - standard_atmosphere.overhead(high)) / (high - low)
        return np.asarray(mean / self._at_ground * np.linalg.norm(end - start, axis=-1))

    def span(self, origin: Floats, direction: Floats, length: float) -> tuple[float, float] | None:
        room = standard_atmosphere.HIGHEST - self.ground_altitude - float(origin[2])
        climb = float(direction[2])
        if climb == 0:
            return (0.0, length) if room >= 0 else None
        reached = room / climb
        low, high = (0.0, min(reached, length)) if climb > 0 else (max(reached, 0.0), length)
        return (low, high) if high > low else None

    def edges(self) -> tuple[Floats, Floats]:
        return np.empty((0, 3)), np.empty((0, 3))

    def shortest_dimension(self) -> float:
        return np.inf

    def greatest_near(self, points: Floats, within: Floats | float) -> Floats:
        altitude = np.asarray(points, dtype=float)[..., 2] - within + self.ground_altitude
        return np.asarray(standard_atmosphere.density(altitude) / self._at_ground)

    def steepness(self) -> float:
        return standard_atmosphere.STEEPEST


def air_profile(air: scene.Air) -> Profile:
    """The shape of the site's air."""
    return StandardAtmosphere(air.ground_altitude) if air.model == "standard atmosphere" else Unbounded()


def _short_mean(low: Floats, high: Floats) -> Floats:
    """Mean density between altitudes that enclose one boundary of layers at most; at low = high the density there."""
    boundaries = standard_atmosphere.BOUNDARIES
    beyond = np.searchsorted(boundaries, high, side="left") - 1
    fold = np.clip(np.where(beyond >= 0, boundaries[beyond], low), low, high)
    upper = _three_points(fold, high)
    share = np.where(high > low, (high - fold) / np.where(high > low, high - low, 1.0), 1.0)
    crossing = share < 1
    mean = upper
    if np.any(crossing):
        part = share[crossing]
        mean[crossing] = part * upper[crossing] + (1 - part) * _three_points(low[crossing], fold[crossing])
    return mean


def _three_points(low: Floats, high: Floats) -> Floats:
    middle, half = (low + high) / 2, (high - low) / 2
    inner = standard_atmosphere.density(middle)
    outer = standard_atmosphere.density(middle - _X * half) + standard_atmosphere.density(middle + _X * half)
    return np.asarray((8 * inner + 5 * outer) / 18)
