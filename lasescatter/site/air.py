"""The table [air]."""

from __future__ import annotations

from typing import Annotated

from lasescatter.scene import Air
from lasescatter.site.faults import Place
from lasescatter.site.fields import Quantity
from lasescatter.site.ledger import Ledger
from lasescatter.site.table import Table, key


class AirTable(Table):
    """Uniform air; left out, it is 20 degC, 1013.25 hPa and dry."""

    temperature: Annotated[float, Quantity("temperature", "-70 degC", "65 degC", "20 degC")] | None = key(
        "Air temperature; 20 degC where it is left out", "20 degC", default=None
    )
    pressure: Annotated[float, Quantity("pressure", "1 kPa", "120 kPa", "1013.25 hPa")] | None = key(
        "Air pressure at the site; 1013.25 hPa where it is left out", "1013.25 hPa", default=None
    )
    relative_humidity: Annotated[float, Quantity("fraction", "0 %", "100 %", "45 %")] | None = key(
        "Relative humidity, for the record; dry where it is left out", "45 %", default=None
    )

    def to_scene(self, place: Place, ledger: Ledger) -> Air:
        """Air with its defaults filled in."""
        default = Air()
        temperature, pressure, humidity = self.temperature, self.pressure, self.relative_humidity
        if temperature is None:
            ledger.took((*place, "temperature"), f"{default.temperature:.9g} K")
            temperature = default.temperature
        if pressure is None:
            ledger.took((*place, "pressure"), f"{default.pressure:.9g} Pa")
            pressure = default.pressure
        if humidity is None:
            ledger.took((*place, "relative_humidity"), f"{default.relative_humidity:.9g}")
            humidity = default.relative_humidity
        return Air(float(temperature), float(pressure), float(humidity))
