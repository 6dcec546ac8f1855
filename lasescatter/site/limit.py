"""The table [[limit]]: exposure limits entered by hand."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Any, Literal, cast

from pydantic import ValidationInfo

from lasescatter.scene import Limit, Mechanism, Tissue
from lasescatter.scene import Quantity as QuantityName
from lasescatter.site.faults import Fault, Place
from lasescatter.site.fields import Marker, Measure, Number, Quantity, Text, Wavelength, Word, read_quantity
from lasescatter.site.ledger import Ledger
from lasescatter.site.table import Seen, Table, key

# The range is wide enough for femtosecond peaks and full-day doses; a mistyped unit mostly leaves it.
_VALUES = {
    "irradiance": Quantity("irradiance", "1e-4 W/m^2", "1e16 W/m^2", "1.0 mW/cm^2"),
    "radiant exposure": Quantity("radiant exposure", "1e-6 J/m^2", "1e9 J/m^2", "18 J/m^2"),
    "radiance": Quantity("radiance", "1e-2 W/(m^2 sr)", "1e18 W/(m^2 sr)", "100 W/(m^2 sr)"),
    "radiance dose": Quantity("radiance dose", "1e-2 J/(m^2 sr)", "1e15 J/(m^2 sr)", "1e6 J/(m^2 sr)"),
}

CoveredTime = Annotated[float, Quantity("time", "1 fs", "24 h", "10 s")]


class LimitValue(Marker):
    """A value of the quantity that the same table names."""

    def read(self, value: Any, info: ValidationInfo) -> Measure:
        quantity = info.data.get("quantity")
        if quantity is None and isinstance(value, str):
            # The quantity is missing or wrong, which is told on its own: no unit can be judged.
            return Measure(0.0, "irradiance")
        return read_quantity(value, _VALUES[quantity or "irradiance"])

    def schema(self) -> dict[str, Any]:
        return _VALUES["irradiance"].schema()


class LimitTable(Table):
    """One exposure limit, as read in the edition held on site."""

    name: Annotated[str, Text("a name", "eye, green, ten seconds")] = key(
        "Name of the limit, unique in the file", "eye, green, ten seconds"
    )
    tissue: Annotated[str, Word(("retina", "cornea and lens", "skin"))] = key(
        "retina, cornea and lens, or skin", "retina"
    )
    mechanism: Annotated[str, Word(("thermal", "photochemical"))] | None = key(
        "thermal or photochemical; thermal where it is left out", "thermal", default=None
    )
    quantity: Annotated[str, Word(tuple(_VALUES))] = key(
        "irradiance, radiant exposure, radiance or radiance dose", "irradiance"
    )
    value: Annotated[float, LimitValue()] = key("The limit, in a unit of its quantity", "1.0 mW/cm^2")
    time_exponent: Annotated[float, Number(-2, 2, "0.75")] | None = key(
        "The limit is value x (t / 1 s)^time_exponent; constant where it is left out", 0.75, default=None
    )
    wavelengths: tuple[Wavelength, ...] = key("Shortest and longest wavelength it covers", ["400 nm", "700 nm"])
    durations: tuple[CoveredTime, ...] = key(
        "Shortest and longest time it covers: of the pulse for per = \"pulse\", else of the exposure",
        ["10 s", "30000 s"],
    )  # fmt: skip
    aperture: Annotated[float, Quantity("length", "0.1 mm", "100 mm", "7 mm")] = key(
        "Diameter of the aperture that the exposure is averaged over", "7 mm"
    )
    per: Annotated[str, Word(("exposure", "pulse"))] | None = key(
        "exposure or pulse; exposure where it is left out", "pulse", default=None
    )
    train: Annotated[str, Word(("none", "N^-1/4"))] | None = key(
        "For a limit per pulse, how it changes with the number of pulses N: none or N^-1/4", "N^-1/4", default=None
    )
    source: Annotated[str, Text("where the limit was read", "edition held on site, clause and table")] = key(
        "Where the limit was read: edition, clause, table", "edition held on site, clause and table"
    )
    entered_by: Annotated[str, Text("the role of who entered it", "duty laser safety officer")] = key(
        "Role of who read the limit and entered it", "duty laser safety officer"
    )
    acceptance: Annotated[float, Quantity("angle", "0.1 mrad", "180 deg", "100 mrad")] | None = key(
        "Full angle of the averaging field, where the limit has one", "100 mrad", default=None
    )

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        for name, what, example in (
            ("wavelengths", "wavelength", '["400 nm", "700 nm"]'), ("durations", "time", '["10 s", "30000 s"]'),
        ):  # fmt: skip
            pair = seen.get(name)
            if pair is None:
                continue
            if len(pair) != 2:
                yield Fault((name,), f"{len(pair)} given where two are due",
                            f"Write the shortest and the longest {what} it covers, for example {example}")  # fmt: skip
            elif pair[0] > pair[1]:
                yield Fault((name,), "the first is larger than the second",
                            f"Write the shortest {what} first, for example {example}")  # fmt: skip
        if seen.stated("train") and seen.get("per") != "pulse" and (seen.good("per") or not seen.stated("per")):
            yield Fault(("train",), "train is given for a limit that is not per pulse",
                        'Leave train out, or write per = "pulse"')  # fmt: skip

    def to_scene(self, place: Place, ledger: Ledger) -> Limit:
        """The limit in SI, defaults filled in."""
        for name, text in (("mechanism", "thermal"), ("time_exponent", "0 (constant)"), ("per", "exposure")):
            if getattr(self, name) is None:
                ledger.took((*place, name), text)
        if self.per == "pulse" and self.train is None:
            ledger.took((*place, "train"), "not stated: more than one pulse is not established")
        return Limit(
            name=self.name, tissue=cast(Tissue, self.tissue), mechanism=cast(Mechanism, self.mechanism or "thermal"),
            quantity=cast(QuantityName, self.quantity), value=float(self.value),
            time_exponent=self.time_exponent or 0.0, wavelengths=_pair(self.wavelengths),
            durations=_pair(self.durations), aperture=float(self.aperture),
            per=cast(Literal["exposure", "pulse"], self.per or "exposure"),
            train=cast(Literal["none", "N^-1/4"] | None, self.train),
            acceptance=None if self.acceptance is None else float(self.acceptance), source=self.source,
            entered_by=self.entered_by, key=ledger.spell(place),
        )  # fmt: skip


def _pair(values: tuple[float, ...]) -> tuple[float, float]:
    low, high = values
    return float(low), float(high)
