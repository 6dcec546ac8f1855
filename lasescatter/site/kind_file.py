"""A file of rules/particles: one kind of particles, every number with its source and evidence mark."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from itertools import pairwise
from typing import Annotated, Any, ClassVar, Literal, cast

from pydantic import field_validator

from lasescatter.matter import Growth, IndexTable, Trust
from lasescatter.matter import TypicalLoad as Typical
from lasescatter.site.faults import Fault, quoted, refusal
from lasescatter.site.fields import Fraction, Number, Quantity, Text, Word
from lasescatter.site.index_file import UNCONFIRMED, Mark
from lasescatter.site.kind_sizes import SizeSpanTable, usual_size_faults
from lasescatter.site.sizes import Radius, SizesOfKind, weight_faults
from lasescatter.site.table import Seen, Table, key

FORMAT = "lasescatter kind 1"
FACTORS: Mapping[str, float] = {"checked": 1.5, "weak": 3.0, "non-spheres": 3.0}
"""How far the light computed for a kind may be off, as a factor, by its trust."""
MOST_MODES = 20
Name = Annotated[str, Text("a name", "glycol haze")]
Source = Annotated[str, Text("document, year and table", "Hess, Koepke & Schult 1998, table 1")]
TrustMark = Annotated[str, Word(tuple(FACTORS))]


class PartTable(Table):
    """Another kind that this one contains."""

    kind: Name = key("Name of the other kind", "water-soluble particles")
    number: Annotated[float, Quantity("number concentration", "1e-9 /cm^3", "1e18 /m^3", "2600 /cm^3")] = key(
        "Its particles per volume; only the proportion of the parts counts", "2600 /cm^3"
    )
    remark: Annotated[str, Text("a remark", "dry")] | None = key("Anything else", "dry", default=None)


class GrowthTable(Table):
    """Water taken up in moist air: by kappa, or by the radii that a source lists."""

    kappa: Annotated[float, Number(0, 3, "0.25", above_low=True)] | None = key(
        "Hygroscopicity (Petters & Kreidenweis 2007)", 0.25, default=None
    )
    humidities: tuple[Annotated[float, Fraction("0.5")], ...] | None = key(
        "Relative humidities of the radii, ascending from 0", ["0 %", "50 %", "80 %"], default=None
    )
    radii: tuple[Radius, ...] | None = key(
        "Radius at each of them, of any one particle", ["0.1 um", "0.12 um", "0.15 um"], default=None
    )
    water: Name = key("Name of the index of what is taken up", "water", default="water")

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        listed = [name for name in ("humidities", "radii") if seen.stated(name)]
        if seen.stated("kappa") and listed:
            yield Fault((listed[0],), "both kappa and listed radii are given", "Keep one of the two laws of growth")
        elif not seen.stated("kappa") and len(listed) < 2:
            yield Fault(("kappa",), "the growth is not given",
                        "Give kappa, or humidities together with radii, for example kappa = 0.25")  # fmt: skip
        humidities, radii = seen.get("humidities"), seen.get("radii")
        if humidities is None or radii is None:
            return
        if len(humidities) != len(radii) or len(radii) < 2:
            yield Fault(("radii",), f"there are {len(radii)} radii and {len(humidities)} humidities",
                        "Give one radius for each humidity, at least two")  # fmt: skip
        elif humidities[0] != 0 or any(b <= a for a, b in pairwise(humidities)) or humidities[-1] >= 1:
            yield Fault(("humidities",), "the humidities do not ascend from 0 % to below 100 %",
                        'Begin with "0 %" and list them in ascending order')  # fmt: skip
        elif any(b < a for a, b in pairwise(radii)):
            yield Fault(("radii",), "the radii fall with humidity", "List the radii in the order of the humidities")

    def to_growth(self, water: IndexTable, source: str) -> Growth:
        """In SI, with factors to the dry radius."""
        if self.kappa is not None:
            return Growth(self.kappa, (), water, source)
        dry = float(cast(tuple[float, ...], self.radii)[0])
        pairs = zip(cast(tuple[float, ...], self.humidities), cast(tuple[float, ...], self.radii), strict=True)
        return Growth(None, tuple((float(humidity), float(radius) / dry) for humidity, radius in pairs), water, source)


class TrustTable(Table):
    """How far the kind is to be trusted, and why."""

    mark: TrustMark = key("checked, weak or non-spheres", "weak")
    reason: Annotated[str, Text("the reason", "sizes were not measured")] = key("Why", "sizes were not measured")
    mark_with_own_sizes: TrustMark | None = key(
        "The same where the user states the sizes; left out: no difference", "checked", default=None
    )
    reason_with_own_sizes: Annotated[str, Text("the reason", "sizes are the user's own")] | None = key(
        "Why then", "sizes are the user's own", default=None
    )

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        one, other = "mark_with_own_sizes", "reason_with_own_sizes"
        if seen.stated(one) != seen.stated(other):
            missing, there = (other, one) if seen.stated(one) else (one, other)
            yield Fault((missing,), f"the key is missing and {there} is given", "Give both or neither")

    def to_trust(self) -> tuple[Trust, Trust]:
        """With the kind's sizes, and with the user's."""
        usual = Trust(_literal(self.mark), FACTORS[self.mark], self.reason)
        if self.mark_with_own_sizes is None or self.reason_with_own_sizes is None:
            return usual, usual
        own = self.mark_with_own_sizes
        return usual, Trust(_literal(own), FACTORS[own], self.reason_with_own_sizes)


class TypicalTable(Table):
    """A load met in practice; exactly one reading."""

    what: Annotated[str, Text("a few words", "a beam just seen")] = key("When it is met", "a beam just seen")
    mass: Annotated[float, Quantity("mass concentration", "1e-15 kg/m^3", "1 kg/m^3", "0.5 mg/m^3")] | None = key(
        "Mass per volume of air", "0.5 mg/m^3", default=None
    )
    number: Annotated[float, Quantity("number concentration", "1e-6 /m^3", "1e18 /m^3", "1e5 /cm^3")] | None = key(
        "Number per volume of air", "1e5 /cm^3", default=None
    )
    meteorological_optical_range: Annotated[float, Quantity("length", "1 cm", "1000 km", "200 m")] | None = key(
        "Meteorological optical range (5 %)", "200 m", default=None
    )
    visual_range: Annotated[float, Quantity("length", "1 cm", "1000 km", "200 m")] | None = key(
        "Visual range (2 %)", "200 m", default=None
    )
    mark: Mark = key("Evidence mark", "M")
    from_: Source = key("Document, year and table", "Weld. J. 2016, abstract", alias="from")
    remark: Annotated[str, Text("a remark", "at 2 m")] | None = key("Anything else", "at 2 m", default=None)

    READINGS: ClassVar[tuple[str, ...]] = ("mass", "number", "meteorological_optical_range", "visual_range")

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        stated = [name for name in cls.READINGS if seen.stated(name)]
        if len(stated) != 1:
            yield Fault((stated[1],) if stated else (), f"the load has {len(stated)} readings",
                        f"Give exactly one of {', '.join(cls.READINGS)}")  # fmt: skip

    def to_typical(self, written: Mapping[str, Any]) -> Typical:
        """`written` is the table as the file has it."""
        reading = next(name for name in self.READINGS if getattr(self, name) is not None)
        return Typical(self.what, str(written[reading]), reading, self.from_, self.mark)


class KindSourceTable(Table):
    """What some numbers of the file are from."""

    of: tuple[Annotated[str, Text("keys of this file", "sizes.geometric_sd")], ...] = key(
        "Keys or tables whose numbers are from there", ["density", "sizes.geometric_sd"]
    )
    from_: Source = key("Document, year and table", "Hess, Koepke & Schult 1998, table 1", alias="from")
    mark: Mark = key("Evidence mark", "S")
    remark: Annotated[str, Text("a remark", "abstract only")] | None = key(
        "Anything else", "abstract only", default=None
    )


class KindFileTable(Table):
    """The whole file."""

    format: Annotated[str, Word((FORMAT,))] = key("Format of this file and its version", FORMAT)
    name: Name = key("Name that site files call it by", "glycol haze")
    also_called: tuple[Name, ...] = key("Other names", ["hazer haze"], default=())
    what: Annotated[str, Text("one sentence", "fine drops of a hazer")] = key("One sentence", "fine drops of a hazer")
    density: Annotated[float, Quantity("density", "10 kg/m^3", "30000 kg/m^3", "1.06 g/cm^3")] | None = key(
        "Density of the particles, dry", "1.06 g/cm^3", default=None
    )
    index: Name | None = key("Name of the refractive index", "water", default=None)
    growth: GrowthTable | None = key("Water taken up in moist air", {"kappa": 0.25}, default=None)
    sizes: tuple[SizesOfKind, ...] = key(
        "The modes of the sizes", [{"shape": "lognormal", "median_radius": "0.5 um", "geometric_sd": 1.6}], default=()
    )
    part: tuple[PartTable, ...] = key(
        "Other kinds that it is made of", [{"kind": "soot", "number": "8300 /cm^3"}], default=()
    )
    trust: TrustTable = key("How far it is to be trusted", {"mark": "weak", "reason": "sizes were not measured"})
    size_span: SizeSpanTable | None = key(
        "Sizes it may have",
        {"what": "median diameter by mass", "usual": "0.7 um", "low": "0.5 um", "high": "1.5 um"},
        default=None,
    )
    load: tuple[TypicalTable, ...] = key("Loads met in practice", [{"what": "a beam just seen"}], default=())
    source: tuple[KindSourceTable, ...] = key(
        "What the numbers are from", [{"of": ["sizes"], "from": "own measurement, May", "mark": "P"}], default=()
    )

    @field_validator("sizes", "part", mode="before")
    @classmethod
    def _not_too_many(cls, value: Any) -> Any:
        if isinstance(value, list) and len(value) > MOST_MODES:
            raise refusal(f"there are {len(value)} entries", f"Give at most {MOST_MODES}")
        return value

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        yield from _made_of(seen)
        yield from weight_faults(seen.get("sizes") or ())
        yield from usual_size_faults(seen.get("size_span"), seen.get("sizes"))
        yield from _sources(seen)


def _made_of(seen: Seen) -> Iterator[Fault]:
    """Sizes with density and index, or parts that have their own."""
    if seen.stated("sizes") == seen.stated("part"):
        both = seen.stated("sizes")
        yield Fault(("part",) if both else ("sizes",),
                    "both sizes and parts are given" if both else "neither sizes nor parts are given",
                    "Give [[sizes]], or [[part]] for a mixture of other kinds, not both")  # fmt: skip
    elif seen.stated("part"):
        for name in ("density", "index", "growth", "size_span"):
            if seen.stated(name):
                yield Fault((name,), "the key does not belong to a kind that is made of parts",
                            "Leave it out: each part has its own")  # fmt: skip
    else:
        for name, example in (("density", '"1.06 g/cm^3"'), ("index", '"water"')):
            if not seen.stated(name):
                yield Fault((name,), "the key is missing", f"Add it, for example {name} = {example}")


_WITH_NUMBERS = ("density", "growth", "sizes", "part", "size_span")


def _numbers(seen: Seen) -> Iterator[tuple[str, ...]]:
    """Key of each number that needs a source, without positions in lists."""
    for name in _WITH_NUMBERS:
        value = seen.get(name)
        for entry in value if isinstance(value, tuple) else (value,):
            if isinstance(entry, Table):
                for inner in type(entry).model_fields:
                    if inner in entry.model_fields_set and not isinstance(getattr(entry, inner), str | None):
                        yield name, inner
            elif entry is not None:
                yield (name,)


def _sources(seen: Seen) -> Iterator[Fault]:
    """Every number has a source, every source a number; what is from memory is not called checked."""
    sources = seen.get("source")
    if sources is None or (seen.stated("sizes") and seen.stated("part")):
        return
    numbers = dict.fromkeys(_numbers(seen))
    covered = {tuple(text.split(".")): entry for entry in sources for text in entry.of}
    for number in numbers:
        if number not in covered and number[:1] not in covered:
            yield Fault(number[:1], f"no source is given for {'.'.join(number)}",
                        f'Add [[source]] with of = ["{".".join(number)}"], from and mark')  # fmt: skip
    known = {*numbers, *(number[:1] for number in numbers)}
    for position, entry in enumerate(sources):
        for text in entry.of:
            place = tuple(text.split("."))
            # Of a table that is missing or reads badly something else is told.
            if place not in known and (place[0] not in _WITH_NUMBERS or seen.get(place[0])):
                yield Fault(("source", position, "of"), f"{quoted(text)} is no number of this file",
                            f"Name keys or tables that it has: {', '.join('.'.join(n) for n in numbers)}")  # fmt: skip
    trust = seen.get("trust")
    memory = sorted({text for entry in sources if entry.mark == UNCONFIRMED for text in entry.of})
    if trust is not None and trust.mark == "checked" and memory:
        yield Fault(("trust", "mark"), f"the kind is called checked, and {', '.join(memory)} is of mark M",
                    'Write mark = "weak", or confirm those numbers in their source')  # fmt: skip


def source_lines(table: KindFileTable) -> tuple[str, ...]:
    """What every number is from, for the report."""
    own = [f"{', '.join(entry.of)}: {entry.from_} [{entry.mark}]" for entry in table.source]
    return (*own, *(f"load ({entry.what}): {entry.from_} [{entry.mark}]" for entry in table.load))


def _literal(mark: str) -> Literal["checked", "weak", "non-spheres"]:
    return cast(Literal["checked", "weak", "non-spheres"], mark)
