"""A folded path as straight legs: where each begins, what power is left, which way its field swings.

Extinction is not in here: mirrors only. Lengths in metres; the path length counts from the beam's start.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from lasescatter.assumptions import Assumption
from lasescatter.scene import Beam, Line

Floats = NDArray[np.float64]

MIRRORS_STAY = Assumption(
    name="Mirrors and stop are in place and set as the site file says",
    direction="low",
    size="without limit: a mirror or stop that is knocked or removed sends the direct beam elsewhere",
    source="common practice, no source",
)
MIRROR_SCATTER = Assumption(
    name="Mirror faces scatter nothing and leak nothing",
    direction="low",
    size="a dusty face can send more to the side than the air along a metre of beam; enter a leak as a beam of its own",
    source="common practice, no source",
)
UNPOLARIZED_KEPT = Assumption(
    name="Mirrors leave unpolarized light unpolarized",
    direction="low",
    size="a mirror of reflectance R can polarize by (1 − R)/R at most: up to that share of F12/F11 more, "
    'at the very most a factor 2; enter polarization = "unknown" to cover it',
    source="conservation of energy over the s and p directions",
)
IDEAL_MIRRORS = Assumption(
    name="Mirrors turn the axis of polarization by reflection and do not retard (the user's word)",
    direction="low",
    size="up to a factor 2, and more near the direction of the field, where an ideal axis sends nothing",
    source="entered by the user",
)
PURITY = Assumption(
    name="The polarization axis and its purity are as stated",
    direction="low",
    size="up to a factor 2 at right angles to a wrong axis; without bound near the direction of the field",
    source="E5",
)
WORST_AXIS = Assumption(
    name="Where the axis of polarization is not known, the worst axis is used at every angle",
    direction="high",
    size="up to a factor 2 over unpolarized light",
    source="E5 with F11 + |F12|",
)

# Within this angle of the s or p direction the axis after a real mirror counts as known.
KNOWN_AXIS_WITHIN = math.radians(1.0)

# An inner point that turns the beam by less than this is no mirror. [rad]
STRAIGHT_ON = 1e-9


@dataclass(frozen=True)
class Swing:
    """Polarization on one leg: Stokes Q/I along `axis`, or the worst axis."""

    q: float
    """Q/I of linear light along the axis; 0 for unpolarized and circular light."""
    axis: tuple[float, float, float] | None
    """Unit vector of the field, square to the leg; None for unpolarized light and for the worst axis."""
    worst: bool

    @property
    def words(self) -> str:
        """How a report names it."""
        if self.worst:
            return "worst axis"
        return "known axis" if self.axis is not None else "unpolarized"


UNPOLARIZED = Swing(0.0, None, False)
WORST = Swing(1.0, None, True)


@dataclass(frozen=True)
class Leg:
    """One straight part of a path."""

    number: int
    """Counted from 1."""
    origin: Floats
    direction: Floats
    """Unit vector."""
    length: float
    """Infinite for the last leg of a beam that leaves the site. [m]"""
    path_before: float
    """Path length at its start. [m]"""
    reflected: float
    """Product of the mirror reflectances before it."""


def legs_of(beam: Beam) -> tuple[Leg, ...]:
    """The legs of a beam's path."""
    points = np.asarray(beam.points, dtype=float)
    steps = np.diff(points, axis=0)
    lengths = np.linalg.norm(steps, axis=1)
    reflected = np.concatenate([[1.0], np.cumprod(beam.mirror_reflectance)])
    before = np.concatenate([[0.0], np.cumsum(lengths)])
    legs = []
    for i, (step, length) in enumerate(zip(steps, lengths, strict=True)):
        endless = beam.leaves_site and i == len(lengths) - 1
        legs.append(
            Leg(
                number=i + 1,
                origin=points[i],
                direction=step / length,
                length=math.inf if endless else float(length),
                path_before=float(before[i]),
                reflected=float(reflected[i]),
            )
        )
    return tuple(legs)


def swings_of(beam: Beam, line: Line, legs: tuple[Leg, ...]) -> tuple[Swing, ...]:
    """Polarization of one line on each leg of its path.

    A linear axis is turned at a mirror by reflection. A real mirror also retards: unless the field lies
    within 1° of its s or p direction, the axis after it counts as unknown, and so it does for circular light.
    """
    swings = [_first_swing(line)]
    for before, after in pairwise(legs):
        swings.append(_after_mirror(beam, line, swings[-1], before, after))
    return tuple(swings)


def _first_swing(line: Line) -> Swing:
    if line.polarization == "linear":
        if line.electric_field is None:
            return WORST
        return Swing((line.polarization_ratio - 1) / (line.polarization_ratio + 1), line.electric_field, False)
    if line.polarization == "unknown":
        return WORST
    return UNPOLARIZED


def _after_mirror(beam: Beam, line: Line, swing: Swing, before: Leg, after: Leg) -> Swing:
    if swing.worst or line.polarization == "unpolarized":
        return swing
    if swing.axis is None:  # circular
        return UNPOLARIZED if beam.mirrors == "ideal" else WORST
    normal = after.direction - before.direction
    turn = float(np.linalg.norm(normal))
    if turn < STRAIGHT_ON:
        return swing  # a point on a straight path, no mirror
    normal = normal / turn
    axis = np.asarray(swing.axis)
    if beam.mirrors == "real" and not _along_s_or_p(axis, before.direction, normal):
        return WORST
    turned = axis - 2 * (axis @ normal) * normal
    return Swing(swing.q, (float(turned[0]), float(turned[1]), float(turned[2])), False)


def _along_s_or_p(axis: Floats, direction: Floats, normal: Floats) -> bool:
    s_direction = np.cross(direction, normal)
    sine = np.linalg.norm(s_direction)
    if sine < 1e-9:  # square incidence: every axis is both
        return True
    along_s = abs(float(axis @ s_direction)) / float(sine)
    return math.asin(min(1.0, min(along_s, math.sqrt(max(0.0, 1 - along_s**2))))) <= KNOWN_AXIS_WITHIN


def assumptions_of(beams: tuple[Beam, ...]) -> tuple[Assumption, ...]:
    """What the paths and their polarization rest on."""
    found: list[Assumption] = []
    if any(len(beam.points) > 2 or beam.stop is not None for beam in beams):
        found.append(MIRRORS_STAY)
    folded = [beam for beam in beams if len(beam.points) > 2]
    if folded:
        found.append(MIRROR_SCATTER)
    if any(line.polarization == "unpolarized" for beam in folded for line in beam.lines):
        found.append(UNPOLARIZED_KEPT)
    if any(beam.mirrors == "ideal" for beam in folded):
        found.append(IDEAL_MIRRORS)
    swings = [swing for beam in beams for line in beam.lines for swing in swings_of(beam, line, legs_of(beam))]
    if any(swing.worst for swing in swings):
        found.append(WORST_AXIS)
    if any(swing.axis is not None for swing in swings):
        found.append(PURITY)
    return tuple(found)
