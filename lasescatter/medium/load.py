"""From what people measure of a load to number concentration, extinction and scattering coefficients."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from lasescatter.assumptions import Assumption
from lasescatter.optics.sizes import ParticleOptics
from lasescatter.scene import Everywhere, Load

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
    size="not quantified; where the index differs much, assess each wavelength with its own index",
    source="entered by the user",
)
SPHERES = Assumption(
    name="Particles are taken as homogeneous spheres",
    direction="low",
    size="non-spheres of the same volume can send several times more light to the side and back",
    source="Mie theory is for spheres (Bohren & Huffman 1983, ch. 4); size of the effect: common practice, no source",
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
    """How much of a load there is where it is."""

    number: float
    """[m⁻³]"""
    mass: float | None
    """[kg m⁻³]; None where no density is stated."""

    def extinction(self, optics: ParticleOptics) -> float:
        """Extinction coefficient at the wavelength of `optics` [m⁻¹]."""
        return self.number * optics.extinction

    def scattering(self, optics: ParticleOptics) -> float:
        """Scattering coefficient at the wavelength of `optics` [m⁻¹]."""
        return self.number * optics.scattering


def concentration(load: Load, optics_at: Callable[[float], ParticleOptics], any_wavelength: float) -> Concentration:
    """Number and mass concentration from the load's reading.

    Parameters
    ----------
    optics_at : callable
        Optics of the load's particles at a wavelength [m].
    any_wavelength : float
        A wavelength of the site: the particles' mean volume is the same at all. [m]

    Notes
    -----
    A reading of extinction is carried to other wavelengths through the particles' own spectrum.
    """
    reading = load.reading
    density = None if load.material is None else load.material.density
    if reading.kind == "extinction":
        at = any_wavelength if reading.at is None else reading.at
        optics = optics_at(at)
        number = reading.value / optics.extinction
    else:
        optics = optics_at(any_wavelength)
        if reading.kind == "number":
            number = reading.value
        else:
            if density is None:
                raise ValueError(f"{load.key}: a load by mass needs the particles' density")
            number = reading.value / (density * optics.volume)
    mass = None if density is None else number * density * optics.volume
    return Concentration(number, mass)


def assumptions_of(loads: tuple[Load, ...], wavelengths: set[float]) -> tuple[Assumption, ...]:
    """What the loads' optics rest on, for beams of some wavelengths [m]."""
    if not loads:
        return (CLEAN_AIR,)
    found = [PUFFS, SPHERES]
    if not any(isinstance(load.region, Everywhere) for load in loads):
        found.append(CLEAN_AIR)
    if any(load.reading.kind == "extinction" for load in loads):
        found.append(FORWARD_LIGHT)
    used = wavelengths | {load.reading.at for load in loads if load.reading.at is not None}
    if len(used) > 1:
        found.append(ONE_INDEX)
    return tuple(found)
