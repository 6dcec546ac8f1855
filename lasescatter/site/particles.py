"""The table [[particles]]: one sort of particles, described in exactly one way, in one region."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import Annotated, Any, cast

from pydantic import field_validator

from lasescatter.matter import (
    ENTERED,
    HenyeyGreenstein,
    Index,
    Material,
    MeasuredMatrix,
    SizeMode,
    SizeTable,
    Trust,
)
from lasescatter.scene import Load
from lasescatter.site.faults import Fault, Place, quoted, refusal
from lasescatter.site.fields import Fraction, Number, Quantity, RefractiveIndex, Text
from lasescatter.site.files import FromFile, TableFile
from lasescatter.site.index_csv import index_table
from lasescatter.site.kinds import KindName, NamedKind, growth_text, index_text, mode_text
from lasescatter.site.ledger import Ledger
from lasescatter.site.load import LoadTable
from lasescatter.site.matrix_csv import measured_matrix
from lasescatter.site.region import RegionTable
from lasescatter.site.sizes import SizesTable, modes_of, weight_faults
from lasescatter.site.table import Seen, Table, key

MOST_MODES = 20

STAND_IN = Trust("stand-in", 5.0, "a Henyey–Greenstein function stands in for the scattering matrix")
CUT_TABLE = Trust(
    "weak",
    3.0,
    "the table of sizes ends where its particles still have a fifth or more of their greatest cross-section",
)
MUCH_LEFT = 0.2
MATRIX = Trust("entered", 1.0, "the scattering matrix is the user's own")
MATRIX_WITHOUT_F12 = Trust(
    "entered", 2.0, "the scattering matrix is the user's own, without F12: linear light may be up to twice as much"
)

_STAND_INS = ("matrix_file", "henyey_greenstein")
_WAYS = (
    'Give kind = "glycol haze" (any kind of the catalogue), or sizes with index, or matrix_file with albedo, or '
    "henyey_greenstein with albedo"
)


class ParticlesTable(Table):
    """One sort of particles in one region."""

    name: Annotated[str, Text("a name", "test haze")] = key("Name of the particles, unique in the file", "test haze")
    kind: Annotated[NamedKind, KindName("glycol haze")] | None = key(
        "Kind of particles, from the catalogue; sizes, index and density may replace what it says", "glycol haze",
        default=None,
    )  # fmt: skip
    sizes: tuple[SizesTable, ...] = key(
        "How large the dry particles are: one table, or [[particles.sizes]] with weight for several modes",
        {"shape": "lognormal", "median_radius": "0.5 um", "geometric_sd": 1.6},
        default=(),
    )
    index: Annotated[complex, RefractiveIndex()] | None = key(
        "Refractive index n + ki at the laser's wavelength; absorption is positive", "1.43 + 1e-6i", default=None
    )
    index_file: Annotated[FromFile, TableFile(index_table, "index.csv")] | None = key(
        "CSV file with the refractive index: wavelength [nm], n, k", "index.csv", default=None
    )
    density: Annotated[float, Quantity("density", "10 kg/m^3", "30000 kg/m^3", "1.06 g/cm^3")] | None = key(
        "Density of the particles, for a load by mass", "1.06 g/cm^3", default=None
    )
    matrix_file: Annotated[FromFile, TableFile(measured_matrix, "matrix.csv")] | None = key(
        "CSV file with a measured scattering matrix: angle [deg], F11 and optionally F12/F11, F33/F11, F34/F11; "
        "instead of kind or sizes, with albedo", "matrix.csv", default=None,
    )  # fmt: skip
    henyey_greenstein: Annotated[float, Number(-0.99, 0.99, "0.8")] | None = key(
        "Asymmetry of a Henyey-Greenstein function: a stand-in without polarization, for want of anything better; "
        "with albedo", 0.8, default=None,
    )  # fmt: skip
    albedo: Annotated[float, Fraction("0.95", above_low=True)] | None = key(
        "Scattered share of the extinction, beside matrix_file or henyey_greenstein", 0.95, default=None
    )
    load: LoadTable = key("How much there is", {"extinction": "0.01 /m", "at": "532 nm"})
    region: RegionTable = key("Where the particles are", {"shape": "box", "from": [1, -2, 0], "to": [8, 2, 3]})
    steady_by: Annotated[str, Text("the role of who vouches for a steady load", "haze operator")] | None = key(
        "Who vouches that the load neither thins nor clears; leave it out where nobody does",
        "haze operator",
        default=None,
    )

    @field_validator("sizes", mode="before")
    @classmethod
    def _one_or_several(cls, value: Any) -> Any:
        if isinstance(value, list) and len(value) > MOST_MODES:
            raise refusal(f"there are {len(value)} modes of sizes", f"Give at most {MOST_MODES}")
        if isinstance(value, list) and not value:
            raise refusal("there are no sizes", 'Give at least one mode, for example shape = "lognormal"')
        return [value] if isinstance(value, dict) else value

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        stand_in = next((name for name in _STAND_INS if seen.stated(name)), None)
        if stand_in is not None:
            yield from _stand_in_rules(seen, stand_in)
        else:
            if seen.stated("albedo"):
                yield Fault(("albedo",), "the albedo of spheres follows from sizes and index",
                            "Leave it out; it belongs to matrix_file or henyey_greenstein")  # fmt: skip
            if seen.stated("kind"):
                yield from _kind_rules(seen)
            else:
                yield from _sphere_rules(seen)
        if seen.get("sizes"):
            yield from weight_faults(seen.get("sizes"))

    def to_scene(self, place: Place, ledger: Ledger, common_wavelength: float | None) -> Load:
        """The load in SI; `common_wavelength` is that of all beams, where they share one."""
        grows = self.kind is not None and self.kind.grows
        reading = self.load.to_scene((*place, "load"), ledger, common_wavelength, grows)
        if self.steady_by is None:
            ledger.took((*place, "steady_by"), "nobody: the load may thin and clear")
        load = Load(
            name=self.name, modes=(), material=None, reading=reading, region=self.region.to_scene(),
            steady_by=self.steady_by, key=ledger.spell(place),
        )  # fmt: skip
        if self.matrix_file is not None:
            matrix = cast(MeasuredMatrix, self.matrix_file.content)
            trust = MATRIX if matrix.f12 is not None else MATRIX_WITHOUT_F12
            return replace(load, stand_in=matrix, albedo=self.albedo, trust=trust)
        if self.henyey_greenstein is not None:
            asymmetry = HenyeyGreenstein(self.henyey_greenstein)
            return replace(load, stand_in=asymmetry, albedo=self.albedo, trust=STAND_IN)
        if self.kind is not None:
            return self._of_kind(load, self.kind, place, ledger)
        index = cast(Index, self._own_index())
        modes, material = modes_of(self.sizes), Material(index, self._own_density())
        return replace(load, modes=modes, material=material, trust=CUT_TABLE if _is_cut(modes) else ENTERED)

    def _of_kind(self, load: Load, named: NamedKind, place: Place, ledger: Ledger) -> Load:
        """The load of a kind; what the entry states itself replaces what the kind says."""
        kind, index, density = named.kind, self._own_index(), self._own_density()
        trust, span, modes = kind.trust, kind.size_span, kind.modes
        if self.sizes:
            trust, span, modes = kind.trust_with_own_sizes, None, modes_of(self.sizes)
            if _is_cut(modes) and trust.factor < CUT_TABLE.factor:
                trust = CUT_TABLE
        material = kind.material
        if index is not None:
            material = replace(material, index=index)
        if density is not None:
            material = replace(material, density=density)
        growth = next((entry.growth for entry in named.materials if entry.growth is not None), None)
        ledger.explain((*place, "kind"),
                       f"{named}; {growth_text(growth)}; trust: {trust.mark}, factor {trust.factor:g}")  # fmt: skip
        if not self.sizes:
            several = len(modes) > 1
            for number, mode in enumerate(modes):
                step: Place = ("sizes", number) if several else ("sizes",)
                ledger.took((*place, *step), f"{mode_text(mode, several)} (from the kind)")
        if index is None and any(mode.material is None for mode in modes):
            ledger.took((*place, "index"), f"{index_text(material.index)} (from the kind)")
        if density is None and material.density is not None and any(mode.material is None for mode in modes):
            ledger.took((*place, "density"), f"{material.density:.9g} kg/m³ (from the kind)")
        return replace(load, modes=modes, material=material, kind=kind.name, kind_from=kind.origin_words,
                       trust=trust, size_span=span)  # fmt: skip

    def _own_index(self) -> Index | None:
        return cast(Index, self.index_file.content) if self.index_file is not None else self.index

    def _own_density(self) -> float | None:
        return None if self.density is None else float(self.density)


def _stand_in_rules(seen: Seen, stand_in: str) -> Iterator[Fault]:
    """A matrix given as data: it stands alone, with its albedo and an optical load."""
    what = "a measured matrix" if stand_in == "matrix_file" else "a Henyey-Greenstein function"
    if all(seen.stated(name) for name in _STAND_INS):
        yield Fault(("henyey_greenstein",), "both matrix_file and henyey_greenstein are given",
                    "Keep one; a measured matrix is the better of the two")  # fmt: skip
    if seen.stated("kind"):
        yield Fault((stand_in,), f"the particles are described twice, by kind and by {stand_in}",
                    "Keep one of the two")  # fmt: skip
    for name in ("sizes", "index", "index_file", "density"):
        if seen.stated(name) and not (seen.stated("kind") and name != "sizes"):
            yield Fault((name,), f"{what} has neither sizes nor index nor density",
                        f"Leave {name} out, or leave {stand_in} and albedo out to compute spheres")  # fmt: skip
    if not seen.stated("albedo"):
        yield Fault(("albedo",), "the key is missing",
                    f"{what[0].upper()}{what[1:]} needs it: the scattered share of the extinction, for example "
                    "albedo = 0.95; 1 where nothing is known, which gives the most light")  # fmt: skip
    load = seen.get("load")
    for name in ("mass", "number"):
        if load is not None and getattr(load, name) is not None:
            yield Fault(("load", name), f"{what} says nothing of a particle's mass or size, and the load is a {name}",
                        "Give an optical reading, for example extinction with at")  # fmt: skip


def _kind_rules(seen: Seen) -> Iterator[Fault]:
    """A kind, and what an entry may state beside it."""
    named: NamedKind | None = seen.get("kind")
    yield from _one_index(seen)
    if named is None:
        return
    if named.has_parts:
        for name in ("sizes", "index", "index_file", "density"):
            if seen.stated(name):
                yield Fault((name,), f"{quoted(named.kind.name)} is a mixture of parts, each with sizes, index and "
                            f"density of its own, and one {name} cannot stand for all of them",
                            f"Leave {name} out, or enter each part as [[particles]] of its own")  # fmt: skip
                return
    load = seen.get("load")
    without = not seen.stated("density") and any(material.density is None for material in named.materials)
    if load is not None and load.mass is not None and without:
        yield Fault(("density",), f"the key is missing, and the catalogue has no density of {quoted(named.kind.name)}",
                    'A load by mass needs it, for example density = "1.06 g/cm^3"')  # fmt: skip


def _sphere_rules(seen: Seen) -> Iterator[Fault]:
    """Spheres of the user's own: sizes and one index, and a density for a mass."""
    has_index = seen.stated("index") or seen.stated("index_file")
    if not seen.stated("sizes") and not has_index:
        yield Fault(("kind",), "nothing says what the particles are", _WAYS)
        return
    if not seen.stated("sizes"):
        yield Fault(("sizes",), "the key is missing",
                    'Particles of your own need it beside their index, for example sizes = { shape = "lognormal", '
                    'median_radius = "0.5 um", geometric_sd = 1.6 }; or give kind')  # fmt: skip
    if not has_index:
        yield Fault(("index",), "the key is missing",
                    'Particles of your own need it beside their sizes, for example index = "1.43 + 1e-6i" or '
                    'index_file = "index.csv"; or give kind')  # fmt: skip
    yield from _one_index(seen)
    load = seen.get("load")
    if load is not None and load.mass is not None and not seen.stated("density"):
        yield Fault(("density",), "the key is missing",
                    'A load by mass needs it, for example density = "1.06 g/cm^3"')  # fmt: skip


def _one_index(seen: Seen) -> Iterator[Fault]:
    if seen.stated("index") and seen.stated("index_file"):
        yield Fault(("index_file",), "both index and index_file are given, and only one of them can hold",
                    "Keep one and leave the other out")  # fmt: skip


def _is_cut(modes: tuple[SizeMode, ...]) -> bool:
    """Whether a table of sizes ends where much of the cross-section may lie beyond."""
    for mode in modes:
        if isinstance(mode.shape, SizeTable):
            areas = [n * r * r for n, r in zip(mode.shape.density, mode.shape.radii, strict=True)]
            if max(areas[0], areas[-1]) >= MUCH_LEFT * max(areas):
                return True
    return False
