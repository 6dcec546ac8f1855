"""Molecular scattering by dry air: dispersion, King factor, cross section and the depolarised Rayleigh matrix.

Sources: Bodhaine, Wood, Dutton & Slusser (1999), J. Atmos. Oceanic Technol. 16, 1854, for the method; Peck &
Reeder (1972), J. Opt. Soc. Am. 62, 958, for the dispersion; Bates (1984), Planet. Space Sci. 32, 785, for the
King factors; Hansen & Travis (1974), Space Sci. Rev. 16, 527, eqs. 2.14–2.16, for the matrix.
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


class AirRangeError(ValueError):
    """Air outside what the formulas were made for; the text names quantity, value and range."""


@dataclass(frozen=True)
class AirOptics:
    """Air at one wavelength."""

    refractivity: float
    """n − 1 at 15 °C and 1013.25 hPa."""
    king_factor: float
    depolarisation: float
    """Of unpolarised light at 90°."""
    cross_section: float
    """Per molecule. [m²]"""
    number: float
    """Molecules. [m⁻³]"""
    scattering: float
    """Coefficient, equal to the extinction: absorption by gases is not counted. [m⁻¹]"""
    matrix: ScatteringMatrix = field(repr=False)


def air_optics(wavelength: float, temperature: float, pressure: float) -> AirOptics:
    """Molecular scattering.

    Parameters
    ----------
    wavelength : float
        In vacuum. [m]
    temperature, pressure : float
        [K], [Pa]

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
    delta = refractivity(wavelength)
    king = king_factor(wavelength)
    standard = _STANDARD_PRESSURE / (BOLTZMANN * _STANDARD_TEMPERATURE)
    square = (1 + delta) ** 2
    # Bodhaine et al. (1999), eq. 2; n² − 1 without cancellation.
    polarisability = delta * (2 + delta) / (square + 2)
    cross_section = 24 * np.pi**3 * polarisability**2 * king / (wavelength**4 * standard**2)
    number = pressure / (BOLTZMANN * temperature)
    rho = depolarisation(king)
    return AirOptics(
        refractivity=delta,
        king_factor=king,
        depolarisation=rho,
        cross_section=float(cross_section),
        number=number,
        scattering=float(cross_section * number),
        matrix=rayleigh_matrix(rho),
    )


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


def rayleigh_elements(rho: float, theta: ArrayLike) -> tuple[NDArray[np.float64], ...]:
    """F11, F12, F22, F33, F44 of molecules with depolarisation rho at scattering angles [rad]."""
    cosine = np.cos(np.asarray(theta, dtype=float))
    square = cosine**2
    dipole = (1 - rho) / (1 + rho / 2)
    circular = (1 - 2 * rho) / (1 - rho)
    f22 = dipole * 0.75 * (1 + square)
    f33 = dipole * 1.5 * cosine
    return f22 + (1 - dipole), -dipole * 0.75 * (1 - square), f22, f33, circular * f33


def rayleigh_matrix(rho: float) -> ScatteringMatrix:
    """Scattering matrix of molecules with depolarisation rho."""
    angles = np.linspace(0, np.pi, _INTERVALS + 1)
    f11, f12, _, f33, _ = rayleigh_elements(rho, angles)
    return ScatteringMatrix(angles, f11, f12, f33, np.zeros_like(f11))
