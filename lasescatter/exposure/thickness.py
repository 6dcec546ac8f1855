"""How thick the medium is where it matters: the optical thickness that tells where single scattering stops."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from lasescatter.exposure.quadrature import sums_by_owner
from lasescatter.exposure.scattered import IntegratedLeg
from lasescatter.medium.mixture import Mixture

Floats = NDArray[np.float64]

# Of a leg without end, the part that sends this share of its light to the observer counts.
COUNTED_SHARE = 0.99

SINGLE_SCATTERING_UP_TO = 0.1
NOTHING_BELOW_ABOVE = 0.5
# Up to here there are figures for orders two and up: one to two times the first (trials for an open bay).
FIGURES_UP_TO = 2.0
HIGHER_ORDERS_PER_THICKNESS = 1.5


@dataclass(frozen=True)
class Thickness:
    """Largest optical thickness that an observer's scattered light meets."""

    total: Floats
    """Of all components together, (observers,)."""
    by_component: Floats
    """Of each component by itself, each where it is largest: they sum to `total` or more, (components, observers)."""

    def doubted(self, factors: Floats) -> Floats:
        """Largest thickness where each component's extinction may be so many times larger, (observers,).

        total + Σ (factor − 1) × component: no path exceeds it, as none exceeds the total nor any component's own.

        Parameters
        ----------
        factors : ndarray (components,)
        """
        return np.asarray(self.total + (factors - 1) @ self.by_component)


def optical_thickness(lights: tuple[IntegratedLeg, ...], mixture: Mixture, points: Floats) -> Thickness:
    """Largest extinction optical thickness that an observer's scattered light meets.

    The largest of: along the beam; along any sight line to it; and across the load by its shortest dimension,
    or by twice the distance from observer to the farthest part of the beam where that is shorter. Across, a load is
    taken as at z = 0 or as at the end of a leg or the observer, where there is more of it.

    Parameters
    ----------
    points : ndarray (observers, 3)
        [m]
    """
    count = len(points)
    parts = len(mixture.components)
    # The last row is that of all components together.
    along, sight = np.zeros((parts + 1, count)), np.zeros((parts + 1, count))
    farthest = np.zeros(count)
    crossed = np.zeros(parts, dtype=bool)
    densest = np.ones((parts, count))
    for light in lights:
        leg = light.light.leg
        end = _counted_end(light, count) if np.isinf(leg.length) else np.full(count, leg.length)
        tip = leg.origin + end[:, None] * leg.direction
        before = light.light.tau_before[:, None]
        along = np.maximum(along, _with_total(before + mixture.thicknesses(leg.origin, tip)))
        for place in (np.broadcast_to(leg.origin, points.shape), tip):
            sight = np.maximum(sight, _with_total(mixture.thicknesses(place, points)))
            farthest = np.maximum(farthest, np.linalg.norm(place - points, axis=-1))
            for i, component in enumerate(mixture.components):
                here = np.maximum(component.profile.value(place), component.profile.value(points))
                densest[i] = np.maximum(densest[i], here)
        nodes = light.nodes
        counted = nodes.theta <= light.light.sight.angle_at(end)[nodes.owner]
        for row, tau in zip(sight, _with_total(nodes.tau_sight[:, counted]), strict=True):
            np.maximum.at(row, nodes.owner[counted], tau)
        crossed |= np.array(
            [c.profile.span(leg.origin, leg.direction, leg.length) is not None for c in mixture.components]
        )
    across = np.zeros((parts, count))
    for i, (component, most) in enumerate(zip(mixture.components, densest, strict=True)):
        if crossed[i]:
            across[i] = component.extinction * most * np.minimum(component.profile.shortest_dimension(), 2 * farthest)
    largest = np.maximum.reduce([along, sight, _with_total(across)])
    return Thickness(total=largest[-1], by_component=largest[:-1])


def _with_total(by_component: Floats) -> Floats:
    return np.concatenate([by_component, by_component.sum(axis=0, keepdims=True)])


def _counted_end(light: IntegratedLeg, count: int) -> Floats:
    """Distance along an endless leg up to which COUNTED_SHARE of its light comes, (observers,). [m]"""
    nodes = light.nodes
    passed = nodes.weight * nodes.emitted.sum(axis=0) * np.exp(-nodes.tau_steady - nodes.tau_load)
    order = np.lexsort((nodes.theta, nodes.owner))
    owner, theta, passed = nodes.owner[order], nodes.theta[order], passed[order]
    running = np.cumsum(passed)
    totals = sums_by_owner(owner, passed, count)
    before = np.concatenate([[0.0], np.cumsum(totals)[:-1]])
    reached = (running - before[owner]) >= COUNTED_SHARE * totals[owner]
    last = np.full(count, np.pi)
    np.minimum.at(last, owner[reached], theta[reached])
    sight = light.light.sight
    ends = sight.s0 - sight.b / np.tan(np.minimum(last, np.pi - 1e-12))
    return np.asarray(np.maximum(ends, 0.0))


def allowance(tau: Floats | float) -> Floats:
    """Factor on the first order for the orders that are not computed: 1 up to tau 0.1, then 1 + 1.5 tau."""
    tau = np.asarray(tau, dtype=float)
    return np.where(tau > SINGLE_SCATTERING_UP_TO, 1 + HIGHER_ORDERS_PER_THICKNESS * tau, 1.0)
