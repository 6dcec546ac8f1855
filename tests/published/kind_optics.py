"""Optics of kinds of the catalogue, as their files describe them, each computed once for all tests."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cache

from lasescatter.matter import Kind, Lognormal, SizeMode
from lasescatter.optics.indices import index_at, volume_mixed
from lasescatter.optics.sizes import Accuracy, particle_optics
from lasescatter.site.catalogue import read_catalogue

ACCURACY = Accuracy(f11=1.0, extinction=1e-3, tail=1e-4, work=1e9)
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


@dataclass(frozen=True)
class Mean:
    """Means per particle."""

    extinction: float
    scattering: float
    asymmetry: float
    volume: float
    effective_radius: float

    @property
    def albedo(self) -> float:
        return self.scattering / self.extinction


mode_optics = cache(particle_optics)
"""Many kinds share a mode, and a mode takes long where its particles are large."""


@cache
def optics_of(name: str, humidity: float, wavelength: float, median_radius: float | None = None) -> Mean:
    """Optics of a kind, mode by mode; its one lognormal mode may be given another median radius."""
    kind = kind_of(name)
    parts = []
    for mode in kind.modes:
        floating, index = moist(mode, kind, humidity, wavelength)
        shape = floating.shape if median_radius is None else replace(floating.shape, median_radius=median_radius)
        parts.append((mode.weight, mode_optics((SizeMode(shape),), index, wavelength, accuracy=ACCURACY)))
    extinction, scattering, forward, volume, area = (
        sum(weight * value(optics) for weight, optics in parts)
        for value in (
            lambda o: o.extinction,
            lambda o: o.scattering,
            lambda o: o.scattering * o.asymmetry,
            lambda o: o.volume,
            lambda o: o.volume / o.effective_radius,
        )
    )
    return Mean(extinction, scattering, forward / scattering, volume, volume / area)


def mass_extinction(optics: Mean, density: float) -> float:
    """Of dry particles. [m²/kg]"""
    return optics.extinction / (optics.volume * density)
