"""How numbers are printed: digits, handy units, and words for what has no number.

"1.2346e-6" means 1.2346 × 10⁻⁶; it can be keyed into a calculator as it stands.
"""

from __future__ import annotations

import math

from lasescatter.scene import LengthUnit, Line, Vector

ABSENT = "–"


def digits(value: float | None, count: int = 3) -> str:
    """A number to `count` significant digits."""
    if value is None or math.isnan(value):
        return ABSENT
    if math.isinf(value):
        return "no end" if value > 0 else "-no end"
    if value == 0:
        return "0"
    mantissa, exponent = f"{value:.{count - 1}e}".split("e")
    power = int(exponent)
    if -3 <= power < max(5, count):
        return f"{value:.{max(0, count - 1 - power)}f}"
    return f"{mantissa}e{power}"


def signed_interval(value: float, error: float, count: int = 3) -> str:
    """A value with its error, to the digits that the error leaves: "1.23e-6 ± 2e-8", "1.2e-6 ± 3e-7".

    An error below the last digit printed is told as that: "1.23e-6 ± <1e-8".
    """
    if not value or not math.isfinite(value) or not math.isfinite(error) or error <= 0:
        return f"{digits(value, count)} ± {digits(error, 1)}"
    first = math.floor(math.log10(abs(value)))
    last = math.floor(math.log10(error))
    kept = min(count, max(1, first - last + 1))
    unit = first - count + 1
    # An estimate of the error is good for its size, not for digits that are not printed.
    shown = digits(error, 1) if last >= unit else f"<{digits(10.0**unit, 1)}"
    return f"{digits(value, kept)} ± {shown}"


def trimmed(value: float) -> str:
    """A number as short as it can be said exactly to six digits."""
    text = digits(value, 6)
    if "e" in text:
        mantissa, power = text.split("e")
        return f"{_without_zeros(mantissa)}e{power}"
    return _without_zeros(text)


def _without_zeros(text: str) -> str:
    return text.rstrip("0").rstrip(".") if "." in text else text


def degrees(angle: float, count: int = 5) -> str:
    """An angle in degrees."""
    return digits(math.degrees(angle), count)


def wavelength(value: float) -> str:
    """For example "532 nm"."""
    return f"{trimmed(value * 1e9)} nm"


def length(value: float | None, unit: LengthUnit, count: int = 3) -> str:
    """A length in the site's own unit, with metres beside any other."""
    if value is None or not math.isfinite(value):
        return digits(value)
    metres = f"{digits(value, count)} m"
    if unit.metres == 1.0:
        return metres
    return f"{digits(value / unit.metres, count)} {unit.name} ({metres})"


def small_length(value: float | None, count: int | None = 3) -> str:
    """A length in the handiest of nm, µm, mm, m; without a digit count as short as it was entered."""
    if value is None:
        return ABSENT
    factor, name = next(
        ((factor, name) for factor, name in ((1.0, "m"), (1e-3, "mm"), (1e-6, "µm")) if abs(value) >= factor),
        (1e-9, "nm"),
    )
    return f"{trimmed(value / factor) if count is None else digits(value / factor, count)} {name}"


def point(position: Vector, unit: LengthUnit) -> str:
    """A point in the site's unit: "(4, 1.5, 1.6) m"."""
    inner = ", ".join(trimmed(value / unit.metres) for value in position)
    return f"({inner}) {unit.name}"


def duration(value: float | None) -> str:
    """A time in seconds, in a smaller unit where it is short, in hours beside it where it is long."""
    if value is None or not math.isfinite(value):
        return digits(value)
    for factor, name in ((1.0, "s"), (1e-3, "ms"), (1e-6, "µs"), (1e-9, "ns"), (1e-12, "ps")):
        if value >= factor or name == "ps":
            text = f"{trimmed(value / factor)} {name}"
            return f"{text} ({_without_zeros(digits(value / 3600, 3))} h)" if value >= 3600 else text
    return digits(value)


_PER_CM2 = {
    "W/m²": (0.1, "mW/cm²"),
    "J/m²": (1e-4, "J/cm²"),
    "W/(m²·sr)": (1e-4, "W/(cm²·sr)"),
    "J/(m²·sr)": (1e-4, "J/(cm²·sr)"),
}


def per_square_centimetre(value: float, unit: str) -> str:
    """The same exposure per square centimetre, as many limit tables print it; "" for other units."""
    if unit not in _PER_CM2:
        return ""
    factor, name = _PER_CM2[unit]
    return f"{trimmed(float(f'{value * factor:.6g}'))} {name}"


def counted(count: int, what: str) -> str:
    """A number of things: "1 pulse", "2 pulses"."""
    return f"{count} {what}{'' if count == 1 else 's'}"


def optical_density(value: float) -> str:
    """An optical density rounded up to a tenth; 0 where none is needed."""
    return f"{math.ceil(10 * value) / 10:.1f}" if value > 0 else "0"


def long_time(value: float) -> str:
    """A time, in hours where it is one hour or longer."""
    return f"{_without_zeros(digits(value / 3600, 3))} h" if value >= 3600 else duration(value)


def light(line: Line) -> str:
    """What a line emits, in words."""
    pulses = line.pulses
    if pulses is None:
        return f"{trimmed(line.power)} W continuous"
    train = f"at {trimmed(pulses.rate)} Hz" if pulses.rate is not None else counted(pulses.count or 1, "pulse")
    return f"{trimmed(pulses.energy)} J in {duration(pulses.duration)}, {train}"


def line_label(beam: str, line: str) -> str:
    """A beam line by name: the beam's alone where it has but one line."""
    return beam if line in ("", beam) else f"{beam} / {line}"
