"""The light of one line of one beam at every observer."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, TypeVar, cast

import numpy as np
from numpy.typing import NDArray

from lasescatter.exposure.direct import aperture_mean, beam_radius, irradiance
from lasescatter.exposure.fraction import Greatest, greatest_over_fraction
from lasescatter.exposure.legs import Leg, Swing, legs_of, swings_of
from lasescatter.exposure.line import BrightLine, Peak, Window, bright_line, brightest_window, peak_radiance
from lasescatter.exposure.scattered import LEAST_GAP, LegLight, PanelEdges, scattered
from lasescatter.exposure.sightline import Sightlines
from lasescatter.exposure.surfaces import stop_light
from lasescatter.exposure.thickness import Thickness, optical_thickness
from lasescatter.medium.mixture import Mixture
from lasescatter.scene import Beam, Line

Floats = NDArray[np.float64]
T = TypeVar("T")

# Direct light that gives less than this per watt is none: a gaussian's tail [m⁻²].
NO_DIRECT_LIGHT = 1e-30

# Legs times observers integrated together: bounds the memory of the nodes to some tens of megabytes.
MOST_LEGS_TIMES_OBSERVERS = 1024


@dataclass(frozen=True)
class LineField:
    """One line of one beam at every observer, per watt in the beam at its start. Axis 0: observers."""

    beam: Beam
    line: Line
    legs: tuple[Leg, ...]
    swings: tuple[Swing, ...]
    mixture: Mixture
    points: Floats
    reaches: Floats
    lights: tuple[LegLight, ...]
    greatest: Greatest
    thickness: Thickness
    stop_stated: Floats
    """With extinction. [m⁻²]"""
    stop_compared: Floats
    """Without. [m⁻²]"""
    stop_tau: Floats
    """Optical thickness from the beam's start to the stop to the observer, load as stated."""
    direct: Floats
    """At the observer's point, not averaged. [m⁻²]"""
    spot: Floats | None
    """Where the beam meets its stop, (3,)."""
    spot_radius: float
    factors: Floats
    """By which the scattered light of each component may be off, (components, observers)."""
    peak_factors: Floats
    """The same for the greatest radiance."""
    extinction_factors: Floats
    """By which the extinction of each component may be off, (components,)."""
    known: dict[tuple[str, float], Any]
    """Values for all observers that have been asked for: by name and aperture, acceptance or leg."""

    def _once(self, name: str, parameter: float, make: Callable[[], T]) -> T:
        key = (name, parameter)
        if key not in self.known:
            self.known[key] = make()
        return cast("T", self.known[key])

    @property
    def scattered(self) -> Floats:
        """First order at the stated load. [m⁻²]"""
        return self._once("scattered", 0, lambda: np.sum([light.by_component.sum(axis=0) for light in self.lights], 0))

    @property
    def unpolarised(self) -> Floats:
        """The same with F12 left out. [m⁻²]"""
        return self._once("unpolarised", 0, lambda: np.sum([light.unpolarised for light in self.lights], axis=0))

    @property
    def error(self) -> Floats:
        """Numerical error of `scattered`: of the integral and of the average over sizes. [m⁻²]"""
        integral = self._once("error", 0, lambda: np.sum([light.error for light in self.lights], axis=0))
        return np.asarray(integral + self.mixture.error * self.unpolarised)

    @property
    def hot_spot(self) -> float:
        """Peak over ideal profile."""
        return 1.0 if self.line.pulses is None else self.line.pulses.hot_spot

    def direct_mean(self, aperture: float) -> Floats:
        """Direct light averaged over an aperture at each observer, no extinction. [m⁻²]"""
        return self._once("direct", aperture, lambda: self._direct_mean(aperture))

    def _direct_mean(self, aperture: float) -> Floats:
        total = np.zeros(len(self.points))
        for leg in self.legs:
            s0, across, alongside = _foot(leg, self.points)
            radius = beam_radius(self.line, leg.path_before + np.clip(s0, 0, None))
            mean = aperture_mean(self.beam.profile, radius, across, aperture)
            total += np.where(alongside, leg.reflected * self.hot_spot * mean, 0.0)
        return np.where(total > NO_DIRECT_LIGHT, total, 0.0)

    def bright(self, index: int) -> BrightLine:
        """One leg's brightness along the scattering angle."""
        return self._once("bright", index, lambda: bright_line(self.lights[index], self.mixture, self.points))

    def window(self, index: int, acceptance: float) -> Window:
        """Brightest window of one leg."""
        worst = self.greatest.fraction
        return self._once(
            f"window {index}", acceptance, lambda: brightest_window(self.bright(index), acceptance, worst)
        )

    def peak(self, index: int) -> Peak:
        """Peak radiance of one leg, its bounds within reach, and where it is void."""
        return self._once(
            "peak",
            index,
            lambda: peak_radiance(
                self.bright(index), self.line, self.beam.profile, self.greatest.fraction, self.reaches, self.mixture
            ),
        )

    @property
    def thickness_within_reach(self) -> Thickness:
        """Optical thickness that no place within reach exceeds by more than a sight line's new chord.

        A sight line grows by the reach at most, twice the farthest distance by twice the reach; where the medium
        thins with height, no part of a sight line comes to lie lower by more than the reach.
        """
        return self._once("thickness", 0, self._thickness_within_reach)

    def _thickness_within_reach(self) -> Thickness:
        shift = np.exp(self.mixture.steepness * self.reaches)
        added = 2 * self.mixture.greatest_extinctions(self.points, self.reaches) * self.reaches
        return Thickness(
            total=self.thickness.total * shift + added.sum(axis=0),
            by_component=self.thickness.by_component * shift + added,
        )

    @property
    def thickness_doubted(self) -> Floats:
        """The same where every extinction may be larger by its factor, (observers,)."""
        return self.thickness_within_reach.doubted(self.extinction_factors)

    def doubters(self, observer: int) -> list[tuple[str, float]]:
        """Components whose extinction is in doubt where it matters to an observer, with their factors."""
        own = self.thickness_within_reach.by_component[:, observer]
        return [
            (component.name, float(factor))
            for component, factor, tau in zip(self.mixture.components, self.extinction_factors, own, strict=True)
            if factor > 1 and tau > 0
        ]

    @property
    def within_reach(self) -> Floats:
        """Scattered irradiance of each component that no place within reach exceeds, at any load fraction,
        (components, observers). [m⁻²]"""
        return self._once("within reach", 0, lambda: np.sum([light.within_reach for light in self.lights], axis=0))

    @property
    def _thicknesses_along(self) -> list[Floats]:
        """Optical thickness of each component along each leg, (components,); of an endless leg it is not used."""
        return self._once("thicknesses along", 0, self._along)

    def _along(self) -> list[Floats]:
        ends = [leg.length if np.isfinite(leg.length) else 0.0 for leg in self.legs]
        return [
            self.mixture.thicknesses(leg.origin, leg.origin + end * leg.direction)
            for leg, end in zip(self.legs, ends, strict=True)
        ]

    def sees_stop(self, observer: int) -> bool:
        """Whether the lit face of the stop can be seen from some place within the observer's reach."""
        if self.beam.stop is None or self.spot is None:
            return False
        towards = self.points[observer] - self.spot
        return float(towards @ np.asarray(self.beam.stop.facing)) + float(self.reaches[observer]) > 0

    def stop_gap(self, observer: int) -> float:
        """Least distance from the lit spot within the observer's reach, and at least LEAST_GAP. [m]"""
        if self.spot is None:
            return np.inf
        r = float(np.linalg.norm(self.points[observer] - self.spot))
        return max(r - float(self.reaches[observer]), LEAST_GAP)

    @property
    def stop_radiance(self) -> float:
        """Peak radiance of the lit spot, per watt. [m⁻² sr⁻¹]"""
        if self.beam.stop is None:
            return 0.0
        peak = float(irradiance(self.beam.profile, self.spot_radius, 0.0)) * self.legs[-1].reflected * self.hot_spot
        slope = abs(float(self.legs[-1].direction @ np.asarray(self.beam.stop.facing)))
        return self.beam.stop.reflectance * peak * slope / np.pi

    def set_free(self, extinction_factors: Floats | float = 1.0) -> float:
        """Share of the beam's power that can come back from walls: what is scattered and what the stop returns.

        Parameters
        ----------
        extinction_factors : float or ndarray (components,)
            Times which each component's extinction is taken.
        """
        tau = sum(
            float((thickness * extinction_factors).sum()) if np.isfinite(leg.length) else np.inf
            for leg, thickness in zip(self.legs, self._thicknesses_along, strict=True)
        )
        stop = 0.0 if self.beam.stop is None else self.beam.stop.reflectance
        return min(1.0, -float(np.expm1(-tau)) + stop)


