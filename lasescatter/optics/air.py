"""Molecular scattering by air, dry or moist: dispersion, King factor, cross section, depolarised Rayleigh matrix.

Sources: Bodhaine, Wood, Dutton & Slusser (1999), J. Atmos. Oceanic Technol. 16, 1854, for the method; Peck &
Reeder (1972), J. Opt. Soc. Am. 62, 958, for the dispersion; Bates (1984), Planet. Space Sci. 32, 785, for the
King factors; Hansen & Travis (1974), Space Sci. Rev. 16, 527, eqs. 2.14–2.16, for the matrix; Ciddor (1996), Appl.
Opt. 35, 1566, for water vapour.

Vapour takes the place of as many molecules of dry air and scatters 0.71 times as much as each of them at 532 nm. So
moist air scatters less: saturated air by 0.7 % at 20 °C, 2 % at 40 °C and 7 % at 65 °C.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lasescatter.optics.matrix import ScatteringMatrix

BOLTZMANN = 1.380649e-23
"""[J K⁻¹] Exact, SI 2019."""
CO2_FRACTION = 360e-6
"""By volume, as in Bodhaine et al. (1999). Today's 430e-6 would change the cross section by 8e-5."""

SHORTEST_WAVELENGTH = 0.2e-6
LONGEST_WAVELENGTH = 1.7e-6
# Air for which the dispersion formula was measured.
_STANDARD_TEMPERATURE = 288.15
_STANDARD_PRESSURE = 101_325.0
_INTERVALS = 2048

# Vapour for which Ciddor (1996), eq. 3, gives the refractivity, at 20 °C; constants from memory, unconfirmed.
_VAPOUR_PRESSURE = 1333.0
_VAPOUR_TEMPERATURE = 293.15
# Wavelengths that eq. 3 was fitted to (from memory, unconfirmed). Beyond them vapour's refractivity is taken to change
# with wavelength as that of dry air, which leaves the scattering of saturated air at 40 °C within 1e-3 at 266 nm.
_VAPOUR_WAVELENGTHS = (0.35e-6, 1.2e-6)
# Of vapour, unpolarised light at 90°, measured in the green: Murphy (1977), J. Chem. Phys. 67, 5831; from memory,
# unconfirmed. Water molecules are nearly isotropic.
_VAPOUR_DEPOLARISATION = 3e-4


class AirRangeError(ValueError):
    """Air outside what the formulas were made for; the text names quantity, value and range."""


@dataclass(frozen=True)
class AirOptics:
    """Air at one wavelength."""

    refractivity: float
    """n − 1 of dry air at 15 °C and 1013.25 hPa."""
    king_factor: float
    depolarisation: float
    """Of unpolarised light at 90°, of the mixture as is the King factor."""
    cross_section: float
    """Mean per molecule. [m²]"""
    number: float
    """Molecules, those of vapour included. [m⁻³]"""
    vapour: float
    """Molecules of water vapour. [m⁻³]"""
    scattering: float
    """Coefficient, equal to the extinction: absorption by gases is not counted. [m⁻¹]"""
    matrix: ScatteringMatrix = field(repr=False)


def air_optics(wavelength: float, temperature: float, pressure: float, relative_humidity: float = 0.0) -> AirOptics:
    """Molecular scattering.

    Parameters
    ----------
    wavelength : float
        In vacuum. [m]
    temperature, pressure : float
        [K], [Pa]
    relative_humidity : float
        0 to 1, over water. Vapour takes its share of the pressure, and not more than all of it.

    Raises
    ------
    AirRangeError
    """
    if not SHORTEST_WAVELENGTH <= wavelength <= LONGEST_WAVELENGTH:
        raise AirRangeError(
            f"wavelength {wavelength * 1e9:.6g} nm is outside the data for the refractive index and King factor "
            f"of air, {SHORTEST_WAVELENGTH * 1e9:g} to {LONGEST_WAVELENGTH * 1e9:g} nm"
        )
    for quantity, value, unit in (("temperature", temperature, "K"), ("pressure", pressure, "Pa")):
        if not (np.isfinite(value) and value > 0):
            raise AirRangeError(f"{quantity} {value:.6g} {unit} of air is outside its range: above 0")
    if not 0 <= relative_humidity <= 1:
        raise AirRangeError(f"relative humidity {relative_humidity:.6g} of air is outside its range: 0 to 1")
    delta = refractivity(wavelength)
    king = king_factor(wavelength)
    standard = _STANDARD_PRESSURE / (BOLTZMANN * _STANDARD_TEMPERATURE)
    cross_section = _cross_section(wavelength, delta, standard, king)
    number = pressure / (BOLTZMANN * temperature)
    rho = depolarisation(king)
    vapour = 0.0
    if relative_humidity > 0:
        vapour = min(relative_humidity * saturation_pressure(temperature), pressure) / (BOLTZMANN * temperature)
        of_vapour = _vapour_cross_section(wavelength)
        share = vapour * of_vapour / ((number - vapour) * cross_section + vapour * of_vapour)
        cross_section = ((number - vapour) * cross_section + vapour * of_vapour) / number
        # Every element of the matrix is linear in the share of dipole scattering.
        dipole = (1 - share) * _dipole_share(rho) + share * _dipole_share(_VAPOUR_DEPOLARISATION)
        rho = (1 - dipole) / (1 + dipole / 2)
        king = (6 + 3 * rho) / (6 - 7 * rho)
    return AirOptics(
        refractivity=delta,
        king_factor=king,
        depolarisation=rho,
        cross_section=cross_section,
        number=number,
        vapour=vapour,
        scattering=cross_section * number,
        matrix=rayleigh_matrix(rho),
    )


