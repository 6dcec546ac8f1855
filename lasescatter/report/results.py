"""What the assessment found: exposures in the beam and beside it, comparisons, contributions."""

from __future__ import annotations

from typing import Any

from lasescatter.assessment.outcome import Assessment, InTheBeam, LineExposure, ObserverOutcome
from lasescatter.limits.compare import Comparison, HazardJudgement
from lasescatter.limits.verdict import few_digits, margin
from lasescatter.report.front import NAME, multiple
from lasescatter.report.quantities import (
    ABSENT,
    digits,
    duration,
    length,
    line_label,
    point,
    signed_interval,
    small_length,
    wavelength,
)
from lasescatter.report.styles import heads, number_cell, paragraph, ruled, verdict_words, words
from lasescatter.report.typography import markup
from lasescatter.scene import LengthUnit


def observer_head(number: int, observer: ObserverOutcome, tail: str = "") -> Any:
    """The heading of one observer's block."""
    return paragraph(f"Observer {number}: {markup(observer.name, NAME)}{tail}", "subsection")


# ---------------------------------------------------------------- in the beam


def beam_section(assessment: Assessment) -> list[Any]:
    """Every place in the beam, line by line."""
    story: list[Any] = [
        paragraph(
            "Exposure of an eye, or of a white card (reflectance 1, seen square), held in the beam at each place. "
            "The load's extinction is not credited."
        )
    ]
    for line in assessment.in_the_beam:
        story += _spots(line, assessment.scene.length_unit)
    return story


