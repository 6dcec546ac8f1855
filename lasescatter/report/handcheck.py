"""The hand check: equations, symbols, and one block of numbers per observer, leg and component.

The blocks are set in a fixed-width face as `label = value unit` items, so that a person with a pocket
calculator and a program that reads the page's text both find every number.
"""

from __future__ import annotations

import math
import textwrap
from typing import Any

from reportlab.platypus import Flowable

from lasescatter.assessment.outcome import Assessment, HandCheck
from lasescatter.report.quantities import degrees, digits, line_label
from lasescatter.report.results import observer_head
from lasescatter.report.styles import MM, heads, paragraph, paragraph_styles, ruled
from lasescatter.report.typography import BOLD, fitted, printable

DIGITS = 5
_COLUMNS = 4
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
    "I = dB11&nbsp;&nbsp; for unpolarised light (q = 0)",
    "I = dB11 + q × cos(2 phi) × dB12&nbsp;&nbsp; where the axis is known",
    "I = dB11 + dB12&nbsp;&nbsp; for the worst axis; dB12 is then taken from |F12|",
    "T_beam = exp(−tau_beam),&nbsp;&nbsp; T_sight = exp(−tau_sight)",
)

SYMBOLS = (
    ("P", "W", "power at the start of the leg: losses at mirrors taken off, extinction not; mean over time for pulses"),
    ("b", "m", "distance of the observer from the line of the leg, square to it"),
    ("s0", "m", "place on that line nearest to the observer, from the start of the leg; below 0 behind the start"),
    ("length", "m", "of the leg; “no end” where the beam leaves the site"),
    ("theta1, theta2", "deg", "scattering angles at the ends of the part of the leg in the component's region"),
    ("beta_sca", "1/m", "scattering coefficient of the component where it is"),
    ("q", "", "Stokes Q/I along the electric-field axis: 0 for unpolarised light, near 1 for linear light"),
    ("phi", "deg", "angle φ about the beam from the electric-field axis to the plane of leg and observer"),
    ("dB11, dB12", "", "B(theta2) − B(theta1), with B11 = ∫ F11/(4π) dθ and B12 = ∫ F12/(4π) dθ"),
    ("I", "", "what multiplies (P/b) beta_sca"),
    ("theta_mid", "deg", "angle at which half of I is reached"),
    ("s_mid, r_mid", "m", "place on the leg of the element at theta_mid, and its distance from the observer"),
    ("tau_beam, tau_sight", "", "optical thickness from the beam's start to that element, and from there on"),
    ("T_beam, T_sight", "", "transmittances that go with them"),
    ("E_hand", "W/m²", "E3 by hand from this block"),
    ("E_program", "W/m²", "what the program found by integrating E2 along this leg, load as stated"),
)  # fmt: skip


def equations() -> list[Any]:
    """The equations and every symbol printed."""
    story: list[Any] = [
        paragraph(
            "A reviewer can redo any block below with a pocket calculator. E2 is what the program integrates; E3 "
            "is its closed form where extinction along the way hardly changes, which the block applies with the "
            "transmittance to one element, at theta_mid. Where hand and program differ by more than 5 %, the "
            "block says which factor is responsible."
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
    """The numbers, observer by observer."""
    story: list[Any] = []
    count = 0
    for number, observer in enumerate(assessment.observers, start=1):
        story.append(observer_head(number, observer))
        if not observer.hand_checks:
            story.append(paragraph("No leg sends scattered light here.", "note"))
        for check in observer.hand_checks:
            count += 1
            story.append(HandCheckBlock(count, number, check))
    return story


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


def _item_lines(check: HandCheck) -> list[str]:
    told = [f"{label} = {value}{' ' + unit if unit else ''}" for label, value, unit in items(check)]
    rows = [told[i : i + _COLUMNS] for i in range(0, len(told), _COLUMNS)]
    return ["".join(f"{item:<{_CELL}}" for item in row).rstrip() for row in rows]


class HandCheckBlock(Flowable):
    """One block; never split over pages."""

    def __init__(self, count: int, observer: int, check: HandCheck) -> None:
        super().__init__()
        style = paragraph_styles()["mono"]
        self.style = style
        self.title = printable(
            f"Hand check {count}: observer {observer}, leg {check.leg} of {line_label(check.beam, check.line)}, "
            f"component {check.component}"
        )
        self.lines = _item_lines(check)
        if check.remark:
            self.lines += textwrap.wrap(printable(f"remark: {check.remark}"), _COLUMNS * _CELL - 4)
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
