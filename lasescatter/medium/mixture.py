"""The medium at one wavelength: a sum of components, each with optics and a shape in space."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from lasescatter.medium.profiles import Profile
from lasescatter.optics.matrix import ScatteringMatrix

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Component:
    """One scatterer of the medium at one wavelength."""

    name: str
    extinction: float
    """Where the profile is 1. [m⁻¹]"""
    scattering: float
    """[m⁻¹]"""
    matrix: ScatteringMatrix
    profile: Profile
    steady: bool
    """True for air and for loads that somebody vouches for: the load fraction does not act on it."""
    error: float = 0.0
    """Estimated relative error of the matrix at its worst angle."""
    trust: float = 1.0
    """Factor by which its scattered light may be off beyond that."""
    mark: str = ""
    """Why, in a word: the mark that the factor belongs to."""
    extinction_trust: float = 1.0
    """Factor by which its extinction may be off: 1 where the load's reading fixes it."""


@dataclass(frozen=True)
class Mixture:
    """All components at one wavelength."""

    components: tuple[Component, ...]

    @property
    def steady(self) -> NDArray[np.bool_]:
        """Which components the load fraction leaves alone, shape (components,)."""
        return np.array([component.steady for component in self.components])

    @property
    def error(self) -> float:
        """Largest relative error of any component's matrix."""
        return max(component.error for component in self.components)

    def thicknesses(self, start: Floats, end: Floats) -> Floats:
        """Optical thickness of each component along segments (..., 3) to (..., 3), shape (components, ...)."""
        return np.stack([c.extinction * c.profile.column(start, end) for c in self.components])

    def densities(self, points: Floats) -> Floats:
        """Scattering coefficient of each component at points (..., 3) [m⁻¹], shape (components, ...)."""
        return np.stack([c.scattering * c.profile.value(points) for c in self.components])

    @property
    def steepness(self) -> float:
        """Greatest relative change of any component per metre inside its shape [m⁻¹]."""
        return max(component.profile.steepness() for component in self.components)

    def greatest_extinctions(self, points: Floats, within: Floats | float) -> Floats:
        """Extinction of each component that no place within a distance [m] of points (..., 3) exceeds [m⁻¹], shape
        (components, ...)."""
        return np.stack([c.extinction * c.profile.greatest_near(points, within) for c in self.components])
