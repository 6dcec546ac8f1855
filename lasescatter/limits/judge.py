"""One observer's verdict: every hazard that is due, the ratios of all beams added, and what stands in the way."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

from lasescatter.limits.compare import TRUST, Comparison, HazardJudgement, Received, compare, covers_time, verdict_of
from lasescatter.limits.hazards import (
    AVERSION_TIME,
    SHORTEST_PULSE,
    VISIBLE,
    dose_time,
    hazard_of,
    hazards_due,
    within,
)
from lasescatter.limits.verdict import ABOVE, BELOW, NOT_ESTABLISHED, Verdict, worst
from lasescatter.scene import Beam, Hazard, Limit, Line, Observer

HAZARDS: tuple[Hazard, ...] = ("retina thermal", "retina photochemical", "cornea and lens", "skin")

# A limit or a reason that begins with one of these words is nobody's yet; starter files write EXAMPLE.
PLACEHOLDERS = ("EXAMPLE", "TODO", "TBD", "REPLACE", "XXX", "?")

# Gives what a limit's detector takes in of a line, or why that cannot be told.
ReceivedBy = Callable[[Line, Limit], Received | str]


@dataclass(frozen=True)
class Gate:
    """Something outside the limits for which nothing that some lines act on may be called below."""

    reason: str
    lines: frozenset[str] | None = None
    """Keys of the lines; None: all."""

    def holds(self, line: Line) -> bool:
        """Whether it keeps a line's light from being below."""
        return self.lines is None or line.key in self.lines


@dataclass(frozen=True)
class Judgement:
    """Result of judging one observer."""

    verdict: Verdict
    ratio: float | None
    governing: str
    reasons: tuple[str, ...]
    comparisons: tuple[Comparison, ...]
    hazards: tuple[HazardJudgement, ...]


def judge(
    observer: Observer,
    beams: tuple[Beam, ...],
    limits: tuple[Limit, ...],
    received_by: ReceivedBy,
    not_judged: tuple[tuple[Hazard, str], ...],
    gates: tuple[Gate, ...],
) -> Judgement:
    """Judge every hazard that is due for one observer.

    Parameters
    ----------
    gates : tuple of Gate
        Reasons outside the limits for which nothing may be called below: direct light within reach and the like. A
        gate of some lines touches the comparisons of those and the hazards that they act on.
    """
    not_judged = tuple((hazard, reason) for hazard, reason in not_judged if not is_placeholder(reason))
    left_out = dict(not_judged)
    held = _held(gates, observer, beams, limits, left_out)
    comparisons: list[Comparison] = []
    judged: dict[Hazard, list[HazardJudgement]] = {}
    for duration in observer.durations:
        made, due, missing = _over_lines(observer, beams, limits, received_by, duration)
        made = [_gated(comparison, gates, beams) for comparison in made]
        comparisons.extend(made)
        for hazard in HAZARDS:
            if hazard in left_out or (hazard not in due and not any(c.hazard == hazard for c in made)):
                continue
            judged.setdefault(hazard, []).append(_hazard(hazard, made, missing.get(hazard, ()), held[hazard]))
    hazards = [_worst_duration(found) for found in judged.values()]
    hazards += [
        HazardJudgement(hazard, None, None, None, NOT_ESTABLISHED, (), (), reason)
        for hazard, reason in not_judged
        if any(
            hazard in hazards_due(line, t, observer.daily)
            for b in beams
            for line in b.lines
            for t in observer.durations
        )
    ]
    counted = [hazard for hazard in hazards if not hazard.not_judged]
    compared = [hazard for hazard in counted if hazard.ratio is not None]
    top = max(compared, key=lambda hazard: hazard.ratio or 0.0, default=None)
    verdict = worst([hazard.verdict for hazard in counted])
    if gates and verdict != ABOVE:
        verdict = NOT_ESTABLISHED
    reasons = tuple(gate.reason for gate in gates) + tuple(reason for hazard in counted for reason in hazard.reasons)
    if not counted:
        reasons += ("every hazard that is due is listed as not judged",)
    return Judgement(
        verdict=verdict,
        ratio=top.ratio if top else None,
        governing=_governing(top),
        reasons=tuple(dict.fromkeys(reasons)),
        comparisons=tuple(comparisons),
        hazards=tuple(hazards),
    )


