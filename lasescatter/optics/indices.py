"""Refractive index at a wavelength: from a table, and of mixtures by volume."""

from __future__ import annotations

from bisect import bisect_left

from lasescatter.matter import Index, IndexTable

WEAK_ABSORPTION = 1e-3
"""k below which a table is read on a logarithmic scale: it spans decades there."""
SAME_WAVELENGTH = 1e-9
"""Relative difference within which a wavelength is that of a node: 1550e-9 and 1.55e-6 differ by rounding."""


class IndexRangeError(ValueError):
    """A wavelength outside an index table; the text names the table, the wavelength and the range."""


def _enclosing(table: IndexTable, wavelength: float) -> tuple[int, int, float]:
    """The nodes on either side of a wavelength and the way from one to the other, 0 to 1; a node encloses itself."""
    nodes = table.wavelengths
    if not nodes[0] * (1 - SAME_WAVELENGTH) <= wavelength <= nodes[-1] * (1 + SAME_WAVELENGTH):
        raise IndexRangeError(
            f"the refractive index of {table.name} is not known at {wavelength * 1e9:.6g} nm: "
            f"its data reach from {nodes[0] * 1e9:.6g} nm to {nodes[-1] * 1e9:.6g} nm"
        )
    above = min(bisect_left(nodes, wavelength * (1 - SAME_WAVELENGTH)), len(nodes) - 1)
    if abs(nodes[above] - wavelength) <= SAME_WAVELENGTH * wavelength:
        return above, above, 0.0
    return above - 1, above, (wavelength - nodes[above - 1]) / (nodes[above] - nodes[above - 1])


def index_at(index: Index, wavelength: float) -> complex:
    """Refractive index at a wavelength.

    n is linear in wavelength between the nodes of a table. k is too, but its logarithm is where both
    neighbours are above 0 and either is below `WEAK_ABSORPTION`. A plain number holds everywhere.

    Parameters
    ----------
    index : complex or IndexTable
    wavelength : float
        In vacuum. [m]

    Returns
    -------
    complex
        n + ik.

    Raises
    ------
    IndexRangeError
        Outside the nodes: nothing is extrapolated.
    """
    if not isinstance(index, IndexTable):
        return complex(index)
    below, above, way = _enclosing(index, wavelength)
    first, second = index.imaginary[below], index.imaginary[above]
    if first > 0 and second > 0 and min(first, second) < WEAK_ABSORPTION:
        imaginary = first * (second / first) ** way
    else:
        imaginary = first + (second - first) * way
    # Rounding must not carry a value past its neighbours.
    imaginary = min(max(imaginary, min(first, second)), max(first, second))
    one, other = index.real[below], index.real[above]
    real = min(max(one + (other - one) * way, min(one, other)), max(one, other))
    return complex(real, imaginary)


def unconfirmed_at(index: Index, wavelength: float) -> bool:
    """Whether the index there rests on a node whose value has not been seen in its source.

    A node itself stands for itself; between two nodes either counts. A plain number is its user's own.

    Raises
    ------
    IndexRangeError
    """
    if not isinstance(index, IndexTable):
        return False
    below, above, _ = _enclosing(index, wavelength)
    return index.unconfirmed[below] or index.unconfirmed[above]


def volume_mixed(first: complex, second: complex, share_of_first: float) -> complex:
    """Index of a mixture, n and k linear in volume.

    Good to about 0.003 in n for water with organic liquids and salts; the published wet indices of OPAC (Hess,
    Koepke & Schult 1998, Bull. Am. Meteorol. Soc. 79, 831) are made so, which tests/published holds it against.

    Parameters
    ----------
    first, second : complex
    share_of_first : float
        Of the volume, 0 to 1.

    Raises
    ------
    ValueError
        If the share is outside 0 to 1.
    """
    if not 0 <= share_of_first <= 1:
        raise ValueError(f"a share of {share_of_first:.6g} by volume is not between 0 and 1")
    return share_of_first * first + (1 - share_of_first) * second
