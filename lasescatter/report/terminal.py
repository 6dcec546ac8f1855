"""The result in brief on a terminal: at most 80 columns, readable without colour and through a pipe."""

from __future__ import annotations

from typing import TYPE_CHECKING

from lasescatter.assessment.outcome import Assessment, InTheBeam
from lasescatter.cautions import foremost
from lasescatter.limits.verdict import BELOW
from lasescatter.report.left_out import lacking
from lasescatter.report.naming import named_line
from lasescatter.report.quantities import digits, duration, length, trimmed
from lasescatter.report.ranking import counted, greatest, worst_first
from lasescatter.report.standing import (
    beam_headline,
    beside_headline,
    grouped,
    left_out_reason,
    left_out_words,
    standing,
)
from lasescatter.report.text_page import TextPage
from lasescatter.report.typography import abridged, plain

if TYPE_CHECKING:
    from rich.console import Console

NAME = 100
TRUSTED, TRUSTS = 40, 6
"""Characters of a load's name, and loads, in the line on trust."""
OBSERVERS = 20
"""More than so many are counted by verdict and only the worst are listed."""


def print_summary(assessment: Assessment, console: Console) -> None:
    """Print the result in brief: somebody in the beam, verdicts, what is left out, the foremost cautions."""
    page = TextPage(console)
    scene = assessment.scene
    page.say(abridged(plain(scene.title), 200), style="bold")
    page.say(abridged(f"Reference {plain(scene.reference)}, prepared by {plain(scene.prepared_by)}", 200))
    page.gap()
    page.say("Somebody in the beam itself (multiples of the limit):", style="bold")
    for line in assessment.in_the_beam:
        page.item(_in_the_beam(line, assessment))
    page.gap()
    page.say(plain(beam_headline(assessment)), style="bold")
    beside = f"{beside_headline(assessment)}: {assessment.verdict}"
    page.say(f"{beside} {plain(left_out_words(assessment))}".rstrip(), style="bold")
    _trusts(assessment, page)
    _observers(assessment, page)
    for hazard, reason in scene.not_judged:
        page.item(abridged(f"{hazard}: not judged, {plain(left_out_reason(reason))}", 300))
    page.gap()
    page.say("Before relying on it:", style="bold")
    for text in foremost():
        page.item(plain(text))
    page.say("All cautions, assumptions and the hand check are in the PDF report; see also SAFETY.md.")


def _trusts(assessment: Assessment, page: TextPage) -> None:
    """Factors of trust that the upper bounds hold, the largest of each load."""
    largest = {}
    for entry in sorted(assessment.components, key=lambda entry: entry.trust.factor):
        if entry.trust.factor > 1:
            largest[entry.name] = entry.trust
    told = [
        f"factor {trimmed(largest[load.name].factor)} for {abridged(plain(load.name), TRUSTED)} "
        f"({largest[load.name].mark})"
        for load in assessment.scene.loads
        if load.name in largest
    ]
    if told:
        shown = told[:TRUSTS] + ([f"{len(told) - TRUSTS} more"] if len(told) > TRUSTS else [])
        page.item(f"bounds include {', '.join(shown)}")


def _in_the_beam(line: InTheBeam, assessment: Assessment) -> str:
    unit = assessment.scene.length_unit
    name = plain(named_line(assessment.scene, line.beam, line.line))
    top = greatest(list(line.spots))
    if line.limit is None or top is None:
        return f"{name}: no multiple, {plain(line.reason) or 'no limit covers it'}{_unended(assessment, line)}"
    told = [
        f"{digits(top.multiple)} at the worst place ({abridged(plain(top.place), NAME)}) for {duration(line.duration)}"
    ]
    cards = [spot.diffuse_distance for spot in line.spots if spot.diffuse_distance is not None]
    if cards:
        told.append(f"a white card in it falls to the limit at {length(max(cards), unit)}")
    if line.hazard_distance is not None:
        told.append(
            "below the limit everywhere"
            if line.hazard_distance == 0
            else f"hazard distance {length(line.hazard_distance, unit)} if nothing stopped it"
        )
    return f"{name}: {'; '.join(told)}{_unended(assessment, line)}"


def _unended(assessment: Assessment, line: InTheBeam) -> str:
    ends = not any(beam.leaves_site for beam in assessment.scene.beams if beam.name == line.beam)
    return "" if ends else "; the beam leaves the site: nothing ends it"


def _observers(assessment: Assessment, page: TextPage) -> None:
    shown = list(enumerate(assessment.observers, start=1))
    if len(shown) > OBSERVERS:
        counts = ", ".join(f"{count} {verdict}" for verdict, count in counted(assessment).items())
        page.say(f"{len(shown)} observers: {counts}")
        shown = worst_first(assessment)[:OBSERVERS]
        page.say(f"The {OBSERVERS} to look at first:")
    for number, outcome in shown:
        page.say(f"{number:>3}  {outcome.verdict}: {abridged(plain(outcome.name), NAME)}", indent=5)
        told = [standing(outcome, lacking(assessment))]
        if outcome.governing:
            told.append(plain(outcome.governing))
        page.say("     " + "; ".join(told), indent=5)
        if outcome.verdict != BELOW:
            for reason in grouped(outcome.reasons):
                page.say("     - " + abridged(plain(reason), 400), indent=7)
