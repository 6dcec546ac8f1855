"""Words for verdicts, ratios and reasons: an open verdict never reads as a margin, nothing is said twice."""

from __future__ import annotations

from dataclasses import replace

import pytest

from lasescatter.assessment.outcome import Assessment
from lasescatter.limits.verdict import margin
from lasescatter.report import quantities
from lasescatter.report.naming import leg_sign, named_beam, named_line
from lasescatter.report.standing import (
    beam_headline,
    beside_headline,
    grouped,
    left_out_reason,
    left_out_words,
    standing,
)


def test_an_open_verdict_has_no_margin(result: Assessment) -> None:
    below = result.observers[0]
    assert standing(below) == margin(below.ratio)
    near = replace(below, verdict="not established", direct_reach="alignment beam", ratio=0.0048)
    assert standing(near) == "light beside the beam alone: 0.0048 of the limit; direct light within reach"
    uncovered = replace(near, direct_reach="")
    assert standing(uncovered) == "light beside the beam alone: 0.0048 of the limit"
    hit = replace(near, lines=tuple(replace(line, direct=1.0) for line in near.lines))
    assert standing(hit) == "light at the stated point: 0.0048 of the limit; direct light within reach"
    for observer in (near, uncovered, hit):
        assert "times below" not in standing(observer)
    assert standing(replace(near, ratio=None)) == "no ratio"


def test_examples_of_the_starter_file_are_counted() -> None:
    example = 'limit "{}" is still an example of the starter file: enter your own, with source'
    found = grouped(
        (
            "retina thermal: " + example.format("one"), "skin: " + example.format("two: b"), "skin: too thick",
            "skin: " + example.format("one"), "skin: too thick",
        )
    )  # fmt: skip
    assert found == ("skin: too thick", "2 limits are still examples of the starter file: enter your own, with source")
    assert grouped((example.format("one"),))[0].startswith("1 limit is still an example")


def test_headlines(result: Assessment) -> None:
    covered = [line for line in result.in_the_beam if line.limit is not None]
    top = max(spot.multiple or 0.0 for line in covered for spot in line.spots)
    assert beam_headline(replace(result, in_the_beam=tuple(covered))) == (
        f"In the beam: up to {quantities.digits(top)} times the limit"
    )
    none = tuple(line for line in result.in_the_beam if line.limit is None)
    assert none
    assert beam_headline(replace(result, in_the_beam=none)) == "In the beam: no entered limit covers it"
    weak = replace(covered[0], spots=(replace(covered[0].spots[0], multiple=0.5),))
    assert beam_headline(replace(result, in_the_beam=(weak,))) == "In the beam: up to 0.500 of the limit"
    assert beside_headline(result) == "Beside the beam, worst of 3 observers"
    assert left_out_words(result) == "(retina thermal only; not judged: skin)"
    judged = tuple(replace(o, hazards=tuple(h for h in o.hazards if not h.not_judged)) for o in result.observers)
    assert left_out_words(replace(result, observers=judged)) == ""
    assert "so it is judged all the same" in left_out_reason("EXAMPLE: the rule of this room")
    assert left_out_reason("the rule of this room") == "the rule of this room"


def test_signs_are_never_cut(result: Assessment) -> None:
    scene = result.scene
    assert named_line(scene, "alignment beam", "alignment beam") == "A, 532 nm: alignment beam"
    assert named_line(scene, scene.beams[1].name, "pointer", 24) == "B, 650 nm: ranging <i> … / pointer"
    assert named_beam(scene, "alignment beam", 9) == "A: ali … eam"
    assert named_line(scene, "unknown", "unknown") == "unknown"
    assert leg_sign(scene, scene.beams[1].name, 2) == "B2"


@pytest.mark.parametrize(
    ("value", "shown"), [(0.0, "0"), (1e-9, "0.1"), (0.1, "0.1"), (0.141, "0.2"), (1.0, "1.0"), (3.7157, "3.8")]
)
def test_optical_densities_are_rounded_up(value: float, shown: str) -> None:
    assert quantities.optical_density(value) == shown
