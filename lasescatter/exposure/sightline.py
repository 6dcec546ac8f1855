"""E1: where an observer stands beside a leg, and the scattering angle as the one variable along it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from lasescatter.exposure.legs import Leg

Floats = NDArray[np.float64]

# An observer on the leg's line beyond its ends has b = 0; this share of the distance, and at least as many metres,
# stands for it. The integral there tends to a limit that is reached long before, and a smaller offset would leave
# too few digits to the place of far elements.
LEAST_OFFSET = 1e-5


@dataclass(frozen=True)
class Sightlines:
    """All observers beside one leg. Axis 0: observers."""

    s0: Floats
    """Position on the leg's line nearest to the observer. [m]"""
    b: Floats
    """Distance from that line. [m]"""
    outward: Floats
    """Unit vectors from the line to the observer, square to the leg, (observers, 3)."""
    theta1: Floats
    """Scattering angle at the start of the leg. [rad]"""
    theta2: Floats
    """At its end; pi for an endless leg. [rad]"""

    def angle_at(self, s: Floats | float) -> Floats:
        """Scattering angle of the element at s. [rad]"""
        return np.arctan2(self.b, self.s0 - s)

    def only(self, chosen: slice) -> Sightlines:
        """Some of the observers."""
        return Sightlines(
            self.s0[chosen], self.b[chosen], self.outward[chosen], self.theta1[chosen], self.theta2[chosen]
        )


def sightlines(leg: Leg, points: Floats, least_offset: Floats | float = 0.0) -> Sightlines:
    """Place observers beside a leg.

    Parameters
    ----------
    points : ndarray (observers, 3)
        Where the observers stand. [m]
    least_offset : float or ndarray (observers,)
        The pencil has no meaning nearer to the axis than the beam's own radius; b is not taken below this
        for observers alongside the leg. [m]
    """
    relative = points - leg.origin
    s0 = relative @ leg.direction
    across = relative - s0[:, None] * leg.direction
    b = np.linalg.norm(across, axis=-1)
    outward = np.where(b[:, None] > 0, across / np.where(b > 0, b, 1.0)[:, None], _any_normal(leg.direction))
    alongside = (s0 >= 0) & (s0 <= leg.length)
    floor = np.maximum(LEAST_OFFSET * np.maximum(np.abs(s0), 1.0), np.where(alongside, least_offset, 0.0))
    b = np.maximum(b, floor)
    return Sightlines(
        s0=s0,
        b=b,
        outward=outward,
        theta1=np.arctan2(b, s0),
        theta2=np.full_like(b, np.pi) if np.isinf(leg.length) else np.arctan2(b, s0 - leg.length),
    )


def _any_normal(direction: Floats) -> Floats:
    other = np.eye(3)[np.argmin(np.abs(direction))]
    normal = np.cross(direction, other)
    return np.asarray(normal / np.linalg.norm(normal))


def silhouette_angles(leg: Leg, sight: Sightlines, starts: Floats, ends: Floats) -> Floats:
    """Angles at which sight lines pass over straight edges, shape (observers, edges); nan where they do not.

    The sight lines to a leg fan out in the plane that holds the leg and the observer. An edge that cuts that
    plane on the leg's side of the observer is passed at the angle under which the observer sees the cut.
    """
    normal = np.cross(leg.direction, sight.outward)  # (observers, 3)
    height1 = (starts - leg.origin) @ normal.T  # (edges, observers)
    height2 = (ends - leg.origin) @ normal.T
    with np.errstate(divide="ignore", invalid="ignore"):
        share = height1 / (height1 - height2)
    cuts = (share >= 0) & (share <= 1)
    share = np.where(cuts, share, 0.0)
    points = starts[:, None] + share[..., None] * (ends - starts)[:, None]  # (edges, observers, 3)
    relative = points - leg.origin
    along = sight.s0 - relative @ leg.direction
    across = sight.b - np.einsum("eoi,oi->eo", relative, sight.outward)
    angles = np.where(cuts & (across > 0), np.arctan2(across, along), np.nan)
    return np.asarray(angles.T)
