"""Plan and elevation of the site, to scale."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from lasescatter.assessment.outcome import Assessment
from lasescatter.limits.verdict import ABOVE, BELOW, NOT_ESTABLISHED
from lasescatter.report import symbols
from lasescatter.report.drawing_key import Entry, draw_key, key_height
from lasescatter.report.ink import (
    BEAM_DASHES,
    BEAM_INKS,
    CLEAR,
    DARK,
    FAINT,
    GREY,
    HATCHES,
    panel,
    sheet,
    write,
)
from lasescatter.report.labels import Rect, Room
from lasescatter.report.naming import beam_letter
from lasescatter.report.quantities import trimmed
from lasescatter.report.site_view import Kind, Point, View, scale_words, ticks, views
from lasescatter.report.typography import printable
from lasescatter.scene import Beam, Box, LengthUnit, Load, Vector

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

SHEET = 174.0
"""Width of a figure. [mm]"""
_LEFT, _TOP, _STRIP = 15.0, 6.5, 19.0
_LONGEST_BAR = 70.0
_NAMED_OBSERVERS = 8
_NAME_LENGTH = 28
_LABEL_SHARES = (0.5, 0.36, 0.64, 0.25, 0.75)
_SQUARE_ON = 0.08
"""Share in the paper below which a leg counts as square to it."""


def draw_site(assessment: Assessment, kind: Kind, enlarged: View | None = None) -> Figure:
    """One view of the site, or an enlarged part of it; its printed width is `SHEET`."""
    scene = assessment.scene
    view = enlarged or views(scene)[kind]
    room = Room(Rect(0.5, 0.5, view.width - 0.5, view.height - 0.5))
    entries = _beam_entries(assessment) + _load_entries(scene.loads) + _sign_entries(assessment, view)
    unnamed = _unnamed(assessment)
    total = _TOP + view.height + _STRIP + key_height(entries, unnamed)
    figure = sheet(SHEET, total)
    axes = panel(figure, _LEFT, total - _TOP - view.height, view.width, view.height)
    axes.set_xlim(0, view.width)
    axes.set_ylim(0, view.height)
    _frame(axes, view, scene.length_unit, enlarged is not None)
    for place, load in enumerate(scene.loads):
        _load(axes, view, load, place, room)
    for beam in scene.beams:
        _note_strokes(view, beam, room)
        _beam_plates(axes, view, beam, room)
    _observers(axes, view, assessment, room)
    for place, beam in enumerate(scene.beams):
        _beam(axes, view, beam, place, room)
    below = panel(figure, 0, 0, SHEET, total - _TOP - view.height)
    below.set_axis_off()
    below.set_xlim(0, SHEET)
    below.set_ylim(0, total - _TOP - view.height)
    _scale_bar(below, view, scene.length_unit, total - _TOP - view.height - 13.0)
    draw_key(below, entries, unnamed, total - _TOP - view.height - _STRIP)
    return figure


def _frame(axes: Axes, view: View, unit: LengthUnit, enlarged: bool) -> None:
    """Ticks in the site's unit, and the title."""
    for setter, labels, start, size, wanted in (
        (axes.set_xticks, axes.set_xticklabels, view.origin[0], view.width, 9),
        (axes.set_yticks, axes.set_yticklabels, view.origin[1], view.height, max(2, int(view.height / 14))),
    ):
        low = start / unit.metres
        step = view.scale / 1000.0 / unit.metres
        values = ticks(low, low + size * step, wanted, 2)
        setter([(value - low) / step for value in values])
        labels([printable(trimmed(value).replace("-", "−")) for value in values], fontsize=6.5)
    across, up = view.axis_names
    axes.set_xlabel(f"{across} [{unit.name}]", fontsize=7, labelpad=1.5, color=DARK)
    axes.set_ylabel(f"{up} [{unit.name}]", fontsize=7, labelpad=1.5, color=DARK)
    axes.grid(True, color=FAINT, linewidth=0.25, zorder=0)
    axes.set_axisbelow(True)
    name = view.kind.capitalize() + (", enlarged part" if enlarged else "")
    write(axes, 0, view.height + 1.6, f"{name}, {view.seen}", fontsize=7.6, fontweight="bold")
    told = f"{scale_words(view.scale)} at a printed width of the whole figure of {SHEET:.0f} mm"
    write(axes, view.width, view.height + 1.6, told, fontsize=7, ha="right")  # fmt: skip


