"""Beams, lines and legs by short signs that are never cut: "A1" for a leg, "A, 532 nm" for a line; names follow."""

from __future__ import annotations

from lasescatter.report.quantities import line_label, wavelength
from lasescatter.report.typography import both_ends, printable
from lasescatter.scene import Line, Scene

NAME = 120
"""Longest name in a table or a heading, cut in its middle; the full one is in the inputs."""


def beam_letter(place: int) -> str:
    """A, B … Z, AA, AB …"""
    letters = ""
    place += 1
    while place:
        place, rest = divmod(place - 1, 26)
        letters = chr(ord("A") + rest) + letters
    return letters


def _found(scene: Scene, beam: str, line: str) -> tuple[str, Line | None]:
    for place, entry in enumerate(scene.beams):
        if entry.name == beam:
            lines = [found for found in entry.lines if found.name == line]
            return beam_letter(place), lines[0] if lines else None
    return "", None


def line_sign(scene: Scene, beam: str, line: str) -> str:
    """Letter and wavelength of a beam line: "A, 532 nm"; "" for one that the site does not have."""
    letter, found = _found(scene, beam, line)
    return ", ".join(part for part in (letter, wavelength(found.wavelength) if found else "") if part)


def named_line(scene: Scene, beam: str, line: str, limit: int = NAME) -> str:
    """A beam line for a table: "A, 532 nm: alignment beam"; only the name is ever cut. Printable text."""
    name = both_ends(printable(line_label(beam, line)), limit)
    sign = line_sign(scene, beam, line)
    return f"{sign}: {name}" if sign else name


def named_beam(scene: Scene, beam: str, limit: int = NAME) -> str:
    """A beam by letter and name: "A: alignment beam". Printable text."""
    letter, _ = _found(scene, beam, "")
    name = both_ends(printable(beam), limit)
    return f"{letter}: {name}" if letter else name


def leg_sign(scene: Scene, beam: str, leg: int) -> str:
    """A leg as the drawings call it: "A1"."""
    letter, _ = _found(scene, beam, "")
    return f"{letter}{leg}" if letter else f"leg {leg}"
