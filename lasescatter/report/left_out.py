"""Light that is not computed because no data reach so far: whose, and at which wavelength; it is never told as zero."""

from __future__ import annotations

from typing import TYPE_CHECKING

from lasescatter.report.quantities import wavelength as in_words
from lasescatter.report.typography import abridged, plain

if TYPE_CHECKING:
    from lasescatter.assessment.outcome import Assessment
    from lasescatter.scene import Scene

AIR = "air"
NOT_COMPUTED = "not computed"
_NAME = 60
_MOST = 4


def wavelengths(scene: Scene) -> tuple[float, ...]:
    """Of all beam lines, each once. [m]"""
    return tuple(dict.fromkeys(line.wavelength for beam in scene.beams for line in beam.lines))


def left_out_at(assessment: Assessment, wavelength: float) -> tuple[str, ...]:
    """Scatterers whose light at a wavelength [m] is not computed: "air" and names of loads."""
    return tuple(gap.component for gap in assessment.gap_entries if gap.left_out and gap.wavelength == wavelength)


def all_left_out(assessment: Assessment, wavelength: float) -> bool:
    """Whether no scattered light at all is computed at a wavelength [m]."""
    return bool(left_out_at(assessment, wavelength)) and not any(
        entry.wavelength == wavelength for entry in assessment.components
    )


def where_left_out(assessment: Assessment, name: str) -> tuple[float, ...]:
    """Wavelengths at which the light of one scatterer is not computed. [m]"""
    return tuple(at for at in wavelengths(assessment.scene) if name in left_out_at(assessment, at))


def lacking(assessment: Assessment, wavelength: float | None = None) -> str:
    """Whose light is not computed, at one wavelength [m] or at any: "air and “fume” at 10600 nm"; "" for nobody's."""
    asked = wavelengths(assessment.scene) if wavelength is None else (wavelength,)
    by_names: dict[tuple[str, ...], list[float]] = {}
    for at in asked:
        names = left_out_at(assessment, at)
        if names:
            by_names.setdefault(names, []).append(at)
    return "; ".join(
        f"{_listed([_shown(name) for name in names])} at {_listed([in_words(at) for at in waves])}"
        for names, waves in by_names.items()
    )


def _shown(name: str) -> str:
    return name if name == AIR else f"“{abridged(plain(name), _NAME)}”"


def _listed(texts: list[str]) -> str:
    if len(texts) > _MOST:
        texts = [*texts[: _MOST - 1], f"{len(texts) - _MOST + 1} more"]
    return texts[0] if len(texts) == 1 else f"{', '.join(texts[:-1])} and {texts[-1]}"
