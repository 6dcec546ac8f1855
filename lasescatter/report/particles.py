"""Light on particles: the optics of each component and its tables of F/(4π) and B."""

from __future__ import annotations

import bisect
import math
from typing import Any

from lasescatter.assessment.outcome import Assessment, ComponentSummary
from lasescatter.report.front import NAME
from lasescatter.report.left_out import lacking
from lasescatter.report.loads import air_words, load_sections
from lasescatter.report.page_frame import FigurePlace
from lasescatter.report.quantities import digits, small_length, wavelength
from lasescatter.report.styles import MM, heads, paragraph, ruled, words
from lasescatter.report.typography import markup

WANTED_DEGREES = (
    0, 1, 2, 3, 4, 5, 6, 8, 10, 12, 15, 18, 21, 25, 30, 35, 40, 45, 50, 55, 60, 65, 70, 75, 80, 85, 90,
    95, 100, 105, 110, 115, 120, 125, 130, 135, 140, 145, 150, 155, 160, 165, 170, 175, 180,
)  # fmt: skip


def component_section(assessment: Assessment, figure_size: tuple[float, float] | None) -> list[Any]:
    """What each component does to the light, how well that is known, and the curves."""
    if not assessment.components:
        return [
            _air(assessment),
            *_gaps(assessment),
            paragraph(f"<b>No scattered light is computed</b>{_of_whom(assessment)}: no values and no curves."),
            *load_sections(assessment),
        ]
    rows: list[list[Any]] = [
        heads(
            "Component", "Wavelength", "Extinction [1/m]", "Scattering [1/m]", "Albedo", "Asymmetry", "Number [1/m³]",
            "Mass [kg/m³]", "Mass ext. [m²/kg]", "Effective radius", numeric_from=1,
        )
    ]  # fmt: skip
    for entry in assessment.components:
        rows.append(
            [
                words(entry.name, limit=NAME), wavelength(entry.wavelength), digits(entry.extinction, 5),
                digits(entry.scattering, 5), digits(entry.albedo, 5), digits(entry.asymmetry, 4),
                digits(entry.number, 4), digits(entry.mass, 4), digits(entry.mass_extinction, 4),
                "–" if entry.effective_radius is None else small_length(entry.effective_radius),
            ]
        )  # fmt: skip
    quality: list[list[Any]] = [
        heads("Component", "Wavelength", "Radii averaged over", "Error of F11 at its worst angle",
              "Error of extinction", numeric_from=1)
    ]  # fmt: skip
    quality += [
        [
            words(entry.name, limit=NAME), wavelength(entry.wavelength),
            {None: "closed form", 0: "no sizes"}.get(entry.size_nodes, str(entry.size_nodes)),
            _relative(entry.error_f11), "–" if entry.size_nodes == 0 else _relative(entry.error_extinction),
        ]
        for entry in assessment.components
    ]  # fmt: skip
    return [
        _air(assessment),
        paragraph(
            "Values where the component is; number, mass and radius as the particles float, water included. Errors "
            "are the program's own estimates, relative to the value."
        ),
        *_gaps(assessment),
        ruled(rows, [26, 19, 18, 18, 15, 18, 15, 15, 15, 15], numeric=tuple(range(1, 10))),
        ruled(quality, [60, 22, 27, 39, 26], numeric=(1, 2, 3, 4)),
        paragraph(
            "The curve, and the tables at the end of this section: F11/(4π) and F12/(4π) in 1/sr at the scattering "
            "angle theta, and their integrals over the angle from 0 to theta: B11, B12, and |B12| of the absolute "
            "value of F12, which serves where the axis of polarization is unknown. A component without polarization, "
            "or whose F12 is not known, has no line in the lower panel."
        ),
        *([FigurePlace("phase", figure_size[0] * MM, figure_size[1] * MM)] if figure_size else []),
        *load_sections(assessment),
    ]


def _air(assessment: Assessment) -> Any:
    return paragraph(f"<b>Air</b>: {air_words(assessment.scene.air)}.")


def _gaps(assessment: Assessment) -> list[Any]:
    if not assessment.gaps:
        return []
    return [
        paragraph("<b>Not complete</b>, because no data reach so far; nothing is below its limit then:"),
        *(paragraph(markup(gap, 600), "small item", bullet="•") for gap in assessment.gaps),
    ]


def _of_whom(assessment: Assessment) -> str:
    missing = lacking(assessment)
    return f", neither stated nor compared, of {markup(missing)}" if missing else ""


def _relative(value: float | None) -> str:
    return "closed form" if value is None else digits(value, 2)


def printed_rows(entry: ComponentSummary) -> list[int]:
    """Which of the component's angles are printed: those nearest to a fixed list, each once."""
    found = set()
    for wanted in WANTED_DEGREES:
        angle = math.radians(wanted)
        right = min(bisect.bisect_left(entry.angles, angle), len(entry.angles) - 1)
        left = max(0, right - 1)
        nearer = left if abs(entry.angles[left] - angle) < abs(entry.angles[right] - angle) else right
        found.add(nearer)
    return sorted(found)


def running_tables(assessment: Assessment) -> list[Any]:
    """F/(4π) and B(theta) of every component, for the hand check."""
    story: list[Any] = []
    for entry in assessment.components:
        rows: list[list[Any]] = [heads("theta [deg]", "F11/(4π)", "F12/(4π)", "B11", "B12", "|B12|", numeric_from=0)]
        rows += [
            [
                digits(math.degrees(entry.angles[i]), 4), digits(entry.phase[i], 5), digits(entry.phase_12[i], 5),
                digits(entry.running[i], 5), digits(entry.running_12[i], 5), digits(entry.running_12_abs[i], 5),
            ]
            for i in printed_rows(entry)
        ]  # fmt: skip
        story.append(paragraph(f"{markup(entry.name, NAME)}, {wavelength(entry.wavelength)}", "subsection"))
        story.append(ruled(rows, [24, 30, 30, 30, 30, 30], numeric=(0, 1, 2, 3, 4, 5), dense=True))
    return story
