"""A scattering matrix on angles, with its integrals from the forward direction.

Convention: F12/F11 = −sin²/(1 + cos²) for Rayleigh scattering; F34 has the sign of Im(S2 S1*) for the time
factor exp(−iωt) (Bohren & Huffman 1983, eq. 4.77).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lasescatter.optics import cosines
from lasescatter.optics.spline import EvenSpline

_FEWEST_INTERVALS = 2048
_MOST_INTERVALS = 2**19
# Error of the spline between nodes, relative to F11 there.
SPLINE_ERROR = 1e-5


@dataclass(frozen=True, eq=False)
class ScatteringMatrix:
    """Elements on a uniform angle grid 0…pi. The mean of F11 over the sphere is 1."""

    angles: NDArray[np.float64]
    """(n,) [rad]"""
    f11: NDArray[np.float64]
    f12: NDArray[np.float64]
    f33: NDArray[np.float64]
    f34: NDArray[np.float64]

    @cached_property
    def _splines(self) -> tuple[EvenSpline, EvenSpline]:
        return EvenSpline(self.f11), EvenSpline(self.f12)

    @cached_property
    def _turns(self) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]:
        """Where F12 changes sign, and the integrals of F12 and |F12| up to 0 and to each of these angles."""
        spline = self._splines[1]
        turns = spline.sign_changes()
        signed = spline.integral(np.concatenate(((0.0,), turns)))
        return turns, signed, np.concatenate(((0.0,), np.cumsum(np.abs(np.diff(signed)))))

    def at(self, theta: ArrayLike) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """F11 and F12 at any angles [rad], by cubic spline. Shape of `theta`."""
        angle = np.asarray(theta, dtype=float)
        f11, f12 = self._splines
        return f11(angle), f12(angle)

    def running(self, theta: ArrayLike) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]:
        """Integrals from 0 to theta of F11/(4π), F12/(4π) and |F12|/(4π) over the angle. [rad sr⁻¹]

        These are the integrals of the splines that `at` evaluates. Shape of `theta`.
        """
        angle = np.asarray(theta, dtype=float)
        f11, f12 = self._splines
        turns, signed_before, absolute_before = self._turns
        stretch = np.searchsorted(turns, angle, side="right")
        signed = f12.integral(angle)
        absolute = absolute_before[stretch] + np.abs(signed - signed_before[stretch])
        return f11.integral(angle) / (4 * np.pi), signed / (4 * np.pi), absolute / (4 * np.pi)

    @cached_property
    def _envelopes(self) -> list[NDArray[np.float64]]:
        """Largest F11 + |F12| over 1, 2, 4 … neighbouring nodes, by the first of them."""
        levels = [self.f11 + np.abs(self.f12)]
        while 2 ** len(levels) <= self.angles.size:
            step = 2 ** (len(levels) - 1)
            levels.append(np.maximum(levels[-1][:-step], levels[-1][step:]))
        return levels

    def greatest_near(self, theta: ArrayLike, within: ArrayLike) -> NDArray[np.float64]:
        """Largest F11 + |F12| at the nodes that enclose theta ± within [rad]. Broadcast shape of both."""
        theta, within = np.broadcast_arrays(np.asarray(theta, dtype=float), np.asarray(within, dtype=float))
        step = np.pi / (self.angles.size - 1)
        last = self.angles.size - 1
        low = np.clip(np.floor((theta - within) / step), 0, last).astype(np.int64)
        high = np.clip(np.ceil((theta + within) / step), 0, last).astype(np.int64)
        level = np.frexp((high - low + 1).astype(float))[1] - 1
        found = np.empty(theta.shape)
        for k in np.unique(level):
            chosen = level == k
            table = self._envelopes[k]
            found[chosen] = np.maximum(table[low[chosen]], table[high[chosen] - 2**k + 1])
        return found

    @cached_property
    def asymmetry(self) -> float:
        """Mean cosine of the scattering angle."""
        series = cosines.from_samples(self.f11)
        return cosines.sphere_mean_cosine(series) / cosines.sphere_mean(series)


def from_series(series: NDArray[np.float64]) -> tuple[ScatteringMatrix, float]:
    """Matrix from the cosine series of F11, F12, F33, F34 up to a common factor.

    The grid is refined until the splines of F11 and F12 are right between its nodes.

    Parameters
    ----------
    series : (4, degree + 1) array

    Returns
    -------
    matrix : ScatteringMatrix
    error : float
        Largest error of the spline of F11 or F12 halfway between nodes, relative to the largest F11 within
        half a period of the fastest term (single spheres have near-nulls narrower than that).
    """
    degree = series.shape[1] - 1
    scaled = series / cosines.sphere_mean(series[0])
    intervals = _FEWEST_INTERVALS
    while intervals < 4 * degree:
        intervals *= 2
    fine = cosines.to_samples(scaled, 2 * intervals)
    while True:
        between = np.linspace(0, np.pi, 2 * intervals + 1)[1::2]
        wrong = [np.abs(EvenSpline(fine[i, ::2])(between) - fine[i, 1::2]) for i in (0, 1)]
        error = float((np.maximum(*wrong) / _largest_near(fine[0, 1::2], intervals // max(degree, 1))).max())
        if error <= SPLINE_ERROR or intervals >= _MOST_INTERVALS:
            break
        intervals *= 2
        fine = cosines.to_samples(scaled, 2 * intervals)
    f11, f12, f33, f34 = (np.ascontiguousarray(row[::2]) for row in fine)
    return ScatteringMatrix(np.linspace(0, np.pi, intervals + 1), f11, f12, f33, f34), error


def _largest_near(values: NDArray[np.float64], reach: int) -> NDArray[np.float64]:
    """Largest value at most `reach` places away."""
    largest = values.copy()
    step = 1
    while reach > 0:
        step = min(step, reach)
        right, left = largest[step:].copy(), largest[:-step].copy()
        np.maximum(largest[:-step], right, out=largest[:-step])
        np.maximum(largest[step:], left, out=largest[step:])
        reach -= step
        step *= 2
    return largest
