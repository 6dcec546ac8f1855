"""The U.S. Standard Atmosphere 1976 from −5 to 86 km: temperature, pressure, density and the column of air.

Source: U.S. Standard Atmosphere, 1976 (NOAA, NASA, USAF; NOAA-S/T 76-1562), the layers of geopotential height and
their gradients, g0, the earth's radius, the gas constant and the molar mass of air of that document. Altitudes are
geometric, above sea level, in metres. Temperatures are molecular-scale: between 80 and 86 km the kinetic temperature
is up to 0.05 % lower, and the number of molecules up to as much higher, than what is given here.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]

LOWEST, HIGHEST = -5_000.0, 86_000.0
"""Ends of the model, geometric altitude. [m]"""

EARTH_RADIUS = 6_356_766.0
"""[m]"""
SEA_LEVEL_PRESSURE = 101_325.0
"""[Pa]"""
SEA_LEVEL_TEMPERATURE = 288.15
"""[K]"""
# g0 M0/R*: 9.80665 m s⁻² × 28.9644 kg kmol⁻¹ / 8314.32 J kmol⁻¹ K⁻¹. [K m⁻¹]
_AUTOCONVECTIVE = 9.80665 * 28.9644 / 8314.32

# Base of each layer in geopotential height [m] and gradient of temperature [K m⁻¹].
_BASE = np.array([0.0, 11e3, 20e3, 32e3, 47e3, 51e3, 71e3])
_GRADIENT = np.array([-6.5e-3, 0.0, 1e-3, 2.8e-3, 0.0, -2.8e-3, -2e-3])
_BASE_TEMPERATURE = SEA_LEVEL_TEMPERATURE + np.concatenate([[0.0], np.cumsum(np.diff(_BASE) * _GRADIENT[:-1])])
# Terms of the column's series: the next one would add 1e-18 of it.
_TERMS = 8


def _geopotential(altitude: Floats) -> Floats:
    return EARTH_RADIUS * altitude / (EARTH_RADIUS + altitude)


BOUNDARIES = np.concatenate([[LOWEST], EARTH_RADIUS * _BASE[1:] / (EARTH_RADIUS - _BASE[1:]), [HIGHEST]])
"""Altitudes at which the density has a kink, and the two ends. [m]"""


def _pressure_factor(layer: NDArray[np.int64], rise: Floats) -> Floats:
    """Pressure at `rise` [m, geopotential] above a layer's base, over that at the base."""
    gradient, base = _GRADIENT[layer], _BASE_TEMPERATURE[layer]
    flat = gradient == 0
    steep = np.where(flat, 1.0, gradient)
    bent = np.log1p(np.where(flat, 0.0, gradient) * rise / base) * (-_AUTOCONVECTIVE / steep)
    return np.exp(np.where(flat, -_AUTOCONVECTIVE * rise / base, bent))


_BASE_PRESSURE = np.concatenate([[1.0], np.cumprod(_pressure_factor(np.arange(6), np.diff(_BASE)))])


def _state(altitude: Floats) -> tuple[NDArray[np.int64], Floats, Floats]:
    """Layer, temperature [K] and pressure over that at sea level; altitudes beyond the model are taken to its ends."""
    height = _geopotential(np.clip(altitude, LOWEST, HIGHEST))
    layer = np.clip(np.searchsorted(_BASE, height, side="right") - 1, 0, len(_BASE) - 1)
    rise = height - _BASE[layer]
    return (
        layer,
        _BASE_TEMPERATURE[layer] + _GRADIENT[layer] * rise,
        _BASE_PRESSURE[layer] * _pressure_factor(layer, rise),
    )


