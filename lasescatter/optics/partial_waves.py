"""Partial waves of a sphere: the coefficients a_n, b_n of the Mie series and what each order absorbs.

Time factor exp(−iωt), so absorption is a positive imaginary part of the index. Source: Bohren & Huffman,
Absorption and Scattering of Light by Small Particles (1983), ch. 4, eqs. 4.56–4.57.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

SMALLEST_SIZE_PARAMETER = 1e-6
LARGEST_SIZE_PARAMETER = 2e4
LARGEST_INDEX = 20.0
SMALLEST_CONTRAST = 1e-6

# Up to this (and a rounding) the upward recurrence of psi_n cancels; its ratios are taken downward instead.
SMALL_SIZE_PARAMETER = 1.0
# The growth of a recurrence between two rescalings, in decades: squares must stay below 1e308.
_DECADES = 120.0
# Elements that one step of the algebra handles, so that its operands stay in the second-level cache.
_CACHED = 12_000


class SizeRangeError(ValueError):
    """A particle lies outside what the series is built for; the text names quantity, value and range."""


@dataclass(frozen=True)
class PartialWaves:
    """Orders 1…N of R spheres. All arrays have the shape (N, R)."""

    a: NDArray[np.complex128]
    b: NDArray[np.complex128]
    absorbed: NDArray[np.float64]
    """Re(a) − |a|² + Re(b) − |b|² of each order, free of cancellation."""


def series_length(size_parameter: ArrayLike) -> NDArray[np.int64]:
    """Orders needed for full accuracy of the amplitudes at every angle.

    The form is that of Wiscombe (1980), Appl. Opt. 19, 1505; the factor 6 in place of his 4.05 takes the
    truncation error of the weakest angles from 1e-7 to rounding.
    """
    x = np.asarray(size_parameter, dtype=float)
    return np.floor(x + 6 * np.cbrt(x) + 3).astype(np.int64)


def check_size_parameter(smallest: float, largest: float, whose: str = "") -> None:
    """Refuse size parameters outside the range of the series.

    Raises
    ------
    SizeRangeError
    """
    for value in (smallest, largest):
        if not SMALLEST_SIZE_PARAMETER <= value <= LARGEST_SIZE_PARAMETER:
            raise SizeRangeError(
                f"size parameter 2π r n/λ = {value:.6g}{whose} is outside its range, "
                f"{SMALLEST_SIZE_PARAMETER:g} to {LARGEST_SIZE_PARAMETER:g}"
            )


def check_index(index: complex) -> None:
    """Refuse an index that the series cannot use.

    Raises
    ------
    SizeRangeError
    """
    if not (np.isfinite(index) and index.real > 0 and index.imag >= 0 and abs(index) <= LARGEST_INDEX):
        raise SizeRangeError(
            f"relative refractive index {index:.6g} is outside its range: real part above 0, "
            f"imaginary part at least 0, modulus at most {LARGEST_INDEX:g}"
        )
    if abs(index - 1) < SMALLEST_CONTRAST:
        raise SizeRangeError(
            f"relative refractive index {index:.9g} is that of the medium to {SMALLEST_CONTRAST:g}: nothing scatters"
        )


def partial_waves(index: complex, size_parameter: NDArray[np.float64], orders: int) -> PartialWaves:
    """Coefficients of spheres of one index.

    Parameters
    ----------
    index : complex
        Relative to the medium. An infinite value means a perfect conductor.
    size_parameter : (R,) array
        Either all up to 1 or all from 1.
    orders : int
        N, at least the series length of every sphere. What lies beyond a sphere's own length is zero.
    """
    x = size_parameter
    psi, chi = _riccati_bessel(x, orders)
    conductor = bool(np.isinf(index))
    m = 1.0 if conductor else (index.real if index.imag == 0 else index)
    inner = np.ones((orders, x.size)) if conductor else _ratios(m * x, orders)
    n_over_x = np.arange(1, orders + 1)[:, np.newaxis] / x

    a = np.empty((orders, x.size), dtype=complex)
    b = np.empty_like(a)
    absorbed = np.zeros((orders, x.size))
    step = max(1, _CACHED // x.size)
    for first in range(0, orders, step):
        rows = slice(first, min(first + step, orders))
        outer = psi[rows], psi[1:][rows], chi[rows], chi[1:][rows]
        if conductor:
            a[rows], _ = _coefficient(n_over_x[rows], *outer)
            b[rows] = outer[1] / (outer[1] - 1j * outer[3])
            continue
        a[rows], lost_a = _coefficient(inner[rows] / m + n_over_x[rows] * (1 - 1 / m**2), *outer)
        b[rows], lost_b = _coefficient(m * inner[rows], *outer)
        absorbed[rows] = lost_a + lost_b

    lengths = series_length(x)
    shortest = int(lengths.min())
    beyond = np.arange(shortest + 1, orders + 1)[:, np.newaxis] > lengths
    for values in (a, b, absorbed):
        values[shortest:][beyond] = 0
    return PartialWaves(a, b, absorbed)


def _coefficient(
    t: NDArray,
    psi_before: NDArray[np.float64],
    psi: NDArray[np.float64],
    chi_before: NDArray[np.float64],
    chi: NDArray[np.float64],
) -> tuple[NDArray[np.complex128], NDArray[np.float64] | float]:
    """(t psi_n − psi_{n−1}) / (t xi_n − xi_{n−1}) with xi = psi − i chi, and Re − |·|² of it.

    The latter is −Im(t)/|denominator|², because psi_{n−1} chi_n − psi_n chi_{n−1} = 1.
    """
    p = t * psi
    p -= psi_before
    q = t * chi
    q -= chi_before
    if np.iscomplexobj(t):
        denominator = p - 1j * q
        absorbed: NDArray[np.float64] = -t.imag / (denominator.real**2 + denominator.imag**2)
        return np.asarray(p / denominator, dtype=complex), absorbed
    # Without absorption all is real: p/(p − iq) = (p² + ipq)/(p² + q²).
    size = p * p + q * q
    ratio = p / size
    result = np.empty(p.shape, dtype=complex)
    np.multiply(ratio, q, out=result.imag)
    np.multiply(ratio, p, out=result.real)
    return result, 0.0


def _riccati_bessel(x: NDArray[np.float64], orders: int) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """psi_n(x) and chi_n(x) for n = 0…orders, each (orders + 1, R); chi_0 = cos x."""
    count = x.size
    both = np.empty((orders + 1, 2 * count))
    sine, cosine = np.sin(x), np.cos(x)
    both[0, :count], both[0, count:] = sine, cosine
    both[1, :count], both[1, count:] = sine / x - cosine, cosine / x + sine
    factors = (2 * np.arange(1, orders)[:, np.newaxis] + 1) * np.concatenate((1 / x, 1 / x))
    rows, steps = list(both), list(factors)
    for n in range(1, orders):
        np.multiply(steps[n - 1], rows[n], out=rows[n + 1])
        np.subtract(rows[n + 1], rows[n - 1], out=rows[n + 1])
    psi, chi = both[:, :count], both[:, count:]
    if x.max() < SMALL_SIZE_PARAMETER * (1 + 1e-9):
        psi = np.vstack((sine, 1 / _ratios(x, orders))).cumprod(axis=0)
    return psi, chi


def _ratios(z: NDArray, orders: int) -> NDArray:
    """psi_{n−1}(z)/psi_n(z) for n = 1…orders, shape (orders, R), by downward recurrence of psi itself.

    The recurrence must start above |z|: below it the start error is neither damped nor amplified, and
    large spheres that hardly absorb would keep it (the extinction would not show it, the angles do).
    """
    largest = float(np.abs(z).max())
    start = int(max(orders, largest + 8 * np.cbrt(largest))) + 15
    inverse = 1 / z
    growth = np.log10((2 * start + 1) / float(np.abs(z).min()) + 1)
    stride = max(1, min(int(_DECADES / growth), max(1, _CACHED // z.size)))

    ratios = np.empty((orders, z.size), dtype=z.dtype)
    window = np.empty((stride + 2, z.size), dtype=z.dtype)
    rows = list(window)
    rows[0][:], rows[1][:] = 0, 1
    top = start
    while top > 0:
        steps = min(stride, top)
        n = np.arange(top, top - steps, -1)
        factors = list((2 * n + 1)[:, np.newaxis] * inverse)
        for i in range(steps):
            np.multiply(factors[i], rows[i + 1], out=rows[i + 2])
            np.subtract(rows[i + 2], rows[i], out=rows[i + 2])
        bottom = top - steps
        if bottom < orders:
            kept = min(top, orders) - bottom
            ratios[bottom : bottom + kept] = (window[2 : steps + 2] / window[1 : steps + 1])[::-1][:kept]
        last = window[steps : steps + 2].copy()
        # Rescaled to a modulus near 1: only ratios are used, so the recurrence can neither overflow nor vanish.
        last /= np.abs(last).max(axis=0)
        window[:2] = last
        top = bottom
    return ratios
