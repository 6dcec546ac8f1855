"""The table [particles.load]: how much there is, by whichever reading an instrument or a person gives."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated, Any, Literal, cast

from pydantic import ValidationInfo

from lasescatter import units
from lasescatter.scene import LoadReading, ReadingKind
from lasescatter.site.faults import Fault, Place, quoted, refusal
from lasescatter.site.fields import Fraction, Marker, Quantity, Wavelength, Word
from lasescatter.site.ledger import Ledger
from lasescatter.site.table import Seen, Table, key

RANGES_AT = 550e-9
"""Wavelength that the two visual ranges stand for. [m]"""

# What each reading is called in messages, and a value of it.
READINGS: dict[str, str] = {
    "extinction": '"0.01 /m"',
    "mass": '"12 mg/m^3"',
    "number": '"1e5 /cm^3"',
    "meteorological_optical_range": '"120 m"',
    "visual_range": '"150 m"',
    "obscuration": '"5 %/ft"',
    "optical_density": '"0.1 /m"',
    "attenuation": '"3 dB/m"',
    "transmittance": "0.8",
}
OPTICAL = tuple(name for name in READINGS if name not in ("mass", "number"))
_RANGES = ("meteorological_optical_range", "visual_range")
_AT_DUE = ("obscuration", "optical_density", "attenuation", "transmittance")
_SMALLEST_SHARE = 1e-9
_DENSEST = 100.0
"""Largest extinction coefficient that a share lost or left over a length may mean. [1/m]"""
_INSTRUMENT = "say at which wavelength the instrument measures"


class LostShare(float):
    """A share of the light that is lost over a length."""

    over: float
    """[m]"""

    def __new__(cls, share: float, over: float) -> LostShare:
        lost = super().__new__(cls, share)
        lost.over = over
        return lost

    def __str__(self) -> str:
        return f"{float(self):.9g} over {self.over:.9g} m"


@dataclass(frozen=True)
class Obscuration(Marker):
    """Per cent of the light lost over one unit of length."""

    def read(self, value: Any, info: ValidationInfo) -> LostShare:
        example = 'for example "5 %/ft" or "10 %/m"'
        if not isinstance(value, str):
            raise refusal(f"{quoted(value)} has no unit, and an obscuration in per cent per length is due",
                          f"Write number and unit in quotes, {example}")  # fmt: skip
        try:
            share, over = units.parse_obscuration(value)
        except units.QuantityError as error:
            raise refusal(f"{quoted(value)} {error.wrong}", f"{error.mend}; {example}") from None
        if not _SMALLEST_SHARE <= share < 1:
            raise refusal(f"{quoted(value)} is outside what is accepted for an obscuration",
                          "Give a share above 0 % and below 100 % of the light, lost over one unit of length; for "
                          "another length give transmittance with over")  # fmt: skip
        if -math.log1p(-share) > _DENSEST * over:
            raise refusal(f"{quoted(value)} means an extinction above {_DENSEST:g} /m", "Check the unit of length")
        return LostShare(share, over)

    def schema(self) -> dict[str, Any]:
        return {"type": "string", "pattern": r"^\s*\+?([0-9]+\.?[0-9]*|\.[0-9]+)([eE][+-]?[0-9]+)?\s*%.+$"}


@dataclass(frozen=True)
class LeftShare(Fraction):
    """Share of the light that is left: above 0 and below 1."""

    def read(self, value: Any, info: ValidationInfo) -> float:
        share = super().read(value, info)
        if not _SMALLEST_SHARE <= share <= 1 - _SMALLEST_SHARE:
            raise refusal(f"{quoted(value)} is outside the range of this key",
                          "Give the share of the light that is left, above 0 and below 1: at 1 there would be no "
                          "load, and at 0 the reading says no more than that there is much")  # fmt: skip
        return share


class LoadTable(Table):
    """How much there is, by exactly one reading."""

    extinction: Annotated[float, Quantity("extinction", "1e-9 /m", "100 /m", "0.01 /m")] | None = key(
        "Extinction coefficient of these particles alone, at the wavelength `at`", "0.01 /m", default=None
    )
    mass: Annotated[float, Quantity("mass concentration", "1e-15 kg/m^3", "1 kg/m^3", "12 mg/m^3")] | None = key(
        "Mass of particles per volume of air; needs a density", "12 mg/m^3", default=None
    )
    number: Annotated[float, Quantity("number concentration", "1 /m^3", "1e18 /m^3", "1e5 /cm^3")] | None = key(
        "Number of particles per volume of air", "1e5 /cm^3", default=None
    )
    meteorological_optical_range: Annotated[float, Quantity("length", "3 cm", "3000 km", "120 m")] | None = key(
        "Distance over which 5 % of the light is left, at 550 nm; of these particles alone", "120 m", default=None
    )
    visual_range: Annotated[float, Quantity("length", "4 cm", "3000 km", "150 m")] | None = key(
        "Distance at which the contrast of a dark object falls to 2 %, at 550 nm", "150 m", default=None
    )
    obscuration: Annotated[LostShare, Obscuration()] | None = key(
        "Light lost over a length, in per cent per length; any unit of length", "5 %/ft", default=None
    )
    optical_density: Annotated[float, Quantity("optical density", "1e-9 /m", "40 /m", "0.1 /m")] | None = key(
        "Optical density per length (decadic logarithm)", "0.1 /m", default=None
    )
    attenuation: Annotated[float, Quantity("attenuation", "1e-9 dB/m", "400 dB/m", "3 dB/m")] | None = key(
        "Decibels per length", "3 dB/m", default=None
    )
    transmittance: Annotated[float, LeftShare("0.8", above_low=True)] | None = key(
        "Share of the light that is left over the length `over`: a number or per cent", 0.8, default=None
    )
    over: Annotated[float, Quantity("length", "1 mm", "100 km", "3 m")] | None = key(
        "Length of a transmittance reading", "3 m", default=None
    )
    as_: Annotated[str, Word(("dry", "ambient"))] | None = key(
        "mass: without (dry, default) or with (ambient) the water that particles take up in moist air", "dry",
        alias="as", default=None,
    )  # fmt: skip
    at: Wavelength | None = key(
        "Wavelength of an optical reading; of an extinction it may be left out where all beams share one wavelength",
        "532 nm",
        default=None,
    )

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        stated = [name for name in READINGS if seen.stated(name)]
        if not stated:
            yield Fault((), "the load has no reading",
                        f'Add exactly one of {", ".join(list(READINGS)[:-1])} or transmittance, for example '
                        'meteorological_optical_range = "120 m"')  # fmt: skip
            return
        for name in stated[1:]:
            yield Fault((name,), f"the load has a second reading beside {stated[0]}",
                        "Keep the one that was measured and leave the other out")  # fmt: skip
        reading = stated[0]
        if len(stated) > 1:
            return
        if seen.stated("at") and reading in ("mass", "number"):
            yield Fault(("at",), f"a load by {reading} is not tied to a wavelength", "Leave at out")
        if seen.stated("at") and reading in _RANGES:
            yield Fault(
                ("at",),
                f"a load by {reading} stands for what an eye sees, at {RANGES_AT * 1e9:g} nm",
                "Leave at out; a measurement at another wavelength is an extinction or a transmittance",
            )
        if not seen.stated("at") and reading in _AT_DUE:
            yield Fault(
                ("at",),
                "the key is missing",
                f'A load by {reading} needs it: {_INSTRUMENT}, for example at = "880 nm"; where nobody knows, the '
                "longest that is plausible: it mostly means the larger load",
            )
        if reading == "transmittance" and not seen.stated("over"):
            yield Fault(("over",), "the key is missing",
                        'A transmittance needs the length that the light went, for example over = "3 m"')  # fmt: skip
        if reading == "transmittance" and seen.good("transmittance", "over"):
            extinction = -math.log(seen.get("transmittance")) / seen.get("over")
            if extinction > _DENSEST:
                yield Fault(("over",), f"the reading means an extinction of {extinction:.3g} /m, above {_DENSEST:g} /m",
                            "Check length and unit: over is the way that the light went")  # fmt: skip
        if seen.stated("over") and reading != "transmittance":
            yield Fault(("over",), f"a load by {reading} is not tied to a length of its own",
                        "Leave over out; it belongs to transmittance")  # fmt: skip
        if seen.stated("as_") and reading != "mass":
            yield Fault(("as",), f"a load by {reading} is of the particles with the water they have",
                        "Leave as out; it belongs to mass")  # fmt: skip

    @property
    def kind(self) -> ReadingKind:
        """Which reading it is."""
        return cast(ReadingKind, next(name for name in READINGS if getattr(self, name) is not None))

    def to_scene(self, place: Place, ledger: Ledger, common_wavelength: float | None, grows: bool) -> LoadReading:
        """The reading in SI.

        `common_wavelength` is that of all beams, where they share one; `grows`: the particles take up water.
        """
        kind, at, over = self.kind, None if self.at is None else float(self.at), self.over
        value = getattr(self, kind)
        if kind == "extinction" and at is None:
            at = common_wavelength
            ledger.took((*place, "at"), f"{at:.9g} m (the one wavelength of all beams)")
        if kind in _RANGES:
            at = RANGES_AT
            ledger.took((*place, "at"), f"{at:.9g} m (what an eye sees)")
        if isinstance(value, LostShare):
            over = value.over
        basis: Literal["dry", "ambient"] | None = None
        if kind == "mass":
            basis = cast(Literal["dry", "ambient"], self.as_ or "dry")
            if grows and self.as_ is None:
                ledger.took((*place, "as"), "dry (the larger exposure)")
        return LoadReading(kind, float(value), at, None if over is None else float(over), basis)
