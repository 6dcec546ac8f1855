"""Cubic spline of an even function of the scattering angle on a uniform grid from 0 to pi.

An intensity does not know the sign of the scattering angle, so its slope is zero at 0 and at pi. With that the
spline's equations are circulant and one cosine transform solves them.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from lasescatter.optics.cosines import transform


@dataclass(frozen=True, eq=False)
class EvenSpline:
    """Values at theta_j = pi j/J, j = 0…J."""

    values: NDArray[np.float64]

    @property
    def step(self) -> float:
        return float(np.pi / (self.values.size - 1))

    @cached_property
    def curvature(self) -> NDArray[np.float64]:
        """Second derivative at the nodes."""
        count = self.values.size - 1
        cosine = np.cos(np.pi * np.arange(count + 1) / count)
        spectrum = transform(self.values) * (6 * (cosine - 1) / (2 + cosine)) / self.step**2
        return transform(spectrum) / (2 * count)

    @cached_property
    def node_integral(self) -> NDArray[np.float64]:
        """Integral of the spline from 0 to each node."""
        y, c, h = self.values, self.curvature, self.step
        pieces = h / 2 * (y[1:] + y[:-1]) - h**3 / 24 * (c[1:] + c[:-1])
        return np.concatenate(((0.0,), np.cumsum(pieces)))

    def _place(self, theta: NDArray[np.float64]) -> tuple[NDArray[np.int64], NDArray[np.float64]]:
        """Interval of each angle and the fraction of it that lies below the angle."""
        place = np.clip(theta, 0, np.pi) / self.step
        j = np.minimum(place.astype(np.int64), self.values.size - 2)
        return j, place - j

    def __call__(self, theta: NDArray[np.float64]) -> NDArray[np.float64]:
        """The spline at any angles; beyond 0 or pi the end's value."""
        j, t = self._place(theta)
        s = 1 - t
        y, c = self.values, self.curvature
        bend = (s**3 - s) * c[j] + (t**3 - t) * c[j + 1]
        return s * y[j] + t * y[j + 1] + self.step**2 / 6 * bend

    def integral(self, theta: NDArray[np.float64]) -> NDArray[np.float64]:
        """Integral of the spline from 0 to any angles."""
        j, t = self._place(theta)
        s = 1 - t
        y, c, h = self.values, self.curvature, self.step
        line = ((1 - s * s) * y[j] + t * t * y[j + 1]) / 2
        bend = (-((1 - s * s) ** 2) * c[j] + (t**4 - 2 * t * t) * c[j + 1]) / 24
        return self.node_integral[j] + h * line + h**3 * bend

    def sign_changes(self) -> NDArray[np.float64]:
        """Angles, ascending, at which the spline changes sign from one node to another."""
        nodes = np.flatnonzero(self.values)
        signs = np.sign(self.values[nodes])
        turn = np.flatnonzero(signs[:-1] != signs[1:])
        low, high = self.step * nodes[turn], self.step * nodes[turn + 1]
        rising = signs[turn + 1]
        for _ in range(60):
            middle = (low + high) / 2
            above = self(middle) * rising > 0
            low, high = np.where(above, low, middle), np.where(above, middle, high)
        return (low + high) / 2
