"""Comparisons with the limits: hazards, every single one with what widens its bounds, and contributions."""

from __future__ import annotations

from typing import Any

from lasescatter.assessment.outcome import Assessment, ObserverOutcome
from lasescatter.limits.compare import Comparison, HazardJudgement
from lasescatter.limits.verdict import few_digits
from lasescatter.report.front import NAME
from lasescatter.report.left_out import lacking
from lasescatter.report.naming import named_line
from lasescatter.report.quantities import ABSENT, counted, degrees, digits, duration, long_time, optical_density
from lasescatter.report.results import observer_head
from lasescatter.report.standing import grouped, standing
from lasescatter.report.styles import answer_words, heads, number_cell, paragraph, ruled, verdict_words, words
from lasescatter.report.typography import markup
from lasescatter.scene import Scene

ASKED = "Ratio at most 1?"
_LEAST_BLOCK = 150
"""Left on a page, an observer's block begins there. [pt]"""


def comparison_section(assessment: Assessment) -> list[Any]:
    """Every comparison with a limit, and how they add up to the verdicts."""
    story: list[Any] = [
        paragraph(
            "For each hazard the greatest ratio of exposure to limit of each beam line is taken and the ratios "
            "are added. The ratio itself carries the allowance for higher orders, where there is one; the lower bound "
            "takes it off again and the numerical error with it; the upper bound adds the allowances listed under "
            "each comparison, in the unit of its exposure. “Reach” is what scattered light and stop light can grow by "
            "where the head can get; “walls” what a room drawn tightly round the site would return. OD is the optical "
            "density that would bring the exposure to the limit, rounded up to a tenth, 0 where the ratio is 1 or "
            "less; it does not choose eyewear."
        ),
        paragraph(
            f"“{ASKED}” looks at one row alone: yes, where the upper bound is at most 1; no, where the lower bound is "
            "above 1; open, where the bounds leave it open or a limit is missing. It is no verdict: that is in the "
            "heading of each observer."
        ),
    ]
    for number, observer in enumerate(assessment.observers, start=1):
        story += _judged(number, observer, assessment)
    return story


def _bounds(low: float | None, high: float | None) -> str:
    if low is None or high is None:
        return ABSENT
    return f"{few_digits(low)}\u00a0to\u00a0{few_digits(high)}"


def _hazard_row(hazard: HazardJudgement) -> list[Any]:
    if hazard.not_judged:
        return [hazard.hazard, ABSENT, ABSENT, words("not judged"), words(f"user's reason: {hazard.not_judged}")]
    return [
        hazard.hazard, few_digits(hazard.ratio) if hazard.ratio is not None else ABSENT,
        _bounds(hazard.ratio_low, hazard.ratio_high), paragraph(answer_words(hazard.verdict), "cell"),
        words("; ".join(_unprefixed(hazard)), limit=900),
    ]  # fmt: skip


def _unprefixed(hazard: HazardJudgement) -> list[str]:
    """Reasons without the hazard's own name, which the row begins with."""
    return [reason.removeprefix(f"{hazard.hazard}: ") for reason in grouped(hazard.reasons)]


def _judged(number: int, observer: ObserverOutcome, assessment: Assessment) -> list[Any]:
    from reportlab.platypus import CondPageBreak

    scene = assessment.scene
    waves = {(line.beam, line.line): line.wavelength for line in observer.lines}

    heading = (standing(observer, lacking(assessment)), observer.governing)
    in_rows = {reason for hazard in observer.hazards for reason in hazard.reasons}
    story: list[Any] = [
        CondPageBreak(_LEAST_BLOCK),
        observer_head(number, observer, f" – {verdict_words(observer.verdict)}"),
        paragraph("; ".join(markup(text, 900) for text in heading if text) + ".", "note"),
    ]
    elsewhere = [reason for reason in observer.reasons if reason not in in_rows]
    story += [words(reason, "item", 900) for reason in grouped(elsewhere)]
    if observer.hazards:
        rows: list[list[Any]] = [[*heads("Hazard", "Ratio", "Bounds", numeric_from=1), *heads(ASKED, "Reasons")]]
        rows += [_hazard_row(hazard) for hazard in observer.hazards]
        story.append(ruled(rows, [36, 16, 32, 20, 70], numeric=(1, 2)))
    if not observer.comparisons:
        story.append(paragraph("No limit covers anything here, so there is no comparison.", "note"))
        return story
    rows = [
        [
            *heads("Limit, rule", "Beam line", "Exposed for"),
            *heads("Exposure", "Limit", "Ratio", "Bounds", "OD", numeric_from=0),
            *heads(ASKED),
        ]
    ]
    for entry in observer.comparisons:
        missing = lacking(assessment, waves[entry.beam, entry.line]) if (entry.beam, entry.line) in waves else ""
        made_of = paragraph(markup(_made_of(entry, missing)), "cell")
        rows += [_comparison_row(entry, scene), [made_of, *[""] * 8]]
    below = range(2, len(rows), 2)
    table = ruled(
        rows,
        [29, 24, 19, 20, 19, 12, 28, 7, 16],
        numeric=(3, 4, 5, 6, 7),
        extra=[("SPAN", (0, row), (-1, row)) for row in below]
        + [("TOPPADDING", (0, row), (-1, row), 0) for row in below],
        tied=tuple(row - 1 for row in below),
    )
    return [*story, table]


