"""A file of rules/indices: the refractive index of one substance by wavelength, each node with its evidence mark."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise
from typing import Annotated

from lasescatter.matter import IndexTable
from lasescatter.site.faults import Fault
from lasescatter.site.fields import Number, Quantity, Text, Word
from lasescatter.site.table import Seen, Table, key

FORMAT = "lasescatter index 1"
MARKS = {
    "P": "seen in the source itself",
    "S": "seen second-hand, where the source is named",
    "K": "computed from values so marked",
    "M": "from memory or a modelling choice, not confirmed",
}
"""Evidence marks of the catalogue, and what they mean."""
UNCONFIRMED = "M"
MOST_NODES = 2000

Mark = Annotated[str, Word(tuple(MARKS))]


class NodeTable(Table):
    """The index at one wavelength."""

    wavelength: Annotated[float, Quantity("wavelength", "100 nm", "1 mm", "0.55 um")] = key(
        "Wavelength in vacuum", "0.55 um"
    )
    n: Annotated[float, Number(0.05, 10, "1.43")] = key("Real part", 1.43)
    k: Annotated[float, Number(0, 20, "1e-6")] = key("Imaginary part; absorption is positive", 1e-6)
    mark: Mark = key("Evidence mark of the two values", "S")
    # The rules of a table run with its last field, which must have a default.
    remark: Annotated[str, Text("a remark", "read from the figure")] | None = key(
        "Anything else", "read from the figure", default=None
    )


class IndexSourceTable(Table):
    """Where the nodes of some marks are from."""

    marks: tuple[Mark, ...] = key("Marks of the nodes that are from there", ["S"])
    from_: Annotated[str, Text("document, year and table", "Hale & Querry 1973, table 1")] = key(
        "Document, year and table", "Hale & Querry 1973, table 1", alias="from"
    )
    remark: Annotated[str, Text("a remark", "25 degC")] | None = key("Anything else", "25 degC", default=None)


class IndexFileTable(Table):
    """The whole file."""

    format: Annotated[str, Word((FORMAT,))] = key("Format of this file and its version", FORMAT)
    name: Annotated[str, Text("a name", "water")] = key("Name that kinds call it by", "water")
    what: Annotated[str, Text("one sentence", "liquid water")] = key("The substance, in one sentence", "liquid water")
    nodes: tuple[NodeTable, ...] = key(
        "Index by wavelength, ascending", [{"wavelength": "0.55 um", "n": 1.333, "k": 1.96e-9, "mark": "S"}]
    )
    source: tuple[IndexSourceTable, ...] = key(
        "Where the nodes are from", [{"marks": ["S"], "from": "Hale & Querry 1973, table 1"}], default=()
    )

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        nodes, sources = seen.get("nodes"), seen.get("source")
        if nodes is None:
            return
        if not 2 <= len(nodes) <= MOST_NODES:
            yield Fault(("nodes",), f"there {'is 1 node' if len(nodes) == 1 else f'are {len(nodes)} nodes'}",
                        f"Give at least two, in ascending order, and at most {MOST_NODES}; nothing is known beyond "
                        "the first and the last")  # fmt: skip
        for number, (before, after) in enumerate(pairwise(nodes), start=1):
            if after.wavelength <= before.wavelength:
                yield Fault(("nodes", number, "wavelength"), "the wavelength is not above the one before",
                            "List the nodes in ascending order, each wavelength once")  # fmt: skip
        for number, node in enumerate(nodes):
            if node.n == 1 and node.k == 0:
                yield Fault(("nodes", number, "n"), "a substance with n = 1 and k = 0 scatters nothing",
                            "Give the index of the particles, not of the air")  # fmt: skip
        named = {mark for entry in sources or () for mark in entry.marks}
        for number, node in enumerate(nodes):
            if sources is not None and node.mark not in named:
                yield Fault(("nodes", number, "mark"), f'no source is given for nodes of mark "{node.mark}"',
                            f'Add [[source]] with marks = ["{node.mark}"] and from = "document, year"')  # fmt: skip
                named.add(node.mark)

    def to_index(self) -> IndexTable:
        """The table in SI."""
        return IndexTable(
            wavelengths=tuple(float(node.wavelength) for node in self.nodes),
            real=tuple(node.n for node in self.nodes),
            imaginary=tuple(node.k for node in self.nodes),
            unconfirmed=tuple(node.mark == UNCONFIRMED for node in self.nodes),
            name=self.name,
            source="; ".join(f"[{', '.join(entry.marks)}] {entry.from_}" for entry in self.source),
        )
