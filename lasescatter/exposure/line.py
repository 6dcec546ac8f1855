"""The beam as one observer sees it: a bright line along the scattering angle; its windows and its radiance.

Each leg is taken by itself and the legs' worst values are added, as if they lay over each other in the field
of view: the sum errs high.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from lasescatter.assumptions import Assumption
from lasescatter.exposure.direct import one_over_e_diameter
from lasescatter.exposure.scattered import LegLight, breaks_of, elements
from lasescatter.medium.mixture import Mixture
from lasescatter.scene import Line, Profile

Floats = NDArray[np.float64]

LEGS_ADDED = Assumption(
    name="Within an acceptance field the worst windows of all legs and spots are added",
    direction="high",
    size="up to the number of legs, where they do not share one field of view",
    source="physics of one gaze: only what lies in one window counts",
)

# Angles per leg on which its brightness is tabulated, besides every break.
TABULATED = 2048
# A window of fewer steps than this is judged by its brightest element.
LEAST_STEPS = 8
# Relative error of windows and peaks from the table, kinks at region faces included.
TABULATION_ERROR = 2e-3
# Observers tabulated together: bounds the memory.
MOST_OBSERVERS_AT_ONCE = 64

# Peak over mean radiance across the beam: of a gaussian with d at 1/e, 2/sqrt(pi); of a top-hat, 4/pi.
PEAK_OVER_MEAN: dict[Profile, float] = {"gaussian": 2 / np.sqrt(np.pi), "top-hat": 4 / np.pi}


@dataclass(frozen=True)
class BrightLine:
    """dE/dtheta of one leg for one watt, tabulated. Axis 0: observers."""

    light: LegLight
    theta: Floats
    """(observers, angles), rising. [rad]"""
    brightness: Floats
    """(observers, angles). [m⁻² rad⁻¹]"""


@dataclass(frozen=True)
class Window:
    """The part of a leg that sends most light into a field of view. Axis 0: observers."""

    irradiance: Floats
    """Per watt. [m⁻²]"""
    low: Floats
    high: Floats


def bright_line(light: LegLight, mixture: Mixture, points: Floats, fraction: Floats) -> BrightLine:
    """Tabulate a leg's brightness at a load fraction per observer (E2's integrand)."""
    parts = []
    for start in range(0, len(points), MOST_OBSERVERS_AT_ONCE):
        chosen = slice(start, start + MOST_OBSERVERS_AT_ONCE)
        parts.append(_brightness(light, mixture, points[chosen], fraction[chosen], chosen))
    theta, brightness = (np.concatenate(arrays) for arrays in zip(*parts, strict=True))
    return BrightLine(light, theta, brightness)


def _brightness(
    light: LegLight, mixture: Mixture, points: Floats, fraction: Floats, chosen: slice
) -> tuple[Floats, Floats]:
    sight = light.sight.only(chosen)
    even = np.linspace(0.0, 1.0, TABULATED)
    inner = sight.theta1[:, None] + (sight.theta2 - sight.theta1)[:, None] * even
    theta = np.sort(np.concatenate([inner, breaks_of(light.leg, sight, mixture)], axis=1), axis=1)
    # The ends themselves may be 0 or pi, where the cotangent has no value.
    theta = np.clip(theta, 1e-12, np.pi - 1e-12)
    owner = np.arange(len(points))[:, None]
    emitted, _, tau, _ = elements(light.leg, light.swing, mixture, sight, points, light.tau_before, owner, theta)
    steady = mixture.steady
    f = fraction[:, None]
    passed = np.exp(-tau[steady].sum(axis=0) - f * tau[~steady].sum(axis=0))
    return theta, (emitted[steady].sum(axis=0) + f * emitted[~steady].sum(axis=0)) * passed


def brightest_window(line: BrightLine, acceptance: float) -> Window:
    """Greatest irradiance that a window of full angle `acceptance` along the beam takes in.

    The whole width across the beam counts, so a field narrower than the beam is judged too high.
    """
    theta, bright = line.theta, line.brightness
    steps = np.diff(theta, axis=1)
    running = np.concatenate(
        [np.zeros((len(theta), 1)), np.cumsum((bright[:, 1:] + bright[:, :-1]) / 2 * steps, axis=1)], axis=1
    )
    first, last = theta[:, :1], theta[:, -1:]
    starts = np.concatenate([theta, theta - acceptance], axis=1)
    starts = np.clip(starts, first, np.maximum(last - acceptance, first))
    ends = np.minimum(starts + acceptance, last)
    taken = _along(theta, running, ends) - _along(theta, running, starts)
    at = np.arange(len(theta)), taken.argmax(axis=1)
    best, low, high = taken[at], starts[at], ends[at]
    narrow = acceptance < LEAST_STEPS * (last - first)[:, 0] / TABULATED
    best = np.where(narrow, np.maximum(best, acceptance * bright.max(axis=1)), best)
    return Window(best, low, high)


def _along(theta: Floats, running: Floats, at: Floats) -> Floats:
    """Each row's running integral at its own angles, (observers, angles): all rows in one look-up."""
    # Angles span at most pi, so rows set 4 apart on one axis do not overlap.
    shift = 4.0 * np.arange(len(theta))[:, None]
    flat = np.interp((at + shift).ravel(), (theta + shift).ravel(), running.ravel())
    return np.asarray(flat.reshape(at.shape))


def peak_radiance(line: BrightLine, beam_line: Line, profile: Profile) -> tuple[Floats, NDArray[np.bool_]]:
    """Greatest radiance of a leg across and along the beam (E4), for one watt. [m⁻² sr⁻¹]

    Returns
    -------
    radiance : ndarray (observers,)
    void : ndarray of bool (observers,)
        True where part of the leg is seen so nearly end-on that E4 does not hold there.
    """
    sight, leg = line.light.sight, line.light.leg
    s = np.clip(sight.s0[:, None] - sight.b[:, None] / np.tan(line.theta), 0.0, leg.length)
    width = one_over_e_diameter(beam_line, profile, leg.path_before + s)
    sine = np.sin(line.theta)
    holds = width <= leg.length * sine
    radiance = line.brightness * sight.b[:, None] / (width * sine) * PEAK_OVER_MEAN[profile]
    return np.where(holds, radiance, 0.0).max(axis=1), np.logical_not(np.all(holds, axis=1))