def _scale_bar(axes: Axes, view: View, unit: LengthUnit, y: float) -> None:
    """A bar of a round length in the site's unit."""
    per_unit = 1000.0 * unit.metres / view.scale
    power = math.floor(math.log10(_LONGEST_BAR / per_unit))
    size = max(digit * 10.0**power for digit in (1.0, 2.0, 5.0) if digit * 10.0**power * per_unit <= _LONGEST_BAR)
    length = size * per_unit
    parts = 5 if f"{size:.0e}"[0] == "5" else 4 if f"{size:.0e}"[0] == "2" else 5
    for i in range(parts):
        axes.fill_between([_LEFT + i * length / parts, _LEFT + (i + 1) * length / parts], y, y + 1.3,
                          facecolor=DARK if i % 2 == 0 else "white", edgecolor=DARK, linewidth=0.5)  # fmt: skip
    write(axes, _LEFT, y - 0.8, "0", fontsize=6.3, ha="center", va="top")
    write(axes, _LEFT + length, y - 0.8, f"{trimmed(size)} {unit.name}", fontsize=6.3, ha="center", va="top")
    write(axes, SHEET - 3, y + 0.6, f"scale {scale_words(view.scale)}; symbols are not to scale",
          fontsize=6.3, ha="right", va="center")  # fmt: skip


def _load(axes: Axes, view: View, load: Load, place: int, room: Room) -> None:
    from matplotlib.patches import Rectangle

    hatch = HATCHES[place % len(HATCHES)]
    if isinstance(load.region, Box):
        left, bottom = view.paper(load.region.low)
        right, top = view.paper(load.region.high)
    else:
        left, bottom, right, top = -1.0, -1.0, view.width + 1, view.height + 1
    # Hatching only where it shows: a box of kilometres would take a pattern of millions of strokes.
    left, bottom = max(left, -1.0), max(bottom, -1.0)
    right, top = min(right, view.width + 1), min(top, view.height + 1)
    if right <= left or top <= bottom:
        return
    corner, across, up = (left, bottom), right - left, top - bottom
    axes.add_patch(Rectangle(corner, across, up, facecolor="none", edgecolor=FAINT, hatch=hatch, linewidth=0, zorder=1))
    axes.add_patch(
        Rectangle(
            corner, across, up, facecolor="none", edgecolor=GREY, linewidth=0.8, linestyle=(0, (4, 1.5)), zorder=2
        )
    )


def _legs(beam: Beam) -> list[tuple[Vector, Vector]]:
    return list(zip(beam.points, beam.points[1:], strict=False))


def _along(start: Vector, end: Vector) -> Vector:
    size = math.dist(start, end) or 1.0
    x, y, z = ((b - a) / size for a, b in zip(start, end, strict=True))
    return x, y, z


def _exit(view: View, start: Point, along: Point) -> Point:
    """Where a ray from a point inside the drawing meets its edge, a little inside."""
    inset = 1.5
    share = math.inf
    for value, step, size in ((start[0], along[0], view.width), (start[1], along[1], view.height)):
        if abs(step) > 1e-12:
            share = min(share, ((size - inset if step > 0 else inset) - value) / step)
    share = max(0.0, share)
    return start[0] + share * along[0], start[1] + share * along[1]


def _square_on(view: View, beam: Beam, number: int) -> bool:
    """True for a leg that runs straight through the paper."""
    return math.hypot(*view.direction(_along(*_legs(beam)[number]))) < _SQUARE_ON