def line_field(beam: Beam, line: Line, mixture: Mixture, points: Floats, reaches: Floats) -> LineField:
    """Compute everything that one line sends to all observers.

    Parameters
    ----------
    points : ndarray (observers, 3)
        [m]
    reaches : ndarray (observers,)
        How far each head moves. [m]
    """
    legs = legs_of(beam)
    swings = swings_of(beam, line, legs)
    parts = [
        _scattered_part(line, legs, swings, mixture, points[some], reaches[some])
        for some in groups(len(legs), len(points))
    ]
    thicknesses = [part[2] for part in parts]
    lights = tuple(_joined([part[0][i] for part in parts]) for i in range(len(legs)))
    spot, spot_radius, stop_tau, compared = _stop(beam, line, legs, mixture, points, lights[-1].tau_before)
    hot = 1.0 if line.pulses is None else line.pulses.hot_spot
    direct = np.zeros(len(points))
    for leg in legs:
        s0, across, alongside = _foot(leg, points)
        radius = beam_radius(line, leg.path_before + np.clip(s0, 0, None))
        direct += np.where(alongside, leg.reflected * hot * irradiance(beam.profile, radius, across), 0.0)
    return LineField(
        beam=beam,
        line=line,
        legs=legs,
        swings=swings,
        mixture=mixture,
        points=points,
        reaches=reaches,
        lights=lights,
        greatest=Greatest(
            irradiance=np.concatenate([part[1].irradiance for part in parts]),
            fraction=np.concatenate([part[1].fraction for part in parts]),
            error=np.concatenate([part[1].error for part in parts]),
        ),
        thickness=Thickness(
            total=np.concatenate([thickness.total for thickness in thicknesses]),
            by_component=np.concatenate([thickness.by_component for thickness in thicknesses], axis=1),
        ),
        stop_stated=compared * np.exp(-stop_tau),
        stop_compared=compared,
        stop_tau=stop_tau,
        direct=np.where(direct > NO_DIRECT_LIGHT, direct, 0.0),
        spot=spot,
        spot_radius=spot_radius,
        factors=np.repeat([[component.trust] for component in mixture.components], len(points), axis=1),
        peak_factors=np.repeat([[component.trust] for component in mixture.components], len(points), axis=1),
        extinction_factors=np.array([component.extinction_trust for component in mixture.components]),
        known={},
    )


