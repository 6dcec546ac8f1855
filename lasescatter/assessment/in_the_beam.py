"""What an eye would get in the beam itself, whether or not anybody stands there, and from a white card held into it."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from lasescatter.assessment.outcome import BeamSpot, InTheBeam
from lasescatter.exposure.direct import aperture_mean, beam_radius, hazard_distance
from lasescatter.exposure.legs import Leg, legs_of
from lasescatter.exposure.surfaces import white_card
from lasescatter.limits.compare import Comparison, Received, compare
from lasescatter.limits.hazards import dose_time, hazard_of
from lasescatter.scene import Beam, Limit, Line, Observer, Scene

Floats = NDArray[np.float64]

# Nearest distance at which a card is looked at: eyes are not measured nearer than this (BGI 832, A2.5.1).
CARD_DISTANCE = 0.1


def in_the_beam(scene: Scene) -> tuple[InTheBeam, ...]:
    """The in-the-beam lines of every beam line."""
    return tuple(_one(scene, beam, line) for beam in scene.beams for line in beam.lines)


@dataclass(frozen=True)
class _Case:
    """One limit and time for one line, as multiples per irradiance of a one-watt beam [m²]."""

    limit: Limit
    comparison: Comparison
    start: float
    """Mean over the aperture at the start of the beam, per watt. [m⁻²]"""

    @property
    def multiple(self) -> float:
        return self.comparison.ratio / self.start

    @property
    def exposure(self) -> float:
        return self.comparison.exposure / self.start


def _one(scene: Scene, beam: Beam, line: Line) -> InTheBeam:
    hot = 1.0 if line.pulses is None else line.pulses.hot_spot
    cases = _cases(scene, beam, line, hot)
    spots = tuple(_spot(beam, line, hot, place, cases) for place in _places(scene, beam))
    if not cases:
        return InTheBeam(
            beam=beam.name,
            line=line.name,
            wavelength=line.wavelength,
            limit=None,
            unit="",
            duration=None,
            limit_value=None,
            hazard_distance=None,
            hazard_limit=None,
            reason="no entered limit (irradiance or radiant exposure) covers this wavelength and time",
            spots=spots,
        )
    first = cases[0].comparison
    reach = {case.limit.name: _hazard_distance(beam, line, hot, case) for case in _for_the_eye(cases)}
    farthest = max(reach, key=lambda name: _without_rounding(reach[name]))
    return InTheBeam(
        beam=beam.name,
        line=line.name,
        wavelength=line.wavelength,
        limit=first.limit,
        unit=first.unit,
        duration=first.time,
        limit_value=first.limit_value,
        hazard_distance=reach[farthest],
        hazard_limit=farthest,
        reason="",
        spots=spots,
    )


def _for_the_eye(cases: list[_Case]) -> list[_Case]:
    return [case for case in cases if case.limit.tissue != "skin"] or cases


def _hazard_distance(beam: Beam, line: Line, hot: float, case: _Case) -> float:
    whole = case.multiple * hot / (math.pi / 4 * case.limit.aperture**2)
    return hazard_distance(line, beam.profile, whole, case.limit.aperture)


def _cases(scene: Scene, beam: Beam, line: Line, hot: float) -> list[_Case]:
    """Every limit with the observers' time that gives it the largest multiple; the largest at the start first, of
    equal ones those for the eye, then in the order of the site file."""
    best: dict[str, _Case] = {}
    for limit in scene.limits:
        if limit.quantity not in ("irradiance", "radiant exposure"):
            continue
        mean = float(aperture_mean(beam.profile, beam_radius(line, 0.0), 0.0, limit.aperture)) * hot
        received = Received((("direct", mean),), mean)
        for duration, daily in _times(scene.observers):
            time = dose_time(hazard_of(limit), line, duration, daily)
            result = compare(limit, beam.name, line, received, duration, time)
            if isinstance(result, Comparison) and (
                limit.name not in best or result.ratio > best[limit.name].comparison.ratio
            ):
                best[limit.name] = _Case(limit, result, mean)
    return sorted(
        best.values(), key=lambda case: (-_without_rounding(case.comparison.ratio), case.limit.tissue == "skin")
    )


def _without_rounding(value: float) -> float:
    """A value to ten digits: those of two limits that differ by rounding alone are equal, and the first one stands."""
    return float(f"{value:.9e}")


def _times(observers: tuple[Observer, ...]) -> set[tuple[float, float | None]]:
    return {(duration, observer.daily) for observer in observers for duration in observer.durations}


def _places(scene: Scene, beam: Beam) -> list[tuple[str, Leg, float]]:
    """Named places along the path: the leg that leads there and the distance along it."""
    legs = legs_of(beam)
    places = [("start", legs[0], 0.0)]
    places += [(f"mirror {leg.number}", leg, leg.length) for leg in legs[:-1]]
    if beam.stop is not None:
        places.append(("stop", legs[-1], legs[-1].length))
    for observer in scene.observers:
        leg, along = nearest_element(legs, np.asarray(observer.position, dtype=float))
        places.append((f"nearest to {observer.name}", leg, along))
    return places


def nearest_element(legs: tuple[Leg, ...], point: Floats) -> tuple[Leg, float]:
    """The leg and the distance along it that are nearest to a point."""
    best: tuple[float, Leg, float] | None = None
    for leg in legs:
        along = float(np.clip((point - leg.origin) @ leg.direction, 0.0, leg.length))
        distance = float(np.linalg.norm(point - leg.origin - along * leg.direction))
        if best is None or distance < best[0]:
            best = distance, leg, along
    assert best is not None  # a path has at least one leg
    return best[1], best[2]


def _spot(beam: Beam, line: Line, hot: float, where: tuple[str, Leg, float], cases: list[_Case]) -> BeamSpot:
    place, leg, along = where
    position = leg.origin + along * leg.direction
    radius = float(beam_radius(line, leg.path_before + along))
    direct = multiple = limit = card_distance = card_multiple = None
    if cases:
        means = [
            float(aperture_mean(beam.profile, radius, 0.0, case.limit.aperture)) * hot * leg.reflected for case in cases
        ]
        direct = means[0] * cases[0].exposure
        multiples = [mean * case.multiple for mean, case in zip(means, cases, strict=True)]
        top = max(range(len(cases)), key=lambda i: _without_rounding(multiples[i]))
        multiple, limit = multiples[top], cases[top].limit.name
        card_multiple = leg.reflected * white_card(CARD_DISTANCE) * max(case.multiple for case in cases)
        card_distance = CARD_DISTANCE * math.sqrt(card_multiple)
    return BeamSpot(
        place=place,
        position=(float(position[0]), float(position[1]), float(position[2])),
        path_length=leg.path_before + along,
        diameter=2 * radius,
        direct=direct,
        multiple=multiple,
        limit=limit,
        diffuse_distance=card_distance,
        diffuse_multiple=card_multiple,
    )
