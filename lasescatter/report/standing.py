"""How an observer stands against the limits, in words that never make an open verdict look like a margin."""

from __future__ import annotations

import re
from collections.abc import Iterable

from lasescatter.assessment.outcome import Assessment, InTheBeam, ObserverOutcome
from lasescatter.limits.judge import HAZARDS, is_placeholder
from lasescatter.limits.verdict import ABOVE, BELOW, NOT_ESTABLISHED, Verdict, few_digits, margin
from lasescatter.report.naming import line_sign
from lasescatter.report.quantities import counted, digits
from lasescatter.report.ranking import greatest
from lasescatter.scene import Scene

_EXAMPLE = re.compile(r'^(?:[^:]+: )?limit "(.*)" is still an example of the starter file')

ANSWERS: dict[Verdict, str] = {BELOW: "yes", ABOVE: "no", NOT_ESTABLISHED: "open"}
"""Whether a ratio is at most 1, its bounds considered: a row of a table is no verdict of its own."""


def standing(observer: ObserverOutcome, lacking: str = "") -> str:
    """The greatest summed ratio in words: with its margin where the verdict is settled, else as a number alone.

    `lacking` says whose light is not computed; a ratio then counts only what is.
    """
    if observer.ratio is None:
        return margin(None)
    if lacking:
        return f"what is computed: {few_digits(observer.ratio)} of the limit; not computed: light of {lacking}"
    if observer.verdict != NOT_ESTABLISHED:
        return margin(observer.ratio)
    alone = "light at the stated point" if observer.total("direct") > 0 else "light beside the beam alone"
    told = f"{alone}: {few_digits(observer.ratio)} of the limit"
    return f"{told}; direct light within reach" if observer.direct_reach else told


def grouped(reasons: Iterable[str]) -> tuple[str, ...]:
    """Reasons, each once; all limits that are still examples in one."""
    found = list(dict.fromkeys(reasons))
    examples = {match[1] for match in map(_EXAMPLE.match, found) if match}
    kept = [reason for reason in found if not _EXAMPLE.match(reason)]
    if examples:
        verb = "limit is still an example" if len(examples) == 1 else "limits are still examples"
        kept.append(f"{len(examples)} {verb} of the starter file: enter your own, with source")
    return tuple(kept)


def beam_headline(assessment: Assessment) -> str:
    """The beam itself, in one line."""
    known = [(line, greatest(list(line.spots))) for line in assessment.in_the_beam if line.limit is not None]
    multiples = [spot.multiple for _, spot in known if spot is not None and spot.multiple is not None]
    if not multiples:
        return "In the beam: no entered limit covers it"
    top = max(multiples)
    told = f"In the beam: up to {digits(top)} {'times' if top > 1 else 'of'} the limit"
    left = [line for line in assessment.in_the_beam if line.limit is None]
    if left:
        told += f"; no entered limit covers {_signs(assessment.scene, left)}"
    return told


def _signs(scene: Scene, lines: list[InTheBeam]) -> str:
    signs = [line_sign(scene, line.beam, line.line) for line in lines]
    shown = "; ".join(sign for sign in signs[:3] if sign)
    return shown if len(signs) <= 3 and shown else counted(len(signs), "line")


def beside_headline(assessment: Assessment) -> str:
    """The worst verdict of the observers, in words before it."""
    count = len(assessment.observers)
    return "Beside the beam, no observer" if not count else f"Beside the beam, worst of {counted(count, 'observer')}"


def left_out_reason(reason: str) -> str:
    """The user's reason for leaving a hazard out, marked where it is still the starter file's."""
    return f"{reason} (still an example, so it is judged all the same)" if is_placeholder(reason) else reason


def left_out_words(assessment: Assessment) -> str:
    """Where the user left hazards out, what the verdict speaks of: "(skin only; not judged: retina thermal)"."""
    rows = [row for observer in assessment.observers for row in observer.hazards]
    out = [hazard for hazard in HAZARDS if any(row.hazard == hazard and row.not_judged for row in rows)]
    if not out:
        return ""
    judged = {row.hazard for row in rows if not row.not_judged}
    kept = ", ".join(hazard for hazard in HAZARDS if hazard in judged) or "nothing"
    return f"({kept} only; not judged: {', '.join(out)})"
