"""The table [particles.sizes], and what it shares with the sizes of a kind: one mode of the sizes."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from statistics import NormalDist
from typing import Annotated, ClassVar, cast

from lasescatter.matter import Lognormal, ModifiedGamma, SingleSize, SizeMode, SizeShape
from lasescatter.site.faults import Fault, quoted
from lasescatter.site.fields import Fraction, Number, Quantity, Word
from lasescatter.site.files import FromFile, TableFile
from lasescatter.site.size_csv import size_table
from lasescatter.site.table import Seen, Table, key

WEIGHTS_OFF_ONE = 1e-3
"""How far the weights of several modes may add up from 1; they are then made to add up exactly."""

LEAST_LEFT = 1e-6
"""Cuts that leave less than this share of the particles are refused."""

Radius = Annotated[float, Quantity("length", "1 nm", "100 um", "0.5 um")]
Diameter = Annotated[float, Quantity("length", "1 nm", "200 um", "1 um")]

Share = Annotated[float, Fraction("0.5", above_low=True)]
_WEIGHT = "Share of the particles by number, where there are several modes"

MEDIANS = ("median_radius", "median_diameter", "mass_median_diameter")
"""Ways to say where a lognormal mode lies; exactly one is given."""

_NEEDED: Mapping[str, Mapping[str, str]] = {
    "lognormal": {"geometric_sd": "1.6"},
    "modified gamma": {"mode_radius": '"4 um"', "alpha": "6", "gamma": "1"},
    "single": {"radius": '"0.25 um"'},
}
_ALSO: Mapping[str, tuple[str, ...]] = {"lognormal": (*MEDIANS, "smallest", "largest")}


class SizeKeys(Table):
    """One mode of the sizes, by a formula."""

    needed: ClassVar[Mapping[str, Mapping[str, str]]] = _NEEDED

    shape: Annotated[str, Word(tuple(_NEEDED))] = key("lognormal, modified gamma or single", "lognormal")
    median_radius: Radius | None = key("lognormal: median radius by number", "0.5 um", default=None)
    median_diameter: Diameter | None = key("lognormal: median diameter by number", "1 um", default=None)
    mass_median_diameter: Diameter | None = key("lognormal: median diameter by mass", "0.7 um", default=None)
    geometric_sd: Annotated[float, Number(1, 10, "1.6", above_low=True)] | None = key(
        "lognormal: geometric standard deviation, above 1", 1.6, default=None
    )
    smallest: Radius | None = key("lognormal: no particles below this radius", "0.005 um", default=None)
    largest: Radius | None = key("lognormal: no particles above this radius", "20 um", default=None)
    mode_radius: Radius | None = key("modified gamma: radius of the most frequent size", "4 um", default=None)
    alpha: Annotated[float, Number(0, 100, "6", above_low=True)] | None = key(
        "modified gamma: exponent of the radius", 6, default=None
    )
    gamma: Annotated[float, Number(0, 20, "1", above_low=True)] | None = key(
        "modified gamma: exponent of the decline", 1, default=None
    )
    radius: Radius | None = key("single: the radius of all particles", "0.25 um", default=None)

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        shape = seen.get("shape")
        if shape is None:
            return
        wanted = cls.needed[shape]
        for name, example in wanted.items():
            if not seen.stated(name):
                yield Fault((name,), "the key is missing",
                            f"Sizes of shape {quoted(shape)} need it, for example {name} = {example}")  # fmt: skip
        stated = [name for name in MEDIANS if seen.stated(name)]
        if shape == "lognormal" and not stated:
            yield Fault(("median_radius",), "the median is missing",
                        f'Give exactly one of {", ".join(MEDIANS)}, for example median_radius = "0.5 um"')  # fmt: skip
        if shape == "lognormal" and len(stated) > 1:
            yield Fault((stated[-1],), f"{' and '.join(stated)} are given", f"Give exactly one of {', '.join(MEDIANS)}")
        takes = (*wanted, *_ALSO.get(shape, ()))
        for name in dict.fromkeys(name for one in cls.needed for name in (*cls.needed[one], *_ALSO.get(one, ()))):
            if name not in takes and seen.stated(name):
                yield Fault((name,), f"the key does not belong to sizes of shape {quoted(shape)}",
                            f"Leave it out; {quoted(shape)} takes {_listed(shape, wanted)}")  # fmt: skip
        if seen.good("smallest", "largest") and seen.get("smallest") >= seen.get("largest"):
            yield Fault(("largest",), "the largest radius is not above the smallest", "Swap the two")
        elif shape == "lognormal" and len(stated) == 1 and seen.good("geometric_sd", *stated):
            yield from _cut_faults(seen, stated[0])

    def to_shape(self) -> SizeShape:
        """In SI."""
        if self.shape == "modified gamma":
            return ModifiedGamma(_plain(self.mode_radius), cast(float, self.alpha), cast(float, self.gamma))
        if self.shape == "single":
            return SingleSize(_plain(self.radius))
        smallest = None if self.smallest is None else float(self.smallest)
        largest = None if self.largest is None else float(self.largest)
        return Lognormal(self.medians()["median_radius"], cast(float, self.geometric_sd), smallest, largest)

    def medians(self) -> dict[str, float]:
        """The medians of a lognormal mode, each from the one that is stated. [m]"""
        to_mass = math.exp(3 * math.log(cast(float, self.geometric_sd)) ** 2)
        if self.median_radius is not None:
            radius = float(self.median_radius)
        elif self.median_diameter is not None:
            radius = float(self.median_diameter) / 2
        else:
            radius = _plain(self.mass_median_diameter) / 2 / to_mass
        return {"median_radius": radius, "median_diameter": 2 * radius, "mass_median_diameter": 2 * radius * to_mass}


class SizesOfKind(SizeKeys):
    """One mode of the sizes of a kind, dry."""

    weight: Share | None = key(_WEIGHT, 0.5, default=None)


class SizesTable(SizeKeys):
    """One mode of the sizes, by a formula or a table."""

    needed: ClassVar[Mapping[str, Mapping[str, str]]] = {**_NEEDED, "table": {"file": '"sizes.csv"'}}

    shape: Annotated[str, Word((*_NEEDED, "table"))] = key("lognormal, modified gamma, single or table", "lognormal")
    file: Annotated[FromFile, TableFile(size_table, "sizes.csv")] | None = key(
        "table: CSV file with radius or diameter (unit in the header) and dN/dlnr or dN/dlogD", "sizes.csv",
        default=None,
    )  # fmt: skip
    weight: Share | None = key(_WEIGHT, 0.5, default=None)

    def to_shape(self) -> SizeShape:
        """In SI."""
        return super().to_shape() if self.file is None else cast(SizeShape, self.file.content)


def _cut_faults(seen: Seen, stated: str) -> Iterator[Fault]:
    """Cuts that leave next to nothing of a mode, in which its number would mean nothing."""
    cuts = [name for name in ("smallest", "largest") if seen.good(name)]
    medians = {name: seen.get(name) for name in MEDIANS}
    mode = SizeKeys.model_construct(
        shape="lognormal", geometric_sd=seen.get("geometric_sd"), smallest=seen.get("smallest"),
        largest=seen.get("largest"), **medians,
    )  # fmt: skip
    if cuts and _between_cuts(mode.to_shape()) <= LEAST_LEFT:
        yield Fault((cuts[0],), f"next to nothing of the sizes is left beside the {stated.replace('_', ' ')}",
                    "Give cuts that leave some of the particles")  # fmt: skip


def weight_faults(sizes: tuple[SizesOfKind | SizesTable, ...]) -> Iterator[Fault]:
    """What must hold between the modes of one entry; places count from the table that has `sizes`."""
    if len(sizes) > 1:
        silent = [number for number, mode in enumerate(sizes) if mode.weight is None]
        for number in silent:
            yield Fault(("sizes", number, "weight"), "the key is missing",
                        "Each of several modes needs its share of the particles by number")  # fmt: skip
        total = sum(mode.weight or 0.0 for mode in sizes)
        if not silent and abs(total - 1) > WEIGHTS_OFF_ONE:
            yield Fault(("sizes", len(sizes) - 1, "weight"), f"the weights of the modes add up to {total:.4g}",
                        "Give shares by number that add up to 1")  # fmt: skip
    elif sizes and sizes[0].weight not in (None, 1):
        yield Fault(("sizes", 0, "weight"), "there is only one mode and its weight is not 1",
                    "Leave weight out, or add the other modes")  # fmt: skip


def modes_of(sizes: tuple[SizesOfKind | SizesTable, ...]) -> tuple[SizeMode, ...]:
    """The modes in SI, their weights brought to 1.

    The file's weights are shares of the particles that there are; those of a `SizeMode` count a cut distribution whole.
    """
    shapes = [mode.to_shape() for mode in sizes]
    whole = [(mode.weight or 1.0) / _between_cuts(shape) for mode, shape in zip(sizes, shapes, strict=True)]
    return tuple(SizeMode(shape, weight / sum(whole)) for shape, weight in zip(shapes, whole, strict=True))


def _between_cuts(shape: SizeShape) -> float:
    """Share of a distribution that its cuts leave, and at least a trace."""
    if not isinstance(shape, Lognormal):
        return 1.0
    number = NormalDist(math.log(shape.median_radius), math.log(shape.geometric_sd))
    below = 0.0 if shape.smallest is None else number.cdf(math.log(shape.smallest))
    above = 1.0 if shape.largest is None else number.cdf(math.log(shape.largest))
    return max(above - below, LEAST_LEFT)


def _listed(shape: str, wanted: Mapping[str, str]) -> str:
    return " and ".join((*(("median_radius",) if shape == "lognormal" else ()), *wanted))


def _plain(value: float | None) -> float:
    return float(cast(float, value))
