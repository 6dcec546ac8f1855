"""At which wavelengths the index data of a kind of particles hold."""

from __future__ import annotations

from typing import Literal

from lasescatter.matter import Kind
from lasescatter.optics.indices import IndexRangeError, index_at, unconfirmed_at


def answer_at(kind: Kind, wavelength: float) -> Literal["yes", "weak", "no"]:
    """Whether a kind answers at a wavelength: "weak" on unconfirmed data, "no" outside its data.

    A kind that takes up water needs the index of water there too.

    Parameters
    ----------
    kind : Kind
    wavelength : float
        In vacuum. [m]
    """
    indices = []
    for material in {mode.material or kind.material for mode in kind.modes}:
        indices += [material.index, *([material.growth.water] if material.growth else [])]
    try:
        for index in indices:
            index_at(index, wavelength)
    except IndexRangeError:
        return "no"
    return "weak" if any(unconfirmed_at(index, wavelength) for index in indices) else "yes"
