"""The hand check: equations, symbols, and one block of numbers per observer, leg and component, and per stop.

The blocks are set in a fixed-width face as `label = value unit` items, so that a person with a pocket
calculator and a program that reads the page's text both find every number.
"""

from __future__ import annotations

import math
import textwrap
from typing import Any

from reportlab.platypus import Flowable

from lasescatter.assessment.outcome import Assessment, HandCheck, ObserverOutcome, StopCheck
from lasescatter.report.left_out import NOT_COMPUTED, all_left_out, lacking, left_out_at
from lasescatter.report.naming import leg_sign, line_sign
from lasescatter.report.quantities import degrees, digits, line_label
from lasescatter.report.results import observer_head
from lasescatter.report.styles import MM, heads, paragraph, paragraph_styles, ruled
from lasescatter.report.typography import BOLD, fitted, markup, printable, shortened
from lasescatter.scene import Scene, Vector

DIGITS = 5
_COLUMNS = 4
MOST_BLOCKS = 60
"""More would bury the reader: then only what matters is printed, the rest stays in the record."""
SAME_DENSITY = 1e-5
"""Scattering coefficients that differ by less, relatively, print alike."""
SHARE_PRINTED = 0.01
"""Of the observer's light; blocks above it are printed in any case."""
_COMPONENT_NAME = 40
_CELL = 29
"""Characters per item, so that four items fill the text column."""

EQUATIONS = (
    ("E1", "s = s0 − b cot θ,&nbsp;&nbsp; r = b / sin θ,&nbsp;&nbsp; ds / r² = dθ / b,&nbsp;&nbsp; "
           "cot θ₁ = s0 / b,&nbsp;&nbsp; cot θ₂ = (s0 − length) / b"),
    ("E2", "E = (1/b) ∫ P(s) β(θ, φ) T dθ,&nbsp;&nbsp; from θ₁ to θ₂"),
    ("E3", "E = (P/b) [B(θ₂) − B(θ₁)] T,&nbsp;&nbsp; B(θ) = ∫ β dθ from 0 to θ"),
    ("E5", 'β(θ, φ) = β<sub rise="2" size="6.5">sca</sub> / (4π) · [F₁₁(θ) + q cos 2φ F₁₂(θ)]'),
)  # fmt: skip

WORKING = (
    "E_hand = (P / b) × beta_sca × I × T_beam × T_sight",
    "I = dB11&nbsp;&nbsp; for unpolarized light (q = 0)",
    "I = dB11 + q × cos(2 phi) × dB12&nbsp;&nbsp; where the axis is known",
    "I = dB11 + dB12&nbsp;&nbsp; for the worst axis; dB12 is then taken from |F12|",
    "T_beam = exp(−tau_beam),&nbsp;&nbsp; T_sight = exp(−tau_sight)",
    "Stop:&nbsp;&nbsp; E_compared = rho × P × cos / (π r²)&nbsp;&nbsp; (Lambert's law),&nbsp;&nbsp; "
    "E_stated = E_compared × exp(−tau)",
)

