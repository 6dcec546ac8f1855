"""The light of one line of one beam at every observer, and what each kind of limit takes in of it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, TypeVar, cast

import numpy as np
from numpy.typing import NDArray

from lasescatter.exposure.direct import aperture_mean, beam_radius, irradiance
from lasescatter.exposure.fraction import Greatest, greatest_over_fraction
from lasescatter.exposure.legs import Leg, Swing, legs_of, swings_of
from lasescatter.exposure.line import TABULATION_ERROR, BrightLine, Window, bright_line, brightest_window, peak_radiance
from lasescatter.exposure.scattered import LegLight, scattered
from lasescatter.exposure.sightline import Sightlines
from lasescatter.exposure.surfaces import stop_light, tight_room_area, wall_return
from lasescatter.exposure.thickness import allowance, optical_thickness
from lasescatter.limits.compare import Received
from lasescatter.limits.hazards import full_field, hazard_of
from lasescatter.medium.mixture import Mixture
from lasescatter.scene import Beam, Limit, Line

Floats = NDArray[np.float64]
T = TypeVar("T")

# Direct light that gives less than this per watt is none: a gaussian's tail [m⁻²].
NO_DIRECT_LIGHT = 1e-30

# Nearer than this a reach counts as touching: the bound is then far above any limit, and finite. [m]
LEAST_GAP = 1e-3

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
    lights: tuple[LegLight, ...]
    greatest: Greatest
    thickness: Floats
    stop_stated: Floats
    """With extinction. [m⁻²]"""
    stop_compared: Floats
    """Without. [m⁻²]"""
    stop_tau: Floats
    """Optical thickness from the beam's start to the stop to the observer, load as stated."""
    direct: Floats
    """At the observer's point, not averaged. [m⁻²]"""
    nearest: Floats
    """Distance to the nearest point of the beam's axis. [m]"""
    spot: Floats | None
    """Where the beam meets its stop, (3,)."""
    spot_radius: float
    known: dict[tuple[str, float], Any]
    """Values for all observers that limits have asked for: by name and aperture, acceptance or leg."""

    def _once(self, name: str, parameter: float, make: Callable[[], T]) -> T:
        key = (name, parameter)
        if key not in self.known:
            self.known[key] = make()
        return cast("T", self.known[key])

    @property
    def scattered(self) -> Floats:
        """First order at the stated load. [m⁻²]"""
        return np.sum([light.by_component.sum(axis=0) for light in self.lights], axis=0)

    @property
    def unpolarised(self) -> Floats:
        """The same with F12 left out. [m⁻²]"""
        return np.sum([light.unpolarised for light in self.lights], axis=0)

    @property
    def error(self) -> Floats:
        """Numerical error of `scattered`: of the integral and of the average over sizes. [m⁻²]"""
        return np.sum([light.error for light in self.lights], axis=0) + self.mixture.error * self.unpolarised

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
        """Tabulated brightness of one leg at the worst load fraction."""
        return self._once(
            "bright", index, lambda: bright_line(self.lights[index], self.mixture, self.points, self.greatest.fraction)
        )

    def window(self, index: int, acceptance: float) -> Window:
        """Brightest window of one leg."""
        return self._once(f"window {index}", acceptance, lambda: brightest_window(self.bright(index), acceptance))

    def peak(self, index: int) -> tuple[Floats, NDArray[np.bool_]]:
        """Peak radiance of one leg, and where it is void."""
        return self._once("peak", index, lambda: peak_radiance(self.bright(index), self.line, self.beam.profile))

    def received(self, observer: int, limit: Limit, reach: float, wall_points: Floats) -> Received | str:
        """What one limit takes in at one observer, per watt; a sentence where that cannot be told.

        Parameters
        ----------
        reach : float
            How far the head moves: the upper bound holds within it. [m]
        wall_points : ndarray (n, 3)
            Beam and observers, about which the tight room of the upper bound is drawn.
        """
        direct = float(self.direct_mean(limit.aperture)[observer])
        radiance = limit.quantity in ("radiance", "radiance dose")
        error = float(self.greatest.error[observer])
        stop = float(self.stop_compared[observer])
        window: tuple[tuple[str, float], ...] | None = None
        if limit.acceptance is not None:
            light, window = self._windows(observer, limit.acceptance)
            error += TABULATION_ERROR * light
            field = np.pi / 4 * limit.acceptance**2
            if radiance:
                light, error, direct = light / field, error / field, direct / field
                stop = min(stop / field, self._stop_radiance(observer))
        elif radiance:
            if direct > 0:
                return "direct light has no radiance without an acceptance field"
            peaks = [self.peak(i) for i in range(len(self.legs))]
            if any(void[observer] for _, void in peaks):
                return f'a leg of "{self.beam.name}" is seen so nearly end-on that its radiance is not defined by E4'
            light = float(sum(peak[observer] for peak, _ in peaks))
            error = TABULATION_ERROR * light
            stop = self._stop_radiance(observer)
        else:
            light = float(self.greatest.irradiance[observer])
        error += self.mixture.error * max(light, self._plain(observer, light))
        orders = light * (float(allowance(self.thickness[observer])) - 1)
        by_origin = [("scattered", light)]
        if orders:
            by_origin.append(("allowance for higher orders", orders))
        by_origin += [("stop", stop), ("direct", direct)]
        allowed = [("numerical error", error * float(allowance(self.thickness[observer])))]
        allowed += self._within_reach(observer, reach, light + orders, stop, radiance)
        if full_field(hazard_of(limit)) and not radiance:
            allowed.append(self._once("walls", 0.0, lambda: self._walls(wall_points)))
        low = max(0.0, light - error) + stop + direct
        return Received(tuple(by_origin), low, tuple(part for part in allowed if part[1] > 0), window)

    def _within_reach(
        self, observer: int, reach: float, scattered: float, stop: float, radiance: bool
    ) -> list[tuple[str, float]]:
        """How much more scattered and stop light the head can get where it reaches, per watt.

        No element of the beam comes nearer than by the reach, so its inverse square grows by (d/(d − reach))² at
        most, d the nearest distance. The stop is taken as seen square from r − reach. Radiance grows with neither.
        """
        if radiance or reach == 0:
            return []
        nearest = float(self.nearest[observer])
        gap = max(nearest - reach, LEAST_GAP)
        grown = [("reach, scattered", scattered * ((nearest / gap) ** 2 - 1))] if nearest > gap else []
        if self.beam.stop is not None and self.spot is not None:
            towards = self.points[observer] - self.spot
            if float(towards @ np.asarray(self.beam.stop.facing)) + reach > 0:
                gap = max(float(np.linalg.norm(towards)) - reach, LEAST_GAP)
                square = self.legs[-1].reflected * self.beam.stop.reflectance / (np.pi * gap**2)
                grown.append(("reach, stop", square - stop))
        return grown

    def _plain(self, observer: int, light: float) -> float:
        """Light as it would be without polarization: the measure of relative errors near a null."""
        polarised = float(self.scattered[observer])
        return light * float(self.unpolarised[observer]) / polarised if polarised > 0 else light

    def _windows(self, observer: int, acceptance: float) -> tuple[float, tuple[tuple[str, float], ...]]:
        total, shown = 0.0, []
        for i, leg in enumerate(self.legs):
            found = self.window(i, acceptance)
            total += float(found.irradiance[observer])
            shown += [(f"leg {leg.number} from", float(found.low[observer])), ("to", float(found.high[observer]))]
        return total, tuple(shown)

    def _stop_radiance(self, observer: int) -> float:
        """Peak radiance of the lit spot where the observer sees its face, per watt. [m⁻² sr⁻¹]"""
        if self.beam.stop is None or self.stop_compared[observer] <= 0:
            return 0.0
        peak = float(irradiance(self.beam.profile, self.spot_radius, 0.0)) * self.legs[-1].reflected
        slope = abs(float(self.legs[-1].direction @ np.asarray(self.beam.stop.facing)))
        return self.beam.stop.reflectance * peak * slope / np.pi

    def _walls(self, wall_points: Floats) -> tuple[str, float]:
        """Upper bound of what walls return, per watt: all that is scattered and all that the stop sends back."""
        tau = sum(
            float(self.mixture.thicknesses(leg.origin, leg.origin + leg.length * leg.direction).sum())
            if np.isfinite(leg.length)
            else np.inf
            for leg in self.legs
        )
        stop = 0.0 if self.beam.stop is None else self.beam.stop.reflectance
        freed = min(1.0, -float(np.expm1(-tau)) + stop)
        area = tight_room_area(wall_points)
        return f"walls of a room of {area:.0f} m²", wall_return(area, freed)


