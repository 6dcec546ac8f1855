"""What the assessment found: exposures in the beam and beside it."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from lasescatter.assessment.outcome import Assessment, BeamSpot, InTheBeam, LineExposure, ObserverOutcome
from lasescatter.report.csv_table import ORIGINS
from lasescatter.report.front import NAME, leaves_site, multiple
from lasescatter.report.left_out import NOT_COMPUTED, all_left_out, lacking, left_out_at
from lasescatter.report.naming import named_beam, named_line
from lasescatter.report.quantities import digits, duration, length, point, signed_interval, small_length, trimmed
from lasescatter.report.styles import heads, number_cell, paragraph, ruled, words
from lasescatter.report.typography import both_ends, markup, printable
from lasescatter.scene import Scene

FORMULAS = (
    "P: power, or the energy of the pulse or of the time judged; a: radius of the limit's aperture; w: radius of the "
    "beam there, w² = (d² + (divergence × path)²)/4 with d the diameter at the start; E_L: the limit.",
    "<b>Direct</b>: mean over the aperture with its centre on the axis; gaussian P (1 − exp(−2a²/w²))/(π a²), top-hat "
    "P over the larger of π a² and π w²; times the hot-spot factor of a pulsed line.",
    "<b>Hazard distance</b>: where that mean falls to E_L if nothing stopped the beam, √((2w_L)² − d²)/divergence; "
    "with M = P/(π a² E_L), gaussian w_L = a √(−2/ln(1 − 1/M)), top-hat w_L = a √M.",
    "<b>White card</b>: its light falls to E_L at √(P/(π E_L)); at 0.1 m it is P/(π (0.1 m)² E_L) of the limit.",
)
_EDGE_WORDS = {"gaussian": "points of the irradiance", "top-hat": "of the beam"}
_LEAST_BLOCK = 110
"""Left on a page, a block of head, facts and table begins there. [pt]"""


def observer_head(number: int, observer: ObserverOutcome, tail: str = "") -> Any:
    """The heading of one observer's block."""
    return paragraph(f"Observer {number}: {markup(both_ends(printable(observer.name), NAME))}{tail}", "subsection")


# ---------------------------------------------------------------- in the beam


def beam_section(assessment: Assessment) -> list[Any]:
    """Every place in the beam, line by line."""
    story: list[Any] = [
        paragraph(
            "Exposure of an eye, or of a white card (reflectance 1, seen square), held in the beam at each place, each "
            "against the limit with the greatest multiple there. "
            "The load's extinction is not credited, losses at mirrors are."
        ),
        *(paragraph(text, "note") for text in FORMULAS),
    ]
    for line in assessment.in_the_beam:
        story += _spots(line, assessment)
    return story


def _spots(line: InTheBeam, assessment: Assessment) -> list[Any]:
    from reportlab.platypus import CondPageBreak

    unit = assessment.scene.length_unit
    criterion, told = _criterion(line, assessment.scene)
    if line.limit is not None:
        told.append(f"judged by “{markup(line.limit, NAME)}”, {digits(line.limit_value, 4)} {line.unit}")
        told.append(f"for {duration(line.duration)}")
    if line.hazard_distance is not None:
        by = f" (by “{markup(line.hazard_limit, NAME)}”)" if line.hazard_limit not in (None, line.limit) else ""
        told.append(
            f"below the limit everywhere{by}"
            if line.hazard_distance == 0
            else f"hazard distance {length(line.hazard_distance, unit)} along the beam if nothing stopped it{by}"
        )
    if line.reason:
        told.append(markup(line.reason, 400))
    if leaves_site(assessment, line):
        told.append("<b>the beam leaves the site: nothing ends it</b>")
    rows: list[list[Any]] = [
        heads(
            "Place", "Point", "Along the path", f"Diameter{criterion}", f"Direct [{line.unit or 'no limit'}]",
            "of the limit", "White card: distance", "at 0.1 m, of the limit", numeric_from=2,
        )
    ]  # fmt: skip
    for spot in line.spots:
        rows.append(
            [
                paragraph(_place(spot, line), "cell"),
                words(point(spot.position, unit)),
                number_cell(length(spot.path_length, unit)),
                small_length(spot.diameter),
                digits(spot.direct),
                multiple(spot.multiple),
                number_cell(length(spot.diffuse_distance, unit)),
                digits(spot.diffuse_multiple),
            ]
        )
    return [
        CondPageBreak(_LEAST_BLOCK),
        paragraph(markup(named_line(assessment.scene, line.beam, line.line)), "subsection"),
        paragraph("; ".join(told) + ".", "note"),
        ruled(rows, [37, 31, 20, 18, 19, 17, 17, 15], numeric=(2, 3, 4, 5, 6, 7)),
    ]


