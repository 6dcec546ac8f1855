"""A table of refractive indices from a file: wavelength, n and k."""

from __future__ import annotations

from lasescatter.matter import IndexTable
from lasescatter.site.columns import Column, TableError, ascending, exactly_one, read_columns
from lasescatter.site.faults import quoted

_K = "from 0 to 20; absorption is positive here (n + ki): turn the sign of values written as n - ki"
_COLUMNS = (
    Column("wavelength", "wavelength [nm]", ("wavelength", "lambda", "wl", "λ"), 1e-7, 1e-3,
           "from 100 nm to 1 mm", "wavelength"),
    Column("n", "n", ("n", "real", "re"), 0.05, 10, "from 0.05 to 10"),
    Column("k", "k", ("k", "imaginary", "imag", "im", "kappa"), 0, 20, _K),
)  # fmt: skip
_ADVICE = {
    "wavenumber": "Give the wavelength in vacuum: 1 divided by the wavenumber",
    "eps1": "Give n and k, the parts of the square root of the permittivity",
    "alpha": "Give k = absorption coefficient times wavelength / (4 pi)",
}


def index_table(file: str, text: str) -> tuple[IndexTable, str]:
    """The refractive index that a file holds, and what became of it in words.

    Raises
    ------
    TableError
    """
    table = read_columns(file, text, _COLUMNS, _ADVICE)
    for key in ("wavelength", "n", "k"):
        exactly_one(file, table, (key,), _COLUMNS)
    rows = len(table.lines)
    if rows < 2:
        raise TableError([(f"{file} has one row", "Give at least two wavelengths, or write the index as index")])
    ascending(table, "wavelength")
    nodes, real, imaginary = (table.values[key] for key in ("wavelength", "n", "k"))
    for row in range(rows):
        if real[row] == 1 and imaginary[row] == 0:
            raise TableError([(f"{table.place(row, 'n')}: n = 1 without absorption does not scatter",
                               "Give the index of the particles in vacuum or air")])  # fmt: skip
    told = f"{rows} wavelengths from {nodes[0]:.6g} m to {nodes[-1]:.6g} m; beyond them it is not known"
    return IndexTable(nodes, real, imaginary, (False,) * rows, file, f"entered by the user: {quoted(file)}"), told
