"""The tables [[beam.line]] and [beam.pulses], and what one line of a beam is with the beam's values filled in."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Annotated, Any, cast

from pydantic import ValidationInfo

from lasescatter.scene import Line, Polarization, Pulses, Vector
from lasescatter.site.faults import Fault, Place, quoted, refusal
from lasescatter.site.fields import (
    Direction,
    Marker,
    Number,
    Quantity,
    Text,
    Vector3,
    Wavelength,
    Word,
    read_direction,
)
from lasescatter.site.ledger import Ledger
from lasescatter.site.table import Seen, Table, choice, key

MOST_POWER = 1e6
"""Mean power of one line. [W]"""
NEAREST_TO_BEAM = math.radians(10)
"""A stated field axis nearer to the beam's direction than this is refused: projected, it hardly says anything."""
DEFAULT_PURITY = 100.0
LONGEST_OF_COMMON_LASERS = 20e-6
"""Carbon dioxide lasers reach 11 um; a stated wavelength beyond this is often a mistyped unit. [m]"""

PulseEnergy = Annotated[float, Quantity("energy", "1 pJ", "10 kJ", "10 mJ")]
PulseDuration = Annotated[float, Quantity("time", "1 fs", "1 s", "8 ns")]
PulseRate = Annotated[float, Quantity("rate", "0.0001 Hz", "100 GHz", "20 Hz")]
Power = Annotated[float, Quantity("power", "0 W", "1 MW", "2 W", above_low=True)]
Diameter = Annotated[float, Quantity("length", "1 um", "10 m", "3 mm")]
Divergence = Annotated[
    float,
    Quantity("angle", "0 rad", "1 rad", "1.0 mrad", above_low=True, hint="a beam that converges is not computed"),
]
PolarizationWord = Annotated[str, Word(("linear", "circular", "unpolarized", "unknown"))]
Purity = Annotated[float, Number(1, 1e6, "100")]


class FieldAxis(Marker):
    """vertical, horizontal or a direction."""

    def read(self, value: Any, info: ValidationInfo) -> str | Direction:
        if isinstance(value, list):
            return read_direction(value, "[0, 0, 1]")
        if value in ("vertical", "horizontal"):
            return cast(str, value)
        raise refusal(f"{quoted(value)} is not an axis of the electric field",
                      'Write "vertical", "horizontal" or a direction such as [0, 0, 1]')  # fmt: skip

    def schema(self) -> dict[str, Any]:
        return {"anyOf": [{"type": "string", "enum": ["vertical", "horizontal"]}, Vector3("").schema()]}


FieldDirection = Annotated[str | Direction, FieldAxis()]


class PulsesTable(Table):
    """A pulse train, or a counted number of pulses."""

    energy: PulseEnergy = key("Energy of one pulse", "10 mJ")
    duration: PulseDuration = key("Duration of one pulse", "8 ns")
    rate: PulseRate | None = key("Repetition rate; or give count", "20 Hz", default=None)
    count: Annotated[int, Number(1, 10**9, "1", whole=True)] | None = key(
        "Number of pulses, where there is no rate", 1, default=None
    )
    hot_spot: Annotated[float, Number(1, 1000, "1.5")] | None = key(
        "Peak over the ideal profile, at least 1; multiplies direct exposure. 1 where it is left out", 1.5,
        default=None,
    )  # fmt: skip

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        yield from choice("rate", "count", seen, 'rate = "20 Hz"')
        if seen.good("duration", "rate") and seen.get("duration") * seen.get("rate") >= 1:
            yield Fault(("rate",), "at this rate the next pulse begins before the last one ends",
                        "Check rate and duration; a beam that is always on is given by power instead")  # fmt: skip
        if seen.good("energy", "rate") and seen.get("energy") * seen.get("rate") > MOST_POWER:
            power = seen.get("energy") * seen.get("rate")
            yield Fault(("energy",), f"energy times rate is a mean power of {power:.3g} W",
                        f"Keep it to {MOST_POWER / 1e6:g} MW, and check both units")  # fmt: skip

    def to_scene(self, place: Place, ledger: Ledger) -> tuple[Pulses, float]:
        """The pulses and their mean power (0 for counted pulses). [W]"""
        if self.hot_spot is None:
            ledger.took((*place, "hot_spot"), "1")
        rate = None if self.rate is None else float(self.rate)
        pulses = Pulses(float(self.energy), float(self.duration), rate, self.count, float(self.hot_spot or 1.0))
        return pulses, pulses.energy * rate if rate else 0.0


