"""Light from surfaces: the matt stop that ends a beam, a white card held into it, and what walls return."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from lasescatter.assumptions import Assumption
from lasescatter.scene import Stop

Floats = NDArray[np.float64]

MATT_STOP = Assumption(
    name="A stop scatters as a matt (Lambertian) surface of the stated reflectance",
    direction="low",
    size="a surface with gloss sends many times more into the direction of mirror reflection",
    source="Lambert's law, E = rho P cos(theta)/(pi r²)",
)
SMALL_SPOT = Assumption(
    name="The lit spot on a stop is small beside its distance",
    direction="either",
    size="by the square of spot radius over distance; nearer than ten radii the verdict is not established",
    source="Lambert's law for a point source",
)
WALLS = Assumption(
    name="Walls, floor and ceiling return no light",
    direction="low",
    size="nothing within a retinal gaze; for cornea, lens and skin up to several times the scattered light. There the "
    "upper bound adds the return of a room drawn tightly round beams and observers, with walls of reflectance 0.5",
    source="integrating-sphere estimate 4 rho (P_scattered + rho_stop P)/(A (1 − rho))",
)

# The tight room of the upper bound for full-field limits.
WALL_REFLECTANCE = 0.5
LEAST_ROOM_SIDE = 2.5

# A stop seen from nearer than this many spot radii is no point.
LEAST_SPOT_DISTANCES = 10.0


def stop_light(stop: Stop, spot: Floats, points: Floats) -> Floats:
    """Irradiance from a stop lit by one watt, on a surface facing it, (observers,). [m⁻²]

    Parameters
    ----------
    spot : ndarray (3,)
        Where the beam meets the stop. [m]
    points : ndarray (observers, 3)
        [m]
    """
    towards = points - spot
    r = np.linalg.norm(towards, axis=-1)
    r = np.maximum(r, 1e-6)
    cosine = np.clip(towards @ np.asarray(stop.facing) / r, 0.0, None)
    return stop.reflectance * cosine / (np.pi * np.square(r))


def white_card(distance: float) -> float:
    """Irradiance at a distance square from a white matt card lit by one watt. [m⁻²]"""
    return 1 / (np.pi * distance**2)


def tight_room_area(points: Floats) -> float:
    """Inner surface of the smallest room about `points` (n, 3), no side under LEAST_ROOM_SIDE. [m²]"""
    x, y, z = np.maximum(np.ptp(points, axis=0), LEAST_ROOM_SIDE)
    return float(2 * (x * y + y * z + x * z))


def wall_return(area: float, power: float) -> float:
    """Irradiance that walls of an inner surface [m²] return of `power` watts set free in the room. [W m⁻²]"""
    return 4 * WALL_REFLECTANCE * power / (area * (1 - WALL_REFLECTANCE))
