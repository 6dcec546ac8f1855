"""Water taken up in moist air: how much larger particles float than they are dry, and what they are then made of.

Growth by kappa-Köhler theory: Petters & Kreidenweis (2007), Atmos. Chem. Phys. 7, 1961; or by factors that a source
lists. Index and density are mixed by volume, as in OPAC (Hess, Koepke & Schult 1998, Bull. Am. Meteorol. Soc. 79, 831).
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from itertools import pairwise
from math import exp, log, log1p, pi
from statistics import NormalDist

from lasescatter.assumptions import Assumption
from lasescatter.matter import Growth, Lognormal, Material, ModifiedGamma, SingleSize, SizeMode, SizeShape
from lasescatter.optics.distributions import mean_power
from lasescatter.optics.indices import index_at, unconfirmed_at, volume_mixed

SURFACE_TENSION = 0.072
"""Of the solution, as for water. [J m⁻²]"""
WATER_DENSITY = 997.05
"""At 25 °C. [kg m⁻³]"""
_MOLAR_MASS = 0.01801528
_GAS_CONSTANT = 8.314462618

# Water per dry volume that is lost in rounding.
_NOTHING = 1e-18

MOST_HUMIDITY = 0.99
"""Above it small errors of the humidity change the size without bound, and drops may form."""

ONE_FACTOR = Assumption(
    name="All particles of a mode grow by one factor in moist air",
    direction="either",
    size="large particles grow more than small ones, and a mode takes the factor of its large ones: given by mass "
    "or number its light is high by up to 4 % at 80 % humidity, 17 % at 95 % and 65 % at 99 %, and low by 1 % at most; "
    "given by an optical reading light to the side is right to 1.5, 5 and 13 %. None of it where the factors are a "
    "source's own. Particles still drying differ by more",
    source="comparison with growth size by size: mass-median diameters of 0.1–0.4 µm, geometric standard deviations of "
    "1.4–2.2, kappa of 0.1–0.61, 532 nm, 5–175°",
)


class HumidityError(ValueError):
    """Air too humid for the growth of particles to be computed; the text names humidity and range."""


def saturation_ratio(growth: float, dry_diameter: float, kappa: float, temperature: float) -> float:
    """Relative humidity in balance with a drop `growth` times as wide as its dry particle [m]; above 1 by curvature.

    Petters & Kreidenweis (2007), eq. 6.
    """
    water = growth**3 - 1
    return water / (water + kappa) * exp(_kelvin_diameter(temperature) / (dry_diameter * growth))


def _kelvin_diameter(temperature: float) -> float:
    """A of the Kelvin term exp(A/D): 2.099 nm at 298.15 K. [m]"""
    return 4 * SURFACE_TENSION * _MOLAR_MASS / (_GAS_CONSTANT * temperature * WATER_DENSITY)


def growth_factor(
    dry_diameter: float, kappa: float, relative_humidity: float, temperature: float, curvature: bool = True
) -> float:
    """Diameter in moist air over dry diameter.

    Parameters
    ----------
    dry_diameter : float
        [m]
    kappa : float
        Hygroscopicity, 0 for what takes up no water.
    relative_humidity : float
        0 to `MOST_HUMIDITY`.
    temperature : float
        [K]
    curvature : bool
        Whether surface tension counts.

    Raises
    ------
    HumidityError
        Above `MOST_HUMIDITY`, where kappa is above 0.
    ValueError
        If another argument is no physical value.
    """
    if not (dry_diameter > 0 and kappa >= 0 and temperature > 0 and relative_humidity >= 0):
        raise ValueError(
            f"dry diameter {dry_diameter:.6g} m, kappa {kappa:.6g}, temperature {temperature:.6g} K or relative "
            f"humidity {relative_humidity:.6g} is no physical value"
        )
    if kappa == 0 or relative_humidity == 0:
        return 1.0
    _check_humidity(relative_humidity, MOST_HUMIDITY)
    # Without curvature the law is solved for the water per dry volume; with it there is less.
    most = kappa * relative_humidity / (1 - relative_humidity)
    if not curvature or most < _NOTHING:
        return float((1 + most) ** (1 / 3))
    shrink = _kelvin_diameter(temperature) / dry_diameter
    aim = log(relative_humidity)
    low, high = 0.0, most
    # Below saturation the balance rises with the water all the way from 0 to `most`: bisection cannot miss.
    while True:
        water = (low + high) / 2
        if not low < water < high:
            return float((1 + high) ** (1 / 3))
        if log(water / (water + kappa)) + shrink / (1 + water) ** (1 / 3) < aim:
            low = water
        else:
            high = water


def _check_humidity(relative_humidity: float, most: float) -> None:
    if not relative_humidity <= most:
        raise HumidityError(
            f"relative humidity {100 * relative_humidity:.6g} % is above {100 * most:g} %, up to which the growth of "
            "particles that take up water is known"
        )


@dataclass(frozen=True)
class Floating:
    """Particles as they float in the air, with the water they have taken up."""

    modes: tuple[SizeMode, ...]
    """Wet sizes; without material."""
    factors: tuple[float, ...]
    """Radius over dry radius, one per mode."""
    dry_mass: float | None
    """Mean per particle, without water. [kg]; None where a density is not stated"""
    mass: float | None
    """Mean per particle, water included. [kg]; None where a density is not stated"""
    materials: tuple[Material, ...] = field(repr=False)
    """Dry, one per mode."""

    def indices(self, wavelength: float) -> tuple[complex, ...]:
        """Refractive index of each mode at a wavelength in vacuum [m].

        Raises
        ------
        IndexRangeError
            Outside the data of a dry material, or of water where there is some.
        """
        found = []
        for material, factor in zip(self.materials, self.factors, strict=True):
            index = index_at(material.index, wavelength)
            if material.growth is not None and factor > 1:
                index = volume_mixed(index, index_at(material.growth.water, wavelength), factor**-3)
            found.append(index)
        return tuple(found)

    def unconfirmed(self, wavelength: float) -> bool:
        """Whether any index there rests on a value that has not been seen in its source.

        Raises
        ------
        IndexRangeError
        """
        return any(
            unconfirmed_at(material.index, wavelength)
            or (material.growth is not None and factor > 1 and unconfirmed_at(material.growth.water, wavelength))
            for material, factor in zip(self.materials, self.factors, strict=True)
        )


def as_they_float(
    modes: tuple[SizeMode, ...], material: Material | None, relative_humidity: float, temperature: float
) -> Floating:
    """Particles of a load in moist air.

    Each mode grows as a whole, by the factor of its mass-median dry diameter (lognormal) or of the diameter of mean
    volume (other shapes); geometric standard deviations stay, all radii and cuts grow.

    Parameters
    ----------
    modes : tuple of SizeMode
        Dry.
    material : Material
        Of the modes that carry none of their own.
    relative_humidity : float
        0 to 1.
    temperature : float
        [K]

    Raises
    ------
    HumidityError
        Where anything grows: above `MOST_HUMIDITY`, or above the last humidity that its source lists.
    ValueError
        If a mode has no material.
    """
    materials = []
    for mode in modes:
        own = mode.material or material
        if own is None:
            raise ValueError("a mode of the size distribution has no material")
        materials.append(own)
    factors = tuple(
        _factor(mode.shape, own.growth, relative_humidity, temperature)
        for mode, own in zip(modes, materials, strict=True)
    )
    dry, wet = 0.0, 0.0
    known = all(own.density is not None for own in materials)
    for mode, own, factor in zip(modes, materials, factors, strict=True):
        volume = mode.weight * 4 / 3 * pi * mean_power(mode.shape, 3)
        dry += volume * (own.density or 0.0)
        wet += volume * (own.density or 0.0) + volume * (factor**3 - 1) * WATER_DENSITY
    return Floating(
        modes=tuple(
            SizeMode(_grown(mode.shape, factor), mode.weight) for mode, factor in zip(modes, factors, strict=True)
        ),
        factors=factors,
        dry_mass=dry if known else None,
        mass=wet if known else None,
        materials=tuple(materials),
    )


def _factor(shape: SizeShape, growth: Growth | None, relative_humidity: float, temperature: float) -> float:
    if growth is None or relative_humidity == 0:
        return 1.0
    if growth.kappa is not None:
        return growth_factor(_typical_diameter(shape), growth.kappa, relative_humidity, temperature)
    _check_humidity(relative_humidity, min(growth.factors[-1][0], MOST_HUMIDITY))
    # Linear in ln(1 − humidity), in which growth is nearest to a straight line, and monotone as the list is.
    for (low, small), (high, large) in pairwise(growth.factors):
        if relative_humidity <= high:
            way = (log1p(-relative_humidity) - log1p(-low)) / (log1p(-high) - log1p(-low))
            return small + way * (large - small)
    raise AssertionError("a humidity up to the last of the list lies between two of them")


def _typical_diameter(shape: SizeShape) -> float:
    """Median diameter, weighted by r⁶, of a lognormal, cut or not; of other shapes (<r⁶>/<r³>)^(1/3). [m]

    Large particles scatter most and grow most: with their factor for all the light is hardly ever low.
    """
    if not isinstance(shape, Lognormal):
        return float(2 * (mean_power(shape, 6) / mean_power(shape, 3)) ** (1 / 3))
    width = log(shape.geometric_sd)
    weighted = NormalDist(log(shape.median_radius) + 6 * width**2, width)
    below = 0.0 if shape.smallest is None else weighted.cdf(log(shape.smallest))
    above = 1.0 if shape.largest is None else weighted.cdf(log(shape.largest))
    middle = (below + above) / 2
    # Cuts that leave next to nothing of the weight leave it at the cut.
    if not 0 < middle < 1:
        return 2 * ((shape.largest if middle == 0 else shape.smallest) or shape.median_radius)
    return 2 * exp(weighted.inv_cdf(middle))


def _grown(shape: SizeShape, factor: float) -> SizeShape:
    if isinstance(shape, Lognormal):
        return replace(
            shape,
            median_radius=shape.median_radius * factor,
            smallest=None if shape.smallest is None else shape.smallest * factor,
            largest=None if shape.largest is None else shape.largest * factor,
        )
    if isinstance(shape, ModifiedGamma):
        return replace(shape, mode_radius=shape.mode_radius * factor)
    if isinstance(shape, SingleSize):
        return SingleSize(shape.radius * factor)
    return replace(shape, radii=tuple(radius * factor for radius in shape.radii))
