"""Comparison of what arrives with the limits entered by hand: ratios, bounds, verdicts."""

from __future__ import annotations

from dataclasses import dataclass

from lasescatter.limits.verdict import Verdict
from lasescatter.scene import Hazard, Mechanism, Quantity, Tissue


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
    time: float
    """Time put into the limit: of the exposure, the daily sum or the pulse. [s]"""
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
    window: tuple[tuple[str, float], ...] | None
    """Where a limit has an acceptance field: its angles along the beam. [rad]"""
    pulses: int | None
    """Pulses counted, for a per-exposure or train comparison of a pulsed line."""
    verdict: Verdict
    note: str
    """Rule applied, in words; "" for the plain case."""


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