def _cross_section(wavelength: float, delta: float, number: float, king: float) -> float:
    """Per molecule of a gas of refractivity `delta` at a number density: Bodhaine et al. (1999), eq. 2. [m²]"""
    square = (1 + delta) ** 2
    polarisability = delta * (2 + delta) / (square + 2)  # n² − 1 without cancellation
    return float(24 * np.pi**3 * polarisability**2 * king / (wavelength**4 * number**2))


def _vapour_cross_section(wavelength: float) -> float:
    """Per molecule of water vapour. [m²]"""
    number = _VAPOUR_PRESSURE / (BOLTZMANN * _VAPOUR_TEMPERATURE)
    king = (6 + 3 * _VAPOUR_DEPOLARISATION) / (6 - 7 * _VAPOUR_DEPOLARISATION)
    return _cross_section(wavelength, vapour_refractivity(wavelength), number, king)


def vapour_refractivity(wavelength: float) -> float:
    """n − 1 of water vapour at 20 °C and 1333 Pa, at a vacuum wavelength in metres: Ciddor (1996), eq. 3."""
    known = min(max(wavelength, _VAPOUR_WAVELENGTHS[0]), _VAPOUR_WAVELENGTHS[1])
    square = (known * 1e6) ** -2
    vapour = 1.022e-8 * (295.235 + 2.6422 * square - 0.032380 * square**2 + 0.004028 * square**3)
    return vapour * (refractivity(wavelength) / refractivity(known))


def saturation_pressure(temperature: float) -> float:
    """Saturation pressure of water vapour over water [Pa] at a temperature [K].

    Davis (1992), Metrologia 29, 67, as Ciddor (1996) uses it; constants from memory, unconfirmed.
    """
    t = temperature
    return float(np.exp(1.2378847e-5 * t * t - 1.9121316e-2 * t + 33.93711047 - 6.3431645e3 / t))


def refractivity(wavelength: float) -> float:
    """n − 1 of dry air at 15 °C and 1013.25 hPa, at a vacuum wavelength in metres.

    Peck & Reeder (1972), taken as air with 300 ppm of carbon dioxide, scaled by Bodhaine et al. (1999), eq. 19.
    """
    square = (wavelength * 1e6) ** -2
    dry = (8060.51 + 2_480_990 / (132.274 - square) + 17_455.7 / (39.32957 - square)) * 1e-8
    return dry * (1 + 0.54 * (CO2_FRACTION - 300e-6))


def king_factor(wavelength: float) -> float:
    """(6 + 3ρ)/(6 − 7ρ) of air, at a vacuum wavelength in metres: Bates (1984), as in Bodhaine et al. (1999)."""
    square = (wavelength * 1e6) ** -2
    # Percent by volume and King factor: nitrogen, oxygen, argon, carbon dioxide.
    gases = (
        (78.084, 1.034 + 3.17e-4 * square),
        (20.946, 1.096 + 1.385e-3 * square + 1.448e-4 * square**2),
        (0.934, 1.00),
        (100 * CO2_FRACTION, 1.15),
    )
    return sum(part * factor for part, factor in gases) / sum(part for part, _ in gases)


def depolarisation(king: float) -> float:
    """Depolarisation of unpolarised light at 90° from a King factor."""
    return 6 * (king - 1) / (3 + 7 * king)


def _dipole_share(rho: float) -> float:
    """Share of pure dipole scattering in F11, Δ of Hansen & Travis (1974)."""
    return (1 - rho) / (1 + rho / 2)


def rayleigh_elements(rho: float, theta: ArrayLike) -> tuple[NDArray[np.float64], ...]:
    """F11, F12, F22, F33, F44 of molecules with depolarisation rho at scattering angles [rad]."""
    cosine = np.cos(np.asarray(theta, dtype=float))
    square = cosine**2
    dipole = _dipole_share(rho)
    circular = (1 - 2 * rho) / (1 - rho)
    f22 = dipole * 0.75 * (1 + square)
    f33 = dipole * 1.5 * cosine
    return f22 + (1 - dipole), -dipole * 0.75 * (1 - square), f22, f33, circular * f33


def rayleigh_matrix(rho: float) -> ScatteringMatrix:
    """Scattering matrix of molecules with depolarisation rho."""
    angles = np.linspace(0, np.pi, _INTERVALS + 1)
    f11, f12, _, f33, _ = rayleigh_elements(rho, angles)
    return ScatteringMatrix(angles, f11, f12, f33, np.zeros_like(f11))
