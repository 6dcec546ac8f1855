"""What an eye would get in the beam itself, whether or not anybody stands there, and from a white card held into it."""

from __future__ import annotations

import math

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


def _one(scene: Scene, beam: Beam, line: Line) -> InTheBeam:
    hot = 1.0 if line.pulses is None else line.pulses.hot_spot
    found = _strictest(scene, beam, line, hot)
    if found is None:
        return InTheBeam(
            beam=beam.name,
            line=line.name,
            wavelength=line.wavelength,
            limit=None,
            unit="",
            duration=None,
            limit_value=None,
            hazard_distance=None,
            reason="no entered limit (irradiance or radiant exposure) covers this wavelength and time",
            spots=tuple(_spot(scene, beam, line, hot, *place, None, None) for place in _places(scene, beam)),
        )
    comparison, limit = found
    start = float(aperture_mean(beam.profile, beam_radius(line, 0.0), 0.0, limit.aperture)) * hot
    # Exposure and multiple are both in proportion to the irradiance per watt.
    whole = comparison.ratio / start * hot / (math.pi / 4 * limit.aperture**2)
    return InTheBeam(
        beam=beam.name,
        line=line.name,
        wavelength=line.wavelength,
        limit=limit.name,
        unit=comparison.unit,
        duration=comparison.time,
        limit_value=comparison.limit_value,
        hazard_distance=hazard_distance(line, beam.profile, whole, limit.aperture),
        reason="",
        spots=tuple(
            _spot(
                scene, beam, line, hot, *place, limit.aperture, (comparison.exposure / start, comparison.ratio / start)
            )
            for place in _places(scene, beam)
        ),
    )


def _strictest(scene: Scene, beam: Beam, line: Line, hot: float) -> tuple[Comparison, Limit] | None:
    """The limit and observer's time with the largest multiple at the start of the beam."""
    best: tuple[Comparison, Limit] | None = None
    for limit in scene.limits:
        if limit.quantity not in ("irradiance", "radiant exposure"):
            continue
        mean = float(aperture_mean(beam.profile, beam_radius(line, 0.0), 0.0, limit.aperture)) * hot
        received = Received((("direct", mean),), mean)
        for duration, daily in _times(scene.observers):
            time = dose_time(hazard_of(limit), line, duration, daily)
            result = compare(limit, beam.name, line, received, duration, time)
            if isinstance(result, Comparison) and (best is None or result.ratio > best[0].ratio):
                best = result, limit
    return best


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


def _spot(
    scene: Scene,
    beam: Beam,
    line: Line,
    hot: float,
    place: str,
    leg: Leg,
    along: float,
    aperture: float | None,
    per_irradiance: tuple[float, float] | None,
) -> BeamSpot:
    position = leg.origin + along * leg.direction
    radius = float(beam_radius(line, leg.path_before + along))
    direct = multiple = card_distance = card_multiple = None
    if aperture is not None and per_irradiance is not None:
        mean = float(aperture_mean(beam.profile, radius, 0.0, aperture)) * hot * leg.reflected
        direct, multiple = mean * per_irradiance[0], mean * per_irradiance[1]
        card_multiple = leg.reflected * white_card(CARD_DISTANCE) * per_irradiance[1]
        card_distance = CARD_DISTANCE * math.sqrt(card_multiple)
    return BeamSpot(
        place=place,
        position=(float(position[0]), float(position[1]), float(position[2])),
        path_length=leg.path_before + along,
        diameter=2 * radius,
        direct=direct,
        multiple=multiple,
        diffuse_distance=card_distance,
        diffuse_multiple=card_multiple,
    )
