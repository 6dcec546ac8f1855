"""The tables [[particles]], [particles.sizes], [particles.load] and [particles.region]."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Any, Literal, cast

from pydantic import field_validator

from lasescatter.matter import Lognormal, Material, ModifiedGamma, SingleSize, SizeMode, SizeShape
from lasescatter.scene import Box, Everywhere, Load, LoadReading, Region
from lasescatter.site.contract import NOT_BUILT_REGIONS, NOT_BUILT_SIZES
from lasescatter.site.faults import Fault, Place, quoted, refusal
from lasescatter.site.fields import (
    Fraction,
    Number,
    PlacePoint,
    Quantity,
    RefractiveIndex,
    Text,
    Wavelength,
    Word,
    vector,
)
from lasescatter.site.ledger import Ledger
from lasescatter.site.table import Seen, Table, key

MOST_MODES = 20
WEIGHTS_OFF_ONE = 1e-3
"""How far the weights of several modes may add up from 1; they are then made to add up exactly."""

Radius = Annotated[float, Quantity("length", "1 nm", "100 um", "0.5 um")]

_KEYS_OF_SHAPE = {
    "lognormal": {"median_radius": '"0.5 um"', "geometric_sd": "1.6"},
    "modified gamma": {"mode_radius": '"4 um"', "alpha": "6", "gamma": "1"},
    "single": {"radius": '"0.25 um"'},
}


class SizesTable(Table):
    """One mode of the sizes."""

    shape: Annotated[str, Word(("lognormal", "modified gamma", "single"), NOT_BUILT_SIZES)] = key(
        "lognormal, modified gamma or single", "lognormal"
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
        return SingleSize(float(cast(float, self.radius)))


class LoadTable(Table):
    """How much there is, by exactly one reading."""

    extinction: Annotated[float, Quantity("extinction", "1e-9 /m", "100 /m", "0.01 /m")] | None = key(
        "Extinction coefficient of these particles alone, at the wavelength `at`", "0.01 /m", default=None
    )
    mass: Annotated[float, Quantity("mass concentration", "1e-15 kg/m^3", "1 kg/m^3", "12 mg/m^3")] | None = key(
        "Mass of particles per volume of air; needs density", "12 mg/m^3", default=None
    )
    number: Annotated[float, Quantity("number concentration", "1 /m^3", "1e18 /m^3", "1e5 /cm^3")] | None = key(
        "Number of particles per volume of air", "1e5 /cm^3", default=None
    )
    at: Wavelength | None = key(
        "Wavelength of an extinction reading; may be left out where all beams share one wavelength", "532 nm",
        default=None,
    )  # fmt: skip

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        stated = [name for name in ("extinction", "mass", "number") if seen.stated(name)]
        if not stated:
            mend = 'Add exactly one of extinction, mass or number, for example extinction = "0.01 /m"'
            yield Fault((), "the load has no reading", mend)
        for name in stated[1:]:
            yield Fault((name,), f"the load has a second reading beside {stated[0]}",
                        "Keep the one that was measured and leave the other out")  # fmt: skip
        if seen.stated("at") and stated and "extinction" not in stated:
            yield Fault(("at",), f"a load by {stated[0]} is not tied to a wavelength", "Leave at out")

    def reading(self) -> tuple[Literal["extinction", "mass", "number"], float]:
        """Which reading it is, and its value in SI."""
        if self.extinction is not None:
            return "extinction", float(self.extinction)
        if self.mass is not None:
            return "mass", float(self.mass)
        return "number", float(cast(float, self.number))


class RegionTable(Table):
    """Where the particles are."""

    shape: Annotated[str, Word(("everywhere", "box"), NOT_BUILT_REGIONS)] = key("everywhere or box", "box")
    from_: PlacePoint | None = key("box: its lowest corner", [1, -2, 0], alias="from", default=None)
    to: PlacePoint | None = key("box: its highest corner", [8, 2, 3], default=None)

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        shape = seen.get("shape")
        for name, example in (("from_", "[1, -2, 0]"), ("to", "[8, 2, 3]")):
            spelling = name.removesuffix("_")
            if shape == "box" and not seen.stated(name):
                yield Fault((spelling,), "the key is missing", f"A box needs it, for example {spelling} = {example}")
            if shape == "everywhere" and seen.stated(name):
                yield Fault((spelling,), 'the key does not belong to shape "everywhere"',
                            'Leave it out, or write shape = "box"')  # fmt: skip
        if shape == "box" and seen.good("from_", "to"):
            corners = list(zip("xyz", seen.get("from_"), seen.get("to"), strict=True))
            swapped = " and ".join(axis for axis, low, high in corners if low > high)
            flat = " and ".join(axis for axis, low, high in corners if low == high)
            if swapped:
                yield Fault(("to",), f"the corners are the wrong way round along {swapped}: from is above to",
                            f"Swap the two numbers of {swapped}: from takes the lower, to the higher")  # fmt: skip
            if flat:
                yield Fault(("to",), f"the box has no size along {flat}: from and to are the same there",
                            "Each number of to must be larger than the same number of from")  # fmt: skip

    def to_scene(self) -> Region:
        """The region in metres."""
        if self.from_ is None or self.to is None:
            return Everywhere()
        return Box(vector(self.from_), vector(self.to))


class ParticlesTable(Table):
    """One sort of particles in one region."""

    name: Annotated[str, Text("a name", "test haze")] = key("Name of the particles, unique in the file", "test haze")
    sizes: tuple[SizesTable, ...] = key(
        "How large the particles are: one table, or [[particles.sizes]] with weight for several modes",
        {"shape": "lognormal", "median_radius": "0.5 um", "geometric_sd": 1.6},
    )
    index: Annotated[complex, RefractiveIndex()] = key(
        "Refractive index n + ki at the laser's wavelength; absorption is positive", "1.43 + 1e-6i"
    )
    density: Annotated[float, Quantity("density", "10 kg/m^3", "30000 kg/m^3", "1.06 g/cm^3")] | None = key(
        "Density of the particles, for a load by mass", "1.06 g/cm^3", default=None
    )
    load: LoadTable = key("How much there is", {"extinction": "0.01 /m", "at": "532 nm"})
    region: RegionTable = key("Where the particles are", {"shape": "box", "from": [1, -2, 0], "to": [8, 2, 3]})
    steady_by: Annotated[str, Text("the role of who vouches for a steady load", "haze operator")] | None = key(
        "Who vouches that the load neither thins nor clears; leave it out where nobody does",
        "haze operator",
        default=None,
    )

    @field_validator("sizes", mode="before")
    @classmethod
    def _one_or_several(cls, value: Any) -> Any:
        if isinstance(value, list) and len(value) > MOST_MODES:
            raise refusal(f"there are {len(value)} modes of sizes", f"Give at most {MOST_MODES}")
        return [value] if isinstance(value, dict) else value

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        load, sizes = seen.get("load"), seen.get("sizes")
        if load is not None and load.mass is not None and not seen.stated("density"):
            yield Fault(("density",), "the key is missing",
                        'A load by mass needs it, for example density = "1.06 g/cm^3"')  # fmt: skip
        if sizes is not None and not sizes:
            yield Fault(("sizes",), "there are no sizes", 'Give at least one mode, for example shape = "lognormal"')
        elif sizes is not None and len(sizes) > 1:
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
                        "Leave weight out, or add the other modes as [[particles.sizes]]")  # fmt: skip

    def to_scene(self, place: Place, ledger: Ledger, common_wavelength: float | None) -> Load:
        """The load in SI; `common_wavelength` is that of all beams, where they share one."""
        kind, value = self.load.reading()
        at = None if self.load.at is None else float(self.load.at)
        if kind == "extinction" and at is None:
            at = common_wavelength
            ledger.took((*place, "load", "at"), f"{at:.9g} m (the one wavelength of all beams)")
        if self.steady_by is None:
            ledger.took((*place, "steady_by"), "nobody: the load may thin and clear")
        total = sum(mode.weight or 1.0 for mode in self.sizes)
        return Load(
            name=self.name, modes=tuple(SizeMode(mode.to_scene(), (mode.weight or 1.0) / total) for mode in self.sizes),
            material=Material(self.index, None if self.density is None else float(self.density)),
            reading=LoadReading(kind, value, at, basis="dry" if kind == "mass" else None), region=self.region.to_scene(), steady_by=self.steady_by,
            key=ledger.spell(place),
        )  # fmt: skip
