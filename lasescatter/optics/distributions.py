"""Size distributions: density, moments, and the radii beyond which particles no longer matter.

Lognormal and modified gamma (Deirmendjian 1969, Electromagnetic Scattering on Spherical Polydispersions),
as number distributions over all radii. What a quadrature leaves out is not put back by renormalising.
"""

from __future__ import annotations

from math import exp, lgamma, log, pi, sqrt

import numpy as np
from numpy.typing import NDArray

from lasescatter.matter import Lognormal, ModifiedGamma, SizeShape
from lasescatter.optics.partial_waves import SizeRangeError

# Points of the grid on which tails are weighed.
_FINE = 4001
# exp(−40) is where a distribution is taken as over before its tails are weighed.
_OVER = 40.0


def check_shape(shape: SizeShape) -> None:
    """Refuse parameters that are no distribution.

    Raises
    ------
    SizeRangeError
    """
    if isinstance(shape, Lognormal):
        _require("median radius", shape.median_radius, shape.median_radius > 0, "above 0")
        _require("geometric standard deviation", shape.geometric_sd, 1 < shape.geometric_sd <= 10, "above 1, up to 10")
    elif isinstance(shape, ModifiedGamma):
        _require("mode radius", shape.mode_radius, shape.mode_radius > 0, "above 0")
        _require("alpha", shape.alpha, 0 < shape.alpha <= 1000, "above 0, up to 1000")
        _require("gamma", shape.gamma, 0.1 <= shape.gamma <= 20, "0.1 to 20")
    else:
        _require("radius", shape.radius, shape.radius > 0, "above 0")


def _require(quantity: str, value: float, holds: bool, rule: str) -> None:
    if not (holds and np.isfinite(value)):
        raise SizeRangeError(f"{quantity} {value:.6g} of a size distribution is outside its range: {rule}")


def mean_power(shape: SizeShape, power: float) -> float:
    """Mean of r^power over the particles, analytic. [m^power]"""
    if isinstance(shape, Lognormal):
        return float(shape.median_radius**power * exp(0.5 * (power * log(shape.geometric_sd)) ** 2))
    if isinstance(shape, ModifiedGamma):
        order = (shape.alpha + 1) / shape.gamma
        shift = lgamma(order + power / shape.gamma) - lgamma(order)
        return float(shape.mode_radius**power * exp(shift - power / shape.gamma * log(shape.alpha / shape.gamma)))
    return float(shape.radius**power)


def density(shape: Lognormal | ModifiedGamma, log_radius: NDArray[np.float64]) -> NDArray[np.float64]:
    """Particles per unit of ln r; the integral over all ln r is 1."""
    if isinstance(shape, Lognormal):
        width = log(shape.geometric_sd)
        z = (log_radius - log(shape.median_radius)) / width
        return np.exp(-0.5 * z * z) / (sqrt(2 * pi) * width)
    order = (shape.alpha + 1) / shape.gamma
    log_t = log(shape.alpha / shape.gamma) + shape.gamma * (log_radius - log(shape.mode_radius))
    return np.exp(log(shape.gamma) + order * log_t - np.exp(log_t) - lgamma(order))


def log_radius_limits(
    shape: Lognormal | ModifiedGamma, wavenumber: float, contrast: float, tail: float
) -> tuple[float, float]:
    """Limits of ln r outside which the particles carry less than `tail` of what is scattered at any angle.

    The upper tail is weighed by the forward intensity, x^6 for small and x^4 for large spheres (with
    phase shift 2x|m − 1| above 2), the lower one by x³ below x = 1 (absorption) and x² above it: each is the
    weight that gives its tail the most. Half of `tail` above allows for the forward maximum between the two
    regimes, a twentieth below for angles to which large spheres send least.

    Parameters
    ----------
    wavenumber : float
        In the medium. [m⁻¹]
    contrast : float
        |m − 1|.
    """
    low, high = _span(shape)
    u = np.linspace(low, high, _FINE)
    number = density(shape, u)
    x = wavenumber * np.exp(u)
    upper = number * x**6 / (1 + (x * contrast) ** 2)
    lower = number * x**3 / (1 + x)
    above = np.cumsum(upper[::-1])[::-1]
    below = np.cumsum(lower)
    first = max(int(np.searchsorted(below, tail / 20 * below[-1])) - 1, 0)
    last = min(_FINE - int(np.searchsorted(above[::-1], tail / 2 * above[0])), _FINE - 1)
    return float(u[first]), float(u[last])


def _span(shape: Lognormal | ModifiedGamma) -> tuple[float, float]:
    """Limits of ln r that hold the second to the sixth moment to exp(−40)."""
    if isinstance(shape, Lognormal):
        width = log(shape.geometric_sd)
        centre, reach = log(shape.median_radius), sqrt(2 * _OVER) * width
        return centre + 2 * width**2 - reach, centre + 6 * width**2 + reach
    second, sixth = ((shape.alpha + 1 + power) / shape.gamma for power in (2, 6))
    scale = log(shape.mode_radius) - log(shape.alpha / shape.gamma) / shape.gamma
    low = log(second) - _OVER / second - sqrt(2 * _OVER / second)
    high = log(sixth) + sqrt(2 * _OVER / sixth)
    return scale + low / shape.gamma, scale + high / shape.gamma
