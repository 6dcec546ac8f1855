"""Sizes in the file of a kind: the modes, and the sizes that the kind may have."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Annotated, cast

from lasescatter.matter import Lognormal, ModifiedGamma, SingleSize, SizeMode, SizeShape, SizeSpan
from lasescatter.site.faults import Fault, quoted
from lasescatter.site.fields import Fraction, Number, Quantity, Text, Word
from lasescatter.site.table import Seen, Table, key

WEIGHTS_OFF_ONE = 1e-3
"""How far the weights of several modes may add up from 1; they are then made to add up exactly."""
USUAL_OFF = 0.02
"""How far the usual size of a span may be from that of the sizes, relative."""


Length = Annotated[float, Quantity("length", "0.1 nm", "1 cm", "0.5 um")]

_MEDIANS = ("median_radius", "median_diameter", "mass_median_diameter")
_OF_SHAPE = {
    "lognormal": ("geometric_sd", "smallest", "largest", *_MEDIANS),
    "modified gamma": ("mode_radius", "alpha", "gamma"),
    "single": ("radius",),
}
_NEEDED = {
    "lognormal": {"geometric_sd": "1.6"},
    "modified gamma": {"mode_radius": '"4 um"', "alpha": "6", "gamma": "1"},
    "single": {"radius": '"0.25 um"'},
}
_SPANS = {
    "median radius by number": "median_radius",
    "median diameter by number": "median_diameter",
    "median diameter by mass": "mass_median_diameter",
}


class SizesOfKind(Table):
    """One mode of the sizes, dry."""

    shape: Annotated[str, Word(tuple(_OF_SHAPE))] = key("lognormal, modified gamma or single", "lognormal")
    median_radius: Length | None = key("lognormal: median radius by number", "0.5 um", default=None)
    median_diameter: Length | None = key("lognormal: median diameter by number", "1 um", default=None)
    mass_median_diameter: Length | None = key("lognormal: median diameter by mass", "0.7 um", default=None)
    geometric_sd: Annotated[float, Number(1, 10, "1.6", above_low=True)] | None = key(
        "lognormal: geometric standard deviation, above 1", 1.6, default=None
    )
    smallest: Length | None = key("lognormal: no particles below this radius", "0.005 um", default=None)
    largest: Length | None = key("lognormal: no particles above this radius", "20 um", default=None)
    mode_radius: Length | None = key("modified gamma: radius of the most frequent size", "4 um", default=None)
    alpha: Annotated[float, Number(0, 100, "6", above_low=True)] | None = key(
        "modified gamma: exponent of the radius", 6, default=None
    )
    gamma: Annotated[float, Number(0, 20, "1", above_low=True)] | None = key(
        "modified gamma: exponent of the decline", 1, default=None
    )
    radius: Length | None = key("single: the radius of all particles", "0.25 um", default=None)
    weight: Annotated[float, Fraction("0.5", above_low=True)] | None = key(
        "Share of the particles by number, where there are several modes", 0.5, default=None
    )

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        shape = seen.get("shape")
        if shape is None:
            return
        for name, example in _NEEDED[shape].items():
            if not seen.stated(name):
                yield Fault((name,), "the key is missing",
                            f"Sizes of shape {quoted(shape)} need it, for example {name} = {example}")  # fmt: skip
        stated = [name for name in _MEDIANS if seen.stated(name)]
        if shape == "lognormal" and len(stated) != 1:
            wrong = f"{' and '.join(stated)} are given" if stated else "the median is missing"
            yield Fault((stated[-1] if stated else "median_radius",), wrong,
                        f"Give exactly one of {', '.join(_MEDIANS)}")  # fmt: skip
        for name in dict.fromkeys(name for names in _OF_SHAPE.values() for name in names):
            if name not in _OF_SHAPE[shape] and seen.stated(name):
                yield Fault((name,), f"the key does not belong to sizes of shape {quoted(shape)}",
                            f"Leave it out; {quoted(shape)} takes {', '.join(_OF_SHAPE[shape])}")  # fmt: skip
        if seen.good("smallest", "largest") and seen.get("smallest") >= seen.get("largest"):
            yield Fault(("largest",), "the largest radius is not above the smallest", "Swap the two")

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


class SizeSpanTable(Table):
    """Sizes that the kind may have."""

    what: Annotated[str, Word(tuple(_SPANS))] = key("What is stated", "median diameter by mass")
    usual: Length = key("That of the sizes above", "0.7 um")
    low: Length = key("Smallest", "0.5 um")
    high: Length = key("Largest", "1.5 um")
    remark: Annotated[str, Text("a remark", "both machines")] | None = key(
        "Anything else", "both machines", default=None
    )

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        if seen.good("usual", "low", "high") and not seen.get("low") <= seen.get("usual") <= seen.get("high"):
            yield Fault(("usual",), "the usual size is not between low and high", "Order them: low, usual, high")

    def to_span(self, source: str) -> SizeSpan:
        """In SI."""
        return SizeSpan(self.what, float(self.usual), float(self.low), float(self.high), source)


def weight_faults(sizes: tuple[SizesOfKind, ...]) -> Iterator[Fault]:
    if len(sizes) == 1 and sizes[0].weight not in (None, 1):
        yield Fault(("sizes", 0, "weight"), "there is only one mode and its weight is not 1", "Leave weight out")
    if len(sizes) < 2:
        return
    silent = [number for number, mode in enumerate(sizes) if mode.weight is None]
    for number in silent:
        yield Fault(("sizes", number, "weight"), "the key is missing",
                    "Each of several modes needs its share of the particles by number")  # fmt: skip
    total = sum(mode.weight or 0.0 for mode in sizes)
    if not silent and abs(total - 1) > WEIGHTS_OFF_ONE:
        yield Fault(("sizes", len(sizes) - 1, "weight"), f"the weights of the modes add up to {total:.4g}",
                    "Give shares by number that add up to 1")  # fmt: skip


def usual_size_faults(span: SizeSpanTable | None, sizes: tuple[SizesOfKind, ...] | None) -> Iterator[Fault]:
    """The usual size of the span is that of the sizes: it is what the sizes are scaled from."""
    if span is None or not sizes:
        return
    if len(sizes) > 1 or sizes[0].shape != "lognormal":
        yield Fault(("size_span",), "a span of sizes is stated for sizes that are not one lognormal mode",
                    "Leave it out, or give one lognormal mode")  # fmt: skip
        return
    found = sizes[0].medians()[_SPANS[span.what]]
    if abs(span.usual / found - 1) > USUAL_OFF:
        yield Fault(("size_span", "usual"), f"the sizes have a {span.what} of {found * 1e6:.4g} um",
                    f'Write usual = "{found * 1e6:.4g} um", or mend the sizes')  # fmt: skip


def modes_of(sizes: tuple[SizesOfKind, ...]) -> tuple[SizeMode, ...]:
    """The modes in SI, their weights brought to 1."""
    total = sum(mode.weight or 1.0 for mode in sizes)
    return tuple(SizeMode(mode.to_shape(), (mode.weight or 1.0) / total) for mode in sizes)


def _plain(value: float | None) -> float:
    return float(cast(float, value))
