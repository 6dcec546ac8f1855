"""House style of the figures: inks told apart in grey too, line styles, hatching, text that is never markup."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from lasescatter.report.typography import printable

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure
    from matplotlib.text import Text

INCH = 25.4
"""[mm]"""

DARK = "#1b1b1e"
GREY = "#85857f"
FAINT = "#c9c8c2"
BEAM_INKS = ("#1d3557", "#b3661a", "#2c8577", "#7a2e57")
BEAM_DASHES: tuple[Any, ...] = ("-", (0, (6, 1.6)), (0, (6, 1.4, 1.2, 1.4)), (0, (1.6, 1.2)))
HATCHES = ("////", "....", "\\\\\\\\", "xxxx", "++++", "oooo")

CLEAR = {"facecolor": "white", "edgecolor": "none", "pad": 0.5}
"""Ground under a label that lies on hatching."""

RC: Any = {
    "font.family": "DejaVu Sans",
    "font.size": 7.0,
    "axes.edgecolor": DARK,
    "axes.linewidth": 0.6,
    "xtick.direction": "out",
    "ytick.direction": "out",
    "xtick.major.width": 0.5,
    "ytick.major.width": 0.5,
    "xtick.major.size": 2.5,
    "ytick.major.size": 2.5,
    "hatch.linewidth": 0.35,
    "pdf.fonttype": 42,
    "pdf.compression": 6,
    "svg.fonttype": "path",
    "svg.hashsalt": "lasescatter",
    "path.simplify": False,
    "text.usetex": False,
    "text.parse_math": False,
    "axes.unicode_minus": True,
    "axes.formatter.use_mathtext": False,
}


def sheet(width: float, height: float) -> Figure:
    """An empty figure of a printed size. [mm]"""
    from matplotlib.figure import Figure

    return Figure(figsize=(width / INCH, height / INCH), facecolor="white")


def panel(figure: Figure, left: float, bottom: float, width: float, height: float) -> Axes:
    """Axes at a place on the sheet. [mm]"""
    across, up = figure.get_size_inches() * INCH
    return figure.add_axes((left / across, bottom / up, width / across, height / up))


def write(axes: Axes, x: float, y: float, text: str, **options: Any) -> Text:
    """Text at a point of the axes; user text is shown as typed."""
    return axes.text(x, y, printable(text), **{"parse_math": False, "color": DARK, **options})


def text_size(text: str, size: float) -> tuple[float, float]:
    """Width and height of a line of text. [mm]"""
    from matplotlib.font_manager import FontProperties
    from matplotlib.textpath import text_to_path

    font = FontProperties(family="DejaVu Sans", size=size)
    width, height, _ = text_to_path.get_text_width_height_descent(printable(text), font, False)
    return float(width) * INCH / 72, max(float(height), size) * INCH / 72


def cut(text: str, size: float, width: float) -> str:
    """Text cut to a width. [mm]"""
    shown = printable(text)[:200]
    if text_size(shown, size)[0] <= width:
        return shown
    low, high = 0, len(shown)
    while low < high:
        middle = (low + high + 1) // 2
        if text_size(shown[:middle] + "…", size)[0] <= width:
            low = middle
        else:
            high = middle - 1
    return shown[:low] + "…"
