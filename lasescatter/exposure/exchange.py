"""Scattered light with the optics of one component exchanged: the same geometry, other particles.

The nodes of one converged integral serve every exchange, so it should be that of the particles whose matrix changes
fastest with angle: the largest.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from lasescatter.exposure.fraction import worst_fraction
from lasescatter.exposure.quadrature import Integers, sums_by_owner
from lasescatter.exposure.scattered import IntegratedLeg, brought_near, double_cosine, polarised_part
from lasescatter.medium.mixture import Component, Mixture

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class _Leg:
    """One leg's nodes without the light of the component that is exchanged. Axis 0: nodes."""

    integrated: IntegratedLeg
    steady: Floats
    """beta/b of the others that the load fraction leaves alone. [m⁻² rad⁻¹]"""
    load: Floats
    """And of those that it acts on. [m⁻² rad⁻¹]"""
    tau_steady: Floats
    tau_load: Floats
    value: Floats
    """Of the component's profile, times 1/(4π b), mirrors taken off. [m⁻¹ sr⁻¹]"""
    column: Floats
    """Of the component's profile, from the beam's start to the element to the observer. [m]"""
    turn: Floats
    """cos 2 phi."""
    turned: Floats
    """How far the angle turns within the reach. [rad]"""
    nearer: Floats
    """By what 1/r² grows within the reach."""


@dataclass(frozen=True)
class Exchanged:
    """Light with other particles, per watt. Axis 0: observers."""

    compared: Floats
    """Of all components, the greatest over the load fraction. [m⁻²]"""
    own: Floats
    """Share of the exchanged component in it. [m⁻²]"""
    within_reach: Floats
    """Of the exchanged component alone, bound for every place within the reach, at any load fraction. [m⁻²]"""


@dataclass(frozen=True)
class Exchange:
    """The legs of one line, ready for other particles in one component."""

    legs: tuple[_Leg, ...]
    component: Component
    count: int

    def light(self, other: Component) -> Exchanged:
        """Light with the extinction, scattering and matrix of another component in the place of the one."""
        parts = [self._of_leg(leg, other) for leg in self.legs]
        owner = np.concatenate([leg.integrated.nodes.owner for leg in self.legs])
        steady, load, tau, bright = (np.concatenate([part[i] for part in parts]) for i in range(4))
        f = worst_fraction(owner, steady, load, tau, self.count)[owner]
        shielded = np.exp(-f * tau)
        return Exchanged(
            compared=sums_by_owner(owner, (steady + f * load) * shielded, self.count),
            own=sums_by_owner(owner, (bright if self.component.steady else f * bright) * shielded, self.count),
            within_reach=np.sum([part[4] for part in parts], axis=0),
        )

    def brightest_over(self, others: Sequence[Component], usual: int) -> Floats:
        """Most that the brightness of any element may be with other components, as seen from within the reach,
        relative to one of them, (others, observers); 1 where none is seen.

        No peak of radiance moves more than that, wherever it stands.
        """
        most = np.ones((len(others), self.count))
        for leg in self.legs:
            nodes = leg.integrated.nodes
            near = np.stack(
                [other.scattering * other.matrix.greatest_near(nodes.theta, leg.turned) for other in others]
            )
            seen = (leg.value > 0) & (near[usual] > 0)
            ratio = near[:, seen] / near[usual, seen]
            for row, values in zip(most, ratio, strict=True):
                np.maximum.at(row, nodes.owner[seen], values)
        return most

    def _of_leg(self, leg: _Leg, other: Component) -> tuple[Floats, Floats, Floats, Floats, Floats]:
        nodes = leg.integrated.nodes
        f11, f12 = other.matrix.at(nodes.theta)
        bright = other.scattering * leg.value * (f11 + polarised_part(f12, leg.integrated.light.swing, leg.turn))
        thickness = other.extinction * leg.column
        steady, load, tau_steady, tau_load = leg.steady, leg.load, leg.tau_steady, leg.tau_load
        if self.component.steady:
            steady, tau_steady = steady + bright, tau_steady + thickness
        else:
            load, tau_load = load + bright, tau_load + thickness
        passed = nodes.weight * np.exp(-tau_steady)
        near = other.scattering * leg.value * other.matrix.greatest_near(nodes.theta, leg.turned) * leg.nearer
        bound = sums_by_owner(nodes.owner, nodes.weight * near, self.count)
        return passed * steady, passed * load, tau_load, passed * bright, bound


def exchange(
    lights: tuple[IntegratedLeg, ...], mixture: Mixture, index: int, points: Floats, reaches: Floats
) -> Exchange:
    """Make the legs of one line ready for other particles in one component of their mixture.

    Parameters
    ----------
    index : int
        Of the component.
    points : ndarray (observers, 3)
        [m]
    reaches : ndarray (observers,)
        How far each head moves. [m]
    """
    component = mixture.components[index]
    others = np.arange(len(mixture.components)) != index
    legs = []
    before = 0.0
    for light in lights:
        leg, sight, nodes = light.light.leg, light.light.sight, light.nodes
        r, places = _places(light)
        start = leg.origin
        column = (
            before + component.profile.column(start, places) + component.profile.column(places, points[nodes.owner])
        )
        turned, nearer = brought_near(r, reaches[nodes.owner])
        thickness = component.extinction * column
        off = (thickness, 0.0) if component.steady else (0.0, thickness)
        legs.append(
            _Leg(
                integrated=light,
                steady=nodes.emitted[mixture.steady & others].sum(axis=0),
                load=nodes.emitted[~mixture.steady & others].sum(axis=0),
                tau_steady=np.maximum(nodes.tau_steady - off[0], 0.0),
                tau_load=np.maximum(nodes.tau_load - off[1], 0.0),
                value=component.profile.value(places) * (leg.reflected / (4 * np.pi)) / sight.b[nodes.owner],
                column=column,
                turn=double_cosine(light.light.swing, sight)[nodes.owner],
                turned=turned,
                nearer=nearer,
            )
        )
        if np.isfinite(leg.length):
            before += float(component.profile.column(start, start + leg.length * leg.direction))
    return Exchange(tuple(legs), component, len(points))


def _places(light: IntegratedLeg) -> tuple[Floats, Floats]:
    """Distance from observer to element at each node [m], and the element's place, (nodes, 3)."""
    leg, sight, nodes = light.light.leg, light.light.sight, light.nodes
    owner: Integers = nodes.owner
    b = sight.b[owner]
    s = np.clip(sight.s0[owner] - b * np.cos(nodes.theta) / np.sin(nodes.theta), 0.0, leg.length)
    return b / np.sin(nodes.theta), leg.origin + s[..., None] * leg.direction
