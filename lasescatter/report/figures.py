"""The figures of a report, by name, and their files."""

from __future__ import annotations

from collections.abc import Callable
from io import BytesIO
from pathlib import Path
from typing import TYPE_CHECKING

from lasescatter.assessment.outcome import Assessment

if TYPE_CHECKING:
    from matplotlib.figure import Figure

PNG_DOTS_PER_INCH = 200


def figure_makers(assessment: Assessment) -> dict[str, Callable[[], Figure]]:
    """What draws each figure of this assessment, in the order in which the report shows them."""
    from lasescatter.report.curves import draw_phase
    from lasescatter.report.drawings import draw_site
    from lasescatter.report.site_view import near_plan

    near = near_plan(assessment.scene)
    makers: dict[str, Callable[[], Figure]] = {
        "plan": lambda: draw_site(assessment, "plan"),
        **({} if near is None else {"plan_near": lambda: draw_site(assessment, "plan", near)}),
        "elevation": lambda: draw_site(assessment, "elevation"),
    }
    if assessment.components:
        makers["phase"] = lambda: draw_phase(assessment)
    return makers


def pdf_figures(assessment: Assessment) -> tuple[bytes, dict[str, tuple[float, float]]]:
    """Figures as one PDF with a page each, and their printed width and height. [mm]

    One document, so that they share their typefaces.
    """
    from matplotlib import rc_context
    from matplotlib.backends.backend_pdf import PdfPages

    from lasescatter.report.ink import INCH, RC

    sizes: dict[str, tuple[float, float]] = {}
    target = BytesIO()
    # Dates and program names would differ from run to run; the report carries its own.
    metadata = {"CreationDate": None, "Creator": None, "Producer": None}
    with rc_context(RC), PdfPages(target, metadata=metadata) as pages:
        for name, maker in figure_makers(assessment).items():
            figure = maker()
            pages.savefig(figure)
            width, height = figure.get_size_inches() * INCH
            sizes[name] = float(width), float(height)
    return target.getvalue(), sizes


def write_figures(assessment: Assessment, folder: Path, stem: str) -> list[Path]:
    """Write every figure as SVG and PNG: STEM_plan.svg, STEM_plan.png, and so on.

    Parameters
    ----------
    assessment : Assessment
    folder : Path
        An existing folder; files of the same names are replaced.
    stem : str
        Start of each file's name.

    Returns
    -------
    list of Path
        The files written, in the order written.
    """
    from matplotlib import rc_context
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.backends.backend_svg import FigureCanvasSVG

    from lasescatter.report.ink import RC

    written = []
    with rc_context(RC):
        for name, maker in figure_makers(assessment).items():
            figure = maker()
            vector, raster = folder / f"{stem}_{name}.svg", folder / f"{stem}_{name}.png"
            with vector.open("w", encoding="utf-8", newline="\n") as target:
                FigureCanvasSVG(figure).print_svg(target, metadata={"Date": None, "Creator": None})
            figure.set_dpi(PNG_DOTS_PER_INCH)
            with raster.open("wb") as pixels:
                FigureCanvasAgg(figure).print_png(pixels, metadata={"Software": None})
            written += [vector, raster]
    return written