def at_altitude(altitude: ArrayLike) -> tuple[Floats, Floats, Floats]:
    """Temperature [K], pressure [Pa] and density over that at sea level.

    Parameters
    ----------
    altitude : array_like
        Geometric. [m]

    Raises
    ------
    ValueError
        Outside the model.
    """
    altitude = np.asarray(altitude, dtype=float)
    if not np.all((altitude >= LOWEST) & (altitude <= HIGHEST)):
        raise ValueError(f"the standard atmosphere reaches from {LOWEST / 1e3:g} to {HIGHEST / 1e3:g} km")
    _, temperature, pressure = _state(altitude)
    return temperature, SEA_LEVEL_PRESSURE * pressure, pressure * SEA_LEVEL_TEMPERATURE / temperature


def density(altitude: Floats) -> Floats:
    """Density over that at sea level: 0 above the model, and below it as at its lower end."""
    _, temperature, pressure = _state(altitude)
    return np.where(altitude > HIGHEST, 0.0, pressure * SEA_LEVEL_TEMPERATURE / temperature)


# The column of density is the integral of the fall of pressure, −dp/g0, times (dz/dH) = (1 + z/r0)². Integrated by
# parts it is a sum over m of a_m ((1 + z/r0) T/r0)^m with a_m = (m + 1)!/((k − L)(k − 2L)…(k − mL)), gradient L.
_DIVISORS = _AUTOCONVECTIVE - np.arange(1, _TERMS)[:, None] * _GRADIENT
_SERIES = np.cumprod(np.concatenate([np.ones((1, len(_BASE))), np.arange(2, _TERMS + 1)[:, None] / _DIVISORS]), axis=0)
_SCALE = SEA_LEVEL_TEMPERATURE / _AUTOCONVECTIVE


def _remaining(layer: NDArray[np.int64], altitude: Floats, temperature: Floats, pressure: Floats) -> Floats:
    """Column above an altitude as if its layer went on without end. [m]"""
    stretch = 1 + altitude / EARTH_RADIUS
    ratio = stretch * temperature / EARTH_RADIUS
    total = np.zeros_like(ratio)
    for row in _SERIES[::-1]:
        total = total * ratio + row[layer]
    return _SCALE * pressure * stretch**2 * total


def _surplus() -> Floats:
    """By how much each layer's own endless column exceeds the column up to the top of the model."""
    layers = np.arange(len(_BASE))
    _, top_temperature, top_pressure = _state(np.array([HIGHEST]))
    ceiling = _remaining(
        layers,
        BOUNDARIES[1:],
        np.append(_BASE_TEMPERATURE[1:], top_temperature),
        np.append(_BASE_PRESSURE[1:], top_pressure),
    )
    floor = _remaining(layers[1:], BOUNDARIES[1:-1], _BASE_TEMPERATURE[1:], _BASE_PRESSURE[1:])
    # Summed from the top, where the columns are small, so that no digits are lost there.
    steps = ceiling - np.append(floor, 0.0)
    return np.cumsum(steps[::-1])[::-1]


_SURPLUS = _surplus()


def overhead(altitude: Floats) -> Floats:
    """Integral of `density` from an altitude to the top of the model; 0 above it. [m]"""
    within = np.clip(altitude, LOWEST, HIGHEST)
    layer, temperature, pressure = _state(within)
    inside = _remaining(layer, within, temperature, pressure) - _SURPLUS[layer]
    beneath = np.maximum(LOWEST - altitude, 0.0) * pressure * SEA_LEVEL_TEMPERATURE / temperature
    return np.where(altitude < HIGHEST, inside + beneath, 0.0)


STEEPEST = float(
    np.max(
        np.concatenate(
            [
                (_AUTOCONVECTIVE + _GRADIENT) / _BASE_TEMPERATURE,
                (_AUTOCONVECTIVE + _GRADIENT) / np.append(_BASE_TEMPERATURE[1:], _state(np.array(HIGHEST))[1]),
                # The lowest layer begins below its base.
                (_AUTOCONVECTIVE + _GRADIENT[:1]) / _state(np.array([LOWEST]))[1],
            ]
        )
    )
)
"""Greatest relative fall of the density per metre of altitude. [m⁻¹]"""
