"""The report as a PDF: sections in order, pages, figures."""

from __future__ import annotations

from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any

from lasescatter.assessment.outcome import Assessment

if TYPE_CHECKING:
    from reportlab.platypus import Flowable

SECTIONS = {
    "drawings": "The site",
    "beam": "Somebody in the beam itself",
    "exposures": "Exposure of each observer",
    "comparisons": "Comparison with the limits",
    "contributions": "Contributions by beam and origin",
    "particles": "Light on air and particles",
    "hand": "Hand check",
    "inputs": "Inputs as written and as read",
    "limits": "Limits and their sources",
    "assumptions": "Assumptions in force",
    "cautions": "Cautions",
    "review": "Review and sign-off",
}

_LEAST_ROOM = 130
"""Left on a page, a section begins there. [pt]"""


def write_pdf(assessment: Assessment, path: Path, page_size: str = "A4", made_at: datetime | None = None) -> None:
    """Write the report.

    Parameters
    ----------
    assessment : Assessment
    path : Path
        File to write; replaced where it exists.
    page_size : str
        "A4" or "Letter".
    made_at : datetime, optional
        The time printed and set as the document's date; that of the assessment where left out. The same
        assessment and the same time give the same bytes.

    Raises
    ------
    ValueError
        For another page size.
    """
    path.write_bytes(pdf_bytes(assessment, page_size, made_at))


def pdf_bytes(assessment: Assessment, page_size: str = "A4", made_at: datetime | None = None) -> bytes:
    """The report as `write_pdf` writes it."""
    from lasescatter.report.figures import pdf_figures
    from lasescatter.report.page_frame import PAGE_SIZES, paginate
    from lasescatter.report.placing import assembled

    if page_size not in PAGE_SIZES:
        raise ValueError(f"page size {page_size!r} is not known; one of {', '.join(PAGE_SIZES)} is")
    moment = made_at or datetime.fromisoformat(assessment.provenance.made_at)
    figures, sizes = pdf_figures(assessment)
    scene = assessment.scene
    digest = assessment.provenance.digest[:12] or "not made"
    pages = paginate(
        _story(assessment, moment, sizes),
        page_size,
        head=f"record {digest}  ·  reference {scene.reference}",
        title=scene.title,
        author=scene.prepared_by,
        subject=f"Laser light beside the beam, reference {scene.reference}: {assessment.verdict}",
    )
    return assembled(pages, figures, moment)


def _story(assessment: Assessment, moment: datetime, sizes: dict[str, tuple[float, float]]) -> list[Flowable]:
    """Everything printed, in order."""
    from lasescatter.report import comparisons, grounds, handcheck, particles, results, signoff
    from lasescatter.report.front import front
    from lasescatter.report.page_frame import SectionHead
    from lasescatter.report.site_pages import site_section

    numbers = {name: place for place, name in enumerate(SECTIONS, start=1)}

    def head(name: str) -> Any:
        return SectionHead(numbers[name], SECTIONS[name])

    from reportlab.platypus import CondPageBreak, PageBreak

    bodies: dict[str, list[Any]] = {
        "drawings": site_section(assessment, sizes),
        "beam": results.beam_section(assessment),
        "exposures": results.exposure_section(assessment),
        "comparisons": comparisons.comparison_section(assessment),
        "contributions": comparisons.contribution_section(assessment),
        "particles": particles.component_section(assessment, sizes.get("phase")) + particles.running_tables(assessment),
        "hand": handcheck.equations() + handcheck.blocks(assessment),
        "inputs": grounds.input_section(assessment),
        "limits": grounds.limit_section(assessment),
        "assumptions": grounds.assumption_section(assessment),
        "cautions": grounds.caution_section(assessment),
        "review": signoff.tick_list() + signoff.signatures(assessment),
    }
    story = front(assessment, moment, numbers)
    for name, body in bodies.items():
        if name in ("drawings", "review"):
            story.append(PageBreak())
        story += [CondPageBreak(_LEAST_ROOM), head(name), *body]
    return story
