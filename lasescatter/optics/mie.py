"""Spheres in a plane wave: one sphere, and sums over many spheres of one index.

Conventions: time factor exp(−iωt), index n + ik with k ≥ 0; size parameter x = 2π r n_medium/λ (vacuum
wavelength); amplitudes S1 (electric field square to the scattering plane) and S2 (in it). Source: Bohren &
Huffman, Absorption and Scattering of Light by Small Particles (1983), ch. 4.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from itertools import pairwise
from math import acosh, ceil, sqrt, tanh

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lasescatter.optics import cosines
from lasescatter.optics.angular import AngularTables, angular_functions
from lasescatter.optics.partial_waves import (
    LARGEST_SIZE_PARAMETER,
    SMALL_SIZE_PARAMETER,
    PartialWaves,
    SizeRangeError,
    check_index,
    check_size_parameter,
    partial_waves,
    series_length,
)

__all__ = ["SizeRangeError", "SphereOptics", "SphereSum", "averaged", "block_edges", "block_sum", "sphere", "work"]

# Bounds on the arrays of one step, in elements.
_WAVES = 400_000
_TABLE = 4_000_000
_PRODUCT = 2_000_000


@dataclass(frozen=True, eq=False)
class SphereOptics:
    """One sphere. Efficiencies are cross sections over pi r²."""

    q_ext: float
    q_sca: float
    q_abs: float
    q_back: float
    """Radar efficiency 4 |S(180°)|²/x²: 4π times the differential backscatter over the cross section."""
    asymmetry: float
    waves: PartialWaves = field(repr=False)

    def amplitudes(self, theta: ArrayLike) -> tuple[NDArray[np.complex128], NDArray[np.complex128]]:
        """S1 and S2 at scattering angles [rad]; any shape."""
        angle = np.asarray(theta, dtype=float)
        total = (self.waves.a + self.waves.b)[:, 0]
        difference = (self.waves.a - self.waves.b)[:, 0]
        cosine = np.cos(angle.ravel())
        s1 = np.empty(cosine.size, dtype=complex)
        s2 = np.empty_like(s1)
        widest = max(1, _TABLE // total.size)
        for first in range(0, cosine.size, widest):
            piece = slice(first, first + widest)
            plus, minus = angular_functions(cosine[piece], total.size)
            sum_, difference_ = total @ plus, difference @ minus
            s1[piece], s2[piece] = (sum_ + difference_) / 2, (sum_ - difference_) / 2
        return s1.reshape(angle.shape), s2.reshape(angle.shape)


def sphere(index: complex, size_parameter: float) -> SphereOptics:
    """One sphere.

    Parameters
    ----------
    index : complex
        Relative to the medium, n + ik. An infinite value means a perfect conductor.
    size_parameter : float

    Raises
    ------
    SizeRangeError
        Outside the range of size parameters or indices.
    """
    if not np.isinf(index):
        check_index(complex(index))
    check_size_parameter(size_parameter, size_parameter)
    x = float(size_parameter)
    orders = int(series_length(x))
    waves = partial_waves(complex(index), np.array([x]), orders)
    a, b = waves.a[:, 0], waves.b[:, 0]
    n = np.arange(1, orders + 1)
    sign = 1 - 2 * (n % 2)
    q_sca = 2 / x**2 * float(((2 * n + 1) * (np.abs(a) ** 2 + np.abs(b) ** 2)).sum())
    q_abs = 2 / x**2 * float(((2 * n + 1) * waves.absorbed[:, 0]).sum())
    back = (sign * (n + 0.5) * (a - b)).sum()
    # Bohren & Huffman (1983), section 4.5: Q_sca <cos theta>.
    neighbours = (a[:-1] * a[1:].conj() + b[:-1] * b[1:].conj()).real
    cosine = (n * (n + 2) / (n + 1))[:-1] @ neighbours + ((2 * n + 1) / (n * (n + 1))) @ (a * b.conj()).real
    return SphereOptics(
        q_ext=q_sca + q_abs,
        q_sca=q_sca,
        q_abs=q_abs,
        q_back=4 / x**2 * float(abs(back) ** 2),
        asymmetry=float(4 / x**2 * cosine / q_sca),
        waves=waves,
    )


@dataclass(frozen=True, eq=False)
class SphereSum:
    """Weighted sum over spheres. Cross sections are in units of 1/k², k the wavenumber in the medium."""

    scattering: float
    absorption: float
    matrix: NDArray[np.float64]
    """Cosine series of S11, S12, S33, S34 (Bohren & Huffman eq. 4.77), shape (4, degree + 1)."""

    def __add__(self, other: SphereSum) -> SphereSum:
        short, long = sorted((self.matrix, other.matrix), key=lambda series: series.shape[1])
        matrix = long.copy()
        matrix[:, : short.shape[1]] += short
        return SphereSum(self.scattering + other.scattering, self.absorption + other.absorption, matrix)

    def scaled(self, factor: float) -> SphereSum:
        return SphereSum(factor * self.scattering, factor * self.absorption, factor * self.matrix)

    @property
    def extinction(self) -> float:
        return self.scattering + self.absorption


def averaged(
    index: complex,
    size_parameter: NDArray[np.float64],
    weight: NDArray[np.float64],
    tables: AngularTables | None = None,
) -> SphereSum:
    """Sum over spheres of one index, each with its weight.

    Spheres of similar series length share one matrix product over angles; the angles of such a block are
    just enough to fix its cosine series, so the result is exact at every angle.

    Parameters
    ----------
    index : complex
        Relative to the medium.
    size_parameter, weight : (R,) arrays
        Weights are at least 0.
    tables : AngularTables, optional
        Carried from call to call to save work.

    Raises
    ------
    SizeRangeError
        Outside the range of size parameters or indices.
    """
    check_index(complex(index))
    check_size_parameter(float(size_parameter.min()), float(size_parameter.max()))
    tables = tables or AngularTables()
    order = np.argsort(size_parameter)
    x, w = size_parameter[order], weight[order]
    places = np.searchsorted(block_edges(), x, side="right")
    total = SphereSum(0.0, 0.0, np.zeros((4, 1)))
    for first, stop in pairwise([0, *(np.flatnonzero(np.diff(places)) + 1).tolist(), x.size]):
        total += block_sum(index, x[first:stop], w[first:stop], tables)
    return total


def block_sum(
    index: complex, size_parameter: NDArray[np.float64], weight: NDArray[np.float64], tables: AngularTables
) -> SphereSum:
    """The same for spheres between two neighbouring block edges; unchecked."""
    x, w = size_parameter, weight
    orders = int(series_length(x).max())
    rung = _LADDER[int(np.searchsorted(_LADDER, orders))]
    samples = np.zeros((4, 2 * rung + 1))
    scattering = absorption = 0.0
    twice = 2.0 * np.arange(1, orders + 1) + 1
    step = max(1, min(_WAVES // orders, _PRODUCT // (4 * min(rung + 1, _widest(rung)))))
    for first in range(0, x.size, step):
        few = slice(first, first + step)
        waves = partial_waves(complex(index), x[few], orders)
        strength = (waves.a.real**2 + waves.a.imag**2 + waves.b.real**2 + waves.b.imag**2) @ w[few]
        scattering += 2 * np.pi * float(twice @ strength)
        absorption += 2 * np.pi * float(twice @ (waves.absorbed @ w[few]))
        _add_samples(samples, waves, np.sqrt(w[few]), rung, tables)
    if not (np.isfinite(scattering) and np.isfinite(absorption) and np.isfinite(samples).all()):
        raise FloatingPointError(f"Mie sums of index {index}, size parameters near {x[0]:.6g} are not finite")
    return SphereSum(scattering, absorption, cosines.from_samples(samples))


def work(size_parameter: NDArray[np.float64]) -> float:
    """Multiplications that a sum will take, near enough to bound a job before it starts."""
    orders = series_length(size_parameter).astype(float)
    return float((16 * orders**2 + 1500 * orders).sum())


def _add_samples(
    samples: NDArray[np.float64],
    waves: PartialWaves,
    root: NDArray[np.float64],
    rung: int,
    tables: AngularTables,
) -> None:
    """Add the weighted matrix of some spheres at theta_j = pi j/(2 rung).

    Complex sums are laid out as [real | imaginary], first for the forward half of the angles, then mirrored.
    """
    orders, count = waves.a.shape
    alternate = (1.0 - 2.0 * (np.arange(orders) % 2))[:, np.newaxis]
    total = np.empty((orders, 4 * count))
    difference = np.empty_like(total)
    both = (waves.a + waves.b) * root
    apart = (waves.a - waves.b) * root
    for target, here, mirrored in ((total, both, apart), (difference, apart, both)):
        target[:, :count], target[:, count : 2 * count] = here.real, here.imag
        np.multiply(mirrored.real, alternate, out=target[:, 2 * count : 3 * count])
        np.multiply(mirrored.imag, alternate, out=target[:, 3 * count :])
    half = 2 * count
    for piece, (plus, minus) in tables.pieces(rung, _widest(rung)):
        left = plus[:orders].T @ total
        right = minus[:orders].T @ difference
        samples[:, piece] += _matrix_rows(left[:, :half], right[:, :half])
        mirror = slice(2 * rung - piece.start, 2 * rung - piece.stop, -1)
        mirrored_rows = _matrix_rows(right[:, half:], left[:, half:])
        if piece.stop == rung + 1:
            # theta = 90° is in both halves.
            mirror = slice(2 * rung - piece.start, rung, -1)
            mirrored_rows = mirrored_rows[:, :-1]
        samples[:, mirror] += mirrored_rows


def _matrix_rows(plus: NDArray[np.float64], minus: NDArray[np.float64]) -> NDArray[np.float64]:
    """S11, S12, S33, S34 summed over spheres, (4, J), from S1 + S2 and S1 − S2 laid out as [real | imaginary]."""
    count = plus.shape[1] // 2
    pp = np.einsum("ij,ij->i", plus, plus)
    mm = np.einsum("ij,ij->i", minus, minus)
    pm = np.einsum("ij,ij->i", plus, minus)
    cross = np.einsum("ij,ij->i", plus[:, count:], minus[:, :count])
    cross -= np.einsum("ij,ij->i", plus[:, :count], minus[:, count:])
    return np.stack(((pp + mm) / 4, -pm / 2, (pp - mm) / 4, cross / 2))


def _widest(rung: int) -> int:
    """Angles of one piece of a table that is not kept."""
    return max(64, _TABLE // rung)


def _outgrown(rung: int) -> float:
    """Size parameter at which the series becomes longer than a rung: x + 6 x^(1/3) + 3 = rung + 1."""
    # With x the cube of c the equation is c³ + 6c = rung − 2.
    c = (rung - 2) ** (1 / 3)
    for _ in range(8):
        c -= (c**3 + 6 * c - (rung - 2)) / (3 * c**2 + 6)
    return c**3


def _growth(n: int, x: float) -> float:
    """Logarithm, nearly, of chi_n(x) for n above x."""
    u = acosh(n / x)
    return n * (u - tanh(u))


def _ladder() -> tuple[int, ...]:
    """Series lengths that blocks are padded to; the first is that of x = 1.

    A step is the square root of two, and less for large spheres: chi_n(x) beyond n = x grows as
    exp(n (u − tanh u)) with cosh u = n/x, and must stay below 1e130 for its square to be finite. That of the
    smallest sphere of a block, padded to its rung, grows most.
    """
    rungs = [int(series_length(SMALL_SIZE_PARAMETER))]
    last = int(series_length(LARGEST_SIZE_PARAMETER))
    while rungs[-1] < last:
        smallest = _outgrown(rungs[-1]) if len(rungs) > 1 else SMALL_SIZE_PARAMETER
        rung = ceil(rungs[-1] * sqrt(2))
        while _growth(rung, smallest) > 300:
            rung -= max(1, rung // 1000)
        rungs.append(rung)
    return tuple(rungs)


_LADDER = _ladder()
# A shade lower, so that rounding cannot lift the sphere at an edge over the rung below.
_EDGES = (SMALL_SIZE_PARAMETER, *(_outgrown(rung) * (1 - 1e-12) for rung in _LADDER[1:]))


def block_edges() -> NDArray[np.float64]:
    """Size parameters at which the series outgrows a rung of the ladder, ascending; the first is 1."""
    return np.array(_EDGES)
