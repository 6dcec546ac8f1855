"""Tables of numbers in text files: a header with units, columns below, and what is wrong with them.

Comma, semicolon or tab separate the columns; lines that begin with # are remarks. A column is known by its
name, however it is spaced; its unit stands behind it in brackets: "radius [um]".
"""

from __future__ import annotations

import csv
import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from decimal import Decimal
from itertools import pairwise

from lasescatter import units
from lasescatter.site.faults import quoted

MOST_ROWS = 20_000
MOST_TOLD = 5
"""Faults of one file that are told."""
LARGEST_NUMBER = 1e30

_NUMBER = re.compile(r"[+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]{1,3})?")
_DECIMAL_COMMA = re.compile(r"[+-]?[0-9]*,[0-9]+(?:[eE][+-]?[0-9]+)?")
_BRACKETS = (re.compile(r"(?P<name>.*?)\s*\[(?P<unit>[^\[\]]*)\]"), re.compile(r"(?P<name>.*?)\s*\((?P<unit>[^()]*)\)"))
_LONGEST_CELL = 100


_LOGARITHMIC = {"db", "b", "bel", "np", "neper", "log", "log10", "lg", "ln", "log2"}
"""Units and words that mean the logarithm of a value."""


@dataclass(frozen=True)
class Column:
    """A column that a table may have."""

    key: str
    """Its name in the program."""
    header: str
    """How a header names it, with a unit: "radius [um]"."""
    names: tuple[str, ...]
    """Plain spellings (see `plain`) that are taken for it."""
    low: float
    """Smallest value. [SI]"""
    high: float
    span: str
    """The range in words."""
    kind: str | None = None
    """What its unit measures; None: it has no unit."""
    any_unit: bool = False
    """Its scale does not matter: a unit may stand there and is not read."""
    turned: bool = False
    """It holds the value with the other sign."""


@dataclass(frozen=True)
class Columns:
    """The columns of a file in SI, by key, and where each row stands."""

    file: str
    values: Mapping[str, tuple[float, ...]]
    headers: Mapping[str, str]
    """As the file writes them."""
    lines: tuple[int, ...]

    def place(self, row: int, key: str) -> str:
        """One cell, for messages."""
        return place(self.file, self.lines[row], self.headers[key])


class TableError(Exception):
    """A file is not the table that is due: what is wrong and what would be right, once or several times."""

    def __init__(self, faults: Sequence[tuple[str, str]]) -> None:
        self.faults = tuple(faults)
        super().__init__("; ".join(wrong for wrong, _ in faults))


def place(file: str, line: int, header: str = "") -> str:
    """A place in a file: 'sizes.csv, line 4, column "radius [um]"'."""
    column = f", column {quoted(header)}" if header else ""
    return f"{file}, line {line}{column}"


def plain(name: str) -> str:
    """A column's name without case, spaces, underscores, brackets and signs from print."""
    return re.sub(r"[\s_(){}\\]", "", name.casefold().replace("−", "-").replace("–", "-"))


def read_columns(file: str, text: str, columns: Sequence[Column], advice: Mapping[str, str]) -> Columns:
    """Read a table.

    Parameters
    ----------
    file : str
        Its name, for messages.
    columns : sequence of Column
        What it may have; which of them it must have is for the caller to say.
    advice : mapping
        Plain names of columns that are not read, with what to do about them.

    Raises
    ------
    TableError
        With the first few faults, each with line and column.
    """
    rows = _rows(text)
    if not rows:
        raise TableError([(f"{file} holds no table", f"Write a header and rows: {_headers(columns)}")])
    (line, header), *body = rows
    delimiter = next((sign for sign in ";\t" if sign in header), ",")
    cells = _split(header, delimiter)
    found, faults = _recognised(file, line, cells, columns, advice)
    if not faults and not body:
        faults = [(f"{file} has a header and no rows", "Write one row of numbers on each line below the header")]
    if len(body) > MOST_ROWS:
        faults = [(f"{file} has {len(body)} rows", f"Keep it to {MOST_ROWS}")]
    if faults:
        raise TableError(_shortened(faults))
    values: dict[str, list[float]] = {column.key: [] for column, _ in found}
    met: dict[str, list[tuple[str, str]]] = {}
    for line, row in body:
        for key, value, fault in _row(file, line, _split(row, delimiter), found, cells):
            if fault is None:
                values[key].append(value)
            else:
                met.setdefault(key, []).append(fault)
    if met:
        raise TableError(_shortened([_with_its_like(faults) for faults in met.values()]))
    return Columns(
        file,
        {key: tuple(column) for key, column in values.items()},
        {column.key: cell for (column, _), cell in zip(found, cells, strict=True)},
        tuple(line for line, _ in body),
    )


def ascending(table: Columns, key: str) -> None:
    """Refuse a column that does not grow from row to row.

    Raises
    ------
    TableError
    """
    for row, (before, here) in enumerate(pairwise(table.values[key])):
        if here <= before:
            what = "repeats the value above it" if here == before else "is smaller than the value above it"
            raise TableError([(f"{table.place(row + 1, key)}: the value {what}",
                               "Sort the rows so that this column grows, each value once")])  # fmt: skip


def exactly_one(file: str, table: Columns, keys: Sequence[str], columns: Sequence[Column]) -> str:
    """The one of several columns that the file has.

    Raises
    ------
    TableError
        If it has none or more than one.
    """
    stated = [key for key in keys if key in table.values]
    if len(stated) == 1:
        return stated[0]
    wanted = " or ".join(dict.fromkeys(column.header for column in columns if column.key in keys))
    if stated:
        both = " and ".join(quoted(table.headers[key]) for key in stated)
        raise TableError([(f"{file} has two columns for the same thing, {both}", f"Keep one of {wanted}")])
    raise TableError([(f"{file} has no column {wanted}", "Add the column, its unit in brackets in the header")])