SYMBOLS = (
    ("P", "W", "power at the start of the leg: losses at mirrors taken off, extinction not; mean over time for pulses"),
    ("b", "m", "distance of the observer from the line of the leg, square to it; never less than the beam's radius"),
    ("s0", "m", "place on that line nearest to the observer, from the start of the leg; below 0 behind the start"),
    ("length", "m", "of the leg; “no end” where the beam leaves the site"),
    ("theta1, theta2", "deg", "scattering angles at the ends of the part of the leg in the component's region"),
    ("beta_sca", "1/m", "scattering coefficient of the component where it is"),
    ("q", "", "Stokes Q/I along the electric-field axis: 0 for unpolarized light, near 1 for linear light"),
    ("phi", "deg", "angle φ about the beam from the electric-field axis to the plane of leg and observer"),
    ("dB11, dB12", "", "B(theta2) − B(theta1), with B11 = ∫ F11/(4π) dθ and B12 = ∫ F12/(4π) dθ"),
    ("I", "", "what multiplies (P/b) beta_sca"),
    ("theta_mid", "deg", "angle at which half of I is reached"),
    ("s_mid, r_mid", "m", "place on the leg of the element at theta_mid, and its distance from the observer"),
    ("tau_beam, tau_sight", "", "optical thickness from the beam's start to that element, and from there on"),
    ("T_beam, T_sight", "", "transmittances that go with them"),
    ("E_hand", "W/m²", "E3 by hand from this block"),
    ("E_program", "W/m²", "what the program found by integrating E2 along this leg, load as stated"),
    ("rho", "", "reflectance of the stop"),
    ("r, cos", "m, –", "distance from the lit spot, and cosine between the stop's normal and the way to the observer"),
    ("tau, T", "", "optical thickness and transmittance from the beam's start by the stop to the observer"),
    ("E_stated, E_compared", "W/m²", "the stop's light with the load's extinction, and without, as limits meet it"),
)  # fmt: skip


def equations() -> list[Any]:
    """The equations and every symbol printed."""
    story: list[Any] = [
        paragraph(
            "A reviewer can redo any block below with a pocket calculator. E2 is what the program integrates; E3 "
            "is its closed form where extinction along the way hardly changes, which the block applies with the "
            "transmittance to one element, at theta_mid. Where hand and program differ by more than 5 %, the "
            "block says which factor is responsible. The sum of E_program over an observer's blocks is "
            "“Scattered, stated” in the exposure of that observer; the sum of E_stated is “Stop light, stated”."
        )
    ]
    story += [paragraph(f"<b>{name}</b>&nbsp;&nbsp;&nbsp; {text}", "equation") for name, text in EQUATIONS]
    story.append(paragraph("In the symbols of the blocks:", "body"))
    story += [paragraph(text, "equation") for text in WORKING]
    rows: list[list[Any]] = [heads("Symbol", "Unit", "Meaning")]
    rows += [[paragraph(name, "cell bold"), unit, paragraph(meaning, "cell")] for name, unit, meaning in SYMBOLS]
    story.append(ruled(rows, [29, 14, 131]))
    story.append(
        paragraph(
            "dB11 and dB12 can be taken from the tables of B in the section on light on particles, at theta1 and "
            "theta2; between two of its rows a straight line is near enough away from the forward peak.",
            "note",
        )
    )
    return story


def blocks(assessment: Assessment) -> list[Any]:
    """The numbers, observer by observer; the number of a block counts every row of the record."""
    scene = assessment.scene
    total = sum(len(observer.hand_checks) + len(observer.stop_checks) for observer in assessment.observers)
    story: list[Any] = []
    if total > MOST_BLOCKS:
        story.append(
            paragraph(
                f"The record holds {total} hand and stop checks. Printed are those that give more than 1 % of the "
                "scattered and stop light of their observer; their numbers count all."
            )
        )
    missing = lacking(assessment)
    if missing:
        story.append(
            paragraph(f"<b>Not computed</b>, so in no block and in no tau of this section: {markup(missing)}.")
        )
    scattered = stops = 0
    for number, observer in enumerate(assessment.observers, start=1):
        story.append(observer_head(number, observer))
        if not observer.hand_checks:
            none = f"No scattered light is computed: {markup(missing)} left out." if missing else ""
            story.append(paragraph(none or "No leg sends scattered light here.", "note"))
        least = _least(observer) if total > MOST_BLOCKS else -1.0
        hidden = []
        for check in observer.hand_checks:
            scattered += 1
            if check.program > least:
                title = f"Hand check {scattered}: observer {number}, {leg_title(scene, check)}"
                distance = leg_distance(scene, observer.position, check)
                story.append(CheckBlock(title, _hand_lines(check, distance, height_note(assessment, check))))
            else:
                hidden.append(check.program)
        for stop in observer.stop_checks:
            stops += 1
            if stop.stated > least:
                title = f"Stop check {stops}: observer {number}, stop of {line_sign(scene, stop.beam, stop.line)}"
                lines = _stop_lines(stop, assessment)
                story.append(CheckBlock(f"{title} – {line_label(stop.beam, stop.line)}", lines))
            else:
                hidden.append(stop.stated)
        if hidden:
            left = f"Not printed: {len(hidden)} of {len(observer.hand_checks) + len(observer.stop_checks)}, together "
            story.append(paragraph(f"{left}{digits(sum(hidden))} W/m².", "note"))
    return story