def _place(spot: BeamSpot, line: InTheBeam) -> str:
    told = markup(spot.place, NAME)
    return told if spot.limit in (None, line.limit) else f"{told}<br/>multiple of “{markup(spot.limit or '', NAME)}”"


def _criterion(line: InTheBeam, scene: Scene) -> tuple[str, list[str]]:
    """By what the diameter is measured: for a head, and in words with the beam's start."""
    beam = next((beam for beam in scene.beams if beam.name == line.beam), None)
    if beam is None:
        return "", []
    where = "1/e²" if beam.profile == "gaussian" else "edge"
    told: list[str] = [beam.profile]
    for entry in beam.lines:
        if entry.name == line.line:
            told.append(
                f"diameter {small_length(entry.diameter, None)} at the start and divergence "
                f"{trimmed(entry.divergence * 1e3)} mrad (full angle), both to the {where} {_EDGE_WORDS[beam.profile]}"
            )
    return f" ({where})", told


# ---------------------------------------------------------------- exposures


def exposure_section(assessment: Assessment) -> list[Any]:
    """What arrives at each observer, by beam line."""
    story: list[Any] = [
        paragraph(
            "Irradiances in W/m², means over time. <b>Stated</b>: with the load exactly as entered, first order, "
            "the whole beam in view, on a surface that faces each element (E2); beside it the same with F12 left "
            "out, as if the light were unpolarized. <b>Compared</b>: the greatest over every part of the load "
            "that may be present, since a load that thins may let more light through; no loss in the load is "
            "credited to stop and direct light. ± is the numerical error alone; “±&nbsp;&lt;” stands where it "
            "is below the last digit printed. 1&nbsp;W/m²&nbsp;= 0.1&nbsp;mW/cm²."
        ),
        paragraph(
            "<b>tau</b> is the largest extinction optical thickness that the scattered light of an observer meets: "
            "along the beam, along any line of sight, and across the load by its shortest dimension or by twice the "
            "distance to the farthest part of the beam, whichever is shorter. Light that is scattered more than once "
            "is not computed. Up to tau = 0.1 nothing is added for it; above, the compared scattered light enters the "
            "comparisons times 1 + 1.5 tau, the “allowance for higher orders”; above 0.5 nothing is called below its "
            "limit."
        ),
    ]
    for number, observer in enumerate(assessment.observers, start=1):
        story += _exposures(number, observer, assessment)
    return story


