"""Comparison of what arrives with the limits entered by hand: ratios, bounds, verdicts."""

from __future__ import annotations

import math
from dataclasses import dataclass

from lasescatter.limits.hazards import hazard_of, within
from lasescatter.limits.verdict import ABOVE, BELOW, NOT_ESTABLISHED, Verdict
from lasescatter.scene import QUANTITY_UNITS, Hazard, Limit, Line, Mechanism, Quantity, Tissue

# Causes of allowances that begin so come from how far the data of a load are trusted.
TRUST = "trust in "


@dataclass(frozen=True)
class Comparison:
    """One line of one beam against one limit, for one observer and one duration."""

    limit: str
    beam: str
    line: str
    hazard: Hazard
    tissue: Tissue
    mechanism: Mechanism
    quantity: Quantity
    unit: str
    duration: float
    """Exposure duration judged. [s]"""
    counted: float
    """Exposure time that counts for the hazard: the daily sum where dose adds up over a day. [s]"""
    time: float
    """Time put into the limit: the worst one up to `counted`, or the pulse. [s]"""
    exposure: float
    """In `unit`, the compared value."""
    limit_value: float
    """In `unit`, train factor included."""
    ratio: float
    ratio_low: float
    """Lower bound: numerical error taken off, nothing added for what is not computed."""
    ratio_high: float
    """Upper bound: numerical error and allowances added."""
    optical_density: float
    """That would bring the exposure to the limit; 0 where it is below."""
    by_origin: tuple[tuple[str, float], ...]
    """Exposure by origin: scattered, stop, direct. Same unit."""
    allowances: tuple[tuple[str, float], ...]
    """What the upper bound adds to the exposure, by cause. Same unit."""
    window: tuple[tuple[str, float], ...] | None
    """Where a limit has an acceptance field: its angles along the beam. [rad]"""
    pulses: int | None
    """Pulses counted, for a per-exposure or train comparison of a pulsed line."""
    verdict: Verdict
    note: str
    """Rule applied, in words; "" for the plain case."""

    @property
    def ratio_high_trusted(self) -> float:
        """Upper bound of the ratio if the data of every load were right as they are."""
        return self.ratio_high - sum(part for cause, part in self.allowances if cause.startswith(TRUST)) / (
            self.limit_value
        )


@dataclass(frozen=True)
class HazardJudgement:
    """One hazard of one observer: the ratios of all beams that act on it, added."""

    hazard: Hazard
    ratio: float | None
    ratio_low: float | None
    ratio_high: float | None
    verdict: Verdict
    reasons: tuple[str, ...]
    parts: tuple[tuple[str, str, float], ...]
    """Per beam line: line, governing limit, ratio."""
    not_judged: str
    """The user's reason where the hazard was left out on purpose, else ""."""

    @property
    def optical_density(self) -> float:
        """That would bring the summed ratio to 1; 0 where it is below."""
        return math.log10(self.ratio) if self.ratio is not None and self.ratio > 1 else 0.0


@dataclass(frozen=True)
class Received:
    """What a limit's detector takes in of one line, per watt in the beam: irradiance [m⁻²] or radiance [m⁻² sr⁻¹]."""

    by_origin: tuple[tuple[str, float], ...]
    low: float
    """Lower bound of the sum."""
    allowances: tuple[tuple[str, float], ...] = ()
    """What the upper bound adds to the sum, by cause."""
    window: tuple[tuple[str, float], ...] | None = None
    note: str = ""

    @property
    def total(self) -> float:
        """Sum over the origins."""
        return sum(value for _, value in self.by_origin)

    @property
    def high(self) -> float:
        """Upper bound of the sum."""
        return self.total + sum(value for _, value in self.allowances)


def covers_time(limit: Limit, time: float) -> bool:
    """Whether a limit's durations hold a time, ends included."""
    return limit.durations[0] * (1 - 1e-9) <= time <= limit.durations[1] * (1 + 1e-9)


def pulses_within(line: Line, time: float) -> int:
    """Pulses of a line that can fall within a time, at least one; 0 for continuous light."""
    if line.pulses is None:
        return 0
    if line.pulses.rate is None:
        return line.pulses.count or 1
    return max(1, math.ceil(line.pulses.rate * time * (1 - 1e-12)))


