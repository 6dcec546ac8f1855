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
from lasescatter.exposure.quadrature import NODES, Integers
from lasescatter.exposure.scattered import LegLight, elements
from lasescatter.medium.mixture import Mixture
from lasescatter.scene import Line, Profile

Floats = NDArray[np.float64]

LEGS_ADDED = Assumption(
    name="Within an acceptance field the worst windows of all legs and spots are added",
    direction="high",
    size="up to the number of legs, where they do not share one field of view",
    source="physics of one gaze: only what lies in one window counts",
)

# Places in each panel where the brightness is taken, from −1 to 1: the nodes of the integral, and both ends a little
# inside, so that each panel has its own value on its side of a region's face.
_PLACES = np.concatenate([[-1 + 1e-6], NODES, [1 - 1e-6]])
# Into so many parts each panel is cut.
PARTS = 4
# Relative error of windows and peaks from the table.
TABULATION_ERROR = 5e-3
# Nodes tabulated together: bounds the memory.
MOST_PANELS_AT_ONCE = 4096
# Load fractions at which windows and peaks are sought besides the one that is worst for the whole leg.
FRACTIONS = np.array([1.0, 0.7, 0.5, 0.35, 0.25, 0.15, 0.1, 0.05, 0.02, 0.005])

# Peak over mean radiance across the beam: of a gaussian with d at 1/e, 2/sqrt(pi); of a top-hat, 4/pi.
PEAK_OVER_MEAN: dict[Profile, float] = {"gaussian": 2 / np.sqrt(np.pi), "top-hat": 4 / np.pi}


@dataclass(frozen=True)
class BrightLine:
    """What makes dE/dtheta of one leg for one watt, tabulated. Axis 0: table places, by observer and rising angle."""

    light: LegLight
    owner: Integers
    """Observer."""
    theta: Floats
    """[rad]"""
    steady: Floats
    """beta/b of air and vouched loads. [m⁻² rad⁻¹]"""
    load: Floats
    """The same of the loads that the fraction acts on."""
    tau_steady: Floats
    tau_load: Floats
    first: Integers
    """Index of each observer's first place, (observers,)."""

    def brightness(self, fraction: Floats) -> Floats:
        """dE/dtheta at one load fraction per observer (E2's integrand). [m⁻² rad⁻¹]"""
        f = fraction[self.owner]
        return (self.steady + f * self.load) * np.exp(-self.tau_steady - f * self.tau_load)

    def fractions(self, worst: Floats) -> list[Floats]:
        """Load fractions to look at, each (observers,): the worst for the whole light, and a ladder."""
        if not self.load.any():
            return [worst]
        return [worst, *(np.full_like(worst, f) for f in FRACTIONS)]


@dataclass(frozen=True)
class Window:
    """The part of a leg that sends most light into a field of view. Axis 0: observers."""

    irradiance: Floats
    """Per watt. [m⁻²]"""
    low: Floats
    high: Floats


def bright_line(light: LegLight, mixture: Mixture, points: Floats) -> BrightLine:
    """Tabulate a leg's brightness on the panels of its converged integral."""
    edges = light.edges
    order = np.lexsort((edges.low, edges.owner))
    # A panel can hold several ripples of a single size: straight lines between places need shorter ones.
    owner = np.repeat(edges.owner[order], PARTS)
    width = np.repeat((edges.high - edges.low)[order] / PARTS, PARTS)
    low = np.repeat(edges.low[order], PARTS) + width * np.tile(np.arange(PARTS), len(order))
    high = low + width
    parts = []
    for start in range(0, len(owner), MOST_PANELS_AT_ONCE):
        chosen = slice(start, start + MOST_PANELS_AT_ONCE)
        theta = ((low + high) / 2)[chosen, None] + ((high - low) / 2)[chosen, None] * _PLACES
        emitted, _, tau, _ = elements(
            light.leg, light.swing, mixture, light.sight, points, light.tau_before, owner[chosen, None], theta
        )
        steady = mixture.steady
        sums = [emitted[steady], emitted[~steady], tau[steady], tau[~steady]]
        parts.append([theta.ravel(), *(part.sum(axis=0).ravel() for part in sums)])
    if not parts:
        parts = [[np.empty(0)] * 5]
    theta, bright_steady, bright_load, tau_steady, tau_load = (
        np.concatenate(arrays) for arrays in zip(*parts, strict=True)
    )
    owners = np.repeat(owner, len(_PLACES))
    return BrightLine(
        light=light,
        owner=owners,
        theta=theta,
        steady=bright_steady,
        load=bright_load,
        tau_steady=tau_steady,
        tau_load=tau_load,
        first=np.searchsorted(owners, np.arange(len(points))),
    )


def brightest_window(line: BrightLine, acceptance: float, worst: Floats) -> Window:
    """Greatest irradiance that a window of full angle `acceptance` along the beam takes in, over load fractions.

    The whole width across the beam counts, so a field narrower than the beam is judged too high.

    Parameters
    ----------
    worst : ndarray (observers,)
        Load fraction at which the whole light is greatest.
    """
    found: Window | None = None
    for fraction in line.fractions(worst):
        window = _window(line, acceptance, line.brightness(fraction), len(worst))
        if found is None:
            found = window
        else:
            more = window.irradiance > found.irradiance
            found = Window(
                np.where(more, window.irradiance, found.irradiance),
                np.where(more, window.low, found.low),
                np.where(more, window.high, found.high),
            )
    assert found is not None  # there is always the worst fraction
    return found