def line_field(beam: Beam, line: Line, mixture: Mixture, points: Floats) -> LineField:
    """Compute everything that one line sends to all observers."""
    legs = legs_of(beam)
    swings = swings_of(beam, line, legs)
    together = max(1, MOST_LEGS_TIMES_OBSERVERS // len(legs))
    parts = [
        _scattered_part(line, legs, swings, mixture, points[start : start + together])
        for start in range(0, len(points), together)
    ]
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
        lights=lights,
        greatest=Greatest(
            irradiance=np.concatenate([part[1].irradiance for part in parts]),
            fraction=np.concatenate([part[1].fraction for part in parts]),
            error=np.concatenate([part[1].error for part in parts]),
        ),
        thickness=np.concatenate([part[2] for part in parts]),
        stop_stated=compared * np.exp(-stop_tau),
        stop_compared=compared,
        stop_tau=stop_tau,
        direct=np.where(direct > NO_DIRECT_LIGHT, direct, 0.0),
        nearest=np.min([distance_to(leg, points) for leg in legs], axis=0),
        spot=spot,
        spot_radius=spot_radius,
        known={},
    )


def _scattered_part(
    line: Line, legs: tuple[Leg, ...], swings: tuple[Swing, ...], mixture: Mixture, points: Floats
) -> tuple[list[LegLight], Greatest, Floats]:
    """Scattered light of some observers; the nodes are let go with it."""
    least = [beam_radius(line, leg.path_before + np.clip(_foot(leg, points)[0], 0, None)) for leg in legs]
    integrated = scattered(legs, swings, mixture, points, np.stack(least))
    return (
        [leg.light for leg in integrated],
        greatest_over_fraction(integrated, mixture, len(points)),
        optical_thickness(integrated, mixture, points),
    )


def _joined(parts: list[LegLight]) -> LegLight:
    """One leg's light of several groups of observers."""
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
