"""The greatest scattered exposure over a common fraction of the load: smoke shields as well as scatters.

A thinner load sends less light to the side but also takes less away, so the load as stated need not be the
worst. The fraction f in (0, 1] acts on every load that nobody vouches for; air is left alone.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from lasescatter.assumptions import Assumption
from lasescatter.exposure.quadrature import Integers, sums_by_owner
from lasescatter.exposure.scattered import FRACTIONS, IntegratedLeg
from lasescatter.medium.mixture import Mixture

Floats = NDArray[np.float64]

WORST_FRACTION = Assumption(
    name="Scattered light is the greatest over load fractions up to the stated load",
    direction="high",
    size="by the shielding of the stated load: nothing where it is thin, several times where it is thick",
    source="a load thins and clears",
)

_GOLDEN = (np.sqrt(5) - 1) / 2
_REFINEMENTS = 24


@dataclass(frozen=True)
class Greatest:
    """Axis 0: observers."""

    irradiance: Floats
    """At the worst fraction, per watt. [m⁻²]"""
    fraction: Floats
    error: Floats
    """Quadrature error there. [m⁻²]"""


def greatest_over_fraction(lights: tuple[IntegratedLeg, ...], mixture: Mixture, count: int) -> Greatest:
    """Greatest irradiance of all legs together over the load fraction.

    Parameters
    ----------
    lights : tuple of IntegratedLeg
        The legs of one line.
    count : int
        Observers.
    """
    steady = mixture.steady
    owner = np.concatenate([light.nodes.owner for light in lights])
    weight = np.concatenate([light.nodes.weight for light in lights])
    own = np.concatenate([light.nodes.emitted[steady].sum(axis=0) for light in lights])
    load = np.concatenate([light.nodes.emitted[~steady].sum(axis=0) for light in lights])
    tau_own = np.concatenate([light.nodes.tau_steady for light in lights])
    tau_load = np.concatenate([light.nodes.tau_load for light in lights])

    best = worst_fraction(owner, weight * own * np.exp(-tau_own), weight * load * np.exp(-tau_own), tau_load, count)
    f = best[owner]
    at_best = (own + f * load) * np.exp(-tau_own - f * tau_load)
    irradiance = sums_by_owner(owner, weight * at_best, count)
    error = np.zeros(count)
    offset = 0
    for light in lights:
        panels = light.nodes.panels
        size = len(light.nodes.owner)
        some = at_best[offset : offset + size].reshape(-1, 15)
        error += sums_by_owner(panels.owner, panels.errors(some), count)
        offset += size
    return Greatest(irradiance, best, error)


def worst_fraction(owner: Integers, own: Floats, load: Floats, tau: Floats, count: int) -> Floats:
    """Load fraction at which each owner's sum of (own + f·load)·exp(−f·tau) is greatest, (count,).

    Parameters
    ----------
    owner : ndarray (nodes,)
    own, load : ndarray (nodes,)
        Light that the fraction leaves alone and light of the whole load, neither shielded by the load. [m⁻²]
    tau : ndarray (nodes,)
        Optical thickness of the whole load.
    """
    rising = sums_by_owner(owner, load * _least_slope(tau) - own * tau, count) >= 0
    some = ~rising[owner]
    if not some.any():
        return np.ones(count)
    return np.where(rising, 1.0, _sought(owner[some], own[some], load[some], tau[some], count))


def _least_slope(tau: Floats) -> Floats:
    """Least slope of f·exp(−f tau) for f from 0 to 1.

    Light that nothing else shields rises with f so steeply at least. What air sends through the load, exp(−f tau),
    falls by tau at most. Where the two together rise, the whole load is worst and nothing need be sought.
    """
    return np.where(tau < 2, (1 - tau) * np.exp(-tau), -np.exp(-2.0))


def _sought(owner: Integers, own: Floats, load: Floats, tau: Floats, count: int) -> Floats:
    """The same, by trial."""

    def total(fraction: Floats) -> Floats:
        f = fraction[owner]
        return sums_by_owner(owner, (own + f * load) * np.exp(-f * tau), count)

    tried = np.stack([total(np.full(count, f)) for f in FRACTIONS])
    at = tried.argmax(axis=0)
    best = FRACTIONS[at]
    low, high = FRACTIONS[np.maximum(at - 1, 0)], FRACTIONS[np.minimum(at + 1, len(FRACTIONS) - 1)]
    for _ in range(_REFINEMENTS):
        first, second = high - _GOLDEN * (high - low), low + _GOLDEN * (high - low)
        rises = total(second) > total(first)
        low, high = np.where(rises, first, low), np.where(rises, high, second)
    middle = (low + high) / 2
    return np.where(total(middle) > tried.max(axis=0), middle, best)
