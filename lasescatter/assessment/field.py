"""The light of one line of one beam at every observer, and what each kind of limit takes in of it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from lasescatter.exposure.direct import aperture_mean, beam_radius, irradiance
from lasescatter.exposure.fraction import Greatest, greatest_over_fraction
from lasescatter.exposure.legs import Leg, Swing, legs_of, swings_of
from lasescatter.exposure.line import BrightLine, bright_line, brightest_window, peak_radiance
from lasescatter.exposure.scattered import LegLight, scattered
from lasescatter.exposure.surfaces import stop_light, wall_return
from lasescatter.exposure.thickness import allowance, optical_thickness
from lasescatter.limits.compare import Received
from lasescatter.limits.hazards import full_field, hazard_of
from lasescatter.medium.mixture import Mixture
from lasescatter.scene import Beam, Limit, Line

Floats = NDArray[np.float64]

# Direct light that gives less than this per watt is none: a gaussian's tail [m⁻²].
NO_DIRECT_LIGHT = 1e-30


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
    direct: Floats
    """At the observer's point, not averaged. [m⁻²]"""
    spot: Floats | None
    """Where the beam meets its stop, (3,)."""
    spot_radius: float
    bright_lines: dict[int, BrightLine]
    """By leg, filled when a limit with an acceptance or a radiance asks."""

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
        """Quadrature error of `scattered`. [m⁻²]"""
        return np.sum([light.error for light in self.lights], axis=0)

    @property
    def hot_spot(self) -> float:
        """Peak over ideal profile."""
        return 1.0 if self.line.pulses is None else self.line.pulses.hot_spot

    def direct_mean(self, aperture: float) -> Floats:
        """Direct light averaged over an aperture at each observer, no extinction. [m⁻²]"""
        total = np.zeros(len(self.points))
        for light in self.lights:
            leg = light.leg
            s0, across, alongside = _foot(leg, self.points)
            radius = beam_radius(self.line, leg.path_before + np.clip(s0, 0, None))
            mean = aperture_mean(self.beam.profile, radius, across, aperture)
            total += np.where(alongside, leg.reflected * self.hot_spot * mean, 0.0)
        return np.where(total > NO_DIRECT_LIGHT, total, 0.0)

    def bright(self, index: int) -> BrightLine:
        """Tabulated brightness of one leg at the worst load fraction."""
        if index not in self.bright_lines:
            self.bright_lines[index] = bright_line(
                self.lights[index], self.mixture, self.points, self.greatest.fraction
            )
        return self.bright_lines[index]

    def received(self, observer: int, limit: Limit, wall_points: Floats) -> Received | str:
        """What one limit takes in at one observer, per watt; a sentence where that cannot be told.

        Parameters
        ----------
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
            field = np.pi / 4 * limit.acceptance**2
            if radiance:
                light, error, direct = light / field, error / field, direct / field
                stop = min(stop / field, self._stop_radiance(observer))
        elif radiance:
            if direct > 0:
                return "direct light has no radiance without an acceptance field"
            peaks = [peak_radiance(self.bright(i), self.line, self.beam.profile) for i in range(len(self.legs))]
            if any(void[observer] for _, void in peaks):
                return f'a leg of "{self.beam.name}" is seen so nearly end-on that its radiance is not defined by E4'
            light = float(sum(peak[observer] for peak, _ in peaks))
            error = light * 1e-3
            stop = self._stop_radiance(observer)
        else:
            light = float(self.greatest.irradiance[observer])
        orders = light * (float(allowance(self.thickness[observer])) - 1)
        by_origin = [("scattered", light)]
        if orders:
            by_origin.append(("allowance for higher orders", orders))
        by_origin += [("stop", stop), ("direct", direct)]
        total = light + orders + stop + direct
        high = total + error * float(allowance(self.thickness[observer]))
        if full_field(hazard_of(limit)) and not radiance:
            high += self._walls(wall_points)
        return Received(tuple(by_origin), max(0.0, light - error) + stop + direct, high, window)

    def _windows(self, observer: int, acceptance: float) -> tuple[float, tuple[tuple[str, float], ...]]:
        total, shown = 0.0, []
        for i, leg in enumerate(self.legs):
            found = brightest_window(self.bright(i), acceptance)
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

    def _walls(self, wall_points: Floats) -> float:
        """Upper bound of what walls return, per watt: all that is scattered and all that the stop sends back."""
        tau = sum(
            float(self.mixture.thicknesses(leg.origin, leg.origin + leg.length * leg.direction).sum())
            if np.isfinite(leg.length)
            else np.inf
            for leg in self.legs
        )
        stop = 0.0 if self.beam.stop is None else self.beam.stop.reflectance
        return wall_return(wall_points, min(1.0, -float(np.expm1(-tau)) + stop))


def line_field(beam: Beam, line: Line, mixture: Mixture, points: Floats) -> LineField:
    """Compute everything that one line sends to all observers."""
    legs = legs_of(beam)
    swings = swings_of(beam, line, legs)
    least = []
    for leg in legs:
        s0, _, _ = _foot(leg, points)
        least.append(beam_radius(line, leg.path_before + np.clip(s0, 0, None)))
    lights = scattered(legs, swings, mixture, points, np.stack(least))
    spot, spot_radius, stated, compared = _stop(beam, line, legs, mixture, points, lights)
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
        greatest=greatest_over_fraction(lights, mixture, len(points)),
        thickness=optical_thickness(lights, mixture, points),
        stop_stated=stated,
        stop_compared=compared,
        direct=np.where(direct > NO_DIRECT_LIGHT, direct, 0.0),
        spot=spot,
        spot_radius=spot_radius,
        bright_lines={},
    )


def _stop(
    beam: Beam, line: Line, legs: tuple[Leg, ...], mixture: Mixture, points: Floats, lights: tuple[LegLight, ...]
) -> tuple[Floats | None, float, Floats, Floats]:
    if beam.stop is None:
        return None, 0.0, np.zeros(len(points)), np.zeros(len(points))
    last = legs[-1]
    spot = last.origin + last.length * last.direction
    compared = last.reflected * stop_light(beam.stop, spot, points)
    tau = lights[-1].tau_before.sum() + mixture.thicknesses(last.origin, spot).sum()
    tau = tau + mixture.thicknesses(spot, points).sum(axis=0)
    radius = float(beam_radius(line, last.path_before + last.length))
    return spot, radius, compared * np.exp(-tau), compared


def _foot(leg: Leg, points: Floats) -> tuple[Floats, Floats, NDArray[np.bool_]]:
    """Nearest position on the leg's line, distance from it, and whether that position is on the leg."""
    relative = points - leg.origin
    s0 = relative @ leg.direction
    across = np.linalg.norm(relative - s0[:, None] * leg.direction, axis=-1)
    return s0, across, (s0 >= 0) & (s0 <= leg.length)
