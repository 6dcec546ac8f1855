"""The table [air]."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated

from lasescatter.scene import Air
from lasescatter.site.faults import Fault, Place
from lasescatter.site.fields import Quantity, Word
from lasescatter.site.ledger import Ledger
from lasescatter.site.table import Seen, Table, key

STANDARD = "standard atmosphere"


class AirTable(Table):
    """Uniform air, 20 degC, 1013.25 hPa and dry where it is left out; or the standard atmosphere over the site."""

    model: Annotated[str, Word((STANDARD,))] | None = key(
        "standard atmosphere: air thins with height as in the U.S. Standard Atmosphere 1976, which also gives "
        "temperature and pressure at z = 0. Uniform air where it is left out", STANDARD, default=None,
    )  # fmt: skip
    ground_altitude: Annotated[float, Quantity("length", "-400 m", "9000 m", "120 m")] | None = key(
        "Altitude of z = 0 above sea level, for the standard atmosphere", "120 m", default=None
    )

    temperature: Annotated[float, Quantity("temperature", "-70 degC", "65 degC", "20 degC")] | None = key(
        "Air temperature; 20 degC where it is left out", "20 degC", default=None
    )
    pressure: Annotated[float, Quantity("pressure", "1 kPa", "120 kPa", "1013.25 hPa")] | None = key(
        "Air pressure at the site; 1013.25 hPa where it is left out", "1013.25 hPa", default=None
    )
    relative_humidity: Annotated[float, Quantity("fraction", "0 %", "100 %", "45 %")] | None = key(
        "Relative humidity at z = 0; dry where it is left out", "45 %", default=None
    )

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        if not seen.stated("model"):
            if seen.stated("ground_altitude"):
                yield Fault(("ground_altitude",), "only the standard atmosphere uses it, and no model is given",
                            f'Add model = "{STANDARD}", or leave ground_altitude out and state the pressure at '
                            "the site itself")  # fmt: skip
            return
        if not seen.stated("ground_altitude"):
            yield Fault(("ground_altitude",), "the key is missing, and the standard atmosphere needs it",
                        'Add the altitude of z = 0 above sea level, for example ground_altitude = "120 m"')  # fmt: skip
        for name in ("temperature", "pressure"):
            if seen.stated(name):
                yield Fault((name,), f"{name} is given, and the standard atmosphere has its own",
                            f"Leave {name} out: it follows from ground_altitude; or leave model and ground_altitude "
                            "out for uniform air")  # fmt: skip

    def to_scene(self, place: Place, ledger: Ledger) -> Air:
        """Air with its defaults filled in."""
        humidity = self.relative_humidity
        if humidity is None:
            humidity = Air().relative_humidity
            ledger.took((*place, "relative_humidity"), f"{humidity:.9g}")
        if self.model is not None and self.ground_altitude is not None:
            return _standard_air(float(self.ground_altitude), float(humidity), place, ledger)
        return Air(*_uniform_air(self.temperature, self.pressure, place, ledger), float(humidity))


def _uniform_air(
    temperature: float | None, pressure: float | None, place: Place, ledger: Ledger
) -> tuple[float, float]:
    default = Air()
    if temperature is None:
        temperature = default.temperature
        ledger.took((*place, "temperature"), f"{temperature:.9g} K")
    if pressure is None:
        pressure = default.pressure
        ledger.took((*place, "pressure"), f"{pressure:.9g} Pa")
    return float(temperature), float(pressure)


def _standard_air(altitude: float, humidity: float, place: Place, ledger: Ledger) -> Air:
    from lasescatter.standard_atmosphere import at_altitude

    temperature, pressure, _ = (float(value) for value in at_altitude(altitude))
    ledger.took((*place, "temperature"), f"{temperature:.6f} K at z = 0, from the model")
    ledger.took((*place, "pressure"), f"{pressure:.3f} Pa at z = 0, from the model")
    return Air(temperature, pressure, humidity, "standard atmosphere", altitude)
