"""The top of the site file and its tables, and what must hold between tables."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Any, cast

from lasescatter.scene import Air, Hazard, LengthUnit, Scene
from lasescatter.site.air import AirTable
from lasescatter.site.beam import BeamTable
from lasescatter.site.faults import Fault, Place, quoted
from lasescatter.site.fields import Text, Word
from lasescatter.site.ledger import Ledger
from lasescatter.site.light import lines_of
from lasescatter.site.limit import LimitTable
from lasescatter.site.observer import AVERSION, ObserverTable
from lasescatter.site.particles import ParticlesTable
from lasescatter.site.table import Seen, Table, key

FORMAT = "lasescatter site 1"
LENGTH_UNITS = ("m", "cm", "mm", "km", "ft", "in")
VISIBLE = (400e-9, 700e-9)
"""Wavelengths at which the aversion response is credited. [m]"""

_REASON = Text("the reason", "covered by the clothing rule for this bay")
Reason = Annotated[str, _REASON]


class NotJudgedTable(Table):
    """Hazards left out on purpose, each with its reason; printed on page 1."""

    retina_thermal: Reason | None = key("Why it is not judged", _REASON.example, alias="retina thermal", default=None)
    retina_photochemical: Reason | None = key(
        "Why it is not judged", _REASON.example, alias="retina photochemical", default=None
    )
    cornea_and_lens: Reason | None = key("Why it is not judged", _REASON.example, alias="cornea and lens", default=None)
    skin: Reason | None = key("Why it is not judged", _REASON.example, default=None)

    def to_scene(self) -> tuple[tuple[Hazard, str], ...]:
        """Hazard and reason of each entry."""
        found = ((field.alias or name, getattr(self, name)) for name, field in type(self).model_fields.items())
        return tuple((cast(Hazard, hazard), reason) for hazard, reason in found if reason is not None)


class SiteTable(Table):
    """A site: its beams, particles, people and limits."""

    format: Annotated[str, Word((FORMAT,))] = key("Format of this file and its version", FORMAT)
    title: Annotated[str, Text("a title", "Hazed test bay, alignment at reduced power")] = key(
        "Title of the assessment", "Hazed test bay, alignment at reduced power"
    )
    reference: Annotated[str, Text("a reference", "TB-3 rev B")] = key("Reference and revision", "TB-3 rev B")
    prepared_by: Annotated[str, Text("a role", "duty laser safety officer")] = key(
        "Role of who prepared the file", "duty laser safety officer"
    )
    lengths_in: Annotated[str, Word(LENGTH_UNITS)] | None = key(
        "Unit of points and sizes that are given as plain numbers", "m", default=None
    )
    not_judged: NotJudgedTable | None = key(
        "Hazards left out on purpose, each with its reason", {"skin": _REASON.example}, default=None
    )
    air: AirTable | None = key("The air; 20 degC, 1013.25 hPa and dry where it is left out",
                               {"temperature": "20 degC"}, default=None)  # fmt: skip
    beam: tuple[BeamTable, ...] = key("The beams", [{"name": "alignment beam"}], default=())
    particles: tuple[ParticlesTable, ...] = key("What floats in the air", [{"name": "test haze"}], default=())
    observer: tuple[ObserverTable, ...] = key("Places of eyes and skin", [{"name": "console operator"}], default=())
    limit: tuple[LimitTable, ...] = key("Exposure limits", [{"name": "eye, green, ten seconds"}], default=())

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        if not seen.stated("beam"):
            yield Fault(("beam",), "the file has no beam", "Add at least one [[beam]]")
        if not seen.stated("observer"):
            yield Fault(("observer",), "the file has no observer", "Add an [[observer]] for each place of people")
        yield from _humidity_rules(seen)
        if not seen.get("beam"):
            return
        if common_wavelength(seen.get("beam")) is None:
            for number, particles in enumerate(seen.get("particles") or ()):
                if particles.load.extinction is not None and particles.load.at is None:
                    yield Fault(("particles", number, "load", "at"), "the key is missing",
                                "The beams have several wavelengths: say at which one the extinction was "
                                'measured, for example at = "532 nm"')  # fmt: skip
        yield from _aversion_rules(seen)

    def to_scene(self, ledger: Ledger) -> Scene:
        """Everything in SI, defaults filled in and noted in the ledger."""
        unit = length_unit(self.lengths_in) or LengthUnit("m", 1.0)
        if self.lengths_in is None:
            ledger.took(("lengths_in",), "m")
        else:
            ledger.explain(("lengths_in",), f"{unit.metres:.9g} m")
        wavelength = common_wavelength(self.beam)
        return Scene(
            title=self.title, reference=self.reference, prepared_by=self.prepared_by, length_unit=unit,
            not_judged=self.not_judged.to_scene() if self.not_judged else (),
            air=self._air(ledger),
            beams=tuple(entry.to_scene(("beam", n), ledger) for n, entry in enumerate(self.beam)),
            rules=self._rules(),
            loads=tuple(entry.to_scene(("particles", n), ledger, wavelength) for n, entry in enumerate(self.particles)),
            observers=tuple(entry.to_scene(("observer", n), ledger) for n, entry in enumerate(self.observer)),
            limits=tuple(entry.to_scene(("limit", n), ledger) for n, entry in enumerate(self.limit)),
        )  # fmt: skip

    def _rules(self) -> dict[str, dict[str, Any]]:
        """What is used of the catalogue, as it was read."""
        kinds = [entry.kind.kind for entry in self.particles if entry.kind is not None]
        if not kinds:
            return {}
        indices = {name: data for kind in kinds for name, data in kind.indices.items()}
        return {"particles": {kind.name: kind.data for kind in kinds}, "indices": indices}

    def _air(self, ledger: Ledger) -> Air:
        return (self.air or AirTable()).to_scene(("air",), ledger)


def length_unit(name: object) -> LengthUnit | None:
    """The unit that `lengths_in` names; None for anything that is none of them."""
    metres = {"m": 1.0, "cm": 0.01, "mm": 0.001, "km": 1000.0, "ft": 0.3048, "in": 0.0254}
    return LengthUnit(name, metres[name]) if isinstance(name, str) and name in metres else None


def _wavelengths(beam: BeamTable) -> Iterator[tuple[Place, str, float]]:
    for line in lines_of(Seen(dict(beam))):
        yield line.place, line["name"], float(line["wavelength"])


def common_wavelength(beams: tuple[BeamTable, ...]) -> float | None:
    """The wavelength of all lines of all beams, where they share one. [m]"""
    found = {wavelength for beam in beams for _, _, wavelength in _wavelengths(beam)}
    return found.pop() if len(found) == 1 else None


def _humidity_rules(seen: Seen) -> Iterator[Fault]:
    """Moist particles are not computed in air more humid than their growth is known for."""
    air = seen.get("air")
    humidity = None if air is None else air.relative_humidity
    for particles in seen.get("particles") or ():
        if humidity is not None and particles.kind is not None and humidity > particles.kind.most_humidity:
            most = 100 * particles.kind.most_humidity
            yield Fault(("air", "relative_humidity"),
                        f"{quoted(particles.name)} takes up water, and how much is known up to {most:g} % only",
                        "Give a humidity within that range, or enter the load by its wet sizes and index")  # fmt: skip
            return


def _aversion_rules(seen: Seen) -> Iterator[Fault]:
    """0.25 s may stand only where no beam lies outside 400 nm to 700 nm."""
    unseen = [
        (name, wavelength)
        for beam in seen.get("beam") for _, name, wavelength in _wavelengths(beam)
        if not VISIBLE[0] <= wavelength <= VISIBLE[1]
    ]  # fmt: skip
    for number, observer in enumerate(seen.get("observer") or ()):
        single = observer.durations is None
        for position, value in enumerate(observer.durations or (observer.duration,)):
            if unseen and value <= AVERSION and observer.viewing == "unintended":
                name, wavelength = unseen[0]
                place: Place = ("observer", number, *(("duration",) if single else ("durations", position)))
                yield Fault(place, f"{value:g} s does not count for {quoted(name)} at {wavelength * 1e9:.5g} nm",
                            "0.25 s is accepted for unintended viewing at 400 nm to 700 nm only: nobody turns away "
                            "from light that is not seen. Give a longer time, for example 10 s")  # fmt: skip