def compare(
    limit: Limit, beam: str, line: Line, received: Received, duration: float, time: float
) -> Comparison | str | None:
    """One line against one limit.

    Parameters
    ----------
    duration : float
        Longest single exposure, for the record. [s]
    time : float
        Exposure time that counts for this hazard. [s]

    Returns
    -------
    Comparison, or a sentence that says why the limit cannot be applied, or None where it does not concern the case.

    Notes
    -----
    The ratio for a time T is the largest over all times up to T that the limit covers: it never falls with time.
    """
    if not within(line.wavelength, limit.wavelengths):
        return None
    if limit.per == "pulse":
        return _per_pulse(limit, beam, line, received, duration, time)
    if limit.durations[0] > time * (1 + 1e-9):
        return None
    longest = min(time, limit.durations[1])
    cases = [(_exposure(limit, line, t, n), t, n) for t, n in _worst_times(line, limit.durations[0], longest)]
    amount, at, pulses = max(cases, key=lambda case: case[0] / (limit.value * case[1] ** limit.time_exponent))
    note = received.note
    if not covers_time(limit, time):
        note = _joined(note, f"covers times up to {limit.durations[1]:g} s; the ratio never falls with time")
    value = limit.value * at**limit.time_exponent
    return _made(limit, beam, line, received, (duration, time, at), amount, value, pulses or None, note)


def _worst_times(line: Line, shortest: float, longest: float) -> list[tuple[float, int]]:
    """Times at which exposure over limit can be largest, with the pulses that fall within them.

    Exposure and limit are powers of time, so for continuous light the largest is at one end. A train steps up: n
    pulses fit into any time just over (n − 1)/rate, and over n pulses exposure over limit is n/(n − 1)^p, which has
    no largest value between its ends.
    """
    ends = [(shortest, pulses_within(line, shortest)), (longest, pulses_within(line, longest))]
    if line.pulses is None or line.pulses.rate is None:
        return ends
    first, last = ends[0][1], ends[1][1]
    steps = [(first / line.pulses.rate, first + 1), ((last - 1) / line.pulses.rate, last)]
    return ends + [(time, count) for time, count in steps if shortest <= time < longest and count <= last]


def _exposure(limit: Limit, line: Line, time: float, pulses: int) -> float:
    """Factor from a per-watt value to the exposure of a limit over a time: W, or J for a dose."""
    dose = limit.quantity in ("radiant exposure", "radiance dose")
    if line.pulses is None:
        return line.power * time if dose else line.power
    energy = line.pulses.energy * pulses
    return energy if dose else energy / time


def _per_pulse(
    limit: Limit, beam: str, line: Line, received: Received, duration: float, time: float
) -> Comparison | str | None:
    if line.pulses is None:
        return None
    width = line.pulses.duration
    if not covers_time(limit, width):
        return None
    count = pulses_within(line, time)
    if count > 1 and limit.train is None:
        return f'limit "{limit.name}" does not say how a train of {count} pulses is judged (train is left out)'
    factor = count**-0.25 if limit.train == "N^-1/4" else 1.0
    dose = limit.quantity in ("radiant exposure", "radiance dose")
    amount = line.pulses.energy if dose else line.pulses.energy / width
    value = limit.value * width**limit.time_exponent * factor
    plural = "" if count == 1 else "s"
    rule = f"per pulse: {limit.value * width**limit.time_exponent:.4g}"
    note = _joined(received.note, f"{rule} × {factor:.4g} for {count} pulse{plural} in {time:g} s")
    return _made(limit, beam, line, received, (duration, time, width), amount, value, count, note)


def _made(
    limit: Limit,
    beam: str,
    line: Line,
    received: Received,
    times: tuple[float, float, float],
    amount: float,
    value: float,
    pulses: int | None,
    note: str,
) -> Comparison:
    exposure = amount * received.total
    ratio, low, high = (amount * part / value for part in (received.total, received.low, received.high))
    return Comparison(
        limit=limit.name,
        beam=beam,
        line=line.name,
        hazard=hazard_of(limit),
        tissue=limit.tissue,
        mechanism=limit.mechanism,
        quantity=limit.quantity,
        unit=QUANTITY_UNITS[limit.quantity],
        duration=times[0],
        counted=times[1],
        time=times[2],
        exposure=exposure,
        limit_value=value,
        ratio=ratio,
        ratio_low=low,
        ratio_high=high,
        optical_density=math.log10(ratio) if ratio > 1 else 0.0,
        by_origin=tuple((origin, amount * part) for origin, part in received.by_origin),
        allowances=tuple((cause, amount * part) for cause, part in received.allowances),
        window=received.window,
        pulses=pulses,
        verdict=verdict_of(low, high),
        note=note,
    )


def verdict_of(low: float, high: float) -> Verdict:
    """Verdict from the bounds of a ratio: below needs the upper bound at most 1, above the lower bound over 1."""
    if low > 1:
        return ABOVE
    return BELOW if high <= 1 else NOT_ESTABLISHED


def _joined(*notes: str) -> str:
    return "; ".join(note for note in notes if note)