def exposed_for(entry: Comparison, scene: Scene) -> str:
    """Duration, the time that counts, and the time put into the limit, each where it differs; pulses counted."""
    told = [duration(entry.duration)]
    if entry.counted != entry.duration:
        told.append(f"{long_time(entry.counted)} counted a day")
    per_pulse = any(limit.name == entry.limit and limit.per == "pulse" for limit in scene.limits)
    if per_pulse:
        told.append(f"limit for {duration(entry.time)}, one pulse")
    elif entry.time != entry.duration or entry.counted != entry.duration:
        told.append(f"worst at {long_time(entry.time)}")
    if entry.pulses is not None:
        told.append(f"N = {counted(entry.pulses, 'pulse')}")
    return "; ".join(told)


def window_words(window: tuple[tuple[str, float], ...]) -> str:
    """An acceptance field's place along the beam: "leg 1 scattering angle from 85.2 to 91.4 deg"."""
    told = []
    for name, angle in window:
        start, end = name.removesuffix("from").strip(), f"{degrees(angle, 4)}"
        told.append(f"to {end} deg" if name == "to" else f"{start} scattering angle from {end}".strip())
    return "; ".join(told).replace("; to", " to")


def _comparison_row(entry: Comparison, scene: Scene) -> list[Any]:
    told = [f"{entry.tissue}, {entry.mechanism}"]
    if entry.note:
        told.append(entry.note)
    if entry.window:
        told.append(window_words(entry.window))
    return [
        paragraph(f"{markup(entry.limit, NAME)}<br/>{markup('; '.join(told), 400)}", "cell"),
        paragraph(markup(named_line(scene, entry.beam, entry.line)), "cell"),
        words(exposed_for(entry, scene)),
        number_cell(f"{digits(entry.exposure)} {entry.unit}"),
        number_cell(f"{digits(entry.limit_value)} {entry.unit}"),
        number_cell(few_digits(entry.ratio)),
        number_cell(_bounds(entry.ratio_low, entry.ratio_high)),
        number_cell(optical_density(entry.optical_density)),
        paragraph(answer_words(entry.verdict), "cell"),
    ]


def _made_of(entry: Comparison, missing: str) -> str:
    """What the exposure is made of and what the upper bound adds to it; `missing`: whose light is not computed."""
    parts = " + ".join(f"{origin} {digits(amount)}" for origin, amount in entry.by_origin if amount > 0)
    added = ", ".join(f"{cause}: {digits(amount)}" for cause, amount in entry.allowances)
    if missing:
        return (
            f"Exposure, as far as computed: {parts or 'nothing'}. Upper bound adds {added or 'nothing'}. Not computed, "
            f"and in neither: light of {missing}."
        )
    return f"Exposure: {parts or 'nothing arrives'}. Upper bound adds {added or 'nothing'}."


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
        waves = {(line.beam, line.line): line.wavelength for line in observer.lines}
        for entry in _governing(observer):
            at = waves.get((entry.beam, entry.line))
            missing = "" if at is None else lacking(assessment, at)
            rows.append([str(number), *_shares(entry, assessment.scene, missing)])
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


def _of_what_is_computed(shares: list[str], missing: str) -> str:
    told = ", ".join(shares)
    if missing:
        return f"{told + ' of what is computed' if told else 'nothing computed'}; not computed: light of {missing}"
    return told or "nothing arrives"


def _shares(entry: Comparison, scene: Scene, missing: str) -> list[Any]:
    whole = sum(amount for _, amount in entry.by_origin)
    shares = [
        f"{origin} {100 * amount / whole:.1f}\u00a0%" for origin, amount in entry.by_origin if whole > 0 and amount > 0
    ]
    return [
        words(entry.hazard),
        paragraph(markup(named_line(scene, entry.beam, entry.line)), "cell"),
        words(entry.limit, limit=NAME),
        few_digits(entry.ratio),
        words(_of_what_is_computed(shares, missing)),
    ]
