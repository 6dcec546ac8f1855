"""Simple media for the tests of exposure: isotropic, dipole and Mie scatterers with any profile."""

from __future__ import annotations

import numpy as np

from lasescatter.exposure.legs import Leg, Swing
from lasescatter.medium.mixture import Component, Mixture
from lasescatter.medium.profiles import Profile, Unbounded
from lasescatter.optics.matrix import ScatteringMatrix

ANGLES = np.linspace(0, np.pi, 2049)


def isotropic() -> ScatteringMatrix:
    one = np.ones_like(ANGLES)
    return ScatteringMatrix(ANGLES, one, 0 * one, one, 0 * one)


def dipole() -> ScatteringMatrix:
    """Pure dipole: no depolarisation."""
    c = np.cos(ANGLES)
    return ScatteringMatrix(ANGLES, 0.75 * (1 + c**2), -0.75 * (1 - c**2), 1.5 * c, 0 * c)


def air_matrix(wavelength: float = 532e-9) -> ScatteringMatrix:
    from lasescatter.optics.air import air_optics

    return air_optics(wavelength, 288.15, 101_325.0).matrix


def component(
    matrix: ScatteringMatrix,
    scattering: float = 1e-3,
    extinction: float = 0.0,
    profile: Profile | None = None,
    steady: bool = False,
    name: str = "haze",
) -> Component:
    return Component(name, extinction, scattering, matrix, profile or Unbounded(), steady)


def mixture(*components: Component) -> Mixture:
    return Mixture(components)


def leg(start, end=None, direction=None, number: int = 1, before: float = 0.0, reflected: float = 1.0) -> Leg:
    start = np.asarray(start, dtype=float)
    if end is None:
        unit = np.asarray(direction, dtype=float)
        return Leg(number, start, unit / np.linalg.norm(unit), np.inf, before, reflected)
    step = np.asarray(end, dtype=float) - start
    length = float(np.linalg.norm(step))
    return Leg(number, start, step / length, length, before, reflected)


PLAIN = Swing(0.0, None, False)


def linear(axis, purity: float = 1.0) -> Swing:
    return Swing(purity, tuple(np.asarray(axis, dtype=float)), False)
