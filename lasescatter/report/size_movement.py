"""How scattered light moves over the sizes that a kind of particles may have, where the user has not stated them."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from lasescatter.matter import SizeSpan
from lasescatter.report.left_out import wavelengths, where_left_out
from lasescatter.report.quantities import digits, small_length, trimmed, wavelength
from lasescatter.report.styles import heads, paragraph, ruled, words
from lasescatter.report.typography import abridged, markup, plain
from lasescatter.scene import Load

if TYPE_CHECKING:
    # A file is checked without the computation.
    from lasescatter.assessment.outcome import Assessment, SizeMovement

MOST_OBSERVERS = 8
"""More than so many: those whose light moves most are printed."""
MOST_SIZES = 7
NAME = 60


def relative(movement: SizeMovement) -> list[list[float | None]]:
    """Per observer, per size: light relative to that at the usual size; None where none arrives at that size."""
    usual = movement.sizes.index(movement.usual)
    return [[value / row[usual] if row[usual] > 0 else None for value in row] for row in movement.scattered]


def extremes(movement: SizeMovement) -> tuple[float, float] | None:
    """Least and greatest relative light over all observers and sizes; None where none arrives."""
    found = [value for row in relative(movement) for value in row if value is not None]
    return (min(found), max(found)) if found else None


def size_range(low: float, high: float, micro: str = "µm") -> str:
    """For example "0.5 to 1.5 µm"."""
    return f"{trimmed(float(f'{low * 1e6:.3g}'))} to {trimmed(float(f'{high * 1e6:.3g}'))} {micro}"


def size_warnings(assessment: Assessment) -> list[str]:
    """One line for each load whose size is uncertain and not stated, for a terminal."""
    lines = []
    for movement in assessment.size_movements:
        name = _named(movement.load, movement.kind)
        found = extremes(movement)
        missing = where_left_out(assessment, movement.load)
        not_computed = f"its light at {_waves(missing)} is not computed" if missing else ""
        over = f"a {plain(movement.what)} of {size_range(movement.sizes[0], movement.sizes[-1], 'um')}"
        if len(missing) == len(wavelengths(assessment.scene)):
            lines.append(f"{name}: size not stated ({over}); {not_computed}, so how it moves is not known")
            continue
        moves = (
            f"no light of it arrives over {over}"
            if found is None
            else f"light is {digits(found[0], 2)} to {digits(found[1], 2)} times that of the usual size over {over}, "
            "which the bounds carry"
        )
        lines.append(f"{name}: size not stated; {moves}{f'; {not_computed}' if not_computed else ''}")
    return lines


def size_request(load: Load, span: SizeSpan) -> str:
    """One line that asks for the size of a load, for a terminal."""
    sizes = size_range(span.low, span.high, "um")
    usual = trimmed(float(f"{span.usual * 1e6:.3g}"))
    return (
        f"{_named(load.name, load.kind)}: size not stated ({plain(span.what)} is taken as {usual} um; it may be "
        f"{sizes}): state it as [particles.sizes], for example with mass_median_diameter and geometric_sd"
    )


def _waves(found: tuple[float, ...]) -> str:
    return ", ".join(wavelength(at) for at in found)


def _named(load: str, kind: str) -> str:
    """Load and kind, each once."""
    shown = abridged(plain(load), NAME)
    return shown if kind in ("", load) else f"{shown} ({abridged(plain(kind), NAME)})"


def movement_section(movement: SizeMovement, assessment: Assessment) -> list[Any]:
    """The sentence that asks for the size, and the table of observers by sizes."""
    observers = tuple(observer.name for observer in assessment.observers)
    missing = where_left_out(assessment, movement.load)
    found = extremes(movement)
    if len(missing) == len(wavelengths(assessment.scene)):
        return [
            paragraph(
                f"<b>State the size</b>, for when the load can be computed. The size of "
                f"{markup(movement.kind, NAME)} is uncertain ({markup(movement.what)} of "
                f"{size_range(movement.sizes[0], movement.sizes[-1])}) and the "
                f"site file does not state it. The light of this load is <b>not computed</b> at {_waves(missing)}, so "
                f"how it moves with the size is not known. Sizes from: {markup(movement.source, 300)}."
            )
        ]
    moved = (
        "no scattered light of it arrives"
        if found is None
        else f"its scattered light moves from {digits(found[0])} to {digits(found[1])} of that at the usual size"
    )
    story: list[Any] = [
        paragraph(
            f"<b>State the size.</b> The size of {markup(movement.kind, NAME)} is uncertain and the site file does "
            f"not state it. Over a {markup(movement.what)} of {size_range(movement.sizes[0], movement.sizes[-1])}, "
            f"the load's reading kept, {moved} ({small_length(movement.usual)}), which the rest of this report "
            f"uses. {f'At {_waves(missing)} its light is not computed. ' if missing else ''}"
            f"Sizes from: {markup(movement.source, 300)}."
        )
    ]
    if found is None:
        return story
    shown = _most_moved(movement)
    sizes = _few(movement)
    rows: list[list[Any]] = [
        heads("No.", "Observer", *(small_length(movement.sizes[i]) for i in sizes), "at usual size [W/m²]",
              numeric_from=2)
    ]  # fmt: skip
    if movement.factor:
        rows[0] += heads("factor in bounds", numeric_from=0)
    usual = movement.sizes.index(movement.usual)
    ratios = relative(movement)
    for place in shown:
        rows.append(
            [
                str(place + 1),
                words(observers[place] if place < len(observers) else "", limit=NAME),
                *(digits(ratios[place][i]) for i in sizes),
                digits(movement.scattered[place][usual]),
                *([digits(movement.factor[place])] if movement.factor else []),
            ]
        )
    widths = [*[14.0] * len(sizes), 25.0, *([17.0] if movement.factor else [])]
    story.append(ruled(rows, [8, 166 - sum(widths), *widths], numeric=tuple(range(2, 2 + len(widths)))))
    notes = [
        "This load's own share of the scattered light as compared, on the beam line on which it moves most, relative "
        f"to the usual {markup(movement.what)}."
    ]
    if movement.factor:
        notes.append(
            "Factor in bounds: times which the upper bound of a ratio takes the light of this load, for trust and for "
            "the size that sends most."
        )
    if len(shown) < len(movement.scattered):
        notes.append(f"The {len(shown)} observers of {len(movement.scattered)} whose light moves most are shown.")
    if len(sizes) < len(movement.sizes):
        notes.append(f"{len(sizes)} of {len(movement.sizes)} sizes are shown; all are in the record.")
    story.append(paragraph(" ".join(notes), "note"))
    return story


def _most_moved(movement: SizeMovement) -> list[int]:
    """Places of the observers to print, in their order."""

    def stretch(place: int) -> float:
        values = movement.scattered[place]
        return max(values) / min(values) if min(values) > 0 else float(max(values) > 0)

    places = sorted(range(len(movement.scattered)), key=lambda place: (-stretch(place), place))
    return sorted(places[:MOST_OBSERVERS])


def _few(movement: SizeMovement) -> list[int]:
    """Places of the sizes to print: the ends, the usual one, and others evenly between."""
    count = len(movement.sizes)
    if count <= MOST_SIZES:
        return list(range(count))
    usual = movement.sizes.index(movement.usual)
    kept = {round(i * (count - 1) / (MOST_SIZES - 2)) for i in range(MOST_SIZES - 1)}
    return sorted(kept | {usual})
