"""Averages over particle sizes: cross sections and scattering matrix of a size distribution.

The quadrature is a trapezoid rule in ln r, panel by panel. Large spheres that absorb little have resonances
much narrower than any grid, so the rule converges slowly and not steadily; each panel is halved until the
changes seen, with a margin, say that the sum is right. Source of the margin: tests/optics/test_sizes.py, which
compares the estimate with fine sums.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from lasescatter.matter import SingleSize, SizeMode
from lasescatter.optics import cosines, distributions
from lasescatter.optics.distributions import SmoothShape
from lasescatter.optics.matrix import SPLINE_ERROR, ScatteringMatrix, from_series
from lasescatter.optics.mie import MieSpace, SphereSum, averaged, block_edges, combined, sums, work
from lasescatter.optics.partial_waves import SizeRangeError, check_index, check_size_parameter

# Error estimate = margin × the last change, or a third of the change before where this is more. The margin is
# larger where steps in size parameter are so wide that all resonances of a panel may have been missed twice.
_MARGIN_COARSE = 1.5
_MARGIN_FINE = 1.0
_FINE_STEP = 0.02
_FEWEST_INTERVALS = 16
_WIDEST_INTERVAL = 0.05
# The two ends of a distribution.
_TAILS = 2
# Size parameter from which panels span several rungs of the ladder of tables, and how many.
_LARGE_SPHERES, _RUNGS_OF_LARGE = 1500.0, 4

NOTHING = SphereSum(0.0, 0.0, np.zeros((4, 1)))


@dataclass(frozen=True)
class Accuracy:
    """When the average over sizes is good enough."""

    f11: float = 1e-3
    """Relative error of F11 at its worst angle, and of F12 relative to F11, of the sums over sizes."""
    extinction: float = 1e-4
    tail: float = 1e-5
    """What the radii left out at either end may carry, as a fraction."""
    work: float = 4e11
    """Multiplications after which the average is returned as it is, with its error estimate. The first two
    halvings of all panels are made in any case; without them there is no estimate."""

    def __post_init__(self) -> None:
        if not 0 < self.tail <= min(self.f11, self.extinction) / (2 * _TAILS):
            raise ValueError(
                f"tails of {self.tail:g} are too much for {self.f11:g} in F11, {self.extinction:g} in extinction"
            )


@dataclass(frozen=True)
class ParticleOptics:
    """Optics of one particle kind at one wavelength, per particle."""

    wavelength: float
    """In vacuum. [m]"""
    extinction: float
    """Mean cross section. [m²]"""
    scattering: float
    """[m²]"""
    albedo: float
    asymmetry: float
    volume: float | None
    """Mean volume of a particle. [m³]; None for a stand-in"""
    effective_radius: float | None
    """Mean of r³ over mean of r². [m]; None for a stand-in"""
    matrix: ScatteringMatrix = field(repr=False)
    nodes: int
    """Radii that the average took."""
    error_f11: float
    """Estimated relative error of F11 at its worst angle, and of F12 relative to F11."""
    error_extinction: float
    """Estimated relative error of the extinction."""


def particle_optics(
    modes: tuple[SizeMode, ...],
    index: complex | tuple[complex, ...],
    wavelength: float,
    medium_index: float = 1.0,
    accuracy: Accuracy | None = None,
    space: MieSpace | None = None,
) -> ParticleOptics:
    """Optics of spheres with a distribution of sizes.

    Parameters
    ----------
    modes : tuple of SizeMode
        Weights are fractions by number and sum to 1.
    index : complex, or one for each mode
        Of the particles, n + ik.
    wavelength : float
        In vacuum. [m]
    medium_index : float
        Of what surrounds them.
    accuracy : Accuracy, optional
    space : MieSpace, optional
        Carried from call to call to save work.

    Returns
    -------
    ParticleOptics
        With its error estimates; they exceed the accuracy asked for where the work bound was met first.

    Raises
    ------
    SizeRangeError
        If sizes that matter, or the index, lie outside the range of the method.
    """
    accuracy = accuracy or Accuracy()
    if not (0 < wavelength < np.inf and 0 < medium_index < np.inf):
        raise SizeRangeError(f"wavelength {wavelength:.6g} m and medium index {medium_index:.6g} must be above 0")
    wavenumber = 2 * np.pi * medium_index / wavelength
    indices = index if isinstance(index, tuple) else (index,) * len(modes)
    relative = tuple(complex(one) / medium_index for one in indices)
    if len(relative) != len(modes):
        raise SizeRangeError(f"there are {len(relative)} refractive indices for {len(modes)} size modes")
    for one in relative:
        check_index(one)
    total = sum(mode.weight for mode in modes)
    if not modes or any(mode.weight < 0 for mode in modes) or abs(total - 1) > 1e-6:
        raise SizeRangeError(f"weights of the size modes sum to {total:.6g}; they are fractions at least 0, sum 1")
    for mode in modes:
        distributions.check_shape(mode.shape)

    average = _Average(modes, relative, wavenumber, accuracy, space or MieSpace())
    average.refine()
    total_sum = average.total
    matrix, spline_error = from_series(total_sum.matrix)
    area = 1 / wavenumber**2
    second, third = (sum(m.weight * distributions.mean_power(m.shape, power) for m in modes) for power in (2, 3))
    tails = _TAILS * accuracy.tail if average.panels else 0.0
    return ParticleOptics(
        wavelength=wavelength,
        extinction=total_sum.extinction * area,
        scattering=total_sum.scattering * area,
        albedo=total_sum.scattering / total_sum.extinction,
        asymmetry=cosines.sphere_mean_cosine(total_sum.matrix[0]) / cosines.sphere_mean(total_sum.matrix[0]),
        volume=4 / 3 * np.pi * third,
        effective_radius=third / second,
        matrix=matrix,
        nodes=average.nodes,
        error_f11=average.error_f11 + tails + spline_error,
        error_extinction=average.error_extinction + tails,
    )


@dataclass(eq=False)
class _Panel:
    """A stretch of ln r of one mode, its trapezoid sum, and how far that is thought to be off."""

    mode: int
    low: float
    high: float
    intervals: int
    sum: SphereSum = NOTHING
    cost: float = 0.0
    """Multiplications of the next halving."""
    change: NDArray[np.float64] = field(default_factory=lambda: np.zeros(1))
    """By the last halving, relative: F11 and F12 (to F11) at all angles, then the extinction. Flat."""
    error: NDArray[np.float64] = field(default_factory=lambda: np.zeros(1))
    """Estimate of the same for the sum as it is."""

    def first_nodes(self) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """Descending ln r of the trapezoid rule and of the nodes that its first two halvings add, and three sets of
        steps: those of the rule, of the first middles and of the second ones, each a rule of its own."""
        u = np.linspace(self.high, self.low, 4 * self.intervals + 1)
        width = (self.high - self.low) / self.intervals
        steps = np.zeros((3, u.size))
        steps[0, ::4] = width
        steps[0, [0, -1]] /= 2
        steps[1, 2::4] = width
        steps[2, 1::2] = width / 2
        return u, steps

    def middles(self) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """Descending ln r halfway between the nodes, and their steps as a rule of their own."""
        u = np.linspace(self.high, self.low, 2 * self.intervals + 1)[1::2]
        return u, np.full((1, u.size), (self.high - self.low) / self.intervals)


Nodes = Callable[[_Panel], tuple[NDArray[np.float64], NDArray[np.float64]]]


class _Average:
    """Sum over all modes, refined panel by panel."""

    def __init__(
        self,
        modes: tuple[SizeMode, ...],
        indices: tuple[complex, ...],
        wavenumber: float,
        accuracy: Accuracy,
        space: MieSpace,
    ) -> None:
        self._modes, self._indices = modes, indices
        self._wavenumber, self._accuracy = wavenumber, accuracy
        self._space = space
        self._done = 0.0
        self.nodes = 0
        self.error_f11 = self.error_extinction = 0.0
        self.panels: list[_Panel] = []
        self._fixed: list[SphereSum] = []
        self._smooth: dict[int, SmoothShape] = {}
        for number, (mode, index) in enumerate(zip(modes, indices, strict=True)):
            if isinstance(mode.shape, SingleSize):
                x = wavenumber * mode.shape.radius
                check_size_parameter(x, x)
                self._fixed.append(averaged(index, np.array([x]), np.array([mode.weight]), self._space))
                self.nodes += 1
            else:
                self._smooth[number] = mode.shape
                self.panels += self._cut(number, mode.shape)
        first, *middles = self._sums(self.panels, _Panel.first_nodes) if self.panels else [[]]
        for panel, total in zip(self.panels, first, strict=True):
            panel.sum = total
        for between in middles:
            self._halve(self.panels, between)

    @property
    def total(self) -> SphereSum:
        """Sum over everything so far."""
        return combined([*self._fixed, *(panel.sum for panel in self.panels)])

    def refine(self) -> None:
        """Halve panels until the estimates meet the accuracy, or the next round would exceed the work bound.

        A grid that misses resonances leaves an error about as large as its last change and independent of
        it, and independent from panel to panel: so errors add as squares.
        """
        # Of the error of F11 the tails and, where it counts, the spline take their part.
        spline = min(SPLINE_ERROR, self._accuracy.f11 / 100)
        allowed = np.full(2 * self.total.matrix.shape[1] + 1, self._accuracy.f11 - spline)
        allowed[-1] = self._accuracy.extinction
        allowed = (allowed - _TAILS * self._accuracy.tail) ** 2
        chosen = self.panels
        while chosen:
            variance = np.sum([panel.error**2 for panel in self.panels], axis=0)
            self.error_f11 = float(np.sqrt(variance[:-1].max()))
            self.error_extinction = float(np.sqrt(variance[-1]))
            failed = variance > allowed
            if not failed.any():
                return
            # What a panel contributes where the sum is not good enough, for its cost. Halving takes this
            # down by a factor of about 8.
            gains = [float((panel.error[failed] ** 2 / variance[failed]).max()) / panel.cost for panel in self.panels]
            chosen = [panel for panel, gain in zip(self.panels, gains, strict=True) if gain >= max(gains) / 4]
            if self._done + sum(panel.cost for panel in chosen) > self._accuracy.work:
                return
            self._halve(chosen, self._sums(chosen, _Panel.middles)[0])

    def _cut(self, number: int, shape: SmoothShape) -> list[_Panel]:
        """The panels of a mode, ascending: its radii cut where the series outgrow their tables, and at its corners."""
        contrast = abs(self._indices[number] - 1)
        limits = distributions.log_radius_limits(shape, self._wavenumber, contrast, self._accuracy.tail)
        for end in limits:
            x = self._wavenumber * float(np.exp(end))
            check_size_parameter(x, x, f" (radius {np.exp(end):.4g} m, which a distribution of sizes reaches)")
        edges = block_edges()
        # Large spheres are few, and their tables are too large to keep: what a panel costs is its table.
        large = int(np.searchsorted(edges, _LARGE_SPHERES))
        edges = np.concatenate((edges[:large], edges[large::_RUNGS_OF_LARGE]))
        edges = np.concatenate((np.log(edges / self._wavenumber), distributions.corners(shape)))
        inside = np.unique(edges[(edges > limits[0]) & (edges < limits[1])])
        widest = min(_WIDEST_INTERVAL, (limits[1] - limits[0]) / _FEWEST_INTERVALS)
        return [
            _Panel(number, low, high, max(2, int(np.ceil((high - low) / widest))))
            for low, high in pairwise([limits[0], *inside.tolist(), limits[1]])
        ]

    def _sums(self, panels: list[_Panel], nodes: Nodes) -> list[list[SphereSum]]:
        """Sums over some nodes of each panel, for each set of their steps; the panels of a mode share the work."""
        results: list[dict[int, SphereSum]] = []
        for number, shape in self._smooth.items():
            own = [panel for panel in reversed(panels) if panel.mode == number]
            if not own:
                continue
            found = [nodes(panel) for panel in own]
            log_radius = np.concatenate([u for u, _ in found])
            steps = np.concatenate([steps for _, steps in found], axis=1)
            x = self._wavenumber * np.exp(log_radius)
            weights = self._modes[number].weight * distributions.density(shape, log_radius) * steps
            cuts = np.concatenate(((0,), np.cumsum([u.size for u, _ in found]))).tolist()
            self.nodes += x.size
            spent = np.add.reduceat(work(x), cuts[:-1])
            self._done += float(spent.sum())
            for panel, cost in zip(own, spent.tolist(), strict=True):
                panel.cost = 2 * cost if len(steps) == 1 else cost
            for i, totals in enumerate(sums(self._indices[number], x, weights, cuts, self._space)):
                if i == len(results):
                    results.append({})
                results[i].update((id(panel), total) for panel, total in zip(own, totals, strict=True))
        return [[totals[id(panel)] for panel in panels] for totals in results]

    def _halve(self, panels: list[_Panel], middles: list[SphereSum]) -> None:
        """Halve the intervals of some panels, given the sums over the new nodes, and note what that changed."""
        total = self.total
        degree = total.matrix.shape[1] - 1
        s11, s12 = cosines.to_samples(total.matrix[:2], degree)
        halved = [combined([panel.sum, between]).scaled(0.5) for panel, between in zip(panels, middles, strict=True)]
        changes = np.zeros((len(panels), 2, degree + 1))
        for change, panel, new in zip(changes, panels, halved, strict=True):
            change[:, : new.matrix.shape[1]] = new.matrix[:2] - panel.sum.matrix[:2]
        for (c11, c12), panel, new in zip(cosines.to_samples(changes, degree), panels, halved, strict=True):
            width = (panel.high - panel.low) / panel.intervals
            common = (new.scattering - panel.sum.scattering) / total.scattering
            extinction = (new.extinction - panel.sum.extinction) / total.extinction
            change = np.abs(np.concatenate((c11 / s11 - common, (c12 - s12 * common) / s11, (extinction,))))
            coarse = self._wavenumber * np.exp(panel.high) * width / 2 > _FINE_STEP
            panel.error = (_MARGIN_COARSE if coarse else _MARGIN_FINE) * np.maximum(change, panel.change / 3)
            panel.change, panel.sum = change, new
            panel.intervals *= 2
