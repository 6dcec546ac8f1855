"""E2: light scattered once out of a beam's legs to observers, for one line of one beam.

Everything is per watt in the beam at its start. First order only; what higher orders add is judged by the
optical thickness that `thickness.py` gives.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from lasescatter.assumptions import Assumption
from lasescatter.exposure.legs import Leg, Swing
from lasescatter.exposure.quadrature import Panels, integrate, sums_by_owner
from lasescatter.exposure.sightline import Sightlines, sightlines, silhouette_angles
from lasescatter.medium.mixture import Mixture

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]

FIRST_ORDER = Assumption(
    name="Light is scattered once (first order)",
    direction="low",
    size="orders two and up are 2–11 % of the first at optical thickness 0.1, 6–33 % at 0.3, 10–58 % at 0.5; "
    "above 0.1 the compared value is raised by 1.5 times the thickness, above 0.5 nothing is below its limit",
    source="multiple-scattering trials for an open bay; not a published figure",
)
PENCIL = Assumption(
    name="Each leg is a pencil without width",
    direction="low",
    size="1–9 % at three beam radii from the axis, less in proportion to the square of radius over distance",
    source="average over the beam's cross-section compared with its axis",
)
NO_SHADOWS = Assumption(
    name="Nothing stands between beam and observer",
    direction="high",
    size="up to all of the light from the hidden part of the beam",
    source="geometry",
)
STAYS_THERE = Assumption(
    name="Scattered and stop light are computed at the observer's stated position",
    direction="low",
    size="the printed ratio holds there; its upper bound, which decides below, takes every element of the beam as near "
    "and at the worst angle that the head can bring it, and the stop as seen square from r − reach",
    source="inverse squares",
)
SPECKLE = Assumption(
    name="Speckle and flicker are averaged over",
    direction="either",
    size="single bright spots can exceed the mean several times over areas far smaller than a pupil",
    source="common practice, no source",
)
SHORT_REACH = Assumption(
    name="Some heads are taken to move less than 0.25 m, as the site file says",
    direction="low",
    size="without limit where the beam itself lies within what a head can reach after all",
    source="entered by the user",
)
ASSUMPTIONS = (FIRST_ORDER, PENCIL, NO_SHADOWS, STAYS_THERE, SPECKLE)

# First division of each leg's angles, so that the forward peak and the glory are met by panels of their own size.
_LADDER = np.array([1e-4, 1e-3, 4e-3, 0.015, 0.04, 0.1, 0.2, 0.4, 0.8, 1.2])
LADDER = np.concatenate([_LADDER, [np.pi / 2], np.pi - _LADDER[::-1]])

# Relative to the unpolarised value of the leg.
TOLERANCE = 1e-6

# Nearer than this to an element a reach counts as touching: the bound is then far above any limit, and finite. [m]
LEAST_GAP = 1e-3

# Load fractions among which the greatest exposure is sought before it is refined.
FRACTIONS = np.concatenate([np.geomspace(1e-4, 0.05, 24, endpoint=False), np.linspace(0.05, 1.0, 39)])


@dataclass(frozen=True)
class Nodes:
    """Quadrature nodes of one leg: enough to integrate again for any load fraction. Axis 0: nodes."""

    owner: Integers
    """Observer."""
    theta: Floats
    weight: Floats
    """Kronrod weight times the half width. [rad]"""
    emitted: Floats
    """beta/b without transmittance, per component, (components, nodes). [m⁻² sr⁻¹]"""
    unpolarised: Floats
    """The same with F12 left out, summed over components. [m⁻² sr⁻¹]"""
    tau_steady: Floats
    """Optical thickness from the beam's start to the observer that the load fraction leaves alone."""
    tau_load: Floats
    """The rest of it."""
    tau_sight: Floats
    """Share of both that lies between element and observer, (components, nodes)."""
    panels: Panels


@dataclass(frozen=True)
class PanelEdges:
    """The panels on which a leg's integral converged: within each the integrand is smooth. Axis 0: panels."""

    owner: Integers
    low: Floats
    high: Floats


@dataclass(frozen=True)
class LegLight:
    """One leg seen by all observers, per watt at the beam's start."""

    leg: Leg
    swing: Swing
    sight: Sightlines
    tau_before: Floats
    """Optical thickness of each component from the beam's start to the leg's start, (components,)."""
    by_component: Floats
    """Irradiance at the stated load, (components, observers). [m⁻²]"""
    unpolarised: Floats
    """(observers,) [m⁻²]"""
    error: Floats
    """Quadrature error, (observers,). [m⁻²]"""
    within_reach: Floats
    """Per component, no place within the observer's reach gets more, at any load fraction, (components, observers).
    [m⁻²]"""
    edges: PanelEdges


