"""Optics of kinds of the catalogue, as their files describe them, each computed once for all tests."""

from __future__ import annotations

from dataclasses import replace
from functools import cache

from lasescatter.matter import Kind, Lognormal, SizeMode
from lasescatter.optics.indices import index_at, volume_mixed
from lasescatter.optics.sizes import Accuracy, ParticleOptics, particle_optics
from lasescatter.site.catalogue import read_catalogue

ACCURACY = Accuracy(f11=1.0, extinction=3e-4, tail=1e-5)
"""Extinction, albedo and asymmetry only: their printed values have 3 or 4 digits."""


def kind_of(name: str) -> Kind:
    """The kind, which must be called just so."""
    return read_catalogue().kinds[name]


def moist(
    mode: SizeMode, kind: Kind, humidity: float, wavelength: float, water: complex | None = None
) -> tuple[SizeMode, complex]:
    """A mode and its index at one of the humidities that its growth table lists; `water` is another index of water."""
    material = mode.material or kind.material
    index = index_at(material.index, wavelength)
    if material.growth is None or humidity == 0:
        return SizeMode(mode.shape, mode.weight), index
    factor = dict(material.growth.factors)[humidity]
    shape = mode.shape
    assert isinstance(shape, Lognormal) and shape.smallest and shape.largest
    grown = replace(
        shape,
        median_radius=shape.median_radius * factor,
        smallest=shape.smallest * factor,
        largest=shape.largest * factor,
    )
    water = index_at(material.growth.water, wavelength) if water is None else water
    return SizeMode(grown, mode.weight), volume_mixed(index, water, factor**-3)


@cache
def optics_of(name: str, humidity: float, wavelength: float, median_radius: float | None = None) -> ParticleOptics:
    """Optics of a kind; its one lognormal mode may be given another median radius."""
    kind = kind_of(name)
    modes, indices = zip(*(moist(mode, kind, humidity, wavelength) for mode in kind.modes), strict=True)
    if median_radius is not None:
        modes = tuple(replace(mode, shape=replace(mode.shape, median_radius=median_radius)) for mode in modes)
    return particle_optics(modes, indices, wavelength, accuracy=ACCURACY)


def mass_extinction(optics: ParticleOptics, density: float) -> float:
    """Of dry particles. [m²/kg]"""
    assert optics.volume is not None
    return optics.extinction / (optics.volume * density)
