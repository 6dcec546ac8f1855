"""The phase functions: how much light goes at which scattering angle, and its degree of linear polarization."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from lasescatter.assessment.outcome import Assessment
from lasescatter.report.ink import BEAM_DASHES, BEAM_INKS, DARK, FAINT, cut, panel, sheet, write
from lasescatter.report.quantities import trimmed, wavelength

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

SHEET = 174.0
_LEFT, _WIDTH = 19.0, 151.0
_UPPER, _LOWER = 50.0, 25.0
_ROW = 4.1
_COLUMNS = 2
_MOST_CURVES = 16
_SIGNS = ("", "o", "s", "^", "v", "D")
"""On the curves, by wavelength."""


@dataclass(frozen=True)
class Curve:
    """One phase function to draw."""

    label: str
    stroke: int
    """Curves of one stroke share ink and dashes."""
    sign: int
    """Curves of one sign share the marks on them."""
    angles: Sequence[float]
    """[rad]"""
    phase: Sequence[float]
    """F11/(4π). [sr⁻¹]"""
    phase_12: Sequence[float]
    """F12/(4π). [sr⁻¹]"""


def draw_phase(assessment: Assessment) -> Figure:
    """F11/(4π) and −F12/F11 of the components: strokes by component, signs by wavelength."""
    shown = assessment.components[:_MOST_CURVES]
    names = list(dict.fromkeys(entry.name for entry in shown))
    waves = list(dict.fromkeys(entry.wavelength for entry in shown))
    curves = [
        Curve(
            f"{wavelength(entry.wavelength)}, {entry.name}", names.index(entry.name), waves.index(entry.wavelength),
            entry.angles, entry.phase, entry.phase_12,
        )
        for entry in shown
    ]  # fmt: skip
    hidden = len(assessment.components) - len(shown)
    return draw_curves(curves, "Scattering by direction, and its polarization", hidden)


def draw_curves(curves: Sequence[Curve], title: str, hidden: int = 0, note: str = "") -> Figure:
    """F11/(4π) on a logarithmic axis, and below it −F12/F11, over the scattering angle; at least one curve.

    `hidden` curves more are said to be in the tables only; `note` stands below the curves' names.
    """
    import math

    import numpy as np

    notes = [f"{hidden} more in the tables only"] * (hidden > 0) + [note] * bool(note)
    rows = math.ceil(len(curves) / _COLUMNS) + len(notes)
    below = 12.0 + rows * _ROW
    total = 6.5 + _UPPER + 5.0 + _LOWER + below
    figure = sheet(SHEET, total)
    upper = panel(figure, _LEFT, below + _LOWER + 5.0, _WIDTH, _UPPER)
    lower = panel(figure, _LEFT, below, _WIDTH, _LOWER)
    for place, curve in enumerate(curves):
        angles = np.degrees(curve.angles)
        f11, f12 = np.asarray(curve.phase), np.asarray(curve.phase_12)
        every = (place * len(angles) // 60, max(1, len(angles) // 9))
        look = {**_look(curve), "markevery": every}
        upper.plot(angles, np.where(f11 > 0, f11, np.nan), **look)
        if np.any(f12):
            ratio = np.divide(-f12, f11, out=np.full_like(f11, np.nan), where=f11 > 0)
            lower.plot(angles, ratio, **look)
    upper.set_yscale("log")
    floor, ceiling = upper.get_ylim()
    upper.set_ylim(10 ** math.floor(math.log10(floor)), 10 ** math.ceil(math.log10(ceiling)))
    upper.yaxis.set_major_formatter(lambda value, _place: trimmed(float(f"{value:.3g}")) if value > 0 else "")
    upper.yaxis.set_minor_formatter("")
    lower.set_ylim(-1.05, 1.05)
    _dress(upper, "F11/(4π)  [1/sr]", labelled=False)
    _dress(lower, "linear\npolarization\n−F12/F11", labelled=True)
    lower.set_xlabel("scattering angle [deg]: 0 straight on, 180 straight back", fontsize=7, labelpad=1.5, color=DARK)
    lower.axhline(0, color=DARK, linewidth=0.4)
    upper.set_title(cut(title, 7.6, 0.9 * _WIDTH), fontsize=7.6, fontweight="bold", loc="left", pad=4,
                    parse_math=False)  # fmt: skip
    _key(figure, curves, notes, below - 12.0)
    return figure


def _look(curve: Curve) -> dict[str, Any]:
    ink = BEAM_INKS[curve.stroke % len(BEAM_INKS)]
    return {
        "color": ink,
        "linestyle": BEAM_DASHES[curve.stroke % len(BEAM_DASHES)],
        "linewidth": 1.1,
        **_marks(_SIGNS[curve.sign % len(_SIGNS)], ink),
    }


def _marks(sign: str, ink: str) -> dict[str, Any]:
    return {
        "marker": sign,
        "markersize": 2.8,
        "markerfacecolor": "white",
        "markeredgecolor": ink,
        "markeredgewidth": 0.7,
    }


def _dress(axes: Axes, label: str, labelled: bool) -> None:
    axes.set_xlim(0, 180)
    axes.set_xticks(range(0, 181, 15))
    axes.tick_params(labelsize=6.5, labelbottom=labelled)
    axes.grid(True, color=FAINT, linewidth=0.3)
    axes.set_ylabel(label, fontsize=7, color=DARK)


def _key(figure: Figure, curves: Sequence[Curve], notes: Sequence[str], top: float) -> None:
    axes = panel(figure, 0, 0, SHEET, top)
    axes.set_axis_off()
    axes.set_xlim(0, SHEET)
    axes.set_ylim(0, top)
    column = _WIDTH / _COLUMNS
    rows = -(-len(curves) // _COLUMNS)
    for place, curve in enumerate(curves):
        across, down = divmod(place, rows)
        x, y = _LEFT + across * column, top - (down + 0.5) * _ROW
        axes.plot([x, x + 5, x + 10], [y] * 3, markevery=[1], **_look(curve))
        write(axes, x + 12, y, cut(curve.label, 6.3, column - 14), fontsize=6.3, va="center")
    for place, note in enumerate(notes):
        y = top - (rows + place + 0.5) * _ROW
        write(axes, _LEFT, y, cut(note, 6.3, _WIDTH), fontsize=6.3, va="center")