def _least(observer: ObserverOutcome) -> float:
    return SHARE_PRINTED * (observer.total("scattered") + observer.total("diffuse"))


def leg_title(scene: Scene, check: HandCheck) -> str:
    """Leg, wavelength and component first; the beam's name, which may be cut, last."""
    component = shortened(printable(check.component), _COMPONENT_NAME)
    sign = line_sign(scene, check.beam, check.line).partition(", ")[2]
    parts = (f"leg {leg_sign(scene, check.beam, check.leg).removeprefix('leg ')}", sign, f"component {component}")
    return f"{', '.join(part for part in parts if part)} – {line_label(check.beam, check.line)}"


def leg_distance(scene: Scene, position: Vector, check: HandCheck) -> float | None:
    """Distance of a point from the line of the leg; None where the site has no such leg. [m]"""
    beam = next((beam for beam in scene.beams if beam.name == check.beam), None)
    if beam is None or not 0 < check.leg < len(beam.points):
        return None
    start, end = beam.points[check.leg - 1], beam.points[check.leg]
    along = [b - a for a, b in zip(start, end, strict=True)]
    towards = [b - a for a, b in zip(start, position, strict=True)]
    size = math.hypot(*along)
    share = sum(a * b for a, b in zip(along, towards, strict=True)) / size**2
    return math.dist(towards, [share * part for part in along])


def items(check: HandCheck) -> list[tuple[str, str, str]]:
    """Label, value and unit of everything in a block, in reading order."""

    def number(value: float) -> str:
        return digits(value, DIGITS)

    return [
        ("P", number(check.power), "W"),
        ("b", number(check.b), "m"),
        ("s0", number(check.s0), "m"),
        ("length", number(check.length), "m" if math.isfinite(check.length) else ""),
        ("theta1", degrees(check.theta1), "deg"),
        ("theta2", degrees(check.theta2), "deg"),
        ("beta_sca", number(check.scattering), "1/m"),
        ("q", number(check.q), ""),
        ("dB11", number(check.integral_11), ""),
        ("dB12", number(check.integral_12), ""),
        ("phi", "not known" if check.phi is None else degrees(check.phi), "" if check.phi is None else "deg"),
        ("I", number(check.integral), ""),
        ("theta_mid", degrees(check.theta_mid), "deg"),
        ("s_mid", number(check.s_mid), "m"),
        ("r_mid", number(check.r_mid), "m"),
        ("tau_beam", number(check.tau_beam), ""),
        ("tau_sight", number(check.tau_sight), ""),
        ("T_beam", number(math.exp(-check.tau_beam)), ""),
        ("T_sight", number(math.exp(-check.tau_sight)), ""),
        ("light", check.polarization, ""),
        ("E_hand", number(check.hand), "W/m²"),
        ("E_program", number(check.program), "W/m²"),
    ]


def stop_items(check: StopCheck, known: bool = True) -> list[tuple[str, str, str]]:
    """The same of a stop; `known` is false where no optical thickness is computed."""

    def number(value: float) -> str:
        return digits(value, DIGITS)

    return [
        ("P", number(check.power), "W"),
        ("rho", number(check.reflectance), ""),
        ("r", number(check.r), "m"),
        ("cos", number(check.cosine), ""),
        ("tau", number(check.tau) if known else NOT_COMPUTED, ""),
        ("T", number(math.exp(-check.tau)) if known else "taken as 1", ""),
        ("E_stated", number(check.stated), "W/m²"),
        ("E_compared", number(check.compared), "W/m²"),
    ]


