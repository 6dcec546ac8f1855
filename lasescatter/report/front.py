"""The first page: what was asked, what the beam itself does, the verdicts, what is left out."""

from __future__ import annotations

from datetime import datetime
from typing import Any

from lasescatter.assessment.outcome import Assessment, BeamSpot, InTheBeam, ObserverOutcome
from lasescatter.cautions import not_covered
from lasescatter.limits.verdict import ABOVE, BELOW
from lasescatter.report.left_out import lacking
from lasescatter.report.naming import named_line
from lasescatter.report.own_kinds import own_kinds
from lasescatter.report.page_frame import COLUMN
from lasescatter.report.quantities import counted as count_of
from lasescatter.report.quantities import digits, duration, length
from lasescatter.report.ranking import counted, greatest, worst_first
from lasescatter.report.standing import (
    beam_headline,
    beside_headline,
    grouped,
    left_out_reason,
    left_out_words,
    standing,
)
from lasescatter.report.styles import INK, MM, heads, number_cell, paragraph, ruled, verdict_words, words
from lasescatter.report.typography import SANS, both_ends, markup, printable

FRONT_LINES = 6
"""Beam lines in the short table of the first page; all are in their own section."""
FRONT_OBSERVERS = 8
"""Observers in the table of the first page; where there are more, a full table follows."""
BRIEF = 240
"""Characters of reasons in the table of the first page; half of it where there are many observers."""
FEW_OBSERVERS = 4
NAME = 120
"""Longest name in a table or a heading."""
_NAME_WIDTH = 34
"""Of an observer's name in the first table. [mm]"""


def front(assessment: Assessment, made_at: datetime, sections: dict[str, int]) -> list[Any]:
    """First page."""
    return [
        *_title(assessment, made_at),
        *_beam_lines(assessment, sections),
        *_verdicts(assessment, sections),
        *_left_out(assessment, sections),
        *_every_verdict(assessment),
    ]


def _title(assessment: Assessment, made_at: datetime) -> list[Any]:
    scene, source = assessment.scene, assessment.provenance
    facts = [
        [paragraph("Reference", "cell bold"), words(scene.reference, limit=200), paragraph("Made at", "cell bold"),
         words(made_at.isoformat(timespec="seconds"))],
        [paragraph("Prepared by", "cell bold"), words(scene.prepared_by, limit=200), paragraph("Program", "cell bold"),
         words(f"lasescatter {source.version}, numpy {source.numpy}, scipy {source.scipy}")],
        [paragraph("Record (sha256)", "cell bold"), words(source.digest or "no record made"), "", ""],
    ]  # fmt: skip
    table = ruled(facts, [27, 66, 21, 60], extra=[("SPAN", (1, 2), (3, 2))], head_rows=0)
    count = len(assessment.observers)
    who = "the one observer" if count == 1 else f"each of the {count} observers"
    beams = len(scene.beams)
    which = "the beam" if beams == 1 else f"the {beams} beams"
    question = (
        f"How much light reaches {who} of this site from {which}: scattered on the way, returned by a beam stop, or "
        "direct? And how does it compare with the exposure limits that were entered for the site?"
    )
    return [
        paragraph("Laser light beside the beam: assessment against entered limits", "kind"),
        words(scene.title, "title", 300),
        table,
        paragraph(f"<b>Question answered.</b> {question}"),
        *(paragraph(f"<b>Own kind of particles.</b> {markup(told)}.", "note") for told in own_kinds(scene.loads)),
    ]


def multiple(value: float | None) -> str:
    """Direct exposure as a multiple of its limit."""
    return digits(value)


def leaves_site(assessment: Assessment, line: InTheBeam) -> bool:
    """Whether nothing ends the beam of a line."""
    return any(beam.leaves_site for beam in assessment.scene.beams if beam.name == line.beam)


def _group(line: InTheBeam, word: str) -> list[BeamSpot]:
    return [spot for spot in line.spots if spot.place.startswith(word)]


def _several(spots: list[BeamSpot], absent: str) -> str:
    """The multiple at one spot, or the greatest of several."""
    if not spots:
        return absent
    top = greatest(spots)
    if top is None:
        return digits(None)
    return multiple(top.multiple) if len(spots) == 1 else f"{multiple(top.multiple)} at most"


def _beam_lines(assessment: Assessment, sections: dict[str, int]) -> list[Any]:
    unit = assessment.scene.length_unit
    ordered = sorted(
        assessment.in_the_beam,
        key=lambda line: -max((spot.multiple or 0.0 for spot in line.spots), default=0.0),
    )
    rows: list[list[Any]] = [
        heads(
            "Beam line and the limit judged", "at the start", "at mirrors", "at the stop", "nearest to observers",
            "white card: below from", "hazard distance", numeric_from=1,
        )
    ]  # fmt: skip
    for line in ordered[:FRONT_LINES]:
        label = f"<b>{markup(named_line(assessment.scene, line.beam, line.line))}</b>"
        end = "; leaves the site" if leaves_site(assessment, line) else ""
        start = _group(line, "start")
        if line.limit is None:
            told = f"{label}<br/>no multiple: {markup(line.reason or 'no limit covers it', 160)}{end}"
        else:
            told = f"{label}<br/>{markup(line.limit, NAME)}, {duration(line.duration)}{end}"
        card = max((spot.diffuse_distance for spot in line.spots if spot.diffuse_distance is not None), default=None)
        rows.append(
            [
                paragraph(told, "cell"),
                number_cell(_several(start, "–")),
                number_cell(_several(_group(line, "mirror"), "none")),
                number_cell(_several(_group(line, "stop"), "none")),
                number_cell(_several(_group(line, "nearest"), "–")),
                number_cell(length(card, unit)),
                number_cell("below everywhere" if line.hazard_distance == 0 else length(line.hazard_distance, unit)),
            ]
        )
    hidden = len(ordered) - FRONT_LINES
    more = (
        f" {count_of(hidden, 'more beam line')} of lesser multiples: see section {sections['beam']}."
        if hidden > 0
        else ""
    )
    return [
        paragraph("Somebody in the beam itself", "section"),
        ruled(rows, [68, 14, 16, 15, 19, 20, 22], numeric=(1, 2, 3, 4, 5, 6)),
        paragraph(
            "Direct exposure as a <b>multiple of the limit</b>, whether or not anybody stands there; above 1 is "
            "above the limit. White card: the distance from a white matt surface held in the beam at which its "
            "light has fallen to the limit. Hazard distance: along the beam from its start if nothing stopped it, no "
            "loss credited. "
            f"Every place is in section {sections['beam']}. 1.2e-3 stands for 1.2 × 10⁻³ throughout; – for a "
            f"value that does not exist.{more}",
            "note",
        ),
    ]