def _window(line: BrightLine, acceptance: float, bright: Floats, observers: int) -> Window:
    """The window at one brightness: prefix sums, windows that begin or end at a place of the table."""
    sight, owner, theta = line.light.sight, line.owner, line.theta
    first, last = sight.theta1[owner], sight.theta2[owner]
    same = owner[1:] == owner[:-1]
    steps = np.where(same, (bright[1:] + bright[:-1]) / 2 * np.diff(theta), 0.0)
    running = np.concatenate([[0.0], np.cumsum(steps)]) if len(theta) else np.empty(0)
    # Angles span at most pi, so observers set 4 apart on one axis do not overlap: one look-up serves all.
    axis = theta + 4.0 * owner
    starts = np.concatenate([theta, theta - acceptance])
    owners = np.concatenate([owner, owner])
    low_end, high_end = np.concatenate([first, first]), np.concatenate([last, last])
    starts = np.clip(starts, low_end, np.maximum(high_end - acceptance, low_end))
    ends = np.minimum(starts + acceptance, high_end)
    taken = np.interp(ends + 4.0 * owners, axis, running) - np.interp(starts + 4.0 * owners, axis, running)
    best, low, high = np.zeros(observers), sight.theta1.copy(), sight.theta1.copy()
    order = np.lexsort((taken, owners))
    top = order[np.searchsorted(owners[order], np.arange(observers), side="right") - 1] if len(order) else order
    lit = np.isin(np.arange(observers), owners)
    best[lit], low[lit], high[lit] = taken[top[lit]], starts[top[lit]], ends[top[lit]]
    return Window(best, low, high)


@dataclass(frozen=True)
class Peak:
    """Greatest radiance of a leg across and along the beam, for one watt. [m⁻² sr⁻¹]"""

    radiance: Floats
    """At the stated place, (observers,)."""
    within_reach: Floats
    """Bound for every place within the reach, (observers,)."""
    by_component: Floats
    """The same bound for the light of each component alone, (components, observers)."""
    void: NDArray[np.bool_]
    """True where part of the leg is seen so nearly end-on, from within the reach, that E4 does not hold there."""


def peak_radiance(
    line: BrightLine, beam_line: Line, profile: Profile, worst: Floats, reaches: Floats | float, mixture: Mixture
) -> Peak:
    """Greatest radiance of a leg (E4) over load fractions.

    Parameters
    ----------
    worst : ndarray (observers,)
        Load fraction at which the whole light is greatest.
    reaches : float or ndarray (observers,)
        How far each head moves. [m]
    """
    sight, leg, owner = line.light.sight, line.light.leg, line.owner
    count = len(worst)
    s = np.clip(sight.s0[owner] - sight.b[owner] / np.tan(line.theta), 0.0, leg.length)
    width = one_over_e_diameter(beam_line, profile, leg.path_before + s)
    sine = np.sin(line.theta)
    scale = sight.b[owner] / width * PEAK_OVER_MEAN[profile]
    radiance = np.zeros(count)
    for fraction in line.fractions(worst):
        np.maximum.at(radiance, owner, line.brightness(fraction) * scale / sine)
    reach = np.broadcast_to(np.asarray(reaches, dtype=float), count)[owner]
    turned = np.arcsin(np.clip(reach * sine / sight.b[owner], 0.0, 1.0))
    # An element within reach can be seen under any angle.
    turned = np.where(reach * sine >= sight.b[owner], np.pi, turned)
    first, last = np.maximum(line.theta - turned, 0.0), np.minimum(line.theta + turned, np.pi)
    least_sine = np.maximum(np.minimum(np.sin(first), np.sin(last)), 0.0)
    least_sine = np.where((first <= 0) | (last >= np.pi), 0.0, least_sine)
    # Seen from within reach under every angle, or under one so small that d/sin(theta) exceeds the leg.
    end_on = (least_sine <= 0) | (width / leg.length > least_sine)
    density = mixture.densities(leg.origin + s[..., None] * leg.direction) * leg.reflected / (4 * np.pi)
    with np.errstate(divide="ignore", invalid="ignore"):
        factor = np.where(end_on, 0.0, PEAK_OVER_MEAN[profile] / (width * least_sine))
    bright = factor * density
    bright *= np.stack([component.matrix.greatest_near(line.theta, turned) for component in mixture.components])
    void = np.zeros(count, dtype=bool)
    np.logical_or.at(void, owner, end_on)
    return Peak(
        radiance=radiance,
        within_reach=_largest_by_owner(owner, bright.sum(axis=0), count),
        by_component=np.stack([_largest_by_owner(owner, row, count) for row in bright]),
        void=void,
    )


def _largest_by_owner(owner: Integers, values: Floats, count: int) -> Floats:
    """Largest of values (n,), none below 0, for each of `count` owners."""
    largest = np.zeros(count)
    np.maximum.at(largest, owner, values)
    return largest
