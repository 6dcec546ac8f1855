"""From what people measure of a load to number concentration, extinction and scattering coefficients."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

from lasescatter.assumptions import Assumption
from lasescatter.matter import HenyeyGreenstein, SizeTable
from lasescatter.optics.distributions import mean_power
from lasescatter.optics.sizes import ParticleOptics
from lasescatter.scene import Everywhere, Load, LoadReading

if TYPE_CHECKING:
    from lasescatter.optics.growth import Floating

MOR_LEFT = 0.05
"""Share of the light that is left over the meteorological optical range (WMO-No. 8; CIE e-ILV 17-31-018)."""
VISUAL_RANGE_CONTRAST = 0.02
"""Contrast of a dark object at the visual range (Koschmieder; AMS Glossary of Meteorology, visual range)."""
OPTICAL = frozenset(
    ("extinction", "meteorological_optical_range", "visual_range", "obscuration", "optical_density", "attenuation",
     "transmittance")
)  # fmt: skip
_BY_EYE = "visual_range"

PUFFS = Assumption(
    name="The stated load is a mean that is never exceeded",
    direction="low",
    size="in proportion: a puff, plume or spray of three times the stated load scatters up to three times as much",
    source="first-order scattering is proportional to the load (E2)",
)
FORWARD_LIGHT = Assumption(
    name="An extinction reading is free of forward-scattered light",
    direction="low",
    size="an instrument that collects forward light reads too low, more so for drops larger than the wavelength",
    source="common practice, no source",
)
ONE_INDEX = Assumption(
    name="The refractive index given is used at every wavelength of the site",
    direction="either",
    size="not quantified; where the index differs much, give it as a table by wavelength",
    source="entered by the user",
)
SPHERES = Assumption(
    name="Particles are taken as homogeneous spheres",
    direction="low",
    size="non-spheres of the same volume can send several times more light to the side and back",
    source="Mie theory is for spheres (Bohren & Huffman 1983, ch. 4); size of the effect: common practice, no source",
)

KINDS = Assumption(
    name="Particles of a kind are as the catalogue describes them",
    direction="either",
    size="by the factor printed with each kind (checked 1.5, weak 3, non-spheres 3), which the upper bounds carry",
    source="the factors: modelling choice; the kind itself: the catalogue's entry, its sources and their marks",
)
OWN_PARTICLES = Assumption(
    name="Sizes, index or scattering matrix entered by the user are right",
    direction="either",
    size="not quantified: no factor is put on the user's own data, but 2 on a matrix without F12 and 3 on a table of "
    "sizes that ends in its midst",
    source="entered by the user",
)
CUT_SIZES = Assumption(
    name="There are no particles outside the radii of a table of sizes",
    direction="low",
    size="by what the instrument does not count; large particles weigh most in extinction by mass or number",
    source="entered by the user",
)
STAND_IN = Assumption(
    name="A Henyey–Greenstein function stands in for the scattering matrix of particles",
    direction="low",
    size="a factor 5 is carried by the upper bounds: to the side and back it can be several times too low, and it "
    "polarizes nothing, where linear light can be up to twice as much",
    source="asked for by name in the site file; size of the effect: common practice, no source",
)
NO_F12 = Assumption(
    name="A measured scattering matrix without F12 polarizes nothing",
    direction="low",
    size="up to a factor 2 for linear light, which the upper bounds carry",
    source="F11 + |F12| is at most 2 F11 (E5)",
)
ONE_MATRIX = Assumption(
    name="A scattering matrix and an extinction that are given as data hold at every wavelength of the site",
    direction="either",
    size="not quantified; give each wavelength a site file with data of its own",
    source="entered by the user",
)
AT_550 = Assumption(
    name="A meteorological optical range or visual range is an extinction at 550 nm",
    direction="either",
    size="by the spectrum of the particles over the visible; particles smaller than 0.2 µm most",
    source="WMO-No. 8 defines the range for light of 2700 K, seen by the eye",
)

STEADY = Assumption(
    name="Loads that a role vouches for neither thin nor clear",
    direction="low",
    size="by the shielding of the load: exp(optical thickness) at most",
    source="entered by the user",
)
CLEAN_AIR = Assumption(
    name="Air outside the stated loads holds no particles",
    direction="low",
    size="room and outdoor air hold dust and haze that scatter some two to thirty times more than its molecules; "
    'enter them as a load of region "everywhere"',
    source="OPAC air types at 550 nm (Hess, Koepke & Schult 1998), 0.026–0.35 per km; molecules 0.0115 per km",
)


@dataclass(frozen=True)
class Concentration:
    """How much of a load there is where its region's profile is 1."""

    number: float | None
    """Particles between the cuts of their sizes. [m⁻³]; None for a stand-in."""
    dry_mass: float | None
    """Without the water taken up. [kg m⁻³]; None where no density is stated, and for a stand-in."""
    mass: float | None
    """As the particles float, water included. [kg m⁻³]"""
    extinction_scale: float
    """By what cross sections are multiplied: the number concentration as if no sizes were cut [m⁻³], or for a stand-in,
    whose nominal extinction is 1 m², its extinction coefficient [m⁻¹]."""
    known_at: float | None = None
    """Wavelength at which a stand-in's extinction was read; None: it follows from the particles at any. [m]"""

    def extinction(self, optics: ParticleOptics) -> float:
        """Extinction coefficient at the wavelength of `optics` [m⁻¹]."""
        return self.extinction_scale * optics.extinction

    def scattering(self, optics: ParticleOptics) -> float:
        """Scattering coefficient at the wavelength of `optics` [m⁻¹]."""
        return self.extinction_scale * optics.scattering


