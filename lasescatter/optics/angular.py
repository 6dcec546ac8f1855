"""Angular functions of the Mie series on symmetric sets of angles, as tables for matrix products."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

Table = tuple[NDArray[np.float64], NDArray[np.float64]]

# Elements that one step of the algebra handles, so that its operands stay in the second-level cache.
_CACHED = 16_000


def angular_functions(cosine: NDArray[np.float64], orders: int) -> Table:
    """(2n+1)/(n(n+1)) (pi_n + tau_n) and the same of pi_n − tau_n, n = 1…orders.

    Bohren & Huffman (1983), eq. 4.47: recurrences in the cosine, so that 0° and 180° are ordinary angles.

    Parameters
    ----------
    cosine : (J,) array

    Returns
    -------
    plus, minus : (orders, J) arrays
    """
    n = np.arange(1, orders + 1)
    # pi_n = p_n/s_n with scales that turn the recurrence into p_{n+1} = c_n mu p_n − p_{n−1}: two calls a step.
    scale = np.ones(orders + 1)
    for m in range(1, orders):
        scale[m + 1] = scale[m - 1] * m / (m + 1)
    slope = scale[2:] * (2 * n[:-1] + 1) / (n[:-1] * scale[1:-1])
    p = np.empty((orders + 1, cosine.size))
    p[0], p[1] = 0, 1
    plus, minus = np.empty((orders, cosine.size)), np.empty((orders, cosine.size))
    np.multiply(slope[:, np.newaxis], cosine, out=plus[1:])
    rows, steps = list(p), list(plus)
    for m in range(1, orders):
        np.multiply(steps[m], rows[m], out=rows[m + 1])
        np.subtract(rows[m + 1], rows[m - 1], out=rows[m + 1])
    factor = (2 * n + 1) / (n * (n + 1))
    here = (factor / scale[1:])[:, np.newaxis]
    below = (factor * (n + 1) / scale[:-1])[:, np.newaxis]
    height = max(1, _CACHED // cosine.size)
    for first in range(0, orders, height):
        part = slice(first, min(first + height, orders))
        pi = p[1:][part] * here[part]
        tau = pi * cosine
        tau *= n[part, np.newaxis]
        tau -= p[part] * below[part]
        np.add(pi, tau, out=plus[part])
        np.subtract(pi, tau, out=minus[part])
    return plus, minus


class AngularTables:
    """Tables at theta_j = pi j/K, j = 0…K with K = 2 L, and orders 1…L; those of a few sizes are kept for reuse.

    The second half of the angles follows from the mirror rule: plus_n(−mu) = (−1)^(n−1) minus_n(mu). So 0° and 180°
    obey their symmetries to rounding.
    """

    def __init__(self, kept_bytes: int = 256_000_000) -> None:
        self._left = kept_bytes
        self._kept: dict[int, Table] = {}

    def pieces(self, orders: int, widest: int) -> Iterator[tuple[slice, Table]]:
        """The table, each part (angles, orders), in pieces of at most `widest` angles and their mirror images, or
        whole where it is small enough to keep. The slice is that of the angles."""
        if orders in self._kept:
            yield slice(0, 2 * orders + 1), self._kept[orders]
            return
        size = 16 * orders * (2 * orders + 1)
        if size <= self._left:
            self._left -= size
            self._kept[orders] = _both_halves(orders)
            yield slice(0, 2 * orders + 1), self._kept[orders]
            return
        cosine = _cosines(orders)
        for first in range(0, orders + 1, widest):
            piece = slice(first, min(first + widest, orders + 1))
            plus, minus = angular_functions(cosine[piece], orders)
            yield piece, (plus.T, minus.T)
            mirrored = slice(2 * orders + 1 - piece.stop, 2 * orders + 1 - piece.start)
            if piece.stop == orders + 1:
                # theta = 90° is in both halves.
                plus, minus = plus[:, :-1], minus[:, :-1]
                mirrored = slice(orders + 1, mirrored.stop)
            yield mirrored, _mirrored(plus, minus)


def _cosines(orders: int) -> NDArray[np.float64]:
    """Of the forward half of the angles; 90° exactly."""
    cosine = np.cos(np.pi * np.arange(orders + 1) / (2 * orders))
    cosine[-1] = 0.0
    return cosine


def _mirrored(plus: NDArray[np.float64], minus: NDArray[np.float64]) -> Table:
    """Tables at pi − theta, angles ascending, from those at theta; (angles, orders) from (orders, angles)."""
    alternate = 1.0 - 2.0 * (np.arange(len(plus)) % 2)
    return minus.T[::-1] * alternate, plus.T[::-1] * alternate


def _both_halves(orders: int) -> Table:
    plus, minus = angular_functions(_cosines(orders), orders)
    back_plus, back_minus = _mirrored(plus[:, :-1], minus[:, :-1])
    return np.concatenate((plus.T, back_plus)), np.concatenate((minus.T, back_minus))
