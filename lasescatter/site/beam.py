"""The tables [[beam]] and [beam.beam_stop]."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Annotated, Literal, cast

from lasescatter.scene import Beam, Profile, Stop, Vector
from lasescatter.site.contract import NOT_BUILT_STOPS
from lasescatter.site.faults import Fault, Place, quoted
from lasescatter.site.fields import (
    Direction,
    Flag,
    Fraction,
    PlacePoint,
    Text,
    Vector3,
    Wavelength,
    Word,
    vector,
)
from lasescatter.site.ledger import Ledger
from lasescatter.site.light import (
    Diameter,
    Divergence,
    FieldDirection,
    LineTable,
    PolarizationWord,
    Power,
    PulsesTable,
    Purity,
    direction,
    line_rules,
    line_to_scene,
    lines_of,
)
from lasescatter.site.table import Seen, Table, choice, key

MOST_POINTS = 200
SHORTEST_LEG = 1e-9
"""Points nearer to each other than this are the same point. [m]"""


class StopTable(Table):
    """The matt surface that ends a beam."""

    reflectance: Annotated[float, Fraction("0.3")] = key(
        "Share of the light that the surface sends back, 0 to 1 or in per cent", 0.3
    )
    facing: Annotated[Direction, Vector3("[-1, 0, 0]")] = key(
        "Direction that the lit side faces, of any length", [-1, 0, 0]
    )
    finish: Annotated[str, Word(("matt",), NOT_BUILT_STOPS)] = key("How the surface reflects: matt", "matt")


class BeamTable(Table):
    """One path, with one wavelength or several."""

    name: Annotated[str, Text("a name", "alignment beam")] = key(
        "Name of the beam, unique in the file", "alignment beam"
    )
    wavelength: Wavelength | None = key("Wavelength in vacuum; or give [[beam.line]]", "532 nm", default=None)
    power: Power | None = key("Power of a continuous beam; or give pulses", "2 W", default=None)
    pulses: PulsesTable | None = key(
        "Pulses instead of a continuous power", {"energy": "10 mJ", "duration": "8 ns", "rate": "20 Hz"}, default=None
    )
    line: tuple[LineTable, ...] = key(
        "Several wavelengths on one path", [{"name": "green", "wavelength": "532 nm", "power": "2 W"}], default=()
    )
    polarization: PolarizationWord | None = key(
        "linear, circular, unpolarized or unknown; unknown (the worst axis) where it is left out", "linear",
        default=None,
    )  # fmt: skip
    electric_field: FieldDirection | None = key(
        "Axis of the field at the start, for linear light: vertical, horizontal or a direction; "
        "it is projected square to the first leg. The worst axis where it is left out", "vertical", default=None,
    )  # fmt: skip
    polarization_ratio: Purity | None = key(
        "Purity r of r:1 for linear light; 100 where it is left out", 100, default=None
    )
    mirrors: Annotated[str, Word(("real", "ideal"))] | None = key(
        "real: after a mirror the axis counts as known only within 1 degree of its s or p direction; "
        "ideal: the axis is turned by reflection. real where it is left out", "real", default=None,
    )  # fmt: skip
    profile: Annotated[str, Word(("gaussian", "top-hat"))] = key("gaussian or top-hat", "gaussian")
    diameter: Diameter | None = key("Diameter at the start of the path, by diameter_criterion", "3 mm", default=None)
    diameter_criterion: Annotated[str, Word(("1/e2", "1/e", "edge"))] = key(
        "Where the diameter is measured: 1/e2 or 1/e of the peak (gaussian), edge (top-hat)", "1/e2"
    )
    divergence: Divergence | None = key("Full angle, by the same criterion", "1.0 mrad", default=None)
    path: tuple[PlacePoint, ...] = key("Start, mirrors and end of the beam", [[0, 0, 1.2], [9, 0, 1.2]])
    mirror_reflectance: tuple[Annotated[float, Fraction("0.99", above_low=True)], ...] | None = key(
        "Reflectance of each mirror, one per inner point of path; 1 where it is left out", [0.99], default=None
    )
    leaves_site: Annotated[bool, Flag()] | None = key(
        "true: the beam goes on without end past its last point; or give beam_stop", True, default=None
    )
    beam_stop: StopTable | None = key(
        "The surface that ends the beam", {"reflectance": 0.3, "facing": [-1, 0, 0], "finish": "matt"}, default=None
    )

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        yield from _source_rules(seen)
        yield from _path_rules(seen)
        yield from _end_rules(seen)
        yield from _shape_rules(seen)
        lines = list(lines_of(seen))
        for line in lines:
            yield from line_rules(line, seen)
        if seen.get("line") and not any(line["polarization"] == "linear" for line in lines):
            for name in ("electric_field", "polarization_ratio"):
                if seen.good(name):
                    yield Fault((name,), f"{name} is given and none of the beam's lines is stated to be linear",
                                f'Set polarization = "linear", or leave {name} out')  # fmt: skip

    def to_scene(self, place: Place, ledger: Ledger) -> Beam:
        """The beam in SI, all defaults filled in."""
        points = tuple(vector(point) for point in self.path)
        inner = len(points) - 2
        mirrors = self.mirrors or "real"
        if self.mirrors is None and inner:
            ledger.took((*place, "mirrors"), mirrors)
        reflectances = tuple(float(value) for value in self.mirror_reflectance or ())
        if inner and not reflectances:
            reflectances = (1.0,) * inner
            ledger.took((*place, "mirror_reflectance"), "1 at each mirror")
        stop = None
        if self.beam_stop is not None:
            stop = Stop(float(self.beam_stop.reflectance), vector(self.beam_stop.facing))
        lines = tuple(
            line_to_scene(line, self.diameter_criterion, points, place, ledger) for line in lines_of(Seen(dict(self)))
        )
        return Beam(
            name=self.name, lines=lines, profile=cast(Profile, self.profile), points=points,
            mirror_reflectance=reflectances, mirrors=cast(Literal["real", "ideal"], mirrors),
            leaves_site=bool(self.leaves_site), stop=stop, key=ledger.spell(place),
        )  # fmt: skip


def _source_rules(seen: Seen) -> Iterator[Fault]:
    """One wavelength with power or pulses, or lines that have them."""
    if seen.stated("line"):
        for name in ("wavelength", "power", "pulses"):
            if seen.stated(name):
                yield Fault((name,), f"{name} is given for the beam, and the beam has lines of its own as well",
                            f"Give {name} inside each [[beam.line]], or leave the lines out")  # fmt: skip
        return
    if not seen.stated("wavelength"):
        yield Fault(("wavelength",), "the key is missing", 'Add it, for example wavelength = "532 nm", '
                    "or give several wavelengths as [[beam.line]]")  # fmt: skip
    yield from choice(
        "power", "pulses", seen, 'power = "2 W"', ": power for a continuous beam, pulses for a pulsed one"
    )


def _shape_rules(seen: Seen) -> Iterator[Fault]:
    if seen.good("profile", "diameter_criterion"):
        profile, criterion = seen.get("profile"), seen.get("diameter_criterion")
        if (profile == "top-hat") != (criterion == "edge"):
            right = '"edge"' if profile == "top-hat" else '"1/e2" or "1/e"'
            yield Fault(("diameter_criterion",), f"{quoted(criterion)} does not go with a {profile} profile",
                        f"A {profile} beam takes {right}; see which one the data sheet means")  # fmt: skip


def _path_rules(seen: Seen) -> Iterator[Fault]:
    if not seen.good("path"):
        return
    points = seen.get("path")
    if not 2 <= len(points) <= MOST_POINTS:
        yield Fault(("path",), f"the path has {len(points)} {'point' if len(points) == 1 else 'points'}",
                    f"Give its start, its mirrors and its end: 2 to {MOST_POINTS} points")  # fmt: skip
        return
    for number in range(1, len(points)):
        if math.dist(points[number - 1], points[number]) <= SHORTEST_LEG:
            yield Fault(("path", number), "this point is the same as the one before it",
                        "Leave one of them out: each leg of the path must have a length")  # fmt: skip
    reflectances = seen.get("mirror_reflectance")
    if reflectances is not None and len(reflectances) != len(points) - 2:
        yield Fault(("mirror_reflectance",),
                    f"{len(reflectances) or 'none'} given and {len(points) - 2} due",
                    "Give one number for each mirror (inner point of path), in its order, or leave the key out, "
                    "which takes each as 1")  # fmt: skip


def _end_rules(seen: Seen) -> Iterator[Fault]:
    """A beam leaves the site or ends on a stop that faces it."""
    stops = seen.stated("beam_stop")
    if seen.get("leaves_site") and stops:
        yield Fault(("leaves_site",), "the beam leaves the site and also has a beam_stop",
                    "Keep the one that is true: what ends the beam for certain is a beam_stop")  # fmt: skip
    elif not stops and (seen.get("leaves_site") is False or not seen.stated("leaves_site")):
        yield Fault(("leaves_site",), "the file does not say how the beam ends",
                    "Add a [beam.beam_stop] table, or leaves_site = true where nothing ends it")  # fmt: skip
    stop: StopTable | None = seen.get("beam_stop")
    path: tuple[Vector, ...] = seen.get("path") or ()
    if stop is not None and len(path) >= 2 and math.dist(path[-2], path[-1]) > SHORTEST_LEG:
        leg = direction(path[-2], path[-1])
        if sum(n * u for n, u in zip(stop.facing, leg, strict=True)) > -1e-3:
            back = ", ".join(f"{0.0 - component:.3g}" for component in leg)
            yield Fault(("beam_stop", "facing"), "the stop does not face the beam that arrives",
                        f"Its lit side faces back along the last leg, as [{back}] does here")  # fmt: skip
