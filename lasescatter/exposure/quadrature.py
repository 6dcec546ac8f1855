"""Gauss–Kronrod panels for many integrals at once: refined where the embedded error estimate asks for it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]

# Abscissae and weights of the 7-15 point pair: Piessens, de Doncker-Kapenga, Überhuber & Kahaner, QUADPACK (1983).
_X = np.array(
    [
        0.991455371120812639206854697526329,
        0.949107912342758524526189684047851,
        0.864864423359769072789712788640926,
        0.741531185599394439863864773280788,
        0.586087235467691130294144838258730,
        0.405845151377397166906606412076961,
        0.207784955007898467600689403773245,
        0.0,
    ]
)
_WK = np.array(
    [
        0.022935322010529224963732008058970,
        0.063092092629978553290700663189204,
        0.104790010322250183839876322541518,
        0.140653259715525918745189590510238,
        0.169004726639267902826583426598550,
        0.190350578064785409913256402421014,
        0.204432940075298892414161999234649,
        0.209482141084727828012999174891714,
    ]
)
_WG = np.array(
    [
        0.129484966168869693270611432679082,
        0.279705391489276667901467771423780,
        0.381830050505118944950369775488975,
        0.417959183673469387755102040816327,
    ]
)
NODES = np.concatenate([-_X, _X[-2::-1]])
KRONROD = np.concatenate([_WK, _WK[-2::-1]])
GAUSS = np.zeros(15)
GAUSS[1::2] = np.concatenate([_WG, _WG[-2::-1]])

# A site that asks for more panels than this per integral does not converge; it ends with an honest error instead.
MOST_PANELS = 2_000
MOST_PASSES = 40


def sums_by_owner(owner: Integers, values: Floats, count: int) -> Floats:
    """Sum of values (n,) for each of `count` owners."""
    return np.asarray(np.bincount(owner, values, count), dtype=np.float64)


@dataclass(frozen=True)
class Panels:
    """Converged panels. Axis 0: panels, in no special order."""

    owner: Integers
    """Which integral each panel belongs to."""
    low: Floats
    high: Floats
    nodes: Floats
    """(panels, 15)"""
    weights: Floats
    """Kronrod weights times the half width, (panels, 15)."""
    values: Floats
    """Integrand at the nodes, (panels, 15)."""

    def errors(self, values: Floats | None = None) -> Floats:
        """Estimated error of each panel, for its own or other values at the same nodes."""
        return panel_errors(self.values if values is None else values, (self.high - self.low) / 2)


def panel_errors(values: Floats, half: Floats) -> Floats:
    """Error of each 15-point panel from the embedded 7-point rule, scaled as QUADPACK does.

    Parameters
    ----------
    values : ndarray (panels, 15)
    half : ndarray (panels,)
        Half widths.
    """
    kronrod = values @ KRONROD
    difference = np.abs(kronrod - values @ GAUSS) * half
    spread = (np.abs(values - kronrod[:, None] / 2) @ KRONROD) * half
    with np.errstate(divide="ignore", invalid="ignore"):
        scaled = spread * np.minimum(1.0, (200 * difference / spread) ** 1.5)
    floor = 50 * np.finfo(float).eps * (np.abs(values) @ KRONROD) * half
    return np.maximum(np.where((spread > 0) & (difference > 0), scaled, difference), floor)


def integrate(
    integrand: Callable[[Integers, Floats], tuple[Floats, Floats]],
    breaks: Floats,
    tolerance: float,
) -> Panels:
    """Integrate over each row of `breaks`, splitting panels until every row meets its tolerance.

    Parameters
    ----------
    integrand : callable
        Takes owners (panels,) and nodes (panels, 15); gives values and a scale of values, both (panels, 15).
    breaks : ndarray (integrals, points)
        Sorted along axis 1; panels run between neighbours. Equal neighbours make no panel.
    tolerance : float
        Relative to the integral of the scale: near a polarization null the integral itself is no measure.

    Returns
    -------
    Panels
    """
    count = len(breaks)
    owner = np.repeat(np.arange(count), breaks.shape[1] - 1)
    low, high = breaks[:, :-1].ravel(), breaks[:, 1:].ravel()
    real = high > low
    owner, low, high = owner[real], low[real], high[real]
    done: list[tuple[Integers, Floats, Floats, Floats, Floats]] = []
    scale = np.zeros(count)
    used = np.zeros(count, dtype=np.int64)
    settled_error = np.zeros(count)
    for _ in range(MOST_PASSES):
        if not len(owner):
            break
        half = (high - low) / 2
        nodes = (low + half)[:, None] + half[:, None] * NODES
        values, scales = integrand(owner, nodes)
        errors = panel_errors(values, half)
        amounts = (scales @ KRONROD) * half
        total_scale = scale + sums_by_owner(owner, amounts, count)
        allowed = tolerance * total_scale
        open_error = sums_by_owner(owner, errors, count)
        panels = used + np.bincount(owner, minlength=count)
        finished = (settled_error + open_error <= allowed) | (panels > MOST_PANELS)
        # A panel that errs by less than its even share of half the allowance needs no more work.
        share = 0.5 * allowed / np.maximum(panels, 1)
        keep = finished[owner] | (errors <= share[owner]) | (half < 1e-15)
        done.append((owner[keep], low[keep], high[keep], nodes[keep], values[keep]))
        settled_error += sums_by_owner(owner[keep], errors[keep], count)
        scale += sums_by_owner(owner[keep], amounts[keep], count)
        used += np.bincount(owner[keep], minlength=count)
        owner, low, high = owner[~keep], low[~keep], high[~keep]
        middle = (low + high) / 2
        owner = np.concatenate([owner, owner])
        low, high = np.concatenate([low, middle]), np.concatenate([middle, high])
    if len(owner):  # the passes ran out: keep what is left, its error stands in the estimate
        half = (high - low) / 2
        nodes = (low + half)[:, None] + half[:, None] * NODES
        done.append((owner, low, high, nodes, integrand(owner, nodes)[0]))
    if not done:
        empty = np.empty((0, 15))
        return Panels(np.empty(0, dtype=np.int64), np.empty(0), np.empty(0), empty, empty, empty)
    owners, lows, highs, all_nodes, all_values = (np.concatenate(parts) for parts in zip(*done, strict=True))
    weights = (highs - lows)[:, None] / 2 * KRONROD
    return Panels(owners, lows, highs, all_nodes, weights, all_values)
