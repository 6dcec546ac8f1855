"""What a single value of the site file may be: markers for the fields of the tables.

Each marker checks one value, words its own refusal and describes itself to the schema. Fields are
written as ``Annotated[float, Quantity("power", ...)]``.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import lru_cache
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler, ValidationInfo
from pydantic_core import CoreSchema, core_schema

from lasescatter import units
from lasescatter.scene import LengthUnit, Vector
from lasescatter.site.faults import quoted, refusal

if TYPE_CHECKING:
    from lasescatter.site.catalogue import Catalogue

LONGEST_TEXT = 20_000
FARTHEST = 1e6
"""Largest coordinate. [m]"""

_SCHEMA_QUANTITY = r"^\s*[+-]?([0-9]+\.?[0-9]*|\.[0-9]+)([eE][+-]?[0-9]+)?\s*[^0-9\s.].*$"

_SCHEMA_PERCENT = r"^\s*\+?([0-9]+\.?[0-9]*|\.[0-9]+)([eE][+-]?[0-9]+)?\s*%\s*$"


@dataclass
class Reading:
    """What fields need to know of the rest of the file while it is read."""

    length_unit: LengthUnit | None
    """None where the file does not say `lengths_in`."""
    folder: Path | None = None
    """Where files that the site file names are looked for; None: the current folder."""
    catalogue: Catalogue | None = None
    """Kinds of particles; there where some entry names one."""
    bare_lengths: bool = field(default=False, init=False)
    """Whether a point or size without a unit was met."""
    files: dict[str, str] = field(default_factory=dict, init=False)
    """Text of each file that was read, by its name in the site file."""
    made: dict[tuple[str, str], Any] = field(default_factory=dict, init=False)
    """What became of each file, or the fault in it, by name and by what it was read as."""


class Measure(float):
    """A value in SI that remembers its kind."""

    kind: str

    def __new__(cls, value: float, kind: str) -> Measure:
        measure = super().__new__(cls, value)
        measure.kind = kind
        return measure

    def __str__(self) -> str:
        return units.si_text(self, self.kind)


class Point(tuple[float, float, float]):
    """A place in metres."""


class Direction(tuple[float, float, float]):
    """A unit vector."""


def vector(values: tuple[float, float, float]) -> Vector:
    """Plain numbers of a point or direction."""
    x, y, z = values
    return float(x), float(y), float(z)


class Marker:
    """One sort of value. Subclasses read it and describe it to the schema."""

    def read(self, value: Any, info: ValidationInfo) -> Any:
        raise TypeError(f"{type(self).__name__} does not read")

    def schema(self) -> dict[str, Any]:
        return {}

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.with_info_plain_validator_function(self.read)

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        return self.schema()


@dataclass(frozen=True)
class Quantity(Marker):
    """A number with a unit, within a range that a mistyped unit trips over."""

    kind: str
    low: str
    high: str
    example: str
    above_low: bool = False
    """The low end itself is refused."""
    hint: str = "check the unit"
    """Closes the refusal of a value outside the range."""

    def read(self, value: Any, info: ValidationInfo) -> Measure:
        return read_quantity(value, self)

    def schema(self) -> dict[str, Any]:
        return {"type": "string", "pattern": _SCHEMA_QUANTITY}


def read_quantity(value: Any, due: Quantity) -> Measure:
    """A value of the file to SI, within the range that `due` states."""
    phrase = units.KINDS[due.kind].phrase
    for_example = f"for example {quoted(due.example)}"
    if isinstance(value, Mapping) and "between" in value:
        raise refusal("a range of values (between) is not built yet",
                      f"Give one value, on the side that makes the exposure larger, {for_example}")  # fmt: skip
    if not isinstance(value, str):
        bare = isinstance(value, int | float) and not isinstance(value, bool)
        raise refusal(
            f"{quoted(value)} {'has no unit' if bare else 'is not a value with a unit'}, and {phrase} is due",
            f"Write number and unit in quotes, {for_example}; what fits: {units.fitting_units(due.kind)}",
        )
    try:
        number = units.parse_quantity(value, due.kind)
    except units.QuantityError as error:
        mend = error.mend if "for example" in error.mend else f"{error.mend}; {for_example}"
        raise refusal(f"{quoted(value)} {error.wrong}", mend) from None
    bottom, top = _bound(due.low, due.kind), _bound(due.high, due.kind)
    if not bottom <= number <= top or (due.above_low and number == bottom):
        span = f"above {due.low} and up to {due.high}" if due.above_low else f"from {due.low} to {due.high}"
        raise refusal(f"{quoted(value)} is outside what is accepted for {phrase} here",
                      f"Give a value {span}; {due.hint}")  # fmt: skip
    return Measure(number, due.kind)


# Computed when first needed: the unit library is slow to load.
_bound = lru_cache(maxsize=256)(units.parse_quantity)


@dataclass(frozen=True)
class Number(Marker):
    """A plain number without a unit."""

    low: float
    high: float
    example: str
    above_low: bool = False
    whole: bool = False

    def read(self, value: Any, info: ValidationInfo) -> float:
        return read_number(value, self)

    def schema(self) -> dict[str, Any]:
        edge = "exclusiveMinimum" if self.above_low else "minimum"
        return {"type": "integer" if self.whole else "number", edge: self.low, "maximum": self.high}


def read_number(value: Any, due: Number) -> float:
    """A plain number within the range that `due` states."""
    sort = "whole number" if due.whole else "number"
    right = isinstance(value, int) if due.whole else isinstance(value, int | float)
    if isinstance(value, bool) or not right:
        what = "is text" if isinstance(value, str) else f"is not a {sort}"
        raise refusal(f"{quoted(value)} {what}, and a plain {sort} without quotes is due",
                      f"Write for example {due.example}")  # fmt: skip
    if not due.low <= value <= due.high or (due.above_low and value == due.low):
        low, high = f"{due.low:.9g}", f"{due.high:.9g}"
        span = f"above {low} and up to {high}" if due.above_low else f"from {low} to {high}"
        raise refusal(f"{quoted(value)} is outside the range of this key",
                      f"Give a {sort} {span}, for example {due.example}")  # fmt: skip
    return int(value) if due.whole else float(value)


@dataclass(frozen=True)
class Fraction(Marker):
    """A share of a whole: a plain number up to 1, or text in per cent."""

    example: str
    above_low: bool = False
    """Nothing at all is refused."""

    def read(self, value: Any, info: ValidationInfo) -> float:
        due = Number(0, 1, f'{self.example}, or "{float(self.example) * 100:g} %"', above_low=self.above_low)
        if not isinstance(value, str):
            return read_number(value, due)
        try:
            share = units.parse_quantity(value, "fraction")
        except units.QuantityError as error:
            raise refusal(f"{quoted(value)} {error.wrong}",
                          f"Write a plain number without quotes, for example {due.example}") from None  # fmt: skip
        if not 0 <= share <= 1 or (self.above_low and share == 0):
            span = "above 0 % and up to 100 %" if self.above_low else "from 0 % to 100 %"
            raise refusal(f"{quoted(value)} is outside the range of this key", f"Give a share {span}")
        return share

    def schema(self) -> dict[str, Any]:
        number = Number(0, 1, self.example, above_low=self.above_low).schema()
        return {"anyOf": [number, {"type": "string", "pattern": _SCHEMA_PERCENT}]}


@dataclass(frozen=True)
class Word(Marker):
    """One of a few words."""

    words: tuple[str, ...]
    not_built: tuple[tuple[str, str], ...] = ()
    """Words of the contract that are refused by name, each with what to do instead."""

    def read(self, value: Any, info: ValidationInfo) -> str:
        if isinstance(value, str) and value in self.words:
            return value
        for word, mend in self.not_built:
            if value == word:
                raise refusal(f"{quoted(value)} is not built yet", mend)
        choice = ", ".join(quoted(word) for word in self.words[:-1])
        choice = f"one of {choice} or {quoted(self.words[-1])}" if choice else quoted(self.words[-1])
        raise refusal(f"{quoted(value)} is not a word that this key takes", f"Write {choice}")

    def schema(self) -> dict[str, Any]:
        return {"type": "string", "enum": list(self.words)}


@dataclass(frozen=True)
class Text(Marker):
    """Free text, not empty."""

    what: str
    example: str

    def read(self, value: Any, info: ValidationInfo) -> str:
        return read_text(value, self.what, self.example)

    def schema(self) -> dict[str, Any]:
        return {"type": "string", "minLength": 1, "maxLength": LONGEST_TEXT}


def read_text(value: Any, what: str, example: str) -> str:
    """Text that says something; `what` names it in the refusal."""
    mend = f"Write {what} in quotes, for example {quoted(example)}"
    if not isinstance(value, str):
        raise refusal(f"{quoted(value)} is not text", mend)
    if not value.strip():
        raise refusal("the text is empty", mend)
    if len(value) > LONGEST_TEXT:
        raise refusal(f"the text has {len(value)} characters", f"Keep it to {LONGEST_TEXT} characters")
    return value


@dataclass(frozen=True)
class Flag(Marker):
    """true or false."""

    def read(self, value: Any, info: ValidationInfo) -> bool:
        if not isinstance(value, bool):
            raise refusal(f"{quoted(value)} is neither true nor false", "Write true or false, without quotes")
        return value

    def schema(self) -> dict[str, Any]:
        return {"type": "boolean"}


@dataclass(frozen=True)
class Place3(Marker):
    """A point (x, y, z)."""

    def read(self, value: Any, info: ValidationInfo) -> Point:
        return read_point(value, info.context)

    def schema(self) -> dict[str, Any]:
        return {"type": "array", "items": {"type": ["number", "string"]}, "minItems": 3, "maxItems": 3}


def read_point(value: Any, reading: Reading | None) -> Point:
    """Three coordinates, bare in the file's own length unit or each with a unit, to metres."""
    if not isinstance(value, list) or len(value) != 3:
        wrong = f"the point has {len(value)} numbers" if isinstance(value, list) else f"{quoted(value)} is not a point"
        raise refusal(wrong, "Write a point as [x, y, z], for example [4, 1.5, 1.6]")
    x, y, z = (_coordinate(entry, axis, reading) for entry, axis in zip(value, "xyz", strict=True))
    return Point((x, y, z))


