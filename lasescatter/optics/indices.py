"""Refractive index at a wavelength: from a table, and of volume mixtures."""

from __future__ import annotations

from lasescatter.matter import Index


class IndexRangeError(ValueError):
    """A wavelength outside an index table; the text names the table, the wavelength and the range."""


def index_at(index: Index, wavelength: float) -> complex: ...


def unconfirmed_at(index: Index, wavelength: float) -> bool: ...


def volume_mixed(first: complex, second: complex, share_of_first: float) -> complex: ...
