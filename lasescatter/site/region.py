"""The table [particles.region]: where the particles are."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated

from lasescatter.scene import Box, Everywhere, Region
from lasescatter.site.contract import NOT_BUILT_REGIONS
from lasescatter.site.faults import Fault
from lasescatter.site.fields import PlacePoint, Word, vector
from lasescatter.site.table import Seen, Table, key


class RegionTable(Table):
    """Where the particles are."""

    shape: Annotated[str, Word(("everywhere", "box"), NOT_BUILT_REGIONS)] = key("everywhere or box", "box")
    from_: PlacePoint | None = key("box: its lowest corner", [1, -2, 0], alias="from", default=None)
    to: PlacePoint | None = key("box: its highest corner", [8, 2, 3], default=None)

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        shape = seen.get("shape")
        for name, example in (("from_", "[1, -2, 0]"), ("to", "[8, 2, 3]")):
            spelling = name.removesuffix("_")
            if shape == "box" and not seen.stated(name):
                yield Fault((spelling,), "the key is missing", f"A box needs it, for example {spelling} = {example}")
            if shape == "everywhere" and seen.stated(name):
                yield Fault((spelling,), 'the key does not belong to shape "everywhere"',
                            'Leave it out, or write shape = "box"')  # fmt: skip
        if shape == "box" and seen.good("from_", "to"):
            corners = list(zip("xyz", seen.get("from_"), seen.get("to"), strict=True))
            swapped = " and ".join(axis for axis, low, high in corners if low > high)
            flat = " and ".join(axis for axis, low, high in corners if low == high)
            if swapped:
                yield Fault(("to",), f"the corners are the wrong way round along {swapped}: from is above to",
                            f"Swap the two numbers of {swapped}: from takes the lower, to the higher")  # fmt: skip
            if flat:
                yield Fault(("to",), f"the box has no size along {flat}: from and to are the same there",
                            "Each number of to must be larger than the same number of from")  # fmt: skip

    def to_scene(self) -> Region:
        """The region in metres."""
        if self.from_ is None or self.to is None:
            return Everywhere()
        return Box(vector(self.from_), vector(self.to))