def _scattered_part(
    line: Line, legs: tuple[Leg, ...], swings: tuple[Swing, ...], mixture: Mixture, points: Floats, reaches: Floats
) -> tuple[list[LegLight], Greatest, Thickness]:
    """Scattered light of some observers; the nodes are let go with it."""
    integrated = scattered(legs, swings, mixture, points, beam_radii(line, legs, points), reaches)
    return (
        [leg.light for leg in integrated],
        greatest_over_fraction(integrated, mixture, len(points)),
        optical_thickness(integrated, mixture, points),
    )


def beam_radii(line: Line, legs: tuple[Leg, ...], points: Floats) -> Floats:
    """Radius of the beam alongside each observer, (legs, observers). [m]"""
    return np.stack([beam_radius(line, leg.path_before + np.clip(_foot(leg, points)[0], 0, None)) for leg in legs])


def groups(legs: int, observers: int) -> list[slice]:
    """Observers that are integrated together."""
    together = max(1, MOST_LEGS_TIMES_OBSERVERS // legs)
    return [slice(start, start + together) for start in range(0, observers, together)]


def _joined(parts: list[LegLight]) -> LegLight:
    """One leg's light of several groups of observers, as many in each but the last."""
    together = len(parts[0].unpolarised)
    sights = [part.sight for part in parts]
    return LegLight(
        leg=parts[0].leg,
        swing=parts[0].swing,
        sight=Sightlines(
            s0=np.concatenate([sight.s0 for sight in sights]),
            b=np.concatenate([sight.b for sight in sights]),
            outward=np.concatenate([sight.outward for sight in sights]),
            theta1=np.concatenate([sight.theta1 for sight in sights]),
            theta2=np.concatenate([sight.theta2 for sight in sights]),
        ),
        tau_before=parts[0].tau_before,
        by_component=np.concatenate([part.by_component for part in parts], axis=1),
        unpolarised=np.concatenate([part.unpolarised for part in parts]),
        error=np.concatenate([part.error for part in parts]),
        within_reach=np.concatenate([part.within_reach for part in parts], axis=1),
        edges=PanelEdges(
            owner=np.concatenate([part.edges.owner + i * together for i, part in enumerate(parts)]),
            low=np.concatenate([part.edges.low for part in parts]),
            high=np.concatenate([part.edges.high for part in parts]),
        ),
    )


def _stop(
    beam: Beam, line: Line, legs: tuple[Leg, ...], mixture: Mixture, points: Floats, tau_before: Floats
) -> tuple[Floats | None, float, Floats, Floats]:
    if beam.stop is None:
        return None, 0.0, np.zeros(len(points)), np.zeros(len(points))
    last = legs[-1]
    spot = last.origin + last.length * last.direction
    compared = last.reflected * stop_light(beam.stop, spot, points)
    tau = tau_before.sum() + mixture.thicknesses(last.origin, spot).sum()
    tau = tau + mixture.thicknesses(spot, points).sum(axis=0)
    radius = float(beam_radius(line, last.path_before + last.length))
    return spot, radius, tau, compared


def distance_to(leg: Leg, points: Floats) -> Floats:
    """Distance from points (observers, 3) to the nearest point of a leg, (observers,). [m]"""
    s0, across, _ = _foot(leg, points)
    return np.hypot(across, s0 - np.clip(s0, 0.0, leg.length))


def _foot(leg: Leg, points: Floats) -> tuple[Floats, Floats, NDArray[np.bool_]]:
    """Nearest position on the leg's line, distance from it, and whether that position is on the leg."""
    relative = points - leg.origin
    s0 = relative @ leg.direction
    across = np.linalg.norm(relative - s0[:, None] * leg.direction, axis=-1)
    return s0, across, (s0 >= 0) & (s0 <= leg.length)
