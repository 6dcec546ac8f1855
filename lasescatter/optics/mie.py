"""Spheres in a plane wave: one sphere, and sums over many spheres of one index.

Conventions: time factor exp(−iωt), index n + ik with k ≥ 0; size parameter x = 2π r n_medium/λ (vacuum
wavelength); amplitudes S1 (electric field square to the scattering plane) and S2 (in it). Source: Bohren &
Huffman, Absorption and Scattering of Light by Small Particles (1983), ch. 4.
"""

from __future__ import annotations

import os
import threading
from collections.abc import Iterator, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, field
from functools import lru_cache
from itertools import pairwise
from math import ceil

import numpy as np
from numpy.typing import ArrayLike, NDArray
from threadpoolctl import ThreadpoolController

from lasescatter.optics import cosines
from lasescatter.optics.angular import AngularTables, angular_functions
from lasescatter.optics.partial_waves import (
    LARGEST_SIZE_PARAMETER,
    PartialWaves,
    SizeRangeError,
    check_index,
    check_size_parameter,
    partial_waves,
)
from lasescatter.optics.recurrences import series_length
from lasescatter.optics.workspace import Workspace

Floats = NDArray[np.float64]

__all__ = [
    "MieSpace",
    "SizeRangeError",
    "SphereOptics",
    "SphereSum",
    "averaged",
    "block_edges",
    "combined",
    "sphere",
    "sums",
    "work",
]

# Bounds on the arrays of one step, in elements.
_WAVES = 400_000
_TABLE = 4_000_000
_CACHED = 60_000
_LEAST_HEIGHT = 32
# Multiplications of a product from which on threads share it, and how many at most.
_WORTH_THREADS = 50_000_000
_MOST_THREADS = 8
# Spheres whose coefficients are computed together.
_TOGETHER = 750
# What the calls of one more group are worth: spheres times orders squared.
_CALLS = 100_000.0


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
        total, difference = self.waves.total[:, 0], self.waves.difference[:, 0]
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
    waves = partial_waves(complex(index), np.array([x]))
    a, b = waves.a[:, 0], waves.b[:, 0]
    n = np.arange(1, orders + 1)
    sign = 1 - 2 * (n % 2)
    q_sca = 2 / x**2 * float(((2 * n + 1) * (np.abs(a) ** 2 + np.abs(b) ** 2)).sum())
    q_abs = 2 / x**2 * float(waves.absorbed[0])
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
    matrix: Floats
    """Cosine series of S11, S12, S33, S34 (Bohren & Huffman eq. 4.77), shape (4, degree + 1)."""

    def scaled(self, factor: float) -> SphereSum:
        return SphereSum(factor * self.scattering, factor * self.absorption, factor * self.matrix)

    @property
    def extinction(self) -> float:
        return self.scattering + self.absorption


def combined(parts: Sequence[SphereSum]) -> SphereSum:
    """The sum of sums."""
    matrix = np.zeros((4, max((part.matrix.shape[1] for part in parts), default=1)))
    for part in parts:
        matrix[:, : part.matrix.shape[1]] += part.matrix
    return SphereSum(sum(part.scattering for part in parts), sum(part.absorption for part in parts), matrix)


class MieSpace:
    """What sums over spheres carry from call to call: tables and work arrays. Not for two callers at once."""

    def __init__(self) -> None:
        self.tables = AngularTables()
        self.work = Workspace()
        self._own = threading.local()

    def own_work(self) -> Workspace:
        """Work arrays of the thread that asks."""
        if not hasattr(self._own, "work"):
            self._own.work = Workspace()
        return self._own.work


@lru_cache(maxsize=1)
def _matrix_library() -> ThreadpoolController:
    return ThreadpoolController().select(user_api="blas")


@lru_cache(maxsize=1)
def _threads() -> ThreadPoolExecutor:
    cores = len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1
    return ThreadPoolExecutor(max_workers=max(1, min(cores, _MOST_THREADS)))


