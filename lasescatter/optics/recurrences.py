"""Recurrences of the Riccati–Bessel functions psi_n(x), chi_n(x) and of psi_{n−1}(z)/psi_n(z), for many spheres.

Spheres are ordered by size, the largest first: in every order those whose series is that long are the first ones.
Abramowitz & Stegun, Handbook of Mathematical Functions (1964), ch. 10.
"""

from __future__ import annotations

from math import acosh, log, tanh

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lasescatter.optics.workspace import Workspace

Floats = NDArray[np.float64]

# Up to this (and a rounding) the upward recurrence of psi_n cancels; a power series is taken instead.
SMALL_SIZE_PARAMETER = 1.0
# The growth of a recurrence between two rescalings, in decades: squares must stay below 1e308.
_DECADES = 120.0
# Orders that are taken together.
_FEWEST_TOGETHER, _MOST_TOGETHER = 8, 64
# Elements that one step handles, so that its operands stay in the second-level cache.
_CACHED = 18_000
# Of chi, as a power of e: its square must stay finite.
_MOST_GROWTH = 300.0
# Where a downward recurrence starts: |z| + 7.4 |z|^(1/3), or the series length, and 8 more. By then the square of the
# growth of chi is 1e16 at all |z| up to 1e5.
_START_CUBE_ROOTS, _START_ABOVE = 7.4, 8
# Terms of the power series of psi_n for size parameters up to 1; the next one is below 1e-19.
_POWERS = 9


def series_length(size_parameter: ArrayLike) -> NDArray[np.int64]:
    """Orders needed for full accuracy of the amplitudes at every angle.

    The form is that of Wiscombe (1980), Appl. Opt. 19, 1505; the factor 6 in place of his 4.05 takes the
    truncation error of the weakest angles from 1e-7 to rounding.
    """
    x = np.asarray(size_parameter, dtype=float)
    return np.floor(x + 6 * np.cbrt(x) + 3).astype(np.int64)


# First order, last order, and how many spheres, from the largest, take part.
Group = tuple[int, int, int]