def _held(
    gates: tuple[Gate, ...],
    observer: Observer,
    beams: tuple[Beam, ...],
    limits: tuple[Limit, ...],
    left_out: dict[Hazard, str],
) -> dict[Hazard, tuple[str, ...]]:
    """Per hazard the reasons of the gates of those lines that act on it; of lines that act on none: for each."""
    acting: dict[Hazard, list[Line]] = {hazard: [] for hazard in HAZARDS}
    for line in (line for beam in beams for line in beam.lines):
        hazards = {hazard for duration in observer.durations for hazard in hazards_due(line, duration, observer.daily)}
        hazards |= {hazard_of(limit) for limit in limits if within(line.wavelength, limit.wavelengths)}
        for hazard in hazards.difference(left_out):
            acting[hazard].append(line)
    held: dict[Hazard, tuple[str, ...]] = dict.fromkeys(HAZARDS, ())
    for gate in gates:
        touched = [hazard for hazard in HAZARDS if any(gate.holds(line) for line in acting[hazard])]
        for hazard in touched or HAZARDS:
            held[hazard] += (gate.reason,)
    return held


def _gated(comparison: Comparison, gates: tuple[Gate, ...], beams: tuple[Beam, ...]) -> Comparison:
    """A comparison that a gate keeps from being below."""
    line = next(line for b in beams if b.name == comparison.beam for line in b.lines if line.name == comparison.line)
    if comparison.verdict == BELOW and any(gate.holds(line) for gate in gates):
        return replace(comparison, verdict=NOT_ESTABLISHED)
    return comparison


def is_placeholder(text: str) -> bool:
    """Whether a text still waits for somebody to write it."""
    return text.strip().upper().startswith(PLACEHOLDERS)


def _over_lines(
    observer: Observer, beams: tuple[Beam, ...], limits: tuple[Limit, ...], received_by: ReceivedBy, duration: float
) -> tuple[list[Comparison], set[Hazard], dict[Hazard, tuple[str, ...]]]:
    """Comparisons of one duration, the hazards due, and per hazard what keeps it from being established."""
    made: list[Comparison] = []
    due: set[Hazard] = set()
    missing: dict[Hazard, tuple[str, ...]] = {}
    for beam in beams:
        for line in beam.lines:
            line_due = hazards_due(line, duration, observer.daily)
            due.update(line_due)
            for hazard in HAZARDS:
                time = dose_time(hazard, line, duration, observer.daily)
                found, faults = _against(beam, line, hazard, limits, received_by, duration, time)
                made.extend(found)
                if hazard in line_due:
                    faults += _uncovered(line, hazard, limits, time)
                    faults += _time_faults(line, hazard, duration)
                if faults and (hazard in line_due or found):
                    missing[hazard] = missing.get(hazard, ()) + tuple(f"{hazard}: {fault}" for fault in faults)
    return made, due, missing


def _against(
    beam: Beam,
    line: Line,
    hazard: Hazard,
    limits: tuple[Limit, ...],
    received_by: ReceivedBy,
    duration: float,
    time: float,
) -> tuple[list[Comparison], list[str]]:
    made, faults = [], []
    for limit in limits:
        if hazard_of(limit) != hazard or not within(line.wavelength, limit.wavelengths):
            continue
        received = received_by(line, limit)
        example = is_placeholder(limit.source) or is_placeholder(limit.entered_by)
        if example:
            faults.append(f'limit "{limit.name}" is still an example of the starter file: enter your own, with source')
        if isinstance(received, str):
            faults.append(f'limit "{limit.name}": {received}')
            continue
        result = compare(limit, beam.name, line, received, duration, time)
        if isinstance(result, str):
            faults.append(result)
        elif result is not None:
            # Against a limit that is nobody's yet nothing is below.
            made.append(replace(result, verdict=NOT_ESTABLISHED) if example and result.verdict == BELOW else result)
    return made, faults


def _uncovered(line: Line, hazard: Hazard, limits: tuple[Limit, ...], time: float) -> list[str]:
    """What no limit covers: the wavelength, the time, or a pulsed line's pulse or exposure."""
    here = [limit for limit in limits if hazard_of(limit) == hazard and within(line.wavelength, limit.wavelengths)]
    name = f"{line.wavelength * 1e9:g} nm"
    if not here:
        return [f"no limit covers {name}"]
    faults = []
    if not any(limit.per == "exposure" and covers_time(limit, time) for limit in here):
        faults.append(f"no limit over the exposure covers {name} for {time:g} s")
    # A photochemical limit is a dose: pulses add up in it and none has a limit of its own.
    if (
        line.pulses is not None
        and hazard != "retina photochemical"
        and not any(limit.per == "pulse" and covers_time(limit, line.pulses.duration) for limit in here)
    ):
        faults.append(f"no limit per pulse covers {name} for a pulse of {line.pulses.duration:g} s")
    return faults


