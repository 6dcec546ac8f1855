"""Sizes in the file of a kind: the modes, and the sizes that the kind may have."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated

from lasescatter.matter import SizeSpan
from lasescatter.site.faults import Fault
from lasescatter.site.fields import Text, Word
from lasescatter.site.sizes import Diameter, SizesOfKind
from lasescatter.site.table import Seen, Table, key

USUAL_OFF = 0.02
"""How far the usual size of a span may be from that of the sizes, relative."""


_SPANS = {
    "median radius by number": "median_radius",
    "median diameter by number": "median_diameter",
    "median diameter by mass": "mass_median_diameter",
}


class SizeSpanTable(Table):
    """Sizes that the kind may have."""

    what: Annotated[str, Word(tuple(_SPANS))] = key("What is stated", "median diameter by mass")
    usual: Diameter = key("That of the sizes above", "0.7 um")
    low: Diameter = key("Smallest", "0.5 um")
    high: Diameter = key("Largest", "1.5 um")
    remark: Annotated[str, Text("a remark", "both machines")] | None = key(
        "Anything else", "both machines", default=None
    )

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        if seen.good("usual", "low", "high") and not seen.get("low") <= seen.get("usual") <= seen.get("high"):
            yield Fault(("usual",), "the usual size is not between low and high", "Order them: low, usual, high")

    def to_span(self, source: str, factor: float) -> SizeSpan:
        """In SI, with the factor of trust that remains where the size is stated."""
        return SizeSpan(self.what, float(self.usual), float(self.low), float(self.high), source, factor)


def usual_size_faults(span: SizeSpanTable | None, sizes: tuple[SizesOfKind, ...] | None) -> Iterator[Fault]:
    """The usual size of the span is that of the sizes: it is what the sizes are scaled from."""
    if span is None or not sizes:
        return
    if len(sizes) > 1 or sizes[0].shape != "lognormal":
        yield Fault(("size_span",), "a span of sizes is stated for sizes that are not one lognormal mode",
                    "Leave it out, or give one lognormal mode")  # fmt: skip
        return
    found = sizes[0].medians()[_SPANS[span.what]]
    if abs(span.usual / found - 1) > USUAL_OFF:
        yield Fault(("size_span", "usual"), f"the sizes have a {span.what} of {found * 1e6:.4g} um",
                    f'Write usual = "{found * 1e6:.4g} um", or mend the sizes')  # fmt: skip