def order_groups(x: Floats, lengths: NDArray[np.int64]) -> list[Group]:
    """Groups of orders, ascending: small enough for the cache, and so that chi_n of no sphere grows beyond bounds."""
    groups: list[Group] = []
    last = int(lengths[0])
    together = max(_FEWEST_TOGETHER, min(_MOST_TOGETHER, _CACHED // x.size))
    ascending = lengths[::-1]
    low = 1
    while low <= last:
        count = x.size - int(np.searchsorted(ascending, low))
        high = min(last, low + together - 1)
        smallest = float(x[count - 1])
        while growth(high, smallest) > _MOST_GROWTH and high > int(lengths[count - 1]):
            high -= 1
        groups.append((low, high, count))
        low = high + 1
    return groups


def psi_and_chi(x: Floats, groups: list[Group], space: Workspace) -> Floats:
    """psi_n(x) and chi_n(x), n = 0…N, side by side for each sphere, (N + 1, 2R); chi_0 = cos x.

    Of spheres that take no part in an order nothing is set.
    """
    both = space.array("psi and chi", groups[-1][1] + 1, 2 * x.size)
    inverse = 1 / x
    sine, cosine = np.sin(x), np.cos(x)
    both[0, ::2], both[0, 1::2] = sine, cosine
    both[1, ::2], both[1, 1::2] = sine * inverse - cosine, cosine * inverse + sine
    twice = np.repeat(inverse, 2)
    multiply, subtract = np.multiply, np.subtract
    for low, high, count in groups:
        first = max(low, 2)
        rows = list(both[first - 2 : high + 1, : 2 * count])
        factors = space.array("factors", high - first + 1, 2 * count)
        np.multiply(2 * np.arange(first - 1.0, high)[:, np.newaxis] + 1, twice[: 2 * count], out=factors)
        for before, here, after, factor in zip(rows, rows[1:], rows[2:], factors, strict=False):
            multiply(factor, here, after)
            subtract(after, before, after)
    small = small_from(x)
    if small < x.size:
        # Upward psi_n would cancel.
        high = int(series_length(x[small]))
        both[: high + 1, 2 * small :: 2] = _small_psi(x[small:], high)
    return both


def small_from(x: Floats) -> int:
    """Place of the first sphere, descending, whose psi_n are taken from their power series."""
    return int(np.searchsorted(-x, -SMALL_SIZE_PARAMETER, side="right"))


def _small_psi(x: Floats, orders: int) -> Floats:
    """psi_n, n = 0…orders, of size parameters up to 1 by its power series, (orders + 1, R)."""
    n = np.arange(orders + 1.0)[:, np.newaxis]
    k = np.arange(1.0, _POWERS + 1)[:, np.newaxis, np.newaxis]
    terms = (-0.5 * x * x) / (k * (2 * n + 2 * k + 1))
    series = 1 + terms[-1]
    for term in terms[-2::-1]:
        series *= term
        series += 1
    leading = np.cumprod(np.concatenate((x[np.newaxis], x / (2 * n[1:] + 1))), axis=0)
    return series * leading


def growth(n: float, z: float) -> float:
    """Logarithm, nearly, of chi_n(z) for n above z: n (u − tanh u) with cosh u = n/z."""
    if n <= z:
        return 0.0
    u = acosh(n / z)
    return n * (u - tanh(u))


class Ratios:
    """psi_{n−1}(z)/psi_n(z) by downward recurrence of psi itself, group by group of orders, highest first."""

    def __init__(self, z: NDArray, lengths: NDArray[np.int64], space: Workspace) -> None:
        """`z` and series lengths of the spheres, both descending in size."""
        self._array = space.complex_array if np.iscomplexobj(z) else space.array
        self._inverse = 1 / z
        size = np.abs(z)
        self._size = size
        # The recurrence must start above |z|, where its error shrinks as the square of chi grows: below |z| it is
        # neither damped nor amplified, and large spheres that hardly absorb would keep it (the extinction would not
        # show it, the angles do).
        self._start = (np.maximum(lengths, size + _START_CUBE_ROOTS * np.cbrt(size)) + _START_ABOVE).astype(np.int64)
        self._next = int(self._start.max())
        self._rows = np.zeros((2, z.size), dtype=z.dtype)
        self._rows[1] = 1

    def of_orders(self, low: int, high: int, count: int) -> NDArray:
        """Ratios of orders low…high of the first `count` spheres. Each call goes on below the last one."""
        while self._next > high:
            self._descend(max(high + 1, self._next - _MOST_TOGETHER + 1), 0)
        ratios = self._array("ratios", high - low + 1, count)
        while self._next >= low:
            top = self._next
            window = self._descend(max(low, top - _MOST_TOGETHER + 1), count)
            kept = top - self._next
            place = self._next + 1 - low
            np.divide(window[2:, :count][::-1], window[1:-1, :count][::-1], out=ratios[place : place + kept])
        return ratios

    def _descend(self, bottom: int, least: int) -> NDArray:
        """From the order `next` down to `bottom`, or not quite so far; psi of next + 1, next, … up to a factor."""
        top = self._next
        active = max(least, int(np.searchsorted(-self._start, -bottom, side="right")))
        # Rescaled often enough that it cannot overflow.
        decades = log((2 * top + 1) / float(self._size[:active].min()) + 1) / log(10)
        bottom = max(bottom, top + 1 - max(1, int(_DECADES / decades)))
        window = self._array("window", top - bottom + 3, active)
        window[:2] = self._rows[:, :active]
        rows = list(window)
        factors = self._array("factors", top - bottom + 1, active)
        np.multiply(2 * np.arange(top, bottom - 1, -1)[:, np.newaxis] + 1, self._inverse[:active], out=factors)
        multiply, subtract = np.multiply, np.subtract
        for factor, before, here, after in zip(factors, rows, rows[1:], rows[2:], strict=False):
            multiply(factor, here, after)
            subtract(after, before, after)
        last = self._rows[:, :active]
        np.divide(window[-2:], np.abs(window[-2:]).max(axis=0), out=last)
        self._next = bottom - 1
        return window
