"""Averages over particle sizes: cross sections and scattering matrix of a size distribution.

The quadrature is a trapezoid rule in ln r, panel by panel. Large spheres that absorb little have resonances
much narrower than any grid, so the rule converges slowly and not steadily; each panel is halved until the
changes seen, with a margin, say that the sum is right. Source of the margin: tests/optics/test_sizes.py, which
compares the estimate with fine sums.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from lasescatter.matter import Lognormal, ModifiedGamma, SingleSize, SizeMode
from lasescatter.optics import cosines, distributions
from lasescatter.optics.angular import AngularTables
from lasescatter.optics.matrix import SPLINE_ERROR, ScatteringMatrix, from_series
from lasescatter.optics.mie import SphereSum, averaged, block_edges, block_sum, work
from lasescatter.optics.partial_waves import SizeRangeError, check_index, check_size_parameter

# Error estimate = margin × the last change, or a third of the change before where this is more. The margin is
# larger where steps in size parameter are so wide that all resonances of a panel may have been missed twice.
_MARGIN_COARSE = 3.0
_MARGIN_FINE = 2.0
_FINE_STEP = 0.02
_FEWEST_INTERVALS = 16
_WIDEST_INTERVAL = 0.05
_FIRST_HALVINGS = 2
# The two ends of a distribution.
_TAILS = 2


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
    index: complex,
    wavelength: float,
    medium_index: float = 1.0,
    accuracy: Accuracy | None = None,
) -> ParticleOptics:
    """Optics of spheres with a distribution of sizes.

    Parameters
    ----------
    modes : tuple of SizeMode
        Weights are fractions by number and sum to 1.
    index : complex
        Of the particles, n + ik.
    wavelength : float
        In vacuum. [m]
    medium_index : float
        Of what surrounds them.
    accuracy : Accuracy, optional

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
    relative = complex(index) / medium_index
    check_index(relative)
    total = sum(mode.weight for mode in modes)
    if not modes or any(mode.weight < 0 for mode in modes) or abs(total - 1) > 1e-6:
        raise SizeRangeError(f"weights of the size modes sum to {total:.6g}; they are fractions at least 0, sum 1")
    for mode in modes:
        distributions.check_shape(mode.shape)

    average = _Average(modes, relative, wavenumber, accuracy)
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

    shape: Lognormal | ModifiedGamma
    weight: float
    """Fraction by number of its mode."""
    low: float
    high: float
    intervals: int
    sum: SphereSum
    cost: float = 0.0
    """Multiplications of the next halving."""
    change: NDArray[np.float64] = field(default_factory=lambda: np.zeros(1))
    """By the last halving, relative: F11 and F12 (to F11) at all angles, then the extinction. Flat."""
    error: NDArray[np.float64] = field(default_factory=lambda: np.zeros(1))
    """Estimate of the same for the sum as it is."""


class _Average:
    """Sum over all modes, refined panel by panel."""

    def __init__(self, modes: tuple[SizeMode, ...], index: complex, wavenumber: float, accuracy: Accuracy) -> None:
        self._index, self._wavenumber, self._accuracy = index, wavenumber, accuracy
        self._tables = AngularTables()
        self._done = 0.0
        self.nodes = 0
        self.error_f11 = self.error_extinction = 0.0
        self.panels: list[_Panel] = []
        self._fixed = SphereSum(0.0, 0.0, np.zeros((4, 1)))
        for mode in modes:
            if isinstance(mode.shape, SingleSize):
                x = wavenumber * mode.shape.radius
                check_size_parameter(x, x)
                self._fixed += averaged(index, np.array([x]), np.array([mode.weight]), self._tables)
                self.nodes += 1
            else:
                self.panels += self._start(mode.shape, mode.weight)

    @property
    def total(self) -> SphereSum:
        """Sum over everything so far."""
        result = self._fixed
        for panel in self.panels:
            result += panel.sum
        return result

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
        for _ in range(_FIRST_HALVINGS):
            self._halve(self.panels)
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
            self._halve(chosen)

    def _start(self, shape: Lognormal | ModifiedGamma, weight: float) -> list[_Panel]:
        """The panels of a mode: its radii cut where the sums change their block."""
        limits = distributions.log_radius_limits(shape, self._wavenumber, abs(self._index - 1), self._accuracy.tail)
        for end in limits:
            x = self._wavenumber * float(np.exp(end))
            check_size_parameter(x, x, f" (radius {np.exp(end):.4g} m, which a distribution of sizes reaches)")
        edges = np.log(block_edges() / self._wavenumber)
        edges = np.array([limits[0], *edges[(edges > limits[0]) & (edges < limits[1])], limits[1]])
        widest = min(_WIDEST_INTERVAL, (limits[1] - limits[0]) / _FEWEST_INTERVALS)
        panels = []
        for low, high in pairwise(edges.tolist()):
            intervals = max(2, int(np.ceil((high - low) / widest)))
            u = np.linspace(low, high, intervals + 1)
            step = np.full(u.size, (high - low) / intervals)
            step[[0, -1]] /= 2
            panels.append(_Panel(shape, weight, low, high, intervals, self._sum(shape, u, weight * step)))
        return panels

    def _sum(
        self, shape: Lognormal | ModifiedGamma, log_radius: NDArray[np.float64], step: NDArray[np.float64]
    ) -> SphereSum:
        """Sum over some radii of a distribution that all lie in one block."""
        x = self._wavenumber * np.exp(log_radius)
        self.nodes += x.size
        self._done += work(x)
        return block_sum(self._index, x, distributions.density(shape, log_radius) * step, self._tables)

    def _halve(self, panels: list[_Panel]) -> None:
        """Halve the intervals of some panels and note what that changed."""
        total = self.total
        degree = total.matrix.shape[1] - 1
        s11, s12 = cosines.to_samples(total.matrix[:2], degree)
        for panel in panels:
            before = self._done
            width = (panel.high - panel.low) / panel.intervals
            middle = np.linspace(panel.low, panel.high, 2 * panel.intervals + 1)[1::2]
            between = self._sum(panel.shape, middle, np.full(middle.size, panel.weight * width))
            halved = (panel.sum + between).scaled(0.5)
            c11, c12 = cosines.to_samples(halved.matrix[:2] - panel.sum.matrix[:2], degree)
            common = (halved.scattering - panel.sum.scattering) / total.scattering
            extinction = (halved.extinction - panel.sum.extinction) / total.extinction
            change = np.abs(np.concatenate((c11 / s11 - common, (c12 - s12 * common) / s11, (extinction,))))
            coarse = self._wavenumber * np.exp(panel.high) * width / 2 > _FINE_STEP
            panel.error = (_MARGIN_COARSE if coarse else _MARGIN_FINE) * np.maximum(change, panel.change / 3)
            panel.change, panel.sum = change, halved
            panel.intervals *= 2
            panel.cost = 2 * (self._done - before)