@dataclass(frozen=True)
class IntegratedLeg:
    """A leg's light with the nodes it was summed from."""

    light: LegLight
    nodes: Nodes


def scattered(
    legs: tuple[Leg, ...],
    swings: tuple[Swing, ...],
    mixture: Mixture,
    points: Floats,
    least_offsets: Floats,
    reaches: Floats | float = 0.0,
    tolerance: float = TOLERANCE,
) -> tuple[IntegratedLeg, ...]:
    """Irradiance at each observer from each leg, per watt at the beam's start, facing each element (E2).

    Parameters
    ----------
    points : ndarray (observers, 3)
        [m]
    least_offsets : ndarray (legs, observers)
        Least distance from the axis that is integrated: the beam's own radius. [m]
    reaches : float or ndarray (observers,)
        How far each head moves. [m]
    tolerance : float
        Relative to the unpolarised value of each leg.
    """
    found = []
    reaches = np.broadcast_to(np.asarray(reaches, dtype=float), len(points))
    tau_before = np.zeros(len(mixture.components))
    for leg, swing, least in zip(legs, swings, least_offsets, strict=True):
        sight = sightlines(leg, points, least)
        nodes = _nodes(leg, swing, mixture, sight, points, tau_before, tolerance)
        found.append(IntegratedLeg(_summed(leg, swing, mixture, sight, tau_before, nodes, reaches), nodes))
        if np.isfinite(leg.length):
            tau_before = tau_before + mixture.thicknesses(leg.origin, leg.origin + leg.length * leg.direction)
    return tuple(found)


def _summed(
    leg: Leg,
    swing: Swing,
    mixture: Mixture,
    sight: Sightlines,
    tau_before: Floats,
    nodes: Nodes,
    reaches: Floats,
) -> LegLight:
    count = len(reaches)
    near = reach_brightness(leg, mixture, sight, nodes.owner, nodes.theta, reaches[nodes.owner])
    passed = np.exp(-nodes.tau_steady - nodes.tau_load) * nodes.weight
    return LegLight(
        leg=leg,
        swing=swing,
        sight=sight,
        tau_before=tau_before,
        by_component=np.stack([sums_by_owner(nodes.owner, row * passed, count) for row in nodes.emitted]),
        unpolarised=sums_by_owner(nodes.owner, nodes.unpolarised * passed, count),
        error=sums_by_owner(nodes.panels.owner, nodes.panels.errors(), count),
        within_reach=np.stack([sums_by_owner(nodes.owner, nodes.weight * row, count) for row in near]),
        edges=PanelEdges(nodes.panels.owner, nodes.panels.low, nodes.panels.high),
    )


def reach_brightness(
    leg: Leg, mixture: Mixture, sight: Sightlines, owner: Integers, theta: Floats, reach: Floats
) -> Floats:
    """Bound on dE/dtheta's elements from every place within a reach, (components, nodes). [m⁻² rad⁻¹]

    A head that moves by the reach brings no element nearer than r − reach and sees none under an angle that differs
    by more than asin(reach/r). Each element is taken that near, at the worst angle and axis among those, and nothing
    is lost on the way: so it holds at any load fraction.
    """
    b = sight.b[owner]
    r = b / np.sin(theta)
    s = np.clip(sight.s0[owner] - b * np.cos(theta) / np.sin(theta), 0.0, leg.length)
    density = mixture.densities(leg.origin + s[..., None] * leg.direction) * (leg.reflected / (4 * np.pi) / b)
    turned, nearer = brought_near(r, reach)
    near = [component.matrix.greatest_near(theta, turned) for component in mixture.components]
    return np.stack(near) * density * nearer


def brought_near(r: Floats, reach: Floats) -> tuple[Floats, Floats]:
    """Greatest turn of the angle under which an element at r is seen from within a reach [rad], and of 1/r² there."""
    turned = np.arcsin(np.clip(reach / r, 0.0, 1.0))
    # An element within reach can be seen under any angle.
    turned = np.where(r <= reach, np.pi, turned)
    return turned, np.square(r / np.maximum(r - reach, np.minimum(LEAST_GAP, r)))