def _leg_on_paper(view: View, beam: Beam, number: int) -> tuple[Point, Point, Point]:
    """Start and end as drawn, and the direction in the paper."""
    start, end = _legs(beam)[number]
    along = view.direction(_along(start, end))
    first, last = view.paper(start), view.paper(end)
    if beam.leaves_site and number == len(beam.points) - 2 and not _square_on(view, beam, number):
        last = _exit(view, first, along)
    return first, last, along


def _note_strokes(view: View, beam: Beam, room: Room) -> None:
    room.mark(view.paper(beam.points[0]), 0.8)
    for number in range(len(beam.points) - 1):
        first, last, _ = _leg_on_paper(view, beam, number)
        if _square_on(view, beam, number):
            room.mark(first, 1.3)
        room.stroke(first, last)


def _beam(axes: Axes, view: View, beam: Beam, place: int, room: Room) -> None:
    """Legs with direction, number and ends."""
    ink, dash = BEAM_INKS[place % len(BEAM_INKS)], BEAM_DASHES[place % len(BEAM_DASHES)]
    for number, (start, end) in enumerate(_legs(beam)):
        first, last, along = _leg_on_paper(view, beam, number)
        endless = beam.leaves_site and number == len(beam.points) - 2
        # Off the middle by turns, so that legs folded over one another keep their labels apart.
        share = _LABEL_SHARES[number % len(_LABEL_SHARES)]
        if not _square_on(view, beam, number):
            first, last = view.shown_part(first, last)
        middle = (first[0] + share * (last[0] - first[0]), first[1] + share * (last[1] - first[1]))
        if _square_on(view, beam, number):
            symbols.through_paper(axes, first, view.towards_reader(_along(start, end)) > 0, ink)
            middle = first
        else:
            symbols.stroke(axes, first, last, ink, dash)
            if math.dist(first, last) > 6:
                tip = (middle[0] + 1.2 * along[0], middle[1] + 1.2 * along[1])
                symbols.arrow(axes, tip, along, ink)
            if endless:
                symbols.endless(axes, last, along, ink)
        text = f"{beam_letter(place)}{number + 1}"
        spot = room.place(text, 7.2, middle, 1.2, forced=True)
        if spot is not None:
            symbols.leader(axes, middle, room.taken[-1], 1.2)
            write(
                axes,
                *spot,
                text,
                fontsize=7.2,
                fontweight="bold",
                color=ink,
                ha="center",
                va="center",
                zorder=9,
                bbox=CLEAR,
            )
    if not _square_on(view, beam, 0):
        start_mark = view.paper(beam.points[0])
        axes.plot([start_mark[0]], [start_mark[1]], marker="o", markersize=3.4, color=ink, zorder=6)


def _beam_plates(axes: Axes, view: View, beam: Beam, room: Room) -> None:
    """Mirrors and stop."""
    for before, at, after in zip(beam.points, beam.points[1:], beam.points[2:], strict=False):
        came, goes = _along(before, at), _along(at, after)
        # The plate's normal halves the turn; it points to the lit side.
        x, y, z = (b - a for a, b in zip(came, goes, strict=True))
        size = math.sqrt(x * x + y * y + z * z) or 1.0
        symbols.plate(axes, view.paper(at), view.direction((x / size, y / size, z / size)), filled=False)
        room.mark(view.paper(at), 1.8)
    if beam.stop is not None:
        end = view.paper(beam.points[-1])
        symbols.plate(axes, end, view.direction(beam.stop.facing), filled=True)
        room.mark(end, 2.2)


def _named(assessment: Assessment) -> bool:
    return len(assessment.observers) <= _NAMED_OBSERVERS


def _short(name: str) -> bool:
    return len(printable(name)) <= _NAME_LENGTH


def _unnamed(assessment: Assessment) -> list[tuple[int, str]]:
    """Observers whose name the key has to give."""
    return [
        (number, outcome.name)
        for number, outcome in enumerate(assessment.observers, start=1)
        if not (_named(assessment) and _short(outcome.name))
    ]