def _because(observer: ObserverOutcome, room: int) -> str:
    """Reasons in brief."""
    told = list(grouped(observer.reasons))
    if observer.governing and (observer.verdict == BELOW or not told):
        told.insert(0, observer.governing)
    return markup(_in_words("; ".join(told), room), room) if told else ""


def _in_words(text: str, room: int) -> str:
    """Text cut between words, so that no number is cut; within a word only where it fills the room."""
    if len(text) <= room:
        return text
    kept = text[: room - 2].rpartition(" ")[0]
    return f"{kept} …" if kept else text


def _verdicts(assessment: Assessment, sections: dict[str, int]) -> list[Any]:
    from reportlab.lib.colors import HexColor
    from reportlab.platypus import Table, TableStyle

    lines = [paragraph(markup(beam_headline(assessment)), "verdict")]
    beside = f"{beside_headline(assessment)}: {verdict_words(assessment.verdict)}"
    lines.append(paragraph(beside, "verdict"))
    if left_out_words(assessment):
        lines.append(paragraph(markup(left_out_words(assessment)), "cell bold"))
    box = Table(
        [[lines]],
        colWidths=[COLUMN * MM],
        hAlign="LEFT",
        style=TableStyle([
            ("FONT", (0, 0), (-1, -1), SANS, 8),
            ("BOX", (0, 0), (-1, -1), 1.6 if assessment.verdict == ABOVE else 0.8, HexColor(INK)),
            ("TOPPADDING", (0, 0), (-1, -1), 3), ("BOTTOMPADDING", (0, 0), (-1, -1), 5),
        ]),
        spaceAfter=4,
    )  # fmt: skip
    numbered = list(enumerate(assessment.observers, start=1))
    story: list[Any] = [paragraph("What was found", "section"), box]
    if len(numbered) > FRONT_OBSERVERS:
        counts = ", ".join(f"{count} {verdict}" for verdict, count in counted(assessment).items())
        story.append(
            paragraph(
                f"{len(numbered)} observers: {counts}. The {FRONT_OBSERVERS} to look at first are below, "
                "all are listed after this page."
            )
        )
        numbered = worst_first(assessment)[:FRONT_OBSERVERS]
    story += [
        _verdict_table(numbered, lacking(assessment)),
        paragraph(
            "A verdict holds for somebody at that place, beside the beam, and for the stated inputs, limits and "
            f"assumptions only (sections {sections['inputs']} to {sections['cautions']}); reasons in full are in "
            f"section {sections['comparisons']}.",
            "note",
        ),
    ]
    return story


def _verdict_table(numbered: list[tuple[int, ObserverOutcome]], missing: str) -> Any:
    rows: list[list[Any]] = [
        heads("No.", "Observer", "Verdict", "Greatest summed ratio to its limit", "Reasons in brief")
    ]
    room = BRIEF if len(numbered) <= FEW_OBSERVERS else BRIEF // 2
    for number, observer in numbered:
        rows.append(
            [
                str(number),
                paragraph(markup(both_ends(printable(observer.name), NAME)), "cell"),
                paragraph(verdict_words(observer.verdict), "cell"),
                paragraph(markup(standing(observer, missing)), "cell"),
                paragraph(_because(observer, room), "cell"),
            ]
        )
    return ruled(rows, [8, _NAME_WIDTH, 25, 50, 57])


def _every_verdict(assessment: Assessment) -> list[Any]:
    """The full list, where the first page has room for some only."""
    if len(assessment.observers) <= FRONT_OBSERVERS:
        return []
    from reportlab.platypus import PageBreak

    return [
        PageBreak(),
        paragraph("Verdict of every observer", "section"),
        _verdict_table(list(enumerate(assessment.observers, start=1)), lacking(assessment)),
    ]


def _left_out(assessment: Assessment, sections: dict[str, int]) -> list[Any]:
    story: list[Any] = [paragraph("Not judged, by the user's decision", "subsection")]
    if assessment.scene.not_judged:
        story += [
            paragraph(f"<b>{hazard}</b>: {markup(left_out_reason(reason), 2000)}", "small item", bullet="•")
            for hazard, reason in assessment.scene.not_judged
        ]
    else:
        story.append(paragraph("None: every hazard that is due was to be judged.", "small item"))
    story.append(paragraph("Not covered", "subsection"))
    story += [paragraph(markup(entry), "small item", bullet="•") for entry in not_covered()]
    story.append(
        paragraph(f"Read the cautions (section {sections['cautions']}) before relying on any number here.", "aside")
    )
    return story