def breaks_of(leg: Leg, sight: Sightlines, mixture: Mixture) -> Floats:
    """Angles at which panels break, sorted, (observers, breaks): faces, edges and the ladder, within the leg."""
    columns = [sight.theta1, sight.theta2]
    for component in mixture.components:
        span = component.profile.span(leg.origin, leg.direction, leg.length)
        if span is not None:
            columns.extend(sight.angle_at(s) for s in span if np.isfinite(s))
        starts, ends = component.profile.edges()
        if len(starts):
            columns.extend(silhouette_angles(leg, sight, starts, ends).T)
    columns.extend(np.full_like(sight.b, angle) for angle in LADDER)
    stacked = np.stack(columns, axis=1)
    stacked = np.where(np.isnan(stacked), sight.theta1[:, None], stacked)
    return np.sort(np.clip(stacked, sight.theta1[:, None], sight.theta2[:, None]), axis=1)


def _nodes(
    leg: Leg,
    swing: Swing,
    mixture: Mixture,
    sight: Sightlines,
    points: Floats,
    tau_before: Floats,
    tolerance: float,
) -> Nodes:
    def integrand(owner: Integers, theta: Floats) -> tuple[Floats, Floats]:
        emitted, plain, tau, _ = elements(leg, swing, mixture, sight, points, tau_before, owner[:, None], theta)
        passed = np.exp(-tau.sum(axis=0))
        return emitted.sum(axis=0) * passed, plain * passed

    panels = integrate(integrand, breaks_of(leg, sight, mixture), tolerance)
    emitted, plain, tau, tau_sight = elements(
        leg, swing, mixture, sight, points, tau_before, panels.owner[:, None], panels.nodes
    )
    steady = mixture.steady
    components = len(mixture.components)
    return Nodes(
        owner=np.repeat(panels.owner, 15),
        theta=panels.nodes.ravel(),
        weight=panels.weights.ravel(),
        emitted=emitted.reshape(components, -1),
        unpolarised=plain.ravel(),
        tau_steady=tau[steady].sum(axis=0).ravel(),
        tau_load=tau[~steady].sum(axis=0).ravel(),
        tau_sight=tau_sight.reshape(components, -1),
        panels=panels,
    )


def elements(
    leg: Leg,
    swing: Swing,
    mixture: Mixture,
    sight: Sightlines,
    points: Floats,
    tau_before: Floats,
    owner: Integers,
    theta: Floats,
) -> tuple[Floats, Floats, Floats, Floats]:
    """The integrand of E2 in its parts, at angles `theta` for observers `owner` (broadcast together).

    Returns
    -------
    emitted : ndarray (components, ...)
        beta/b, polarization included, mirrors taken off; no transmittance. [m⁻² sr⁻¹]
    plain : ndarray (...)
        The same without F12, summed over components.
    tau : ndarray (components, ...)
        Optical thickness from the beam's start to the element to the observer.
    tau_sight : ndarray (components, ...)
        Its part between element and observer.
    """
    b = sight.b[owner]
    s = sight.s0[owner] - b * np.cos(theta) / np.sin(theta)
    s = np.clip(s, 0.0, leg.length)
    places = leg.origin + s[..., None] * leg.direction
    density = mixture.densities(places) * (leg.reflected / (4 * np.pi) / b)
    tau_sight = mixture.thicknesses(places, points[owner])
    tau = tau_before.reshape((-1,) + (1,) * s.ndim) + mixture.thicknesses(leg.origin, places) + tau_sight
    emitted = np.empty_like(density)
    plain = np.zeros_like(s)
    turn = double_cosine(swing, sight)[owner]
    for i, component in enumerate(mixture.components):
        f11, f12 = component.matrix.at(theta)
        emitted[i] = density[i] * (f11 + polarised_part(f12, swing, turn))
        plain += density[i] * f11
    return emitted, plain, tau, tau_sight


def polarised_part(f12: Floats, swing: Swing, double_cosine: Floats) -> Floats:
    """What polarization adds to F11 (E5)."""
    return np.abs(f12) if swing.worst else swing.q * double_cosine * f12


def azimuths(swing: Swing, sight: Sightlines) -> Floats | None:
    """phi of E5, from the field axis to the scattering plane [rad], (observers,); None without a known axis."""
    if swing.axis is None:
        return None
    return np.arccos(np.clip(sight.outward @ np.asarray(swing.axis), -1.0, 1.0))


def double_cosine(swing: Swing, sight: Sightlines) -> Floats:
    """cos 2 phi of E5, (observers,); 0 without a known axis."""
    if swing.axis is None:
        return np.zeros_like(sight.b)
    return 2 * np.square(sight.outward @ np.asarray(swing.axis)) - 1
