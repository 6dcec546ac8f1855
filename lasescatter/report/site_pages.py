"""The site: its drawings and the list of observers."""

from __future__ import annotations

from typing import Any

from lasescatter.assessment.outcome import Assessment
from lasescatter.report.naming import named_line
from lasescatter.report.page_frame import FigurePlace
from lasescatter.report.quantities import duration, light, long_time, point, small_length, trimmed
from lasescatter.report.styles import MM, heads, paragraph, ruled, words
from lasescatter.report.typography import markup

DRAWINGS = ("plan", "plan_near", "elevation")


def site_section(assessment: Assessment, sizes: dict[str, tuple[float, float]]) -> list[Any]:
    """Drawings to scale, then what they show as lists."""
    return [
        *(
            FigurePlace(name, sizes[name][0] * MM, sizes[name][1] * MM)
            for name in ("plan", "plan_near", "elevation")
            if name in sizes
        ),
        *_beams(assessment),
        *_observers(assessment),
    ]


def _beams(assessment: Assessment) -> list[Any]:
    unit = assessment.scene.length_unit
    rows: list[list[Any]] = [heads("Beam line", "Light", "Start", "Path and end")]
    for beam in assessment.scene.beams:
        path = " to ".join(point(p, unit) for p in beam.points[:12])
        if len(beam.points) > 12:
            path += f" … {len(beam.points)} points, in the inputs"
        if beam.stop is not None:
            end = f"ends on a matt stop, reflectance {trimmed(beam.stop.reflectance)}"
        else:
            end = "leaves the site: the last leg has no end" if beam.leaves_site else "ends at the last point"
        for line in beam.lines:
            spread = f"{trimmed(line.divergence * 1e3)} mrad"
            rows.append(
                [
                    paragraph(markup(named_line(assessment.scene, beam.name, line.name)), "cell"),
                    words(f"{light(line)}, {line.polarization}"),
                    words(f"{beam.profile}, {small_length(line.diameter, None)}, {spread}"),
                    words(f"{path}; {end}", limit=900),
                ]
            )  # fmt: skip
    return [paragraph("Beams", "subsection"), ruled(rows, [48, 38, 31, 57])]


def _observers(assessment: Assessment) -> list[Any]:
    unit = assessment.scene.length_unit
    entered = {observer.key: observer for observer in assessment.scene.observers}
    rows: list[list[Any]] = [heads("No.", "Observer", "Place", "Reach", "Exposed for", "Daily sum", "Viewing")]
    for number, outcome in enumerate(assessment.observers, start=1):
        observer = entered.get(outcome.key)
        rows.append(
            [
                str(number),
                words(outcome.name),
                words(point(outcome.position, unit)),
                f"{trimmed(observer.reach / unit.metres)} {unit.name}" if observer else "",
                words(", ".join(duration(value) for value in observer.durations)) if observer else "",
                words(long_time(observer.daily) if observer.daily is not None else "not stated") if observer else "",
                observer.viewing if observer else "",
            ]
        )
    return [paragraph("Observers", "subsection"), ruled(rows, [9, 55, 36, 17, 20, 20, 17], numeric=(3,))]