def _time_faults(line: Line, hazard: Hazard, duration: float) -> list[str]:
    faults = []
    if line.pulses is not None and line.pulses.duration < SHORTEST_PULSE:
        faults.append(f'pulses of "{line.name}" are shorter than 100 fs, where no limit is published')
    if hazard != "skin" and duration <= AVERSION_TIME and not within(line.wavelength, VISIBLE):
        faults.append(
            f"0.25 s counts for 400–700 nm only, and {line.wavelength * 1e9:g} nm does not make anybody look away"
        )
    return faults


def _hazard(hazard: Hazard, made: list[Comparison], missing: tuple[str, ...], held: tuple[str, ...]) -> HazardJudgement:
    """Per line the limit with the largest ratio; then the lines are added.

    What is missing and what holds the hazard back from outside the limits keep it from being below, never from being
    above.
    """
    open_for = held + missing
    governing: dict[tuple[str, str], Comparison] = {}
    for comparison in made:
        if comparison.hazard != hazard:
            continue
        key = (comparison.beam, comparison.line)
        if key not in governing or comparison.ratio > governing[key].ratio:
            governing[key] = comparison
    bounds = {
        key: (
            max(c.ratio_low for c in made if c.hazard == hazard and (c.beam, c.line) == key),
            max(c.ratio_high for c in made if c.hazard == hazard and (c.beam, c.line) == key),
        )
        for key in governing
    }
    parts = tuple((line, c.limit, c.ratio) for (_, line), c in governing.items())
    if not parts:
        return HazardJudgement(hazard, None, None, None, NOT_ESTABLISHED, open_for, (), "")
    ratio = sum(part[2] for part in parts)
    low, high = (sum(bound[i] for bound in bounds.values()) for i in (0, 1))
    verdict = verdict_of(low, high)
    reasons = open_for
    if verdict == NOT_ESTABLISHED:
        reasons += (
            f"{hazard}: the bounds {low:.3g} and {high:.3g} of the limit lie on both sides of it"
            f"{_held_back([c for c in made if c.hazard == hazard]) or _widest(list(governing.values()))}",
        )
    elif verdict != ABOVE and open_for:
        verdict = NOT_ESTABLISHED
    return HazardJudgement(hazard, ratio, low, high, verdict, reasons, parts, "")


def _held_back(made: list[Comparison]) -> str:
    """The factors of trust, in brackets, where without them the upper bound would not exceed the limit."""
    trusted: dict[tuple[str, str], float] = {}
    for comparison in made:
        key = (comparison.beam, comparison.line)
        trusted[key] = max(trusted.get(key, 0.0), comparison.ratio_high_trusted)
    total = sum(trusted.values())
    if total > 1:
        return ""
    causes = dict.fromkeys(cause for c in made for cause, _ in c.allowances if cause.startswith(TRUST))
    without = "it" if len(causes) == 1 else "all of these"
    return f" (held back by {', '.join(causes)}; without {without} the upper bound is {total:.3g})"


def _widest(governing: list[Comparison]) -> str:
    """What widens the bounds most, in brackets."""
    causes: dict[str, float] = {}
    for comparison in governing:
        orders = tuple(part for part in comparison.by_origin if part[0].startswith("allowance"))
        for cause, amount in comparison.allowances + orders:
            causes[cause] = causes.get(cause, 0.0) + amount / comparison.limit_value
    return f" (mostly: {max(causes, key=lambda cause: causes[cause])})" if causes else ""


def _worst_duration(found: list[HazardJudgement]) -> HazardJudgement:
    """Of several durations the one with the worst verdict, then the largest ratio; reasons of all are kept."""
    verdict = worst([hazard.verdict for hazard in found])
    chosen = max((h for h in found if h.verdict == verdict), key=lambda h: -1.0 if h.ratio is None else h.ratio)
    reasons = tuple(dict.fromkeys(reason for hazard in found for reason in hazard.reasons))
    ratios = [h.ratio for h in found if h.ratio is not None]
    return HazardJudgement(
        chosen.hazard,
        max(ratios, default=None),
        chosen.ratio_low,
        chosen.ratio_high,
        verdict,
        reasons,
        chosen.parts,
        "",
    )


def _governing(top: HazardJudgement | None) -> str:
    if top is None or not top.parts:
        return ""
    line, limit, _ = max(top.parts, key=lambda part: part[2])
    others = f" and {len(top.parts) - 1} more" if len(top.parts) > 1 else ""
    return f'{top.hazard}, limit "{limit}", {line}{others}'