def _rows(text: str) -> list[tuple[int, str]]:
    """The lines that say something, counted from 1."""
    lines = text.removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n").split("\n")
    told = ((number, line) for number, line in enumerate(lines, 1) if line.strip())
    return [(number, line) for number, line in told if not line.lstrip().startswith("#")]


def _split(line: str, delimiter: str) -> list[str]:
    """The cells of a line; empty ones at its end, as spreadsheets leave them, are dropped."""
    try:
        cells = [cell.strip() for cell in next(csv.reader([line], delimiter=delimiter, skipinitialspace=True))]
    except (csv.Error, StopIteration):
        return [line]
    while len(cells) > 1 and not cells[-1]:
        cells.pop()
    return cells


def _headers(columns: Sequence[Column]) -> str:
    return ", ".join(dict.fromkeys(column.header for column in columns))


def _with_its_like(faults: list[tuple[str, str]]) -> tuple[str, str]:
    """The first fault of a column; a whole column that is wrong is told once."""
    (wrong, mend), *others = faults
    more = f" ({len(others)} more row{'s' if len(others) > 1 else ''} of it likewise)" if others else ""
    return wrong + more, mend


def _shortened(faults: list[tuple[str, str]]) -> list[tuple[str, str]]:
    if len(faults) <= MOST_TOLD:
        return faults
    return [*faults[:MOST_TOLD], ("further faults of the file are not listed", "Mend those above first")]


def _recognised(
    file: str, line: int, cells: list[str], columns: Sequence[Column], advice: Mapping[str, str]
) -> tuple[list[tuple[Column, Decimal]], list[tuple[str, str]]]:
    """The column that each cell of the header stands for, with the SI value of one of its unit."""
    found: list[tuple[Column, Decimal]] = []
    faults: list[tuple[str, str]] = []
    if all(_NUMBER.fullmatch(cell) for cell in cells):
        return found, [(f"{place(file, line)}: numbers stand where the header is due",
                        f"Put a line with the columns' names and units above: {_headers(columns)}")]  # fmt: skip
    by_name = {name: column for column in columns for name in column.names}
    for cell in cells:
        name, unit = _name_and_unit(cell, {*by_name, *advice})
        column = by_name.get(plain(name))
        where = place(file, line, cell)
        if column is None:
            mend = advice.get(plain(name)) or f"Leave the column out; read are {_headers(columns)}"
            faults.append((f"{where}: this is not a column that is read here", mend))
            continue
        if any(column.key == other.key for other, _ in found):
            faults.append((f"{where}: the file has this column twice", "Keep one of the two"))
        factor = Decimal(-1 if column.turned else 1)
        if column.kind is not None:
            try:
                factor *= units.unit_factor(unit or "", column.kind) if unit else Decimal(0)
            except units.QuantityError as error:
                faults.append((f"{where}: {quoted(unit)} {error.wrong}", f"{error.mend}, as in {column.header}"))
            if not unit:
                faults.append((f"{where}: the column has no unit", f"Write it in brackets, as in {column.header}"))
        elif unit and unit.strip().lower() in _LOGARITHMIC:
            faults.append((f"{where}: plain values are due, and {quoted(unit)} says that these are logarithms",
                           f"Write {column.header}, and the values themselves"))  # fmt: skip
        elif unit and not column.any_unit and unit not in ("1", "-"):
            faults.append((f"{where}: plain numbers are due, and {quoted(unit)} is given as their unit",
                           f"Write {column.header}, and the numbers without a unit"))  # fmt: skip
        found.append((column, factor))
    return found, faults


def _name_and_unit(cell: str, known: set[str]) -> tuple[str, str | None]:
    """A header taken apart; brackets that belong to a known name are no unit."""
    if plain(cell) in known:
        return cell, None
    for pattern in _BRACKETS:
        match = pattern.fullmatch(cell)
        if match:
            return match["name"], match["unit"].strip()
    return cell, None


def _row(
    file: str, line: int, cells: list[str], found: list[tuple[Column, Decimal]], headers: list[str]
) -> Iterator[tuple[str, float, tuple[str, str] | None]]:
    """Key and value of each cell of a row, or what is wrong with it."""
    if len(cells) != len(headers):
        told = f"the row has {len(cells)} cell{'s' if len(cells) != 1 else ''} and the header {len(headers)}"
        comma = "; write decimals with a point" if len(cells) > len(headers) else ""
        yield "", 0.0, (f"{place(file, line)}: {told}", f"Give one number for each column{comma}")
        return
    for cell, header, (column, factor) in zip(cells, headers, found, strict=True):
        value, fault = _value(cell, column, factor)
        yield column.key, value, None if fault is None else (f"{place(file, line, header)}: {fault[0]}", fault[1])


def _value(cell: str, column: Column, factor: Decimal) -> tuple[float, tuple[str, str] | None]:
    """A cell in SI, or what is wrong with it."""
    if not cell:
        return 0.0, ("the cell is empty", "Give a number, or leave the whole row out")
    if _DECIMAL_COMMA.fullmatch(cell):
        return 0.0, (f"{quoted(cell)} has a comma inside the number", "Use a point for decimals, for example 2.5")
    if len(cell) > _LONGEST_CELL or not _NUMBER.fullmatch(cell):
        return 0.0, (f"{quoted(cell)} is not a number", "Write a plain number, for example 0.5 or 5e-3")
    value = float(Decimal(cell) * factor) + 0.0
    if not column.low <= value <= column.high:
        return 0.0, (f"{quoted(cell)} is outside what is accepted here", f"Give a value {column.span}")
    return value, None