def _stop_lines(check: StopCheck, assessment: Assessment) -> list[str]:
    wavelength = next(
        (line.wavelength for beam in assessment.scene.beams if beam.name == check.beam for line in beam.lines
         if line.name == check.line), None,
    )  # fmt: skip
    if wavelength is None or not left_out_at(assessment, wavelength):
        return _item_lines(stop_items(check))
    remark = f"remark: no extinction is computed for {lacking(assessment, wavelength)}"
    lines = _item_lines(stop_items(check, not all_left_out(assessment, wavelength)))
    return lines + textwrap.wrap(printable(remark), _COLUMNS * _CELL - 4)


def _item_lines(found: list[tuple[str, str, str]]) -> list[str]:
    told = [f"{label} = {value}{' ' + unit if unit else ''}" for label, value, unit in found]
    rows = [told[i : i + _COLUMNS] for i in range(0, len(told), _COLUMNS)]
    return ["".join(f"{item:<{_CELL}}" for item in row).rstrip() for row in rows]


def height_note(assessment: Assessment, check: HandCheck) -> str:
    """Where beta_sca holds, if it is not that of the table of components: air that thins with height; else ""."""
    beam = next((beam for beam in assessment.scene.beams if beam.name == check.beam), None)
    if beam is None or not 0 < check.leg < len(beam.points):
        return ""
    wave = next((line.wavelength for line in beam.lines if line.name == check.line), None)
    listed = [c.scattering for c in assessment.components if (c.name, c.wavelength) == (check.component, wave)]
    if not listed or abs(check.scattering - listed[0]) <= SAME_DENSITY * listed[0]:
        return ""
    start, end = beam.points[check.leg - 1], beam.points[check.leg]
    unit = assessment.scene.length_unit
    height = start[2] + check.s_mid * (end[2] - start[2]) / math.dist(start, end)
    return (
        f"beta_sca at the element at theta_mid, z = {digits(height / unit.metres, 4)} {unit.name}; "
        f"{digits(listed[0], DIGITS)} 1/m in the table of components, at z = 0"
    )


def _hand_lines(check: HandCheck, distance: float | None, note: str = "") -> list[str]:
    lines = []
    if note:
        lines += textwrap.wrap(printable(note), _COLUMNS * _CELL - 4)
    if distance is not None and check.b > distance * (1 + 1e-6):
        lines.append(
            f"b used: never less than the beam's radius; the observer is {digits(distance)} m from the leg's line"
        )
    lines += _item_lines(items(check))
    if check.remark:
        lines += textwrap.wrap(printable(f"remark: {check.remark}"), _COLUMNS * _CELL - 4)
    return lines


class CheckBlock(Flowable):
    """One block; never split over pages."""

    def __init__(self, title: str, lines: list[str]) -> None:
        super().__init__()
        style = paragraph_styles()["mono"]
        self.style = style
        self.title = printable(title)
        self.lines = lines
        self.height = style.leading * (len(self.lines) + 1) + 7

    def wrap(self, available_width: float, available_height: float) -> tuple[float, float]:
        self.width = available_width
        return available_width, self.height

    def draw(self) -> None:
        canvas, style = self.canv, self.style
        y = self.height - style.leading
        canvas.setFillColor(style.textColor)
        canvas.setFont(BOLD, 7.1)
        canvas.drawString(0, y, fitted(self.title, BOLD, 7.1, self.width))
        canvas.setFont(style.fontName, style.fontSize)
        for line in self.lines:
            y -= style.leading
            canvas.drawString(2 * MM, y, line)