class LineTable(Table):
    """One of several wavelengths on a beam's path; what it leaves out is the beam's."""

    name: Annotated[str, Text("a name", "green")] = key("Name of the line, unique in its beam", "green")
    wavelength: Wavelength = key("Wavelength in vacuum", "532 nm")
    power: Power | None = key("Power of a continuous line; or give pulses", "2 W", default=None)
    pulses: PulsesTable | None = key(
        "Pulses instead of a continuous power", {"energy": "10 mJ", "duration": "8 ns", "rate": "20 Hz"}, default=None
    )
    diameter: Diameter | None = key("Where it differs from the beam's", "3 mm", default=None)
    divergence: Divergence | None = key("Where it differs from the beam's", "1.0 mrad", default=None)
    polarization: PolarizationWord | None = key("Where it differs from the beam's", "linear", default=None)
    electric_field: FieldDirection | None = key("Where it differs from the beam's", "vertical", default=None)
    polarization_ratio: Purity | None = key("Where it differs from the beam's", 100, default=None)

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        yield from choice("power", "pulses", seen, 'power = "2 W"')


@dataclass(frozen=True)
class LineValues:
    """One line of a beam, the beam's values filled in where the line is silent."""

    place: Place
    """Of the line in its beam; () for a beam without lines of its own."""
    values: Mapping[str, Any]
    holders: Mapping[str, Place]
    """Place in the beam of the table that states each value, or would."""

    def __getitem__(self, name: str) -> Any:
        return self.values[name]

    def key(self, name: str) -> Place:
        """Place of one of its keys in the beam."""
        return (*self.holders.get(name, self.place), name)


_OWN = ("name", "wavelength", "power", "pulses")
_SHARED = ("diameter", "divergence", "polarization", "electric_field", "polarization_ratio")
_OF_LINEAR_LIGHT = ("electric_field", "polarization_ratio")


def lines_of(beam: Seen) -> Iterator[LineValues]:
    """The lines of a beam as far as its keys read well; one where it has no [[beam.line]]."""
    if not beam.stated("line"):
        yield LineValues((), {name: beam.get(name) for name in (*_OWN, *_SHARED)}, {})
        return
    for number, line in enumerate(beam.get("line") or ()):
        values = {name: getattr(line, name) for name in (*_OWN, *_SHARED)}
        holders: dict[str, Place] = {}
        for name in _SHARED:
            wanted = name not in _OF_LINEAR_LIGHT or values["polarization"] == "linear"
            if values[name] is None and wanted and beam.get(name) is not None:
                values[name], holders[name] = beam.get(name), ()
        yield LineValues(("line", number), values, holders)


def line_rules(line: LineValues, beam: Seen) -> Iterator[Fault]:
    """Rules on one line with the beam's own values filled in."""
    for name, example in (("diameter", "3 mm"), ("divergence", "1.0 mrad")):
        if line[name] is None and not beam.stated(name):
            where = "; it may stand in the beam too" if line.place else ""
            yield Fault(line.key(name), "the key is missing", f'Add it, for example {name} = "{example}"{where}')
    unreadable = line["polarization"] is None and beam.stated("polarization")
    if line["polarization"] != "linear" and not unreadable:
        for name in _OF_LINEAR_LIGHT:
            if line[name] is not None:
                yield Fault(line.key(name), f"{name} is given and the light is not stated to be linear",
                            f'Set polarization = "linear", or leave {name} out')  # fmt: skip
    if line["polarization"] == "linear" and line["electric_field"] is not None and beam.good("path"):
        leg = first_leg(beam.get("path"))
        if leg is not None and field_axis(line["electric_field"], leg) is None:
            upright = line["electric_field"] == "horizontal"
            yield Fault(line.key("electric_field"),
                        "the first leg is nearly upright, and horizontal does not say which way the field lies there"
                        if upright else
                        "the axis lies nearly along the first leg of the beam, and the field is square to the beam",
                        "Give a direction [x, y, z] that is more than 10 degrees away from the beam")  # fmt: skip
    if beam.good("profile", "diameter_criterion"):
        yield from _diffraction_rule(line, beam.get("profile"), beam.get("diameter_criterion"))


def to_standard(criterion: str) -> float:
    """Factor from a diameter or divergence at the stated criterion to the one used inside.

    A gaussian falls to 1/e² at √2 times the diameter at which it falls to 1/e.
    """
    return math.sqrt(2) if criterion == "1/e" else 1.0


