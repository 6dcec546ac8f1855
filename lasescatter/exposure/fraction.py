"""The greatest scattered exposure over a common fraction of the load: smoke shields as well as scatters.

A thinner load sends less light to the side but also takes less away, so the load as stated need not be the
worst. The fraction f in (0, 1] acts on every load that nobody vouches for; air is left alone.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from lasescatter.assumptions import Assumption
from lasescatter.exposure.quadrature import sums_by_owner
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

    def values(fraction: Floats) -> Floats:
        f = fraction[owner]
        return (own + f * load) * np.exp(-tau_own - f * tau_load)

    def total(fraction: Floats) -> Floats:
        return sums_by_owner(owner, weight * values(fraction), count)

    best = np.ones(count)
    if not steady.all():
        tried = np.stack([total(np.full(count, f)) for f in FRACTIONS])
        at = tried.argmax(axis=0)
        best = FRACTIONS[at]
        low, high = FRACTIONS[np.maximum(at - 1, 0)], FRACTIONS[np.minimum(at + 1, len(FRACTIONS) - 1)]
        for _ in range(_REFINEMENTS):
            first, second = high - _GOLDEN * (high - low), low + _GOLDEN * (high - low)
            rises = total(second) > total(first)
            low, high = np.where(rises, first, low), np.where(rises, high, second)
        middle = (low + high) / 2
        best = np.where(total(middle) > tried.max(axis=0), middle, best)
    irradiance = total(best)
    error = np.zeros(count)
    at_best, offset = values(best), 0
    for light in lights:
        panels = light.nodes.panels
        size = len(light.nodes.owner)
        some = at_best[offset : offset + size].reshape(-1, 15)
        error += sums_by_owner(panels.owner, panels.errors(some), count)
        offset += size
    return Greatest(irradiance, best, error)
