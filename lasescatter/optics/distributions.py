"""Size distributions: density, moments, and the radii beyond which particles no longer matter.

Lognormal and modified gamma (Deirmendjian 1969, Electromagnetic Scattering on Spherical Polydispersions),
as number distributions over all radii. What a quadrature leaves out is not put back by renormalising.
"""

from __future__ import annotations

from math import erf, exp, inf, lgamma, log, pi, sqrt

import numpy as np
from numpy.typing import NDArray

from lasescatter.matter import Lognormal, ModifiedGamma, SizeShape, SizeTable
from lasescatter.optics.partial_waves import SizeRangeError

# Points of the grid on which tails are weighed.
_FINE = 4001
# exp(−40) is where a distribution is taken as over before its tails are weighed.
_OVER = 40.0

SmoothShape = Lognormal | ModifiedGamma | SizeTable
"""A distribution over a range of sizes."""


def check_shape(shape: SizeShape) -> None:
    """Refuse parameters that are no distribution.

    Raises
    ------
    SizeRangeError
    """
    if isinstance(shape, Lognormal):
        _require("median radius", shape.median_radius, shape.median_radius > 0, "above 0")
        _require("geometric standard deviation", shape.geometric_sd, 1 < shape.geometric_sd <= 10, "above 1, up to 10")
        low, high = _cuts(shape)
        _require("smallest radius", low, low < high, "0 or above, and below the largest radius")
    elif isinstance(shape, ModifiedGamma):
        _require("mode radius", shape.mode_radius, shape.mode_radius > 0, "above 0")
        _require("alpha", shape.alpha, 0 < shape.alpha <= 1000, "above 0, up to 1000")
        _require("gamma", shape.gamma, 0.1 <= shape.gamma <= 20, "0.1 to 20")
    elif isinstance(shape, SizeTable):
        radii, values = np.array(shape.radii), np.array(shape.density)
        good = radii.size == values.size >= 2 and bool((values >= 0).all() and values.max() > 0)
        _require("number of rows", radii.size, good, "at least two, densities at least 0 and not all 0")
        steps = np.diff(radii)
        _require("step of the radii", float(steps.min()), bool((steps > 0).all() and radii[0] > 0), "above 0")
    else:
        _require("radius", shape.radius, shape.radius > 0, "above 0")


def _require(quantity: str, value: float, holds: bool, rule: str) -> None:
    if not (holds and np.isfinite(value)):
        raise SizeRangeError(f"{quantity} {value:.6g} of a size distribution is outside its range: {rule}")


def mean_power(shape: SizeShape, power: float) -> float:
    """Mean of r^power over the particles, analytic. [m^power]"""
    if isinstance(shape, Lognormal):
        width = log(shape.geometric_sd)
        whole = shape.median_radius**power * exp(0.5 * (power * width) ** 2)
        # The power times the distribution is a lognormal again, moved by power width².
        low, high = ((_log(cut / shape.median_radius) / width - power * width) for cut in _cuts(shape))
        return float(whole * (_normal(high) - _normal(low)))
    if isinstance(shape, ModifiedGamma):
        order = (shape.alpha + 1) / shape.gamma
        shift = lgamma(order + power / shape.gamma) - lgamma(order)
        return float(shape.mode_radius**power * exp(shift - power / shape.gamma * log(shape.alpha / shape.gamma)))
    if isinstance(shape, SizeTable):
        return _table_power(shape, power)
    return float(shape.radius**power)


def _cuts(shape: Lognormal) -> tuple[float, float]:
    """Smallest and largest radius; 0 and infinite where it is not cut."""
    return shape.smallest or 0.0, inf if shape.largest is None else shape.largest


def _log(value: float) -> float:
    return log(value) if value > 0 else -inf


def _normal(z: float) -> float:
    """Share of a normal distribution below z."""
    return 0.5 * (1 + erf(z / sqrt(2)))


def _table_power(shape: SizeTable, power: float) -> float:
    """Integral of r^power times a density that is linear in u = ln r between the rows, exact."""
    u, f = np.log(shape.radii), np.array(shape.density)
    step = np.diff(u)
    if power == 0:
        return float((step * (f[1:] + f[:-1])).sum() / 2)
    slope = np.diff(f) / step
    ends = np.exp(power * u)
    rising = (ends[1:] * f[1:] - ends[:-1] * f[:-1]) / power
    return float((rising - slope * (ends[1:] - ends[:-1]) / power**2).sum())


def corners(shape: SmoothShape) -> NDArray[np.float64]:
    """Where the density has corners, ln r."""
    return np.log(shape.radii) if isinstance(shape, SizeTable) else np.empty(0)


def density(shape: SmoothShape, log_radius: NDArray[np.float64]) -> NDArray[np.float64]:
    """Particles per unit of ln r between the limits of `log_radius_limits`; the integral over all ln r is 1.

    A cut is not looked for: at its edge a quadrature needs the value inside.
    """
    if isinstance(shape, Lognormal):
        width = log(shape.geometric_sd)
        z = (log_radius - log(shape.median_radius)) / width
        return np.exp(-0.5 * z * z) / (sqrt(2 * pi) * width)
    if isinstance(shape, SizeTable):
        return np.interp(log_radius, np.log(shape.radii), shape.density)
    order = (shape.alpha + 1) / shape.gamma
    log_t = log(shape.alpha / shape.gamma) + shape.gamma * (log_radius - log(shape.mode_radius))
    return np.exp(log(shape.gamma) + order * log_t - np.exp(log_t) - lgamma(order))


def log_radius_limits(shape: SmoothShape, wavenumber: float, contrast: float, tail: float) -> tuple[float, float]:
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


def _span(shape: SmoothShape) -> tuple[float, float]:
    """Limits of ln r that hold the second to the sixth moment to exp(−40), or at which the distribution is cut."""
    if isinstance(shape, SizeTable):
        return log(shape.radii[0]), log(shape.radii[-1])
    if isinstance(shape, Lognormal):
        width = log(shape.geometric_sd)
        centre, reach = log(shape.median_radius), sqrt(2 * _OVER) * width
        low, high = centre + 2 * width**2 - reach, centre + 6 * width**2 + reach
        smallest, largest = _cuts(shape)
        return max(low, _log(smallest)), min(high, _log(largest))
    second, sixth = ((shape.alpha + 1 + power) / shape.gamma for power in (2, 6))
    scale = log(shape.mode_radius) - log(shape.alpha / shape.gamma) / shape.gamma
    low = log(second) - _OVER / second - sqrt(2 * _OVER / second)
    high = log(sixth) + sqrt(2 * _OVER / sixth)
    return scale + low / shape.gamma, scale + high / shape.gamma
