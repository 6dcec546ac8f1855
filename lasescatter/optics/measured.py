"""Scattering matrices that stand in for spheres: measured ones, from a table, and Henyey–Greenstein's.

Henyey & Greenstein (1941), Astrophys. J. 93, 70: F11 = (1 − g²)/(1 + g² − 2g cos(theta))^(3/2), no polarization.
"""

from __future__ import annotations

from itertools import pairwise
from math import ceil, log, pi

import numpy as np
from numpy.typing import NDArray

from lasescatter.assumptions import Assumption
from lasescatter.matter import HenyeyGreenstein, MeasuredMatrix
from lasescatter.optics import cosines
from lasescatter.optics.matrix import ScatteringMatrix, from_series
from lasescatter.optics.sizes import ParticleOptics
from lasescatter.optics.spline import EvenSpline

STRAIGHT_LINES = Assumption(
    name="Between the angles of a measured scattering matrix its elements follow straight lines",
    direction="low",
    size="in a forward peak the lines run above the curve, and all else is lowered in proportion: by 1 % for rows "
    "every 5 degrees at a mean cosine of 0.8, by 22 % at 0.95; by 1 % for rows every degree there",
    source="tables made of Henyey–Greenstein functions",
)

GRID_ERROR = 2e-4
"""What the curve on the grid may be off its table anywhere, relative to F11, before the grid is refined."""
_MOST_ERROR = 1e-3
_FEWEST_INTERVALS = 2048
_MOST_INTERVALS = 2**18
# Grids of 180 × these intervals are tried first: one that has every angle of the table as a node meets it exactly.
_PARTS_OF_A_DEGREE = (1, 2, 4, 5, 10, 20)
# How far a table's own mean may lie from 1: rounding.
_MEAN_WITHIN = 1e-6
_STEEPEST = 0.999
# The terms of Henyey–Greenstein's series fall as g^k: those below exp(−36) are rounding.
_FORGOTTEN = 36.0


class MatrixError(ValueError):
    """Not a scattering matrix that can be used; the text says which and why."""


def stand_in_optics(stand_in: MeasuredMatrix | HenyeyGreenstein, albedo: float, wavelength: float) -> ParticleOptics:
    """Optics of a nominal particle of 1 m² extinction that scatters as the stand-in says.

    Parameters
    ----------
    albedo : float
        Scattered share of the extinction.
    wavelength : float
        In vacuum; the matrix is taken to hold there. [m]

    Returns
    -------
    ParticleOptics
        Without sizes. Its error of F11 is what the grid of angles is off the table or the formula.

    Raises
    ------
    MatrixError
    """
    if not 0 <= albedo <= 1:
        raise MatrixError(f"albedo {albedo:.6g} is outside 0 to 1")
    matrix, error = _from_table(stand_in) if isinstance(stand_in, MeasuredMatrix) else _from_formula(stand_in)
    return ParticleOptics(
        wavelength=wavelength,
        extinction=1.0,
        scattering=albedo,
        albedo=albedo,
        asymmetry=float(matrix.asymmetry),
        volume=None,
        effective_radius=None,
        matrix=matrix,
        nodes=0,
        error_f11=error,
        error_extinction=0.0,
    )


def _from_formula(stand_in: HenyeyGreenstein) -> tuple[ScatteringMatrix, float]:
    g = stand_in.asymmetry
    if not abs(g) <= _STEEPEST:
        raise MatrixError(f"asymmetry {g:.6g} is outside -{_STEEPEST:g} to {_STEEPEST:g}")
    degree = 2 if g == 0 else max(2, ceil(_FORGOTTEN / -log(abs(g))))
    half = np.linspace(0, pi / 2, degree + 1)
    # 1 + g² − 2g cos(theta) without cancellation at the peak.
    square = (1 - abs(g)) ** 2 + 4 * abs(g) * np.square(np.sin(half) if g >= 0 else np.cos(half))
    series = np.zeros((4, degree + 1))
    series[0] = cosines.from_samples((1 - g * g) / square**1.5)
    return from_series(series)