def _groups(spots: list[Point]) -> list[list[int]]:
    """Observers whose marks would cover one another, by place in the list."""
    groups: list[list[int]] = []
    for number, spot in enumerate(spots):
        for group in groups:
            if math.dist(spots[group[0]], spot) < 0.6 * symbols.MARKER:
                group.append(number)
                break
        else:
            groups.append([number])
    return groups


def _observers(axes: Axes, view: View, assessment: Assessment, room: Room) -> None:
    scene = assessment.scene
    reach = {observer.key: observer.reach for observer in scene.observers}
    spots = [view.paper(outcome.position) for outcome in assessment.observers]
    for spot, outcome in zip(spots, assessment.observers, strict=True):
        symbols.observer(axes, spot, 1000.0 * reach.get(outcome.key, 0.0) / view.scale, outcome.verdict)
        room.mark(spot, 0.55 * symbols.MARKER)
    size = 6.6 if len(spots) <= 30 else 5.2
    for group in (group for group in _groups(spots) if view.holds(spots[group[0]])):
        spot = spots[group[0]]
        for text, forced in _candidates(assessment, group):
            found = room.place(text, size, spot, 0.75 * symbols.MARKER, forced)
            if found is not None:
                symbols.leader(axes, spot, room.taken[-1], 0.75 * symbols.MARKER)
                write(axes, *found, text, fontsize=size, ha="center", va="center", zorder=9, bbox=CLEAR)
                break


def _candidates(assessment: Assessment, group: list[int]) -> list[tuple[str, bool]]:
    """Labels to try at a mark, the fullest first."""
    numbers = ", ".join(str(number + 1) for number in group[:4]) + (" …" if len(group) > 4 else "")
    name = assessment.observers[group[0]].name
    if len(group) == 1 and _named(assessment) and _short(name):
        return [(f"{numbers} {name}", False), (f"{numbers} {name}", True)]
    return [(numbers, False), (numbers, True)]


def _beam_entries(assessment: Assessment) -> list[Entry]:
    entries = []
    for place, beam in enumerate(assessment.scene.beams):
        # The name last: what is too long is cut at its end.
        lines = ", ".join(f"{trimmed(line.wavelength * 1e9)} nm" for line in beam.lines)
        text = f"{beam_letter(place)}  {lines}, {beam.name}"
        entries.append(Entry("beam", text, BEAM_INKS[place % len(BEAM_INKS)], BEAM_DASHES[place % len(BEAM_DASHES)]))
    return entries


def _load_entries(loads: tuple[Load, ...]) -> list[Entry]:
    return [
        Entry(
            "load",
            f"{load.name}{'' if isinstance(load.region, Box) else ', everywhere'}",
            hatch=HATCHES[i % len(HATCHES)],
        )
        for i, load in enumerate(loads)
    ]


def _sign_entries(assessment: Assessment, view: View) -> list[Entry]:
    """Signs that occur in the drawing."""
    beams = assessment.scene.beams
    through = {
        view.towards_reader(_along(*leg)) > 0
        for beam in beams
        for number, leg in enumerate(_legs(beam))
        if _square_on(view, beam, number)
    }
    entries = [Entry("start", "start of a beam")]
    if any(len(beam.points) > 2 for beam in beams):
        entries.append(Entry("mirror", "mirror"))
    if any(beam.stop is not None for beam in beams):
        entries.append(Entry("stop", "beam stop"))
    if any(beam.leaves_site for beam in beams):
        entries.append(Entry("endless", "goes on past the drawing"))
    if True in through:
        entries.append(Entry("towards", "leg towards the reader"))
    if False in through:
        entries.append(Entry("away", "leg away from the reader"))
    found = {outcome.verdict for outcome in assessment.observers}
    entries += [
        Entry("observer", f"observer, {verdict}", verdict=verdict)
        for verdict in (BELOW, ABOVE, NOT_ESTABLISHED)
        if verdict in found
    ]
    if any(1000.0 * observer.reach / view.scale > symbols.LEAST_RING for observer in assessment.scene.observers):
        entries.append(Entry("reach", "reach of an observer's head"))
    return entries
