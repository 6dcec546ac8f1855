"""What other instruments would read of a load: the same amount in every way that people measure it."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator

from lasescatter.medium.load import MOR_LEFT, VISUAL_RANGE_CONTRAST, Concentration
from lasescatter.optics.indices import IndexRangeError
from lasescatter.optics.sizes import ParticleOptics
from lasescatter.scene import LoadReading

RANGES_AT = 550e-9
"""Wavelength that the two visual ranges stand for. [m]"""
SAME_WAVELENGTH = 1e-9
"""How near to its reading a stand-in's extinction counts as known. [m]"""

_FOOT = 0.3048
_OBSCURED_OVER = (1.0, _FOOT)
_LEFT_OVER = (1.0, 10.0)


def equivalents(
    amount: Concentration, optics_at: Callable[[float], ParticleOptics], wavelengths: tuple[float, ...]
) -> tuple[LoadReading, ...]:
    """Every reading that is equivalent to a load.

    Parameters
    ----------
    optics_at : callable
        Optics of the particles at a wavelength [m]; where it raises IndexRangeError that wavelength is left out.
    wavelengths : tuple of float
        At which the optical readings are given. [m]

    Returns
    -------
    tuple of LoadReading
        Dry and ambient mass and the number, where they are known; at each wavelength extinction, obscuration over
        1 m and 1 ft, optical density, attenuation, and transmittance over 1 m and 10 m; the two visual ranges at
        550 nm. Of a stand-in only what lies at the wavelength of its reading.
    """
    found = []
    if amount.dry_mass is not None:
        found.append(LoadReading("mass", amount.dry_mass, basis="dry"))
    if amount.mass is not None:
        found.append(LoadReading("mass", amount.mass, basis="ambient"))
    if amount.number is not None:
        found.append(LoadReading("number", amount.number))
    for wavelength in dict.fromkeys(wavelengths):
        extinction = _extinction(amount, optics_at, wavelength)
        if extinction is not None:
            found += _optical(extinction, wavelength)
    extinction = _extinction(amount, optics_at, RANGES_AT)
    if extinction is not None:
        ranges = -math.log(MOR_LEFT) / extinction, -math.log(VISUAL_RANGE_CONTRAST) / extinction
        found.append(LoadReading("meteorological_optical_range", ranges[0], RANGES_AT))
        found.append(LoadReading("visual_range", ranges[1], RANGES_AT))
    return tuple(found)


def _extinction(amount: Concentration, optics_at: Callable[[float], ParticleOptics], wavelength: float) -> float | None:
    """Extinction coefficient [m⁻¹], or None where it is not known or there is none."""
    if amount.known_at is not None and abs(wavelength - amount.known_at) > SAME_WAVELENGTH * (1 + 1e-9):
        return None
    try:
        extinction = amount.extinction(optics_at(wavelength))
    except IndexRangeError:
        return None
    return extinction if extinction > 0 else None


def _optical(extinction: float, wavelength: float) -> Iterator[LoadReading]:
    density = extinction / math.log(10)
    yield LoadReading("extinction", extinction, wavelength)
    for length in _OBSCURED_OVER:
        yield LoadReading("obscuration", -math.expm1(-extinction * length), wavelength, length)
    yield LoadReading("optical_density", density, wavelength)
    yield LoadReading("attenuation", 10 * density, wavelength)
    for length in _LEFT_OVER:
        yield LoadReading("transmittance", math.exp(-extinction * length), wavelength, length)