def _spots(line: InTheBeam, unit: LengthUnit) -> list[Any]:
    told = [wavelength(line.wavelength)]
    if line.limit is not None:
        told.append(f"judged by “{markup(line.limit, NAME)}”, {digits(line.limit_value, 4)} {line.unit}")
        told.append(f"for {duration(line.duration)}")
    if line.hazard_distance is not None:
        told.append(
            "below the limit everywhere"
            if line.hazard_distance == 0
            else f"hazard distance {length(line.hazard_distance, unit)} along the beam"
        )
    if line.reason:
        told.append(markup(line.reason, 400))
    rows: list[list[Any]] = [
        heads(
            "Place", "Point", "Along the path", "Diameter", f"Direct [{line.unit or 'no limit'}]", "of the limit",
            "White card: distance", "at 0.1 m, of the limit", numeric_from=2,
        )
    ]  # fmt: skip
    for spot in line.spots:
        rows.append(
            [
                words(spot.place, limit=NAME),
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
        paragraph(markup(line_label(line.beam, line.line), NAME), "subsection"),
        paragraph("; ".join(told) + ".", "note"),
        ruled(rows, [37, 31, 20, 18, 19, 17, 17, 15], numeric=(2, 3, 4, 5, 6, 7)),
    ]


# ---------------------------------------------------------------- exposures


def exposure_section(assessment: Assessment) -> list[Any]:
    """What arrives at each observer, by beam line."""
    story: list[Any] = [
        paragraph(
            "Irradiances in W/m², means over time. <b>Stated</b>: with the load exactly as entered, first order, "
            "the whole beam in view, on a surface that faces each element (E2); beside it the same with F12 left "
            "out, as if the light were unpolarised. <b>Compared</b>: the greatest over every part of the load "
            "that may be present, since a load that thins may let more light through; no loss in the load is "
            "credited to stop and direct light. ± is the numerical error alone. 1&nbsp;W/m²&nbsp;= 0.1&nbsp;mW/cm²."
        )
    ]
    for number, observer in enumerate(assessment.observers, start=1):
        story += _exposures(number, observer, assessment.scene.length_unit)
    return story


def _exposures(number: int, observer: ObserverOutcome, unit: LengthUnit) -> list[Any]:
    from reportlab.platypus import KeepTogether

    rows: list[list[Any]] = [
        heads(
            "Beam line", "Scattered, stated", "F12 left out", "Scattered, compared", "at load fraction",
            "Stop light, stated", "Stop light, compared", "Direct", numeric_from=1,
        )
    ]  # fmt: skip
    for line in observer.lines:
        rows.append(_line_row(line))
        if line.pulse_rate is not None or line.pulse_scattered is not None:
            rows.append(_pulse_row(line))
    if len(observer.lines) > 1:
        total = observer.total
        rows.append(
            [
                paragraph("All lines", "cell bold"), digits(total("scattered")), digits(total("scattered_unpolarised")),
                digits(total("scattered_compared")), "", digits(total("diffuse")), digits(total("diffuse_compared")),
                digits(total("direct")),
            ]
        )  # fmt: skip
    facts = [
        f"at {point(observer.position, unit)}",
        f"{length(observer.nearest, unit)} from the axis of {markup(observer.nearest_beam, NAME)}",
        f"optical thickness tau = {digits(observer.optical_thickness)}",
    ]
    if observer.direct_reach:
        facts.append(f"direct light of {markup(observer.direct_reach, NAME)} is within reach")
    return [
        KeepTogether(
            [
                observer_head(number, observer),
                paragraph("; ".join(facts) + ".", "note"),
                ruled(rows, [42, 28, 18, 18, 17, 16, 18, 17], numeric=(1, 2, 3, 4, 5, 6, 7)),
            ]
        )
    ]


def _line_row(line: LineExposure) -> list[Any]:
    return [
        paragraph(f"{markup(line_label(line.beam, line.line), NAME)}, {wavelength(line.wavelength)}", "cell"),
        signed_interval(line.scattered, line.scattered_error),
        digits(line.scattered_unpolarised),
        digits(line.scattered_compared),
        digits(line.load_fraction),
        digits(line.diffuse),
        digits(line.diffuse_compared),
        digits(line.direct),
    ]


def _pulse_row(line: LineExposure) -> list[Any]:
    return [
        paragraph("– per pulse, in J/m²; compared with stop light included", "cell"), digits(line.pulse_scattered), "",
        digits(line.pulse_compared), "", "", "", digits(line.pulse_direct),
    ]  # fmt: skip


# ---------------------------------------------------------------- comparisons


def comparison_section(assessment: Assessment) -> list[Any]:
    """Every comparison with a limit, and how they add up to the verdicts."""
    story: list[Any] = [
        paragraph(
            "For each hazard the greatest ratio of exposure to limit of each beam line is taken and the ratios "
            "are added. Lower and upper bounds carry the numerical error; the upper also what is allowed for "
            "effects that are not computed. OD is the optical density that would bring the exposure to the "
            "limit; it does not choose eyewear."
        )
    ]
    for number, observer in enumerate(assessment.observers, start=1):
        story += _judged(number, observer)
    return story


def _bounds(low: float | None, high: float | None) -> str:
    if low is None or high is None:
        return ABSENT
    return f"{few_digits(low)} to {few_digits(high)}"


def _hazard_row(hazard: HazardJudgement) -> list[Any]:
    if hazard.not_judged:
        return [hazard.hazard, ABSENT, ABSENT, words("not judged"), words(f"user's reason: {hazard.not_judged}")]
    return [
        hazard.hazard, few_digits(hazard.ratio) if hazard.ratio is not None else ABSENT,
        _bounds(hazard.ratio_low, hazard.ratio_high), paragraph(verdict_words(hazard.verdict), "cell"),
        words("; ".join(hazard.reasons), limit=900),
    ]  # fmt: skip


def _judged(number: int, observer: ObserverOutcome) -> list[Any]:
    from reportlab.platypus import CondPageBreak

    story: list[Any] = [
        CondPageBreak(110),
        observer_head(number, observer, f" – {verdict_words(observer.verdict)}"),
        paragraph(
            f"{margin(observer.ratio)}{'; ' + markup(observer.governing, 300) if observer.governing else ''}.", "note"
        ),
    ]
    story += [words(reason, "item", 900) for reason in observer.reasons]
    if observer.hazards:
        rows: list[list[Any]] = [[*heads("Hazard", "Ratio", "Bounds", numeric_from=1), *heads("Verdict", "Reasons")]]
        rows += [_hazard_row(hazard) for hazard in observer.hazards]
        story.append(ruled(rows, [36, 18, 30, 26, 64], numeric=(1, 2)))
    if not observer.comparisons:
        story.append(paragraph("No limit covers anything here, so there is no comparison.", "note"))
        return story
    rows = [
        heads(
            "Limit, rule", "Beam line", "Exposed for (time in the limit)", "Exposure", "Limit", "Ratio", "Bounds", "OD",
            "Verdict", numeric_from=3,
        )
    ]  # fmt: skip
    rows[0][-1] = heads("Verdict")[0]
    rows += [_comparison_row(entry) for entry in observer.comparisons]
    story.append(ruled(rows, [30, 21, 16, 22, 20, 13, 22, 8, 22], numeric=(3, 4, 5, 6, 7)))
    return story


def _comparison_row(entry: Comparison) -> list[Any]:
    told = [f"{entry.tissue}, {entry.mechanism}"]
    if entry.note:
        told.append(entry.note)
    if entry.pulses is not None:
        told.append(f"{entry.pulses} pulses counted")
    if entry.window:
        # Angles of an acceptance field along the beam, in mrad as limits state them.
        told.append("window " + ", ".join(f"{name} {digits(value * 1e3, 4)} mrad" for name, value in entry.window))
    time = duration(entry.duration)
    if entry.time != entry.duration:
        time += f" ({duration(entry.time)})"
    return [
        paragraph(f"{markup(entry.limit, NAME)}<br/>{markup('; '.join(told), 300)}", "cell"),
        words(line_label(entry.beam, entry.line), limit=NAME),
        words(time),
        number_cell(f"{digits(entry.exposure)} {entry.unit}"),
        number_cell(f"{digits(entry.limit_value)} {entry.unit}"),
        number_cell(few_digits(entry.ratio)),
        number_cell(_bounds(entry.ratio_low, entry.ratio_high)),
        number_cell(f"{entry.optical_density:.1f}" if entry.optical_density > 0 else "0"),
        paragraph(verdict_words(entry.verdict), "cell"),
    ]


# ---------------------------------------------------------------- contributions


def contribution_section(assessment: Assessment) -> list[Any]:
    """Which beam and which origin makes each observer's exposure."""
    rows: list[list[Any]] = [
        [
            *heads("No.", "Hazard", "Beam line", "by its greatest ratio"),
            *heads("ratio", numeric_from=0),
            *heads("made of"),
        ]
    ]
    for number, observer in enumerate(assessment.observers, start=1):
        rows += [[str(number), *_shares(entry)] for entry in _governing(observer)]
    text = paragraph(
        "For each observer, hazard and beam line: the comparison with the greatest ratio and what its exposure is "
        "made of. The numbers of the observers are those of the first page."
    )
    if len(rows) == 1:
        return [text, paragraph("There is no comparison to split up.")]
    return [text, ruled(rows, [8, 27, 42, 38, 14, 45], numeric=(4,))]


def _governing(observer: ObserverOutcome) -> list[Comparison]:
    """Per hazard and beam line the comparison with the greatest ratio, in the order found."""
    found: dict[tuple[str, str, str], Comparison] = {}
    for entry in observer.comparisons:
        place = (entry.hazard, entry.beam, entry.line)
        if place not in found or entry.ratio > found[place].ratio:
            found[place] = entry
    return list(found.values())


def _shares(entry: Comparison) -> list[Any]:
    whole = sum(amount for _, amount in entry.by_origin)
    shares = [
        f"{origin} {100 * amount / whole:.1f} %" for origin, amount in entry.by_origin if whole > 0 and amount > 0
    ]
    return [
        words(entry.hazard),
        words(line_label(entry.beam, entry.line), limit=NAME),
        words(entry.limit, limit=NAME),
        few_digits(entry.ratio),
        words(", ".join(shares) or "nothing arrives"),
    ]
