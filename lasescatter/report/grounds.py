"""What the result rests on: inputs, limits, assumptions, cautions."""

from __future__ import annotations

from typing import Any

from lasescatter.assessment.outcome import Assessment
from lasescatter.report.front import NAME
from lasescatter.report.own_tables import own_tables
from lasescatter.report.quantities import duration, per_square_centimetre, small_length, trimmed, wavelength
from lasescatter.report.styles import heads, paragraph, ruled, words
from lasescatter.report.typography import markup
from lasescatter.scene import QUANTITY_UNITS, Limit


def input_section(assessment: Assessment) -> list[Any]:
    """Every value of the site file, as written and as read."""
    rows: list[list[Any]] = [heads("Key", "As written", "As read (SI)")]
    for line in assessment.scene.inputs:
        written = words(line.written, limit=None) if line.stated else paragraph("default: not in the file", "aside")
        rows.append([words(line.key, limit=None), written, words(line.read, limit=None)])
    return [
        paragraph(
            "The site file as the program read it; a value that the file leaves out is marked as a default. A "
            "character that the typeface lacks, that steers text instead of showing, or that runs from right to "
            "left is printed as its number, for example [U+6F22], here and in the drawings."
        ),
        ruled(rows, [68, 53, 53]) if len(rows) > 1 else paragraph("No inputs are on record."),
        *own_tables(assessment),
    ]


def limit_section(assessment: Assessment) -> list[Any]:
    """Limits with their sources and who entered them."""
    if not assessment.scene.limits:
        return [paragraph("No limit was entered, so nothing could be judged.")]
    rows: list[list[Any]] = [heads("No.", "Limit", "Value", "Covers", "Averaged over", "Source; entered by")]
    for number, limit in enumerate(assessment.scene.limits, start=1):
        rows.append(
            [
                str(number),
                paragraph(
                    f"{markup(limit.name, NAME)}<br/>{limit.tissue}, {limit.mechanism}; {limit.quantity}", "cell"
                ),
                words(_value(limit)),
                words(_cover(limit)),
                words(_averaging(limit)),
                paragraph(f"{markup(limit.source, 600)}<br/>entered by {markup(limit.entered_by, 200)}", "cell"),
            ]
        )
    return [
        paragraph(
            "Entered by hand for this site. Whoever reviews this report checks them against the edition in force."
        ),
        ruled(rows, [8, 40, 34, 32, 22, 38]),
    ]


def _together(text: str) -> str:
    """A number and its unit, not to be parted at a line's end."""
    return text.replace(" ", "\u00a0")


def _value(limit: Limit) -> str:
    unit = QUANTITY_UNITS[limit.quantity]
    text = _together(f"{trimmed(limit.value)} {unit}")
    other = per_square_centimetre(limit.value, unit)
    if other:
        text += f" ({_together(other)})"
    if limit.time_exponent:
        text += f" × (t / 1 s)^{trimmed(limit.time_exponent)}"
    return text


def _cover(limit: Limit) -> str:
    times = "pulses of" if limit.per == "pulse" else "exposures of"
    low, high = limit.durations
    first, last = limit.wavelengths
    return f"{wavelength(first)} to {wavelength(last)}; {times} {duration(low)} to {duration(high)}"


def _averaging(limit: Limit) -> str:
    told = [f"{_together(small_length(limit.aperture, None))} aperture"]
    if limit.acceptance is not None:
        told.append(f"{trimmed(limit.acceptance * 1e3)} mrad field")
    if limit.per == "pulse":
        told.append(f"train factor {limit.train or 'not stated'}")
    return "; ".join(told)


def assumption_section(assessment: Assessment) -> list[Any]:
    """Approximations in force, those that err low first."""
    order = {"low": 0, "either": 1, "high": 2}
    rows: list[list[Any]] = [heads("Estimate", "Assumption", "By how much", "Source")]
    for entry in sorted(assessment.assumptions, key=lambda entry: order[entry.direction]):
        rows.append(
            [
                paragraph(entry.direction, "cell bold" if entry.direction == "low" else "cell"),
                words(entry.name, limit=900),
                words(entry.size, limit=900),
                words(entry.source, limit=400),
            ]
        )
    if len(rows) == 1:
        return [paragraph("None is on record.")]
    return [
        paragraph(
            "“Low”: the true exposure can be larger than printed, which can hide a hazard; these come first. “High”: "
            "it errs on the careful side. “Either”: both can happen."
        ),
        ruled(rows, [15, 55, 66, 38]),
    ]


def caution_section(assessment: Assessment) -> list[Any]:
    """All cautions."""
    return [
        paragraph(markup(text, None), "caution", bullet=f"{number}.")
        for number, text in enumerate(assessment.cautions, start=1)
    ]
