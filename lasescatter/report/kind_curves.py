"""The phase function of a kind, drawn in the house style and written as a file."""

from __future__ import annotations

from pathlib import Path

from lasescatter.assessment.kind_optics import KindOptics
from lasescatter.report.quantities import wavelength

FORMATS = (".svg", ".png", ".pdf")
_STROKES = 4
"""Wavelengths after so many share a stroke and differ by their signs."""


def write_curves(found: KindOptics, path: Path) -> None:
    """Write F11/(4π) and −F12/F11 at every wavelength that the kind's data reach; at least one.

    Raises
    ------
    ValueError
        For a suffix that is none of `FORMATS`.
    """
    from matplotlib import rc_context
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.backends.backend_pdf import FigureCanvasPdf
    from matplotlib.backends.backend_svg import FigureCanvasSVG

    from lasescatter.report.curves import Curve, draw_curves
    from lasescatter.report.figures import PNG_DOTS_PER_INCH
    from lasescatter.report.ink import RC

    suffix = path.suffix.lower()
    if suffix not in FORMATS:
        raise ValueError(f"{suffix!r} is none of {', '.join(FORMATS)}")
    known = [entry for entry in found.wavelengths if entry.usual is not None]
    curves = [
        Curve(wavelength(entry.wavelength), place % _STROKES, place // _STROKES, entry.angles, entry.phase,
              entry.phase_12)
        for place, entry in enumerate(known)
    ]  # fmt: skip
    outside = [wavelength(entry.wavelength) for entry in found.wavelengths if entry.usual is None]
    note = f"not established, outside the data: {', '.join(outside)}" if outside else ""
    with rc_context(RC), path.open("wb") as target:
        figure = draw_curves(curves, f"{found.kind.name}: scattering by direction, and its polarization", note=note)
        # Dates and program names would differ from run to run.
        if suffix == ".svg":
            FigureCanvasSVG(figure).print_svg(target, metadata={"Date": None, "Creator": None})
        elif suffix == ".pdf":
            silent = {"CreationDate": None, "Creator": None, "Producer": None}
            FigureCanvasPdf(figure).print_pdf(target, metadata=silent)
        else:
            figure.set_dpi(PNG_DOTS_PER_INCH)
            FigureCanvasAgg(figure).print_png(target, metadata={"Software": None})