def _coordinate(value: Any, axis: str, reading: Reading | None) -> float:
    if isinstance(value, str):
        try:
            metres = units.parse_quantity(value, "length")
        except units.QuantityError as error:
            raise refusal(f"{axis} = {quoted(value)} {error.wrong}", error.mend) from None
    elif isinstance(value, bool) or not isinstance(value, int | float) or not math.isfinite(_bounded(value)):
        raise refusal(
            f"{axis} = {quoted(value)} is not a length",
            'Write a plain number, in the unit that lengths_in names, or text with a unit such as "25 cm"',
        )
    else:
        unit = reading.length_unit if reading else None
        if reading:
            reading.bare_lengths = True
        metres = _bounded(value) * (unit.metres if unit else 1.0)
    if abs(metres) > FARTHEST:
        raise refusal(f"{axis} = {quoted(value)} is farther than any site",
                      f"Give coordinates within {FARTHEST / 1000:g} km of the origin, and check the unit")  # fmt: skip
    return metres


def _bounded(value: int | float) -> float:
    """To float without overflow: whole numbers of the file can have any length."""
    return float(max(min(value, 10**30), -(10**30))) if isinstance(value, int) else value


@dataclass(frozen=True)
class Vector3(Marker):
    """A direction [x, y, z] of plain numbers, not zero; made a unit vector."""

    example: str

    def read(self, value: Any, info: ValidationInfo) -> Direction:
        return read_direction(value, self.example)

    def schema(self) -> dict[str, Any]:
        return {"type": "array", "items": {"type": "number"}, "minItems": 3, "maxItems": 3}


