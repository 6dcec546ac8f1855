"""The modes of a size distribution one by one: name, share by number, growth, index as they float."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from lasescatter.matter import Material, SizeMode
from lasescatter.optics.growth import as_they_float
from lasescatter.optics.indices import IndexRangeError
from lasescatter.scene import Air


@dataclass(frozen=True)
class ModeRow:
    """One mode as it floats."""

    name: str
    share: float
    """By number."""
    growth: float
    """Radius over dry radius."""
    indices: tuple[complex | None, ...]
    """At the wavelengths asked for; None where some index is not known there."""


def mode_rows(
    modes: tuple[SizeMode, ...], material: Material | None, air: Air, wavelengths: Sequence[float], names: Sequence[str]
) -> list[ModeRow]:
    """Each mode in the order of the site file or the catalogue. Wavelengths in metres."""
    floating = as_they_float(modes, material, air.relative_humidity, air.temperature)
    columns: list[tuple[complex, ...] | None] = []
    for wavelength in wavelengths:
        try:
            columns.append(floating.indices(wavelength))
        except IndexRangeError:
            columns.append(None)
    return [
        ModeRow(name, mode.weight, factor, tuple(None if column is None else column[place] for column in columns))
        for place, (name, mode, factor) in enumerate(zip(names, modes, floating.factors, strict=True))
    ]


def mode_names(count: int, data: Mapping[str, Any] | None = None) -> tuple[str, ...]:
    """Names of modes: of the parts that a kind of the catalogue is made of (`data`: its file as read), else numbers."""
    numbered = tuple(f"mode {place}" for place in range(1, count + 1))
    parts, read = (data or {}).get("part"), (data or {}).get("parts as read")
    if not isinstance(parts, list) or not isinstance(read, Mapping):
        return numbered
    by_name = {_plain(name): (name, kind) for name, kind in read.items()}
    names: list[str] = []
    for part in parts:
        name, kind = by_name.get(_plain(str(part.get("kind"))), ("", {}))
        sizes = kind.get("sizes")
        several = len(sizes) if isinstance(sizes, list) else 1
        names += [name] if several == 1 else [f"{name}, mode {place}" for place in range(1, several + 1)]
    return tuple(names) if len(names) == count and all(names) else numbered


def _plain(name: str) -> str:
    """A name as the catalogue compares it: case, spaces, hyphens, underscores and commas do not count."""
    return re.sub(r"[\s\-_,()]+", "", name).casefold()
