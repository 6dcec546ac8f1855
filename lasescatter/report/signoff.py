"""The reviewer's tick list and the sign-off block, to be filled in by hand."""

from __future__ import annotations

from typing import Any

from lasescatter.assessment.outcome import Assessment
from lasescatter.report.styles import RULE, heads, paragraph, ruled, words
from lasescatter.report.typography import markup

CHECKS = (
    "Beams: wavelength, power or energy, diameter, divergence and polarization agree with data sheet or measurement.",
    "Every wavelength that leaves each laser is entered, or shown to be negligible.",
    "Geometry: path, mirrors, stops and observers agree with the site; nobody can be nearer to a beam than stated.",
    "Each stop: finish and reflectance are those of the real surface, which stays matt, dry and in place.",
    "The reach of each observer: the head cannot get farther than stated from its place.",
    "The load (haze, smoke, dust): how it was measured, when, and whether puffs above it were allowed for.",
    "Particle sizes and refractive index: their origin is known and fits this load.",
    "Limits: value, unit, wavelengths, times and aperture were read in the edition in force, by the person named.",
    "Exposure times, daily sums and kind of viewing fit the work done at each place.",
    "Hazards left out by the user's decision: each reason holds.",
    "Somebody in the beam itself: controls exist and do not rest on this report.",
    "Mirror-like surfaces, optical aids, a removed stop and a turned mirror were considered.",
    "Each assumption that errs low is acceptable here.",
    "The hand check was redone for the places noted beside.",
    "An irradiance was measured at one place at least, and compared.",
    "Cautions read; local codes and notices to authorities considered.",
)


def _lattice(room: float) -> list[tuple[Any, ...]]:
    """Cells to write into by hand."""
    from reportlab.lib.colors import HexColor

    return [("INNERGRID", (0, 1), (-1, -1), 0.25, HexColor(RULE)), ("BOTTOMPADDING", (0, 1), (-1, -1), room)]


def tick_list() -> list[Any]:
    """What a reviewer goes through, with room for remarks."""
    rows: list[list[Any]] = [heads("", "To be checked", "Done", "Remarks")]
    rows += [
        [str(number), paragraph(text, "cell"), paragraph("☐", "body"), ""]
        for number, text in enumerate(CHECKS, start=1)
    ]
    redone: list[list[Any]] = [
        heads("Hand check no.", "Redone: E_hand [W/m²]", "Printed: E_program [W/m²]", "Difference [%]")
    ]
    redone += [["", "", "", ""] for _ in range(3)]
    return [
        paragraph("For the reviewer, who is not the author. A box is ticked only for what was checked in person."),
        ruled(rows, [7, 95, 12, 60], extra=_lattice(3)),
        ruled(redone, [34, 48, 48, 44], extra=_lattice(10)),
    ]


def signatures(assessment: Assessment) -> list[Any]:
    """Who answers for the report."""
    from reportlab.platypus import KeepTogether

    rows: list[list[Any]] = [heads("", "Role", "Name", "Date", "Signature")]
    rows += [
        [paragraph("Prepared by", "cell bold"), words(assessment.scene.prepared_by, limit=200), "", "", ""],
        [paragraph("Reviewed by", "cell bold"), "", "", "", ""],
        [paragraph("Laser safety officer", "cell bold"), "", "", "", ""],
    ]
    table = ruled(rows, [32, 42, 40, 22, 38], extra=_lattice(22))
    reference = markup(assessment.scene.reference, 200)
    text = paragraph(
        f"Signatures hold for reference {reference}, record {assessment.provenance.digest[:12] or 'not made'}, and for "
        "no other version."
    )
    return [KeepTogether([text, table])]