def read_direction(value: Any, example: str) -> Direction:
    """Three plain numbers to a unit vector."""
    mend = f"Write three plain numbers that are not all zero, for example {example}"
    if not isinstance(value, list) or len(value) != 3:
        raise refusal(f"{quoted(value)} is not a direction [x, y, z]", mend)
    for entry in value:
        if isinstance(entry, bool) or not isinstance(entry, int | float) or not math.isfinite(_bounded(entry)):
            raise refusal(f"{quoted(entry)} is not a number, and a direction has plain numbers", mend)
    largest = max(abs(_bounded(entry)) for entry in value)
    if not 1e-9 <= largest <= 1e9:
        raise refusal("the direction has no usable length", mend)
    scaled = [_bounded(entry) / largest for entry in value]
    length = math.hypot(*scaled)
    x, y, z = (entry / length + 0.0 for entry in scaled)
    return Direction((x, y, z))


_INDEX = re.compile(
    r"\s*(?P<n>[0-9]*\.?[0-9]+(?:[eE][+-]?[0-9]{1,2})?)\s*"
    r"(?:(?P<sign>[+-])\s*(?P<k>[0-9]*\.?[0-9]+(?:[eE][+-]?[0-9]{1,2})?)\s*\*?\s*[ij])?\s*"
)


@dataclass(frozen=True)
class RefractiveIndex(Marker):
    """n + ik, absorption positive."""

    def read(self, value: Any, info: ValidationInfo) -> complex:
        example = 'for example "1.43 + 1e-6i", or "1.43" where nothing is absorbed'
        text = repr(value) if isinstance(value, int | float) and not isinstance(value, bool) else value
        found = _INDEX.fullmatch(text) if isinstance(text, str) and len(text) <= 60 else None
        if found is None:
            raise refusal(f"{quoted(value)} is not a refractive index", f"Write it as n + ki, {example}")
        if found["sign"] == "-":
            raise refusal(
                f"{quoted(value)} has a minus sign before its imaginary part",
                f"Absorption is written with a plus here (n + ki, k not negative): turn the sign, {example}",
            )
        index = complex(float(found["n"]), float(found["k"] or 0))
        if not (0.05 <= index.real <= 10 and index.imag <= 20) or index == 1:
            raise refusal(f"{quoted(value)} is outside what is accepted for a refractive index",
                          f"Give n from 0.05 to 10 and k from 0 to 20, not 1 exactly: {example}")  # fmt: skip
        return index

    def schema(self) -> dict[str, Any]:
        return {"type": ["string", "number"], "pattern": r"^\s*[0-9.]+.*$"}


WAVELENGTH = Quantity("wavelength", "180 nm", "1 mm", "532 nm")
Wavelength = Annotated[float, WAVELENGTH]
PlacePoint = Annotated[Point, Place3()]
