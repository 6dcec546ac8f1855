"""The phase functions: how much light each component sends at which scattering angle, and its polarization."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from lasescatter.assessment.outcome import Assessment, ComponentSummary
from lasescatter.report.ink import BEAM_DASHES, BEAM_INKS, DARK, FAINT, cut, panel, sheet, write
from lasescatter.report.quantities import trimmed, wavelength

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

SHEET = 174.0
_LEFT, _WIDTH = 17.0, 153.0
_UPPER, _LOWER = 50.0, 25.0
_ROW = 4.1
_COLUMNS = 2
_MOST_CURVES = 16
_SIGNS = ("", "o", "s", "^", "v", "D")
"""On the curves, by wavelength."""


def draw_phase(assessment: Assessment) -> Figure:
    """F11/(4π) and −F12/F11 of the components over the scattering angle."""
    import math

    import numpy as np

    shown = assessment.components[:_MOST_CURVES]
    rows = math.ceil(len(shown) / _COLUMNS) + (len(shown) < len(assessment.components))
    below = 12.0 + rows * _ROW
    total = 6.5 + _UPPER + 5.0 + _LOWER + below
    figure = sheet(SHEET, total)
    upper = panel(figure, _LEFT, below + _LOWER + 5.0, _WIDTH, _UPPER)
    lower = panel(figure, _LEFT, below, _WIDTH, _LOWER)
    for place, entry in enumerate(shown):
        ink, dash, sign = _style(entry, shown)
        angles = np.degrees(entry.angles)
        f11, f12 = np.asarray(entry.phase), np.asarray(entry.phase_12)
        every = (place * len(angles) // 60, max(1, len(angles) // 9))
        look = {"color": ink, "linestyle": dash, "linewidth": 1.1, "markevery": every, **_marks(sign, ink)}
        upper.plot(angles, np.where(f11 > 0, f11, np.nan), **look)
        ratio = np.divide(-f12, f11, out=np.full_like(f11, np.nan), where=f11 > 0)
        lower.plot(angles, ratio, **look)
    upper.set_yscale("log")
    floor, ceiling = upper.get_ylim()
    upper.set_ylim(10 ** math.floor(math.log10(floor)), 10 ** math.ceil(math.log10(ceiling)))
    upper.yaxis.set_major_formatter(lambda value, _place: trimmed(float(f"{value:.3g}")) if value > 0 else "")
    upper.yaxis.set_minor_formatter("")
    lower.set_ylim(-1.05, 1.05)
    _dress(upper, "F11/(4π)  [1/sr]", labelled=False)
    _dress(lower, "−F12/F11", labelled=True)
    lower.set_xlabel("scattering angle [deg]: 0 straight on, 180 straight back", fontsize=7, labelpad=1.5, color=DARK)
    lower.axhline(0, color=DARK, linewidth=0.4)
    upper.set_title("Scattering by direction, and its polarization", fontsize=7.6, fontweight="bold", loc="left", pad=4)
    _key(figure, shown, len(assessment.components) - len(shown), below - 12.0)
    return figure


def _marks(sign: str, ink: str) -> dict[str, Any]:
    return {
        "marker": sign,
        "markersize": 2.8,
        "markerfacecolor": "white",
        "markeredgecolor": ink,
        "markeredgewidth": 0.7,
    }


def _style(entry: ComponentSummary, shown: tuple[ComponentSummary, ...]) -> tuple[str, object, str]:
    """Ink and dash by component, sign by wavelength."""
    names = list(dict.fromkeys(other.name for other in shown))
    waves = list(dict.fromkeys(other.wavelength for other in shown))
    which = names.index(entry.name)
    return (
        BEAM_INKS[which % len(BEAM_INKS)],
        BEAM_DASHES[which % len(BEAM_DASHES)],
        _SIGNS[waves.index(entry.wavelength) % len(_SIGNS)],
    )


def _dress(axes: Axes, label: str, labelled: bool) -> None:
    axes.set_xlim(0, 180)
    axes.set_xticks(range(0, 181, 15))
    axes.tick_params(labelsize=6.5, labelbottom=labelled)
    axes.grid(True, color=FAINT, linewidth=0.3)
    axes.set_ylabel(label, fontsize=7, color=DARK)


def _key(figure: Figure, shown: tuple[ComponentSummary, ...], hidden: int, top: float) -> None:
    axes = panel(figure, 0, 0, SHEET, top)
    axes.set_axis_off()
    axes.set_xlim(0, SHEET)
    axes.set_ylim(0, top)
    column = _WIDTH / _COLUMNS
    rows = -(-len(shown) // _COLUMNS)
    for place, entry in enumerate(shown):
        ink, dash, sign = _style(entry, shown)
        across, down = divmod(place, rows)
        x, y = _LEFT + across * column, top - (down + 0.5) * _ROW
        axes.plot(
            [x, x + 5, x + 10], [y] * 3, color=ink, linestyle=dash, linewidth=1.1, markevery=[1], **_marks(sign, ink)
        )
        write(axes, x + 12, y, cut(f"{wavelength(entry.wavelength)}, {entry.name}", 6.3, column - 14), fontsize=6.3,
              va="center")  # fmt: skip
    if hidden:
        write(axes, _LEFT, top - (rows + 0.5) * _ROW, f"{hidden} more in the tables only", fontsize=6.3, va="center")
