"""The table [particles.sizes]: one mode of the sizes."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Any, cast

from lasescatter.matter import Lognormal, ModifiedGamma, SingleSize, SizeShape
from lasescatter.site.faults import Fault, quoted
from lasescatter.site.fields import Fraction, Number, Quantity, Word
from lasescatter.site.files import FromFile, TableFile
from lasescatter.site.size_csv import size_table
from lasescatter.site.table import Seen, Table, key

WEIGHTS_OFF_ONE = 1e-3
"""How far the weights of several modes may add up from 1; they are then made to add up exactly."""

Radius = Annotated[float, Quantity("length", "1 nm", "100 um", "0.5 um")]

_KEYS_OF_SHAPE = {
    "lognormal": {"median_radius": '"0.5 um"', "geometric_sd": "1.6"},
    "modified gamma": {"mode_radius": '"4 um"', "alpha": "6", "gamma": "1"},
    "single": {"radius": '"0.25 um"'},
    "table": {"file": '"sizes.csv"'},
}


class SizesTable(Table):
    """One mode of the sizes."""

    shape: Annotated[str, Word(tuple(_KEYS_OF_SHAPE))] = key(
        "lognormal, modified gamma, single or table", "lognormal"
    )
    median_radius: Radius | None = key("lognormal: median radius by number", "0.5 um", default=None)
    geometric_sd: Annotated[float, Number(1, 10, "1.6", above_low=True)] | None = key(
        "lognormal: geometric standard deviation, above 1", 1.6, default=None
    )
    mode_radius: Radius | None = key("modified gamma: radius of the most frequent size", "4 um", default=None)
    alpha: Annotated[float, Number(0, 100, "6", above_low=True)] | None = key(
        "modified gamma: exponent of the radius", 6, default=None
    )
    gamma: Annotated[float, Number(0, 20, "1", above_low=True)] | None = key(
        "modified gamma: exponent of the decline", 1, default=None
    )
    radius: Radius | None = key("single: the radius of all particles", "0.25 um", default=None)
    file: Annotated[FromFile, TableFile(size_table, "sizes.csv")] | None = key(
        "table: CSV file with radius or diameter (unit in the header) and dN/dlnr or dN/dlogD", "sizes.csv",
        default=None,
    )  # fmt: skip
    weight: Annotated[float, Fraction("0.5", above_low=True)] | None = key(
        "Share of the particles by number, where there are several modes", 0.5, default=None
    )

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        shape = seen.get("shape")
        if shape is None:
            return
        wanted = _KEYS_OF_SHAPE[shape]
        for name, example in wanted.items():
            if not seen.stated(name):
                yield Fault((name,), "the key is missing",
                            f"Sizes of shape {quoted(shape)} need it, for example {name} = {example}")  # fmt: skip
        for name in dict.fromkeys(name for keys in _KEYS_OF_SHAPE.values() for name in keys):
            if name not in wanted and seen.stated(name):
                yield Fault((name,), f"the key does not belong to sizes of shape {quoted(shape)}",
                            f"Leave it out; {quoted(shape)} takes {' and '.join(wanted)}")  # fmt: skip

    def to_scene(self) -> SizeShape:
        """The shape in SI."""
        if self.shape == "lognormal" and self.median_radius is not None and self.geometric_sd is not None:
            return Lognormal(float(self.median_radius), self.geometric_sd)
        if self.shape == "modified gamma" and self.mode_radius is not None:
            return ModifiedGamma(float(self.mode_radius), cast(float, self.alpha), cast(float, self.gamma))
        if self.file is not None:
            return cast(SizeShape, self.file.content)
        return SingleSize(float(cast(float, self.radius)))


def mode_rules(sizes: tuple[Any, ...]) -> Iterator[Fault]:
    """What must hold between the modes of one entry; places count from [[particles]]."""
    if len(sizes) > 1:
        silent = [number for number, mode in enumerate(sizes) if mode.weight is None]
        for number in silent:
            yield Fault(("sizes", number, "weight"), "the key is missing",
                        "Each of several modes needs its share of the particles by number")  # fmt: skip
        total = sum(mode.weight or 0.0 for mode in sizes)
        if not silent and abs(total - 1) > WEIGHTS_OFF_ONE:
            yield Fault(("sizes", len(sizes) - 1, "weight"), f"the weights of the modes add up to {total:.4g}",
                        "Give shares by number that add up to 1")  # fmt: skip
    elif sizes[0].weight not in (None, 1):
        yield Fault(("sizes", 0, "weight"), "there is only one mode and its weight is not 1",
                    "Leave weight out, or add the other modes as [[particles.sizes]]")  # fmt: skip
