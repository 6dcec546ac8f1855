"""Direct light of a beam: irradiance at a point, mean over an aperture, and how far it stays above a limit.

Extinction is not credited: smoke thins and clears.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lasescatter.assumptions import Assumption
from lasescatter.exposure.legs import Leg
from lasescatter.scene import Line, Profile

Floats = NDArray[np.float64]

WAIST_AT_START = Assumption(
    name="Each beam is narrowest at the start of its path and widens as a hyperbola",
    direction="either",
    size="high on the axis, low beside it: the straight-line law d + divergence × distance spreads the light wider, to "
    "half the irradiance on the axis where both terms are alike; a focus along the path is not described",
    source="common practice, no source",
)
SMOOTH_BEAM = Assumption(
    name="Direct beams have the stated profile; turbulence and hot spots beyond the stated factor are left out",
    direction="low",
    size="turbulence over long paths and multimode beams can exceed the ideal peak several times",
    source="reference to scintillation outdoors: SPIE Proc. 2974, 139–147, 1997 (abstract)",
)
NAKED_EYE = Assumption(
    name="Everybody looks with the naked eye",
    direction="low",
    size="binoculars and telescopes gather up to the square of objective over pupil more, 51 times for 7 × 50 glasses",
    source="geometry: (50 mm/7 mm)²",
)
NO_EXTINCTION = Assumption(
    name="Direct and stop light are compared with limits without credit for the load's extinction",
    direction="high",
    size="by exp(optical thickness of the load)",
    source="a load thins and clears",
)

# A gaussian beam sends nothing that counts beyond this many 1/e² radii from its axis: exp(-2 · 8²).
NOTHING_BEYOND = 8.0


def beam_radius(line: Line, path_length: ArrayLike) -> Floats:
    """Radius after a path from the start: 1/e² of a gaussian, edge of a top-hat. [m]"""
    return np.hypot(line.diameter, line.divergence * np.asarray(path_length, dtype=float)) / 2


def one_over_e_diameter(line: Line, profile: Profile, path_length: ArrayLike) -> Floats:
    """Diameter d of E4: at 1/e of a gaussian, at the edge of a top-hat. [m]"""
    diameter = 2 * beam_radius(line, path_length)
    return diameter / math.sqrt(2) if profile == "gaussian" else diameter


def irradiance(profile: Profile, radius: ArrayLike, off_axis: ArrayLike) -> Floats:
    """Irradiance of a one-watt beam at a distance from its axis. [m⁻²]

    Parameters
    ----------
    radius, off_axis : array_like, broadcast together
        Beam radius and distance from the axis. [m]
    """
    radius, off_axis = np.asarray(radius, dtype=float), np.asarray(off_axis, dtype=float)
    mean = 1 / (np.pi * np.square(radius))
    if profile == "gaussian":
        return 2 * mean * np.exp(-2 * np.square(off_axis / radius))
    return np.where(off_axis <= radius, mean, 0.0)


def aperture_mean(profile: Profile, radius: ArrayLike, off_axis: ArrayLike, aperture: float) -> Floats:
    """Mean irradiance of a one-watt beam over a circular aperture that faces it. [m⁻²]

    Parameters
    ----------
    radius, off_axis : array_like, broadcast together
        Beam radius, and distance of the aperture's centre from the axis. [m]
    aperture : float
        Diameter of the aperture. [m]

    Notes
    -----
    Gaussian: the two coordinates are normal with standard deviation radius/2, so the share within the aperture
    is the noncentral chi-square distribution with two degrees of freedom. Top-hat: overlap of two circles.
    """
    radius, off_axis = np.broadcast_arrays(np.asarray(radius, dtype=float), np.asarray(off_axis, dtype=float))
    half = aperture / 2
    area = np.pi * half**2
    if profile == "gaussian":
        from scipy.special import chndtr

        near = off_axis - half <= NOTHING_BEYOND * radius
        sigma = radius / 2
        offset = np.where(near, np.square(off_axis / sigma), 0.0)
        # Far inside a beam much wider than the aperture the series needs many terms: the point value is the mean there.
        share = chndtr(np.square(half / sigma), 2.0, offset)
        wide = half < 1e-3 * radius
        share = np.where(wide, irradiance(profile, radius, off_axis) * area, share)
        return np.where(near, share, 0.0) / area
    return _overlap(radius, np.full_like(radius, half), off_axis) / (np.pi * np.square(radius)) / area


def _overlap(first: Floats, second: Floats, distance: Floats) -> Floats:
    """Area common to two circles. [m²]"""
    smaller = np.minimum(first, second)
    inside = distance <= np.abs(first - second)
    apart = distance >= first + second
    d = np.where(inside | apart, first + second, distance)
    cos1 = np.clip((d**2 + first**2 - second**2) / (2 * d * first), -1, 1)
    cos2 = np.clip((d**2 + second**2 - first**2) / (2 * d * second), -1, 1)
    kite = np.clip((-d + first + second) * (d + first - second) * (d - first + second) * (d + first + second), 0, None)
    lens = first**2 * np.arccos(cos1) + second**2 * np.arccos(cos2) - 0.5 * np.sqrt(kite)
    return np.where(inside, np.pi * smaller**2, np.where(apart, 0.0, lens))


def hazard_distance(line: Line, profile: Profile, multiple: float, aperture: float) -> float:
    """Distance along the axis at which the mean over an aperture falls to a limit. [m]

    Parameters
    ----------
    multiple : float
        Whole beam through the aperture, over the limit: P/(area · limit), hot spot included.
    aperture : float
        Diameter. [m]

    Returns
    -------
    float
        0 where the beam is below the limit at its start; infinite for a beam that never widens.
    """
    if multiple <= 1:
        return 0.0
    if profile == "gaussian":
        radius = (aperture / 2) * math.sqrt(2 / -math.log1p(-1 / multiple))
    else:
        radius = (aperture / 2) * math.sqrt(multiple)
    widened = (2 * radius) ** 2 - line.diameter**2
    if widened <= 0:
        return 0.0
    return math.inf if line.divergence == 0 else math.sqrt(widened) / line.divergence


def clearance(leg: Leg, line: Line, points: Floats, radii: float, aperture: float) -> Floats:
    """Least distance from observers to the cone of `radii` beam radii plus half an aperture about a leg. [m]

    Negative inside the cone. Shape (observers,).
    """
    relative = points - leg.origin
    s0 = relative @ leg.direction
    b = np.linalg.norm(relative - s0[:, None] * leg.direction, axis=-1)
    end = leg.length if np.isfinite(leg.length) else np.inf
    # The nearest element of a widening cone lies a little beyond the foot of the perpendicular.
    tilt = radii * line.divergence / 2
    reach = np.minimum(end, np.maximum(s0, 0.0) + 2 * (b + 1.0))
    steps = np.linspace(0.0, 1.0, 65)[:, None] * reach
    s = np.clip(np.concatenate([steps, s0[None], (s0 + b * tilt)[None]]), 0.0, end)
    distance = np.hypot(b, s0 - s)
    cone = radii * beam_radius(line, leg.path_before + s) + aperture / 2
    return np.asarray((distance - cone).min(axis=0))