def averaged(
    index: complex,
    size_parameter: Floats,
    weight: Floats,
    space: MieSpace | None = None,
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
    space : MieSpace, optional
        Carried from call to call to save work.

    Raises
    ------
    SizeRangeError
        Outside the range of size parameters or indices.
    """
    check_index(complex(index))
    check_size_parameter(float(size_parameter.min()), float(size_parameter.max()))
    order = np.argsort(-size_parameter)
    x, w = size_parameter[order], weight[order]
    (groups,) = sums(index, x, w[np.newaxis], _cuts(x), space or MieSpace())
    return combined(groups)


def _cuts(x: Floats) -> list[int]:
    """Where to cut descending size parameters into groups that share a table.

    Wide groups save calls, narrow ones arithmetic: from rung to rung a group grows while that costs its new spheres
    less than the calls of one more group.
    """
    tops = np.array(_LADDER)[np.searchsorted(_LADDER, series_length(x))]
    ends = [*(np.flatnonzero(np.diff(tops)) + 1).tolist(), x.size]
    cuts, top = [0], float(tops[0])
    for end, next_end in pairwise(ends):
        here = float(tops[next_end - 1])
        if (next_end - end) * (top**2 - here**2) > _CALLS:
            cuts.append(end)
            top = here
    return [*cuts, x.size]


def sums(
    index: complex,
    size_parameter: Floats,
    weights: Floats,
    cuts: list[int],
    space: MieSpace,
) -> list[list[SphereSum]]:
    """Sums over groups of spheres, for each of a few sets of weights; unchecked.

    Parameters
    ----------
    size_parameter : (R,) array
        Descending.
    weights : (W, R) array
    cuts : list of int
        Where the groups begin, and R.

    Returns
    -------
    list
        For each set of weights the sums of all groups.
    """
    # One thread for each product, and threads of our own for several: those of the matrix library wait for each other
    # in a loop, which takes twenty times as long where other work has the machine.
    with _matrix_library().limit(limits=1):
        return _sums(index, size_parameter, weights, cuts, space)


def _sums(
    index: complex, size_parameter: Floats, weights: Floats, cuts: list[int], space: MieSpace
) -> list[list[SphereSum]]:
    lengths = series_length(size_parameter)
    rungs = [_LADDER[int(np.searchsorted(_LADDER, int(lengths[first])))] for first in cuts[:-1]]
    samples = [np.zeros((len(weights), 4, 2 * rung + 1)) for rung in rungs]
    absorbed = np.empty((len(weights), size_parameter.size))
    single = weights[0] if len(weights) == 1 else None
    for first, stop, parts in _batches(cuts, lengths):
        here = slice(first, stop)
        waves = partial_waves(index, size_parameter[here], None if single is None else single[here], space.work)
        absorbed[:, here] = waves.absorbed if single is not None else weights[:, here] * waves.absorbed
        for group, begin, end in parts:
            columns = slice(begin - first, end - first)
            own = None if single is not None else weights[:, begin:end]
            _add_samples(samples[group], waves, columns, int(lengths[begin]), own, space)
    totals = 2 * np.pi * np.add.reduceat(absorbed, cuts[:-1], axis=1)
    if not (np.isfinite(totals).all() and all(np.isfinite(values[:, 0]).all() for values in samples)):
        raise FloatingPointError(f"Mie sums of index {index} are not finite")
    series = [cosines.from_samples(values) for values in samples]
    return [
        [
            SphereSum(4 * np.pi * cosines.sphere_mean(one[i, 0]), float(totals[i, group]), one[i])
            for group, one in enumerate(series)
        ]
        for i in range(len(weights))
    ]


def _batches(cuts: list[int], lengths: NDArray[np.int64]) -> Iterator[tuple[int, int, list[tuple[int, int, int]]]]:
    """Spheres to take together, first and stop, and which of them belong to which group: (group, begin, end)."""
    first, parts = 0, list[tuple[int, int, int]]()
    for group, (begin, end) in enumerate(pairwise(cuts)):
        while begin < end:
            room = first + max(1, min(_TOGETHER, _WAVES // int(lengths[first]))) - begin
            stop = min(end, begin + room)
            if stop > begin:
                parts.append((group, begin, stop))
            begin = stop
            if begin < end:
                yield first, begin, parts
                first, parts = begin, []
    yield first, cuts[-1], parts


def _add_samples(
    samples: Floats,
    waves: PartialWaves,
    columns: slice,
    orders: int,
    weights: Floats | None,
    space: MieSpace,
) -> None:
    """Add the matrix of some spheres at theta_j = pi j/(2 rung); without weights these are in the waves."""
    rung = samples.shape[-1] // 2
    total = waves.total[:orders].view(float)[:, 2 * columns.start : 2 * columns.stop]
    difference = waves.difference[:orders].view(float)[:, 2 * columns.start : 2 * columns.stop]
    height = max(_LEAST_HEIGHT, _CACHED // total.shape[1])
    for piece, (plus, minus) in space.tables.pieces(rung, max(64, _TABLE // rung)):
        target = samples[..., piece]

        def add(start: int, plus: Floats = plus, minus: Floats = minus, target: Floats = target) -> None:
            some = slice(start, min(start + height, len(plus)))
            work = space.own_work()
            left = work.array("left", some.stop - start, total.shape[1])
            right = work.array("right", *left.shape)
            np.matmul(plus[some, :orders], total, out=left)
            np.matmul(minus[some, :orders], difference, out=right)
            target[..., some] += _matrix_rows(left, right, weights)

        starts = range(0, len(plus), height)
        if len(plus) * total.size < _WORTH_THREADS:
            for start in starts:
                add(start)
        else:
            list(_threads().map(add, starts))


def _matrix_rows(plus: Floats, minus: Floats, weights: Floats | None) -> Floats:
    """S11, S12, S33, S34 summed over spheres, (W, 4, J), from S1 + S2 and S1 − S2, (J, 2R).

    Real and imaginary parts stand in turn.
    """
    left, right = plus.view(complex), minus.view(complex)
    if weights is None:
        pp, mm = np.vecdot(plus, plus)[np.newaxis], np.vecdot(minus, minus)[np.newaxis]
        pm = np.vecdot(left, right)[np.newaxis]
    else:
        pp = weights @ (left.real**2 + left.imag**2).T
        mm = weights @ (right.real**2 + right.imag**2).T
        pm = weights @ (left.conj() * right).T
    return np.stack((pp + mm, -2 * pm.real, pp - mm, -2 * pm.imag), axis=1) / 4


def work(size_parameter: Floats) -> Floats:
    """Multiplications that each sphere will take, near enough to bound a job before it starts."""
    orders = series_length(size_parameter).astype(float)
    return 16 * orders**2 + 1500 * orders


def _outgrown(rung: int) -> float:
    """Size parameter at which the series becomes longer than a rung: x + 6 x^(1/3) + 3 = rung + 1."""
    # With x the cube of c the equation is c³ + 6c = rung − 2.
    c = (rung - 2) ** (1 / 3)
    for _ in range(8):
        c -= (c**3 + 6 * c - (rung - 2)) / (3 * c**2 + 6)
    return c**3


def _ladder() -> tuple[int, ...]:
    """Series lengths that have a table; the first is that of x = 1. A step is the fourth root of two."""
    rungs = [int(series_length(1.0))]
    last = int(series_length(LARGEST_SIZE_PARAMETER))
    while rungs[-1] < last:
        rungs.append(ceil(rungs[-1] * 2**0.25))
    return tuple(rungs)


_LADDER = _ladder()
# A shade lower, so that rounding cannot lift the sphere at an edge over the rung below.
_EDGES = (1.0, *(_outgrown(rung) * (1 - 1e-12) for rung in _LADDER[1:]))


def block_edges() -> Floats:
    """Size parameters at which the series outgrows a rung of the ladder, ascending; the first is 1."""
    return np.array(_EDGES)
