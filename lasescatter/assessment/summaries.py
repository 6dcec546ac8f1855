"""What a report prints of air and of each load at one wavelength."""

from __future__ import annotations

import math
from typing import TypedDict

import numpy as np

from lasescatter.assessment.components import SiteOptics
from lasescatter.assessment.outcome import ComponentSummary
from lasescatter.medium.equivalents import equivalents
from lasescatter.medium.mixture import Component, Mixture
from lasescatter.optics.matrix import ScatteringMatrix
from lasescatter.scene import Load, LoadReading

# Angles of the printed curves and running integrals: close together where the forward peak is. [rad]
CURVE_ANGLES = np.radians(
    np.concatenate([np.arange(0, 2, 0.25), np.arange(2, 10, 0.5), np.arange(10, 180, 1.0), [180.0]])
)

ROUNDING = 1e-12


def summaries(optics: SiteOptics, wavelength: float, mixture: Mixture) -> tuple[ComponentSummary, ...]:
    """Summaries of the components of a site's mixture at a wavelength; of those that are left out there is none."""
    loads = (None, *optics.present(wavelength))
    return tuple(
        _air(component, wavelength) if load is None else _load(component, wavelength, optics, load)
        for component, load in zip(mixture.components, loads, strict=True)
        if component.extinction > 0
    )


def readings_of(optics: SiteOptics, load: Load) -> tuple[LoadReading, ...]:
    """What instruments would read of a load, at those wavelengths of the site that its data reach."""
    wavelengths = tuple(at for at in optics.wavelengths if not optics.fault(load, at))
    return equivalents(optics.concentration(load), lambda at: optics.of(load, at), wavelengths)


def _air(component: Component, wavelength: float) -> ComponentSummary:
    return ComponentSummary(
        name=component.name,
        wavelength=wavelength,
        extinction=component.extinction,
        scattering=component.scattering,
        albedo=component.scattering / component.extinction,
        asymmetry=_asymmetry(component.matrix),
        number=None,
        mass=None,
        mass_extinction=None,
        effective_radius=None,
        size_nodes=None,
        error_f11=None,
        error_extinction=None,
        **_curves(component.matrix),
    )


def _load(component: Component, wavelength: float, optics: SiteOptics, load: Load) -> ComponentSummary:
    own, amount, floating = optics.of(load, wavelength), optics.concentration(load), optics.floating(load)
    return ComponentSummary(
        name=component.name,
        wavelength=wavelength,
        extinction=component.extinction,
        scattering=component.scattering,
        albedo=component.scattering / component.extinction,
        asymmetry=own.asymmetry,
        number=amount.number,
        mass=amount.mass,
        mass_extinction=None if amount.mass is None else component.extinction / amount.mass,
        effective_radius=own.effective_radius,
        size_nodes=own.nodes,
        error_f11=own.error_f11,
        error_extinction=own.error_extinction,
        kind=load.kind,
        index=None if floating is None else floating.indices(wavelength)[0],
        growth_factor=1.0 if floating is None else max(floating.factors),
        dry_mass=amount.dry_mass,
        trust=optics.trust(load, wavelength),
        equivalents=readings_of(optics, load),
        **_curves(component.matrix),
    )


class _Curves(TypedDict):
    """The printed curves of a summary."""

    angles: tuple[float, ...]
    phase: tuple[float, ...]
    phase_12: tuple[float, ...]
    running: tuple[float, ...]
    running_12: tuple[float, ...]
    running_12_abs: tuple[float, ...]


def _curves(matrix: ScatteringMatrix) -> _Curves:
    f11, f12 = matrix.at(CURVE_ANGLES)
    # F12 is 0 straight on and straight back by symmetry: rounding is not printed as a number.
    f12 = np.where(np.abs(f12) < ROUNDING * f11.max(), 0.0, f12)
    running, running_12, running_12_abs = matrix.running(CURVE_ANGLES)
    return {
        "angles": tuple(CURVE_ANGLES.tolist()),
        "phase": tuple((f11 / (4 * math.pi)).tolist()),
        "phase_12": tuple((f12 / (4 * math.pi)).tolist()),
        "running": tuple(running.tolist()),
        "running_12": tuple(running_12.tolist()),
        "running_12_abs": tuple(running_12_abs.tolist()),
    }


def _asymmetry(matrix: ScatteringMatrix) -> float:
    asymmetry = float(matrix.asymmetry)
    return 0.0 if abs(asymmetry) < ROUNDING else asymmetry
