"""Which hazards are due for a wavelength and a time, and which hazard a limit speaks of."""

from __future__ import annotations

from lasescatter.scene import Hazard, Limit, Line

# Range of each hazard: limits of wavelength are inclusive, so that a boundary takes the stricter side.
RETINA = (400e-9, 1400e-9)
BLUE = (400e-9, 600e-9)
BLUE_FROM_TIME = 10.0
FRONT_OF_EYE_BELOW = 400e-9
FRONT_OF_EYE_FROM = 1250e-9
VISIBLE = (400e-9, 700e-9)
AVERSION_TIME = 0.25

# A daily sum that nobody stated: a whole working day.
WORKING_DAY = 30_000.0

# Pulses shorter than this have no published limit.
SHORTEST_PULSE = 100e-15

# Wavelengths are compared with this slack, which only rounding needs.
_SLACK = 1e-9


def within(wavelength: float, band: tuple[float, float]) -> bool:
    """Whether a wavelength lies in a band, ends included."""
    return band[0] * (1 - _SLACK) <= wavelength <= band[1] * (1 + _SLACK)


def dose_time(hazard: Hazard, line: Line, duration: float, daily: float | None) -> float:
    """Exposure time that counts for a hazard: the daily sum where dose adds up over a day, else the longest
    single exposure. [s]"""
    if hazard == "retina photochemical" or line.wavelength < FRONT_OF_EYE_BELOW:
        return max(duration, WORKING_DAY if daily is None else daily)
    return duration


def hazards_due(line: Line, duration: float, daily: float | None) -> tuple[Hazard, ...]:
    """Hazards that must be judged for a line and a duration."""
    due: list[Hazard] = []
    if within(line.wavelength, RETINA):
        due.append("retina thermal")
    blue_time = dose_time("retina photochemical", line, duration, daily)
    if within(line.wavelength, BLUE) and blue_time >= BLUE_FROM_TIME:
        due.append("retina photochemical")
    if line.wavelength < FRONT_OF_EYE_BELOW or line.wavelength >= FRONT_OF_EYE_FROM * (1 - _SLACK):
        due.append("cornea and lens")
    due.append("skin")
    return tuple(due)


def hazard_of(limit: Limit) -> Hazard:
    """The hazard that a limit speaks of."""
    if limit.tissue == "retina":
        return "retina photochemical" if limit.mechanism == "photochemical" else "retina thermal"
    return limit.tissue


def full_field(hazard: Hazard) -> bool:
    """Whether light from all round counts, as for the front of the eye and the skin."""
    return hazard in ("cornea and lens", "skin")
