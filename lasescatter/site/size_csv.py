"""A table of sizes from a file: radius or diameter, and the particles per interval of its logarithm."""

from __future__ import annotations

import math
from itertools import pairwise

from lasescatter.matter import SizeTable
from lasescatter.site.columns import LARGEST_NUMBER, Column, TableError, ascending, exactly_one, read_columns
from lasescatter.site.faults import quoted

MOST_SIZES = 2000
CUT_OFF = 0.01
"""Share of the highest value that may stand at an end before the reader is told that the table is cut off."""

_COUNTS = "from 0, and below 1e30"
# Radius and diameter differ by a factor and the logarithms' bases too: after normalising, both densities are alike.
_COLUMNS = (
    Column("radius", "radius [um]", ("radius", "r", "radii"), 1e-9, 1e-4, "from 1 nm to 100 um", "length"),
    Column("diameter", "diameter [um]", ("diameter", "d", "dp"), 2e-9, 2e-4, "from 2 nm to 200 um", "length"),
    Column("per ln", "dN/dlnr", ("dn/dlnr", "dn/dlnd", "dn/dlndp"), 0, LARGEST_NUMBER, _COUNTS, any_unit=True),
    Column("per log", "dN/dlogD", ("dn/dlogd", "dn/dlogdp", "dn/dlog10d", "dn/dlog10dp", "dn/dlogr", "dn/dlog10r"),
           0, LARGEST_NUMBER, _COUNTS, any_unit=True),
)  # fmt: skip

_BY_VOLUME = "Turn it into numbers: divide each value by the cube of the diameter, and name the column dN/dlogD"
_PER_WIDTH = "Multiply each value by its own radius or diameter, and name the column dN/dlnr"
_PER_BIN = "Divide each count by the natural logarithm of upper over lower edge of its bin, and name the column dN/dlnr"
_ADVICE = {
    **{name: _PER_WIDTH for name in ("dn/dr", "dn/dd", "dn/ddp", "nr")},
    **{name: _PER_BIN for name in ("n", "dn", "number", "count", "counts", "concentration")},
    **{name: _BY_VOLUME for name in ("dv/dlogd", "dv/dlogdp", "dv/dlnr", "dv/dlnd", "dm/dlogd", "dm/dlogdp",
                                     "dm/dlnr", "dm/dlnd", "volume", "mass")},
    **{name: "Divide each value by the square of the diameter, and name the column dN/dlogD"
       for name in ("ds/dlogd", "ds/dlogdp", "ds/dlnr", "surface")},
}  # fmt: skip


def size_table(file: str, text: str) -> tuple[SizeTable, str]:
    """The size distribution that a file holds, and what became of it in words.

    Between the radii the density is linear in ln r; it is brought to an integral of 1.

    Raises
    ------
    TableError
    """
    table = read_columns(file, text, _COLUMNS, _ADVICE)
    size = exactly_one(file, table, ("radius", "diameter"), _COLUMNS)
    counts = exactly_one(file, table, ("per ln", "per log"), _COLUMNS)
    if not 2 <= len(table.lines) <= MOST_SIZES:
        raise TableError([(f"{file} has {len(table.lines)} row{'s' if len(table.lines) != 1 else ''}",
                           f"Give from 2 to {MOST_SIZES} sizes, or write shape = {quoted('single')}")])  # fmt: skip
    ascending(table, size)
    radii = tuple(value if size == "radius" else value / 2 for value in table.values[size])
    heights = table.values[counts]
    steps = [math.log(above / below) for below, above in pairwise(radii)]
    total = math.fsum(step * (one + two) / 2 for step, (one, two) in zip(steps, pairwise(heights), strict=True))
    if not total > 0:
        raise TableError([(f"{file} has no particles: {table.headers[counts]} is 0 everywhere",
                           "Give the number of particles per interval, on any scale")])  # fmt: skip
    told = f"{len(radii)} radii from {radii[0]:.6g} m to {radii[-1]:.6g} m, normalised to 1 particle"
    ends = [share for share in (heights[0] / max(heights), heights[-1] / max(heights)) if share > CUT_OFF]
    if ends:
        told += f"; cut off where it still has {max(ends) * 100:.2g} % of its highest value"
    return SizeTable(radii, tuple(height / total for height in heights)), told