def extinction_of(reading: LoadReading) -> float | None:
    """Extinction coefficient at the wavelength of an optical reading [m⁻¹]; None for mass and number.

    Natural logarithms of what is left: K = −ln(T)/L. Five per cent are left over the meteorological optical range;
    contrast falls to two per cent over the visual range; an optical density is −log₁₀ T, a decibel a tenth of it.

    Raises
    ------
    ValueError
        For an obscuration or transmittance without its length.
    """
    value = reading.value
    if reading.kind == "extinction":
        return value
    if reading.kind == "meteorological_optical_range":
        return -math.log(MOR_LEFT) / value
    if reading.kind == "visual_range":
        return -math.log(VISUAL_RANGE_CONTRAST) / value
    if reading.kind == "optical_density":
        return math.log(10) * value
    if reading.kind == "attenuation":
        return math.log(10) / 10 * value
    if reading.kind in ("obscuration", "transmittance"):
        if reading.over is None:
            raise ValueError(f"a reading of {reading.kind} needs the length that it belongs to")
        return -(math.log1p(-value) if reading.kind == "obscuration" else math.log(value)) / reading.over
    return None


def concentration(
    load: Load, floating: Floating | None, optics_at: Callable[[float], ParticleOptics], any_wavelength: float
) -> Concentration:
    """How much there is, from the load's reading.

    Parameters
    ----------
    floating : Floating or None
        The particles as they float in the site's air; None for a stand-in.
    optics_at : callable
        Optics of the floating particles at a wavelength [m]. Called for an optical reading of spheres alone, at its
        wavelength; what it raises there is passed on.
    any_wavelength : float
        Where an optical reading does not say at which wavelength it was made. [m]

    Raises
    ------
    ValueError
        For a mass where the particles have no density, and for anything but an optical reading of a stand-in.

    Notes
    -----
    An optical reading is carried to other wavelengths through the particles' own spectrum.
    """
    reading = load.reading
    extinction = extinction_of(reading)
    at = any_wavelength if reading.at is None else reading.at
    if floating is None:
        if extinction is None:
            raise ValueError(f"{load.key}: a stand-in for particles takes an optical reading, not a {reading.kind}")
        return Concentration(None, None, None, extinction, at)
    if extinction is not None:
        number = extinction / optics_at(at).extinction
    elif reading.kind == "number":
        # What is counted lies between the cuts; distributions are normalised over all radii.
        number = reading.value / _between_cuts(floating)
    else:
        particle = floating.mass if reading.basis == "ambient" else floating.dry_mass
        if particle is None:
            raise ValueError(f"{load.key}: a load by mass needs the particles' density")
        number = reading.value / particle
    dry = None if floating.dry_mass is None else number * floating.dry_mass
    wet = None if floating.mass is None else number * floating.mass
    return Concentration(number * _between_cuts(floating), dry, wet, number)


def _between_cuts(floating: Floating) -> float:
    """Share of the particles whose sizes are not cut away."""
    return sum(mode.weight * mean_power(mode.shape, 0) for mode in floating.modes)


def assumptions_of(loads: tuple[Load, ...], wavelengths: set[float]) -> tuple[Assumption, ...]:
    """What the loads' optics rest on, for beams of some wavelengths [m]."""
    found = [] if any(isinstance(load.region, Everywhere) for load in loads) else [CLEAN_AIR]
    for load in loads:
        found += [PUFFS, *_of_particles(load, wavelengths), *_of_reading(load.reading)]
    return tuple(dict.fromkeys(found))


def _of_particles(load: Load, wavelengths: set[float]) -> Iterator[Assumption]:
    at = load.reading.at
    used = wavelengths | ({at} if at is not None else set())
    if load.stand_in is not None:
        if isinstance(load.stand_in, HenyeyGreenstein):
            yield STAND_IN
        else:
            yield OWN_PARTICLES
            if load.stand_in.f12 is None:
                yield NO_F12
        if len(used) > 1:
            yield ONE_MATRIX
        return
    yield SPHERES
    yield KINDS if load.kind else OWN_PARTICLES
    if any(isinstance(mode.shape, SizeTable) for mode in load.modes):
        yield CUT_SIZES
    materials = [mode.material or load.material for mode in load.modes]
    if len(used) > 1 and any(material is not None and isinstance(material.index, complex) for material in materials):
        yield ONE_INDEX


def _of_reading(reading: LoadReading) -> Iterator[Assumption]:
    if reading.kind in OPTICAL and reading.kind != _BY_EYE:
        yield FORWARD_LIGHT
    if reading.kind in ("meteorological_optical_range", "visual_range"):
        yield AT_550