def _exposures(number: int, observer: ObserverOutcome, assessment: Assessment) -> list[Any]:
    from reportlab.platypus import KeepTogether

    scene, unit = assessment.scene, assessment.scene.length_unit
    missing = lacking(assessment)
    none_at_all = all(all_left_out(assessment, line.wavelength) for line in observer.lines)
    rows: list[list[Any]] = [
        heads(
            "Beam line", "Scattered, stated", "F12 left out", "Scattered, compared", "at load fraction",
            "Stop light, stated", "Stop light, compared", "Direct", numeric_from=1,
        )
    ]  # fmt: skip
    for line in observer.lines:
        told = _computed(assessment, line.wavelength)
        rows.append(_line_row(line, scene, told))
        if line.pulse_rate is not None or line.pulse_scattered is not None:
            rows.append(_pulse_row(line, told))
    if len(observer.lines) > 1:
        total = observer.total
        rows.append(
            [
                paragraph("All lines", "cell bold"),
                *(
                    NOT_COMPUTED if none_at_all else f"{digits(total(name))}{PART if missing else ''}"
                    for name in ("scattered", "scattered_unpolarised", "scattered_compared")
                ),
                "", digits(total("diffuse")), digits(total("diffuse_compared")),
                digits(total("direct")),
            ]
        )  # fmt: skip
    facts = [
        f"at {point(observer.position, unit)}",
        f"{length(observer.nearest, unit)} from the axis of {markup(named_beam(scene, observer.nearest_beam))}",
        _thickness(observer, missing, none_at_all),
    ]
    if missing:
        facts.append(f"<b>not computed: light of {markup(missing)}</b>")
    raised = _raised(observer)
    if raised:
        facts.append(f"allowance for higher orders: {digits(100 * raised)} % of the compared scattered light")
    if observer.direct_reach:
        facts.append(f"direct light of {markup(named_beam(scene, observer.direct_reach))} is within reach")
    return [
        KeepTogether(
            [
                observer_head(number, observer),
                paragraph("; ".join(facts) + ".", "note"),
                ruled(rows, [42, 28, 18, 18, 17, 16, 18, 17], numeric=(1, 2, 3, 4, 5, 6, 7)),
            ]
        )
    ]


def _raised(observer: ObserverOutcome) -> float:
    """Greatest allowance for higher orders over the scattered light it goes with."""
    found = [dict(entry.by_origin) for entry in observer.comparisons]
    return max((p[ORIGINS[1]] / p["scattered"] for p in found if p.get(ORIGINS[1]) and p["scattered"]), default=0.0)


MORE = 1.01
"""A doubted thickness that is larger by less is not told."""
PART = " (part)"
"""Beside a value that lacks some of the light."""


def _thickness(observer: ObserverOutcome, missing: str, none_at_all: bool) -> str:
    if none_at_all:
        return f"tau {NOT_COMPUTED}"
    told = f"tau = {digits(observer.optical_thickness)}{' without what is not computed' if missing else ''}"
    if observer.thickness_doubted > MORE * max(observer.optical_thickness, observer.thickness_within_reach):
        told += f" (up to {digits(observer.thickness_doubted)} within reach and with the loads' extinction as doubted)"
    return told


def _computed(assessment: Assessment, wavelength: float) -> Callable[[str], str]:
    """How a number of scattered light at a wavelength is told: as it is, marked as a part, or as not computed."""
    if all_left_out(assessment, wavelength):
        return lambda text: NOT_COMPUTED
    return (lambda text: f"{text}{PART}") if left_out_at(assessment, wavelength) else (lambda text: text)


def _line_row(line: LineExposure, scene: Scene, told: Callable[[str], str]) -> list[Any]:
    return [
        paragraph(markup(named_line(scene, line.beam, line.line)), "cell"),
        number_cell(told(signed_interval(line.scattered, line.scattered_error))),
        number_cell(told(digits(line.scattered_unpolarised))),
        number_cell(told(digits(line.scattered_compared))),
        "" if told("") == NOT_COMPUTED else digits(line.load_fraction),
        digits(line.diffuse),
        digits(line.diffuse_compared),
        digits(line.direct),
    ]


def _pulse_row(line: LineExposure, told: Callable[[str], str]) -> list[Any]:
    return [
        paragraph("– per pulse, in J/m²; compared with stop light included", "cell"),
        number_cell(told(digits(line.pulse_scattered))), "", number_cell(_with_stop(line, told)), "",
        digits(line.pulse_diffuse), "", digits(line.pulse_direct),
    ]  # fmt: skip


def _with_stop(line: LineExposure, told: Callable[[str], str]) -> str:
    """Compared light per pulse; stop light alone where no scattered light is computed."""
    shown = digits(line.pulse_compared)
    return f"{shown}{PART}" if told("") == NOT_COMPUTED else told(shown)
