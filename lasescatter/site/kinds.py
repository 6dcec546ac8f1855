"""The kind of particles that an entry names, from the catalogue."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, cast

from pydantic import ValidationInfo

from lasescatter.matter import (
    Growth,
    Index,
    IndexTable,
    Kind,
    Lognormal,
    Material,
    ModifiedGamma,
    SingleSize,
    SizeMode,
    SizeShape,
)
from lasescatter.site.faults import quoted, refusal
from lasescatter.site.fields import Marker, Reading, read_text

if TYPE_CHECKING:
    from lasescatter.site.catalogue import Catalogue

MOST_HUMIDITY = 0.99
"""Above it small errors of the humidity change the size of moist particles without bound."""


@dataclass(frozen=True)
class NamedKind:
    """A kind, as the list of inputs tells it."""

    kind: Kind

    @property
    def has_parts(self) -> bool:
        """Whether some of its modes are of a material of their own."""
        return any(mode.material is not None for mode in self.kind.modes)

    @property
    def materials(self) -> tuple[Material, ...]:
        """What its modes are made of."""
        return tuple(mode.material or self.kind.material for mode in self.kind.modes)

    @property
    def grows(self) -> bool:
        """Whether it takes up water in moist air."""
        return any(material.growth is not None for material in self.materials)

    @property
    def most_humidity(self) -> float:
        """Relative humidity up to which its growth is known; infinite where it does not grow."""
        growths = [material.growth for material in self.materials if material.growth is not None]
        listed = [growth.factors[-1][0] for growth in growths if growth.factors]
        return min([MOST_HUMIDITY, *listed]) if growths else math.inf

    def __str__(self) -> str:
        return f"{self.kind.name}: {self.kind.what.rstrip('.')}"


@dataclass(frozen=True)
class KindName(Marker):
    """The name of a kind, or one of the other names it goes by."""

    example: str

    def read(self, value: Any, info: ValidationInfo) -> NamedKind:
        name = read_text(value, "the name of a kind", self.example)
        reading = cast(Reading, info.context)
        catalogue = cast("Catalogue", reading.catalogue)
        kind = catalogue.named(name)
        if kind is None:
            near = catalogue.near(name)
            meant = f"Perhaps {' or '.join(quoted(other) for other in near)} was meant" if near else "Check the name"
            raise refusal(f"{quoted(name)} is not a kind of the catalogue",
                          f"{meant}; lasescatter particles list names them all. For other particles give sizes "
                          "and index instead of kind")  # fmt: skip
        return NamedKind(kind)

    def schema(self) -> dict[str, Any]:
        return {"type": "string", "minLength": 1}


def shape_text(shape: SizeShape) -> str:
    """A size distribution in words, SI."""
    if isinstance(shape, Lognormal):
        ends = [f"from {shape.smallest:.6g} m"] if shape.smallest is not None else []
        ends += [f"up to {shape.largest:.6g} m"] if shape.largest is not None else []
        cut = f", {' '.join(ends)}" if ends else ""
        return f"lognormal, median radius {shape.median_radius:.6g} m, geometric sd {shape.geometric_sd:.6g}{cut}"
    if isinstance(shape, ModifiedGamma):
        return f"modified gamma, mode radius {shape.mode_radius:.6g} m, alpha {shape.alpha:g}, gamma {shape.gamma:g}"
    if isinstance(shape, SingleSize):
        return f"single, radius {shape.radius:.6g} m"
    return f"table of {len(shape.radii)} radii from {shape.radii[0]:.6g} m to {shape.radii[-1]:.6g} m"


def index_text(index: Index) -> str:
    """A refractive index in words."""
    if isinstance(index, IndexTable):
        nodes = index.wavelengths
        return f"{index.name}: {len(nodes)} wavelengths from {nodes[0]:.6g} m to {nodes[-1]:.6g} m"
    return f"{index.real:.9g} + {index.imag:.9g}i"


def growth_text(growth: Growth | None) -> str:
    """Whether and how particles take up water."""
    if growth is None:
        return "growth in moist air is not computed"
    by = f"kappa {growth.kappa:g}" if growth.kappa is not None else "a table of growth factors"
    return f"takes up water, by {by}; sizes, index and density are those of the dry particles"


def mode_text(mode: SizeMode, several: bool) -> str:
    """A mode in words, with its share and what it is made of where that is its own."""
    words = shape_text(mode.shape)
    if several:
        words += f", share {mode.weight:.6g} by number"
    if mode.material is not None:
        density = mode.material.density
        words += f", index {index_text(mode.material.index)}"
        words += f", density {density:.6g} kg/m³" if density is not None else ""
    return words
