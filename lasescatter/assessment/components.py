"""Optics of the site's air and loads at each wavelength: the mixtures that scatter, and their summaries."""

from __future__ import annotations

import math

import numpy as np

from lasescatter.assessment.outcome import ComponentSummary
from lasescatter.assumptions import Assumption
from lasescatter.limits.judge import is_placeholder
from lasescatter.medium.load import Concentration, concentration
from lasescatter.medium.mixture import Component, Mixture
from lasescatter.medium.profiles import Unbounded, profile_of
from lasescatter.optics.air import LONGEST_WAVELENGTH, SHORTEST_WAVELENGTH, AirRangeError, air_optics
from lasescatter.optics.matrix import ScatteringMatrix
from lasescatter.optics.mie import SizeRangeError
from lasescatter.optics.sizes import ParticleOptics, particle_optics
from lasescatter.problems import Problem, SiteError
from lasescatter.scene import Load, Scene

AIR = "air"

DRY_AIR = Assumption(
    name="Air is taken as dry, with 360 ppm of carbon dioxide, uniform over the site",
    direction="high",
    size="water vapour scatters less than the air it replaces: below 1 % at 20 °C; thinner air aloft is not credited",
    source="Bodhaine et al. 1999 for dry air; the effect of vapour: common practice, no source",
)
SIZE_AVERAGE = Assumption(
    name="The average over particle sizes is a finite sum",
    direction="either",
    size="by the error printed with each component, which the bounds of every ratio carry; 1e-3 is aimed at",
    source="comparison of N with 2N radii",
)

# Angles of the printed curves and running integrals: close together where the forward peak is. [rad]
CURVE_ANGLES = np.radians(
    np.concatenate([np.arange(0, 2, 0.25), np.arange(2, 10, 0.5), np.arange(10, 180, 1.0), [180.0]])
)

ROUNDING = 1e-12


def is_vouched(load: Load) -> bool:
    """Whether somebody vouches that a load neither thins nor clears; a placeholder is nobody."""
    return load.steady_by is not None and not is_placeholder(load.steady_by)


class SiteOptics:
    """Particle optics of a scene, each load and wavelength computed once."""

    def __init__(self, scene: Scene) -> None:
        self.scene = scene
        self._known: dict[tuple[str, float], ParticleOptics] = {}
        self._concentrations: dict[str, Concentration] = {}

    def of(self, load: Load, wavelength: float) -> ParticleOptics:
        """Optics of a load's particles.

        Raises
        ------
        SiteError
            If the sizes are outside what Mie sums are made for.
        """
        key = (load.key, wavelength)
        if key not in self._known:
            try:
                self._known[key] = particle_optics(load.sizes, load.index, wavelength)
            except SizeRangeError as fault:
                raise SiteError([Problem(f"{load.key}.sizes", str(fault), "Give sizes within that range")]) from fault
        return self._known[key]

    def concentration(self, load: Load) -> Concentration:
        """Number and mass of a load."""
        if load.key not in self._concentrations:
            wavelength = self.scene.beams[0].lines[0].wavelength
            self._concentrations[load.key] = concentration(load, lambda at: self.of(load, at), wavelength)
        return self._concentrations[load.key]

    def mixture(self, wavelength: float) -> Mixture:
        """Air and all loads at a wavelength.

        Outside the data for air its scattering is left out, and `gap` says so: the value is not extrapolated.
        """
        components = [self._air(wavelength)]
        for load in self.scene.loads:
            optics = self.of(load, wavelength)
            amount = self.concentration(load)
            components.append(
                Component(
                    load.name,
                    amount.extinction(optics),
                    amount.scattering(optics),
                    optics.matrix,
                    profile_of(load.region),
                    is_vouched(load),
                    optics.error_f11,
                )
            )
        return Mixture(tuple(components))

    def _air(self, wavelength: float) -> Component:
        air = self.scene.air
        try:
            molecules = air_optics(wavelength, air.temperature, air.pressure)
            scattering = molecules.scattering
        except AirRangeError:
            nearest = min(max(wavelength, SHORTEST_WAVELENGTH), LONGEST_WAVELENGTH)
            molecules, scattering = air_optics(nearest, air.temperature, air.pressure), 0.0
        return Component(AIR, scattering, scattering, molecules.matrix, Unbounded(), True)

    def gap(self, wavelength: float) -> str:
        """Why scattering at a wavelength is not complete; "" where it is."""
        if SHORTEST_WAVELENGTH <= wavelength <= LONGEST_WAVELENGTH:
            return ""
        return (
            f"scattering by air at {wavelength * 1e9:g} nm is outside the data "
            f"({SHORTEST_WAVELENGTH * 1e9:g}–{LONGEST_WAVELENGTH * 1e9:g} nm) and left out"
        )

    def summaries(self, wavelength: float, mixture: Mixture) -> tuple[ComponentSummary, ...]:
        """What a report prints of each component."""
        found = []
        for component, load in zip(mixture.components, (None, *self.scene.loads), strict=True):
            if component.extinction == 0:
                continue
            optics = None if load is None else self.of(load, wavelength)
            amount = None if load is None else self.concentration(load)
            found.append(_summary(component, wavelength, optics, amount))
        return tuple(found)


def _summary(
    component: Component, wavelength: float, optics: ParticleOptics | None, amount: Concentration | None
) -> ComponentSummary:
    mass = None if amount is None else amount.mass
    f11, f12 = component.matrix.at(CURVE_ANGLES)
    # F12 is 0 straight on and straight back by symmetry: rounding is not printed as a number.
    f12 = np.where(np.abs(f12) < ROUNDING * f11.max(), 0.0, f12)
    running, running_12, running_12_abs = component.matrix.running(CURVE_ANGLES)
    return ComponentSummary(
        name=component.name,
        wavelength=wavelength,
        extinction=component.extinction,
        scattering=component.scattering,
        albedo=component.scattering / component.extinction,
        asymmetry=_asymmetry(component.matrix) if optics is None else optics.asymmetry,
        number=None if amount is None else amount.number,
        mass=mass,
        mass_extinction=None if mass is None else component.extinction / mass,
        effective_radius=None if optics is None else optics.effective_radius,
        size_nodes=None if optics is None else optics.nodes,
        error_f11=None if optics is None else optics.error_f11,
        error_extinction=None if optics is None else optics.error_extinction,
        angles=tuple(CURVE_ANGLES.tolist()),
        phase=tuple((f11 / (4 * math.pi)).tolist()),
        phase_12=tuple((f12 / (4 * math.pi)).tolist()),
        running=tuple(running.tolist()),
        running_12=tuple(running_12.tolist()),
        running_12_abs=tuple(running_12_abs.tolist()),
    )


def _asymmetry(matrix: ScatteringMatrix) -> float:
    asymmetry = float(matrix.asymmetry)
    return 0.0 if abs(asymmetry) < ROUNDING else asymmetry