def _from_table(table: MeasuredMatrix) -> tuple[ScatteringMatrix, float]:
    """The table on a uniform grid, linear in angle between its rows; the mean is brought to 1 again."""
    angles, rows = _checked(table)
    intervals = _first_intervals(angles)
    while True:
        grid = np.linspace(0, pi, intervals + 1)
        f11, f12, f33, f34 = (np.interp(grid, angles, row) for row in rows)
        scale = cosines.sphere_mean(cosines.from_samples(f11))
        error = max(_misread(f11 / scale, rows[0], rows[0], angles), _misread(f12 / scale, rows[1], rows[0], angles))
        if error <= GRID_ERROR or 2 * intervals > _MOST_INTERVALS:
            break
        intervals *= 2
    if error > _MOST_ERROR:
        raise MatrixError(
            f"{table.file}: F11 or F12 bends too sharply between the angles of the table to be followed to "
            f"{_MOST_ERROR:g} by a grid of {180 / intervals:.2g} degrees"
        )
    return ScatteringMatrix(grid, f11 / scale, f12 / scale, f33 / scale, f34 / scale), error


def _checked(table: MeasuredMatrix) -> tuple[NDArray[np.float64], tuple[NDArray[np.float64], ...]]:
    """Angles and the elements F11, F12, F33, F34 of a table; an element that was not measured is 0."""
    angles, f11 = np.asarray(table.angles, dtype=float), np.asarray(table.f11, dtype=float)
    others = {"F12": table.f12, "F33": table.f33, "F34": table.f34}
    if len(angles) < 2 or angles[0] != 0 or angles[-1] != pi or not np.all(np.diff(angles) > 0):
        raise MatrixError(f"{table.file}: the angles do not ascend from 0 to 180 degrees")
    if f11.shape != angles.shape or not np.all(np.isfinite(f11) & (f11 > 0)):
        raise MatrixError(f"{table.file}: F11 is not above 0 at each of the {len(angles)} angles")
    elements = [f11]
    for name, values in others.items():
        element = np.zeros_like(f11) if values is None else np.asarray(values, dtype=float)
        if element.shape != f11.shape or not np.all(np.abs(element) <= f11 * (1 + 1e-9)):
            raise MatrixError(f"{table.file}: {name} is not between -F11 and F11 at each of the {len(angles)} angles")
        elements.append(element)
    mean = _mean(angles, f11)
    if not abs(mean - 1) <= _MEAN_WITHIN:
        raise MatrixError(f"{table.file}: the mean of F11 over the sphere is {mean:.9g}, not 1")
    return angles, tuple(elements)


def _mean(angles: NDArray[np.float64], values: NDArray[np.float64]) -> float:
    """½ ∫ f sin(theta) d(theta) of a function that is linear between its nodes."""
    steps = zip(pairwise(angles.tolist()), pairwise(values.tolist()), strict=True)
    total = 0.0
    for (a, b), (p, q) in steps:
        total += p * np.cos(a) - q * np.cos(b) + (q - p) / (b - a) * (np.sin(b) - np.sin(a))
    return float(total / 2)


def _first_intervals(angles: NDArray[np.float64]) -> int:
    """Intervals of a grid to begin with: at least 2048, with all angles of the table as nodes where that is easy."""
    degrees = np.degrees(angles)
    for parts in _PARTS_OF_A_DEGREE:
        if np.all(np.abs(degrees * parts - np.round(degrees * parts)) < 1e-6):
            return 180 * parts * ceil(_FEWEST_INTERVALS / (180 * parts))
    return _FEWEST_INTERVALS


def _misread(
    values: NDArray[np.float64],
    row: NDArray[np.float64],
    f11: NDArray[np.float64],
    angles: NDArray[np.float64],
) -> float:
    """Largest distance of the spline through grid values from the table's straight lines, relative to F11 there."""
    step = pi / (len(values) - 1)
    places = np.concatenate([angles, *((np.arange(len(values) - 1) + part) * step for part in (0.25, 0.5, 0.75))])
    wrong = np.abs(EvenSpline(values)(places) - np.interp(places, angles, row))
    return float(np.max(wrong / np.interp(places, angles, f11)))
