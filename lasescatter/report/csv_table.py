"""The comparisons as a table for spreadsheets and scripts: one row each, numbers in full, units in the heads."""

from __future__ import annotations

import csv
import math
import unicodedata
from pathlib import Path

from lasescatter.assessment.outcome import Assessment, LineExposure, ObserverOutcome
from lasescatter.limits.compare import Comparison

OBSERVER_HEADS = (
    "observer_number", "observer", "x_m", "y_m", "z_m", "observer_verdict", "observer_ratio", "reasons", "nearest_m",
    "optical_thickness", "scattered_stated_w_m2", "scattered_error_w_m2", "scattered_compared_w_m2",
    "stop_stated_w_m2", "stop_compared_w_m2", "direct_w_m2",
)  # fmt: skip
COMPARISON_HEADS = (
    "limit", "beam", "line", "wavelength_m", "hazard", "tissue", "mechanism", "quantity", "unit", "duration_s",
    "counted_s", "time_s", "exposure_in_unit", "scattered_in_unit", "higher_orders_allowance_in_unit",
    "stop_in_unit", "direct_in_unit", "limit_in_unit", "ratio",
    "ratio_low", "ratio_high", "allowances_in_unit", "optical_density", "pulses", "verdict", "note",
)  # fmt: skip
HEADS = OBSERVER_HEADS + COMPARISON_HEADS

# Names of the origins in the order of their columns.
ORIGINS = ("scattered", "allowance for higher orders", "stop", "direct")

# A spreadsheet takes a cell that starts so for a formula and would run it.
_FORMULA_STARTS = ("=", "+", "-", "@")
_BREAKS = "\t\n\r"


def write_csv(assessment: Assessment, path: Path) -> None:
    """Write the table (UTF-8, comma, CRLF).

    An observer without any comparison has one row with those columns empty. A text that a spreadsheet would
    take for a formula is written with an apostrophe before it; control characters are left out. `allowances_in_unit`
    names what the upper bound adds: "cause: amount; cause: amount".
    """
    with path.open("w", encoding="utf-8", newline="", errors="backslashreplace") as target:
        writer = csv.writer(target)
        writer.writerow(HEADS)
        for number, observer in enumerate(assessment.observers, start=1):
            shared = _observer_cells(number, observer)
            waves = {(line.beam, line.line): line for line in observer.lines}
            for entry in observer.comparisons:
                writer.writerow([*shared, *_comparison_cells(entry, waves.get((entry.beam, entry.line)))])
            if not observer.comparisons:
                writer.writerow([*shared, *("" for _ in COMPARISON_HEADS)])


def text_cell(text: str) -> str:
    """A text that no spreadsheet runs, without control characters."""
    text = "".join(" " if c in _BREAKS else c for c in text if c in _BREAKS or unicodedata.category(c) != "Cc")
    return f"'{text}" if text.lstrip().startswith(_FORMULA_STARTS) else text


def _number(value: float | None) -> str:
    return "" if value is None or not math.isfinite(value) else repr(float(value))


def _observer_cells(number: int, observer: ObserverOutcome) -> list[str]:
    return [
        str(number),
        text_cell(observer.name),
        *(_number(value) for value in observer.position),
        observer.verdict,
        _number(observer.ratio),
        text_cell("; ".join(observer.reasons)),
        _number(observer.nearest),
        _number(observer.optical_thickness),
        *(
            _number(observer.total(name))
            for name in (
                "scattered", "scattered_error", "scattered_compared", "diffuse", "diffuse_compared", "direct",
            )
        ),
    ]  # fmt: skip


def _comparison_cells(entry: Comparison, line: LineExposure | None) -> list[str]:
    origins = dict(entry.by_origin)
    wavelength = line.wavelength if line else None
    by_origin = [_number(origins.get(word)) for word in ORIGINS]
    return [
        text_cell(entry.limit), text_cell(entry.beam), text_cell(entry.line), _number(wavelength), entry.hazard,
        entry.tissue, entry.mechanism, entry.quantity, entry.unit, _number(entry.duration),
        _number(entry.counted), _number(entry.time),
        _number(entry.exposure), *by_origin,
        _number(entry.limit_value), _number(entry.ratio), _number(entry.ratio_low), _number(entry.ratio_high),
        "; ".join(f"{cause}: {_number(amount)}" for cause, amount in entry.allowances),
        _number(entry.optical_density), "" if entry.pulses is None else str(entry.pulses), entry.verdict,
        text_cell(entry.note),
    ]  # fmt: skip