def _diffraction_rule(line: LineValues, profile: str, criterion: str) -> Iterator[Fault]:
    """No beam spreads less than diffraction makes it: 4λ/(πd) for a gaussian at 1/e², λ/d for a top-hat."""
    wavelength, diameter, divergence = line["wavelength"], line["diameter"], line["divergence"]
    if wavelength is None or diameter is None or divergence is None:
        return
    scale = to_standard(criterion)
    if profile == "gaussian":
        least, formula = 4 * wavelength / (math.pi * diameter * scale), "4 λ/(π d) at 1/e²"
    else:
        least, formula = wavelength / diameter, "λ/d"
    if divergence * scale < least:
        # A wavelength in um where nm was meant is a thousand times too long, and its limit too wide.
        mistyped = wavelength > LONGEST_OF_COMMON_LASERS or least > 10 * divergence * scale
        read_as = f"{wavelength * 1e6:.6g} um"
        doubt = f"; check the unit of wavelength (read as {read_as}) and of diameter" if mistyped else ""
        yield Fault(line.key("divergence"),
                    f"{divergence * 1e3:.3g} mrad is below the diffraction limit of this beam ({formula})",
                    f"Give the full angle, at least {_rounded_up(least / scale * 1e3)} mrad for this wavelength "
                    f"and diameter; a beam that converges is not computed{doubt}")  # fmt: skip


def _rounded_up(value: float) -> str:
    """Three digits, never less than the value."""
    step = 10.0 ** (math.floor(math.log10(value)) - 2)
    return f"{math.ceil(value / step) * step:.3g}"


def first_leg(path: tuple[Vector, ...]) -> Vector | None:
    """Direction of the first leg; None where there is none."""
    if len(path) < 2 or path[0] == path[1]:
        return None
    return direction(path[0], path[1])


def direction(start: Vector, end: Vector) -> Vector:
    """Unit vector from one point to another."""
    length = math.dist(start, end)
    x, y, z = ((b - a) / length for a, b in zip(start, end, strict=True))
    return x, y, z


def field_axis(stated: str | Direction, leg: Vector) -> Vector | None:
    """The stated axis of the field made square to the first leg; None where it lies nearly along it.

    "horizontal" is never along a beam, but says next to nothing for one that is nearly upright: None too.
    """
    if stated == "horizontal":
        return _unit((-leg[1], leg[0], 0.0))
    given = (0.0, 0.0, 1.0) if isinstance(stated, str) else stated
    along = sum(g * u for g, u in zip(given, leg, strict=True))
    x, y, z = (g - along * u for g, u in zip(given, leg, strict=True))
    return _unit((x, y, z))


def _unit(across: Vector) -> Vector | None:
    size = math.hypot(*across)
    if size < math.sin(NEAREST_TO_BEAM):
        return None
    x, y, z = (value / size + 0.0 for value in across)
    return x, y, z


def line_to_scene(line: LineValues, criterion: str, path: tuple[Vector, ...], place: Place, ledger: Ledger) -> Line:
    """One line in SI; `place` is the beam's, `path` and `criterion` are the beam's too."""
    polarization = line["polarization"]
    if polarization is None:
        polarization = "unknown"
        ledger.took((*place, *line.key("polarization")), "unknown (worst axis)")
    axis, purity = None, DEFAULT_PURITY
    if polarization == "linear":
        axis = _axis_to_scene(line, path, place, ledger)
        if line["polarization_ratio"] is None:
            ledger.took((*place, *line.key("polarization_ratio")), f"{DEFAULT_PURITY:g}")
        else:
            purity = float(line["polarization_ratio"])
    pulses, power = None, float(line["power"] or 0.0)
    if line["pulses"] is not None:
        pulses, power = line["pulses"].to_scene((*place, *line.key("pulses")), ledger)
    scale = to_standard(criterion)
    diameter, divergence = float(line["diameter"]) * scale, float(line["divergence"]) * scale
    if scale != 1.0:
        for name, value, unit in (("diameter", diameter, "m"), ("divergence", divergence, "rad")):
            ledger.explain((*place, *line.key(name)), f"{value / scale:.9g} {unit} at 1/e, {value:.9g} {unit} at 1/e²")
    return Line(
        name=line["name"], wavelength=float(line["wavelength"]), power=power, pulses=pulses, diameter=diameter,
        divergence=divergence, polarization=cast(Polarization, polarization), electric_field=axis,
        polarization_ratio=purity, key=ledger.spell((*place, *line.place)),
    )  # fmt: skip


def _axis_to_scene(line: LineValues, path: tuple[Vector, ...], place: Place, ledger: Ledger) -> Vector | None:
    where = (*place, *line.key("electric_field"))
    leg = first_leg(path)
    if line["electric_field"] is None or leg is None:
        ledger.took(where, "not stated (worst axis)")
        return None
    axis = field_axis(line["electric_field"], leg)
    if axis is not None:
        ledger.explain(where, "({:.6g}, {:.6g}, {:.6g}) on the first leg".format(*axis))
    return axis
