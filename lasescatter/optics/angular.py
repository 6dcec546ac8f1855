"""Angular functions of the Mie series on symmetric sets of angles, as tables for matrix products."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

Table = tuple[NDArray[np.float64], NDArray[np.float64]]


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
    pi = np.empty((orders, cosine.size))
    tau = np.empty_like(pi)
    below, here = np.zeros_like(cosine), np.ones_like(cosine)
    scratch = np.empty_like(cosine)
    for n in range(1, orders + 1):
        pi[n - 1] = here
        np.multiply(cosine, here, out=scratch)
        np.multiply(scratch, n, out=tau[n - 1])
        tau[n - 1] -= (n + 1) * below
        scratch *= (2 * n + 1) / n
        below *= -(n + 1) / n
        below += scratch
        below, here = here, below
    order = np.arange(1, orders + 1)[:, np.newaxis]
    factor = (2 * order + 1) / (order * (order + 1))
    pi *= factor
    tau *= factor
    plus = pi + tau
    np.subtract(pi, tau, out=tau)
    return plus, tau


class AngularTables:
    """Tables at theta_j = pi j / (2 L), j = 0…L, and orders 1…L; those of a few sizes are kept for reuse.

    The other half of the sphere follows from the mirror rule: plus_n(−mu) = (−1)^(n−1) minus_n(mu).
    """

    def __init__(self, kept_bytes: int = 160_000_000) -> None:
        self._left = kept_bytes
        self._kept: dict[int, Table] = {}

    def pieces(self, orders: int, widest: int) -> Iterator[tuple[slice, Table]]:
        """The table in pieces of at most `widest` angles, or whole where it is small enough to keep."""
        if orders in self._kept:
            yield slice(0, orders + 1), self._kept[orders]
            return
        cosine = np.cos(np.pi * np.arange(orders + 1) / (2 * orders))
        cosine[-1] = 0.0
        size = 16 * orders * (orders + 1)
        if size <= self._left:
            self._left -= size
            self._kept[orders] = angular_functions(cosine, orders)
            yield slice(0, orders + 1), self._kept[orders]
            return
        for first in range(0, orders + 1, widest):
            piece = slice(first, min(first + widest, orders + 1))
            yield piece, angular_functions(cosine[piece], orders)
