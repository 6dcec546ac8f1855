"""What instruments read of a load: names, values in units of the trade, and the same readings as rows of a table."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable
from dataclasses import dataclass

from lasescatter.report.quantities import digits, trimmed, wavelength
from lasescatter.scene import LoadReading

FOOT = 0.3048
"""[m]"""

_NAMES = {
    "mass": "mass of particles",
    "number": "number of particles",
    "meteorological_optical_range": "meteorological optical range (5 % contrast)",
    "visual_range": "visual range (2 % contrast)",
    "extinction": "extinction coefficient",
    "obscuration": "obscuration",
    "optical_density": "optical density",
    "attenuation": "attenuation",
    "transmittance": "transmittance",
}
_BASES = {"dry": ", without water taken up", "ambient": ", with water taken up", None: ""}
# From so much on, unit and its size. [kg m⁻³]
_MASSES = ((1.0, "kg/m³", 1.0), (1e-3, "g/m³", 1e-3), (1e-8, "mg/m³", 1e-6), (0.0, "µg/m³", 1e-9))
NEAR_ONE = 0.01
"""A transmittance nearer to 1 is told with more digits."""
MOST_DECIMALS = 8


@dataclass(frozen=True)
class ReadingRow:
    """One sort of reading, at each wavelength it was taken at."""

    name: str
    unit: str
    cells: dict[float | None, str]
    """By wavelength [m]; None: not tied to one of the lasers."""


def reading_name(reading: LoadReading) -> str:
    """For example "obscuration over 1 ft", "mass of particles, without water taken up"."""
    over = "" if reading.over is None else f" over {path_length(reading.over)}"
    return f"{_NAMES[reading.kind]}{_BASES[reading.basis]}{over}"


def path_length(value: float) -> str:
    """A length of air in metres; one foot as a foot."""
    return "1 ft" if abs(value - FOOT) < 1e-9 else f"{trimmed(value)} m"


def reading_value(reading: LoadReading) -> tuple[str, str]:
    """Number and unit for a table: one unit for each sort of reading, so that rows and loads can be compared."""
    if reading.kind == "mass":
        return digits(reading.value * 1e6), "mg/m³"
    lost = 1 - reading.value
    if reading.kind == "transmittance" and 0 < lost < NEAR_ONE:
        # Three digits of what is lost.
        return f"{reading.value:.{min(MOST_DECIMALS, 2 - math.floor(math.log10(lost)))}f}", ""
    return _value(reading, digits)


def _value(reading: LoadReading, told: Callable[[float], str]) -> tuple[str, str]:
    value = reading.value
    if reading.kind == "mass":
        unit, size = next((unit, size) for least, unit, size in _MASSES if value >= 0.9999999 * least)
        return told(value / size), unit
    if reading.kind == "number":
        return told(value * 1e-6), "1/cm³"
    if reading.kind in ("meteorological_optical_range", "visual_range"):
        return told(value), "m"
    if reading.kind == "obscuration":
        return told(100 * value), "%"
    if reading.kind == "transmittance":
        return told(value), ""
    return told(value), "dB/m" if reading.kind == "attenuation" else "1/m"


def reading_words(reading: LoadReading, grows: bool = True) -> str:
    """A reading in one phrase, as short as it was entered: "transmittance 0.8 over 3 m at 650 nm".

    Of particles that take up no water (`grows` false) a mass is simply their mass.
    """
    value, unit = _value(reading, trimmed)
    told = f"{_NAMES[reading.kind]} {value}{' ' + unit if unit else ''}{_BASES[reading.basis] if grows else ''}"
    told += "" if reading.over is None else f" over {path_length(reading.over)}"
    return told if reading.at is None else f"{told} at {wavelength(reading.at)}"


def reading_rows(readings: Iterable[LoadReading]) -> list[ReadingRow]:
    """Readings as rows, those of one sort at several wavelengths together, those not tied to a laser first.

    Mass with and without water is one row where both are the same. The two ranges are not tied to a laser: their
    wavelength, 550 nm, is in the name.
    """
    kept = _merged(list(dict.fromkeys(readings)))
    rows: dict[tuple[str, str], ReadingRow] = {}
    for reading in kept:
        tied = reading.kind not in ("meteorological_optical_range", "visual_range")
        at = reading.at if tied else None
        name = reading_name(reading)
        if reading.at is not None and not tied:
            name += f", {wavelength(reading.at)}"
        value, unit = reading_value(reading)
        rows.setdefault((name, unit), ReadingRow(name, unit, {})).cells[at] = value
    return sorted(rows.values(), key=lambda row: None not in row.cells)


def _merged(readings: list[LoadReading]) -> list[LoadReading]:
    masses = {reading.basis: reading for reading in readings if reading.kind == "mass"}
    dry, ambient = masses.get("dry"), masses.get("ambient")
    if dry is None or ambient is None or abs(ambient.value / dry.value - 1) > 1e-9:
        return readings
    return [
        LoadReading("mass", reading.value) if reading is dry else reading
        for reading in readings
        if reading is not ambient
    ]
