"""The list of inputs as read: each value as written and in SI, and each default that was taken."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from lasescatter.scene import InputLine
from lasescatter.site.faults import Place, place_in_file, quoted, spelled
from lasescatter.site.fields import Direction, Point
from lasescatter.site.line_index import LineIndex
from lasescatter.site.table import Table


class Ledger:
    """Collects what tables say while they become a scene."""

    def __init__(self, document: Mapping[str, Any], index: LineIndex) -> None:
        self.document, self.index = document, index
        self._taken: list[tuple[Place, str]] = []
        self._explained: dict[Place, str] = {}

    def spell(self, place: Place) -> str:
        """A place in the contract's spelling."""
        return spelled(place, self.document)

    def took(self, place: Place, text: str) -> None:
        """A default was taken for a key that the file leaves out."""
        self._taken.append((place, text))

    def explain(self, place: Place, text: str) -> None:
        """What a stated value became, where its SI form alone does not say it."""
        self._explained[place] = text

    def lines(self, site: Table) -> tuple[InputLine, ...]:
        """All inputs in the order of the file; the defaults of a table follow what it states."""
        entries = []
        ends = self._ends()
        for place, value in _values((), site):
            where = place_in_file(place, self.document)
            spot = self.index.spots.get(where)
            line = InputLine(self.spell(where), self._written(where), self._explained.get(place) or as_read(value))
            entries.append((spot.start if spot else len(self.index.text), 0, line))
        for place, text in self._taken:
            where = place_in_file(place, self.document)
            line = InputLine(self.spell(where), "", text, stated=False)
            # Of a table that the file leaves out, behind the nearest one that it has.
            homes = (where[:length] for length in range(len(where) - 1, 0, -1))
            entries.append((next((ends[home] for home in homes if home in ends), len(self.index.text)), 1, line))
        entries.sort(key=lambda entry: entry[:2])
        return tuple(line for _, _, line in entries)

    def _written(self, where: Place) -> str:
        raw: Any = self.document
        for step in where:
            raw = raw[step]
        if isinstance(raw, str):
            return raw
        return self.index.written(where) or _as_toml(raw)

    def _ends(self) -> dict[Place, int]:
        """Where the last value of each table begins."""
        ends: dict[Place, int] = {}
        for place, spot in self.index.spots.items():
            for length in range(len(place)):
                table = place[:length]
                ends[table] = max(ends.get(table, 0), spot.start)
        return ends


def as_read(value: Any) -> str:
    """A value as the program took it, in SI."""
    if isinstance(value, Point):
        return f"({_listed(value)}) m"
    if isinstance(value, Direction):
        return f"({_listed(value)})"
    if isinstance(value, tuple):
        return ", ".join(as_read(entry) for entry in value) or "none"
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, complex):
        return f"{value.real:.9g} + {value.imag:.9g}i"
    if type(value) in (int, float):
        return f"{value:.9g}"
    return str(value)


def _listed(numbers: tuple[float, ...]) -> str:
    return ", ".join(f"{number + 0.0:.6g}" for number in numbers)


def _as_toml(raw: Any) -> str:
    if isinstance(raw, list):
        return f"[{', '.join(_as_toml(entry) for entry in raw)}]"
    return quoted(raw)


def _values(place: Place, value: Any) -> Iterator[tuple[Place, Any]]:
    """Every stated value below a table, with its place."""
    if isinstance(value, Table):
        for name in type(value).model_fields:
            if name in value.model_fields_set:
                alias = type(value).model_fields[name].alias or name
                yield from _values((*place, alias), getattr(value, name))
    elif isinstance(value, tuple) and value and all(isinstance(entry, Table) for entry in value):
        for number, entry in enumerate(value):
            yield from _values((*place, number), entry)
    else:
        yield place, value
