"""A measured scattering matrix from a file: angle, F11 and, where they were measured, F12, F33 and F34."""

from __future__ import annotations

import math
from itertools import pairwise

from lasescatter.matter import MeasuredMatrix
from lasescatter.site.columns import Column, Columns, TableError, ascending, exactly_one, read_columns

WIDEST_GAP = 5.0
"""Widest step between angles. [deg]"""
COARSEST = 0.05
"""How far the mean of F11 may depend on how it runs between the rows. A forward peak that the rows do not follow
takes light from the sides when F11 is normalised."""
_ENDS_WITHIN = 1e-6
"""How far an end may lie from 0 or pi by rounding. [rad]"""
_F11 = "above 0, and below 1e30"


_GAUSS = ((0.5 - math.sqrt(0.15), 5 / 18), (0.5, 8 / 18), (0.5 + math.sqrt(0.15), 5 / 18))


def _ratio(name: str) -> tuple[Column, ...]:
    low = name.lower()
    span = f"from -1 to 1: no element is larger than F11, and {name}/F11 is its share of F11"
    return (
        Column(f"{name}/F11", f"{name}/F11", (f"{low}/f11",), -1, 1, span),
        Column(f"{name}/F11", f"{name}/F11", (f"-{low}/f11",), -1, 1, span, turned=True),
        Column(name, name, (low,), -1e30, 1e30, "within 1e30"),
    )


_COLUMNS = (
    Column("angle", "angle [deg]", ("angle", "theta", "θ", "scatteringangle"), 0.0, math.pi + _ENDS_WITHIN,
           "from 0 to 180 degrees", "angle"),
    Column("F11", "F11", ("f11", "p11", "phasefunction"), 1e-30, 1e30, _F11, any_unit=True),
    *_ratio("F12"), *_ratio("F33"), *_ratio("F34"),
)  # fmt: skip
_NOT_USED = "Leave the column out: light scattered once from a linear or unpolarized beam does not depend on it"
_ADVICE = {f"{name}{over}": _NOT_USED for name in ("f22", "f44") for over in ("", "/f11")}
_ADVICE |= {"s11": "Name the column F11; any scale will do", "cos": "Give the scattering angle itself, in degrees"}


def measured_matrix(file: str, text: str) -> tuple[MeasuredMatrix, str]:
    """The scattering matrix that a file holds, F11 brought to a mean of 1, and what became of it in words.

    F11 is linear in the angle between the rows; its mean over the sphere is then a closed sum. F12 of Rayleigh
    scattering is negative; a column "-F12/F11" is turned.

    Raises
    ------
    TableError
    """
    table = read_columns(file, text, _COLUMNS, _ADVICE)
    for key in ("angle", "F11"):
        exactly_one(file, table, (key,), _COLUMNS)
    ascending(table, "angle")
    angles = _angles(table)
    f11 = table.values["F11"]
    mean = mean_over_sphere(angles, f11)
    _check_steps(table, angles, f11, mean)
    f12, f33, f34 = (_element(table, name, mean) for name in ("F12", "F33", "F34"))
    normal = tuple(value / mean for value in f11)
    have = [name for name, values in (("F12", f12), ("F33", f33), ("F34", f34)) if values is not None]
    told = f"{len(angles)} angles, F11 divided by {mean:.9g} so that its mean is 1; "
    told += f"with {' and '.join(have)}" if have else "without polarization"
    return MeasuredMatrix(angles, normal, f12, f33, f34, mean, file), told


def mean_over_sphere(angles: tuple[float, ...], values: tuple[float, ...]) -> float:
    """½ ∫ f sin(theta) d(theta) of a function that is linear in theta between its nodes [rad]."""
    parts = []
    for (a, b), (p, q) in zip(pairwise(angles), pairwise(values), strict=True):
        parts += [p * math.cos(a), -q * math.cos(b), (q - p) / (b - a) * (math.sin(b) - math.sin(a))]
    return math.fsum(parts) / 2


def _check_steps(table: Columns, angles: tuple[float, ...], f11: tuple[float, ...], mean: float) -> None:
    """Refuse rows too far apart to be normalised: straight lines and exponentials between them must agree."""
    found = []
    for (a, b), (p, q) in zip(pairwise(angles), pairwise(f11), strict=True):
        straight = mean_over_sphere((a, b), (p, q))
        # Three-point Gauss: the exponential of an interval is smooth.
        curved = sum(
            weight * p ** (1 - share) * q**share * math.sin(a + share * (b - a)) for share, weight in _GAUSS
        ) * (b - a) / 2  # fmt: skip
        found.append(straight - curved)
    off = math.fsum(found) / mean
    if off > COARSEST:
        worst = max(range(len(found)), key=lambda row: found[row])
        raise TableError(
            [
                (
                    f"{table.place(worst + 1, 'F11')}: F11 falls so steeply above this row that its mean is "
                    f"not known: it depends by {off * 100:.2g} % on how F11 runs between the rows",
                    "Give angles closer together where F11 is steep, above all in the forward peak",
                )
            ]
        )


def _angles(table: Columns) -> tuple[float, ...]:
    """The angles with their ends at exactly 0 and pi."""
    angles = table.values["angle"]
    ends = ((0, 0.0, "0 degrees (straight on)"), (len(angles) - 1, math.pi, "180 degrees (straight back)"))
    for row, end, words in ends:
        if abs(angles[row] - end) > _ENDS_WITHIN:
            raise TableError([(f"{table.place(row, 'angle')}: the table does not reach {words}",
                               "Extend it by a fit or a computation that you can answer for: nothing is guessed "
                               "beyond what was measured")])  # fmt: skip
    for row, (before, here) in enumerate(pairwise(angles)):
        gap = math.degrees(here - before)
        if gap > WIDEST_GAP + 1e-6:
            raise TableError([(f"{table.place(row + 1, 'angle')}: there is a gap of {gap:.4g} degrees above this row",
                               f"Give an angle at least every {WIDEST_GAP:g} degrees")])  # fmt: skip
    return (0.0, *angles[1:-1], math.pi)


def _element(table: Columns, name: str, mean: float) -> tuple[float, ...] | None:
    """An element on the scale of the normalised F11; None where the file does not have it."""
    f11 = table.values["F11"]
    share, whole = table.values.get(f"{name}/F11"), table.values.get(name)
    if share is not None and whole is not None:
        exactly_one(table.file, table, (name, f"{name}/F11"), _COLUMNS)
    if share is not None:
        return tuple(ratio * value / mean for ratio, value in zip(share, f11, strict=True))
    if whole is None:
        return None
    for row, (value, most) in enumerate(zip(whole, f11, strict=True)):
        if abs(value) > most:
            raise TableError([(f"{table.place(row, name)}: {value:g} is larger than F11 = {most:g} on this row",
                               "No element is larger than F11: check the columns, and their scale")])  # fmt: skip
    return tuple(value / mean for value in whole)
