"""Folded paths and the axis of polarization along them."""

from __future__ import annotations

import math

import numpy as np
import pytest
from exposure.beams import beam, line
from numpy.testing import assert_allclose

from lasescatter.exposure.legs import legs_of, swings_of


def folded(**changes):
    return beam((0.0, 0.0, 1.0), (4.0, 0.0, 1.0), (4.0, 3.0, 1.0), mirror_reflectance=(0.9,), **changes)


def test_legs_of_a_folded_path():
    first, second = legs_of(folded())
    assert (first.length, second.length) == (4.0, math.inf)
    assert (first.reflected, second.reflected) == (1.0, 0.9)
    assert second.path_before == 4.0
    assert_allclose(second.direction, [0, 1, 0])


def test_vertical_field_stays_vertical_in_a_horizontal_fold():
    """s-polarized light keeps its axis at a mirror (Fresnel's laws); real mirrors included."""
    source = line(polarization="linear", electric_field=(0.0, 0.0, 1.0))
    path = folded(lines=(source,))
    swings = swings_of(path, source, legs_of(path))
    assert_allclose(np.abs(swings[1].axis), [0, 0, 1], atol=1e-12)
    assert swings[1].q == pytest.approx(99 / 101, rel=1e-12)


def test_field_in_the_plane_of_a_fold_turns_with_the_beam():
    source = line(polarization="linear", electric_field=(0.0, 1.0, 0.0))
    path = folded(lines=(source,))
    axis = swings_of(path, source, legs_of(path))[1].axis
    assert_allclose(np.abs(axis), [1, 0, 0], atol=1e-12)


@pytest.mark.parametrize(("turn", "known"), [(0.9, True), (1.1, False), (45.0, False), (89.2, True)])
def test_real_mirror_keeps_the_axis_within_one_degree_only(turn, known):
    angle = math.radians(turn)
    source = line(polarization="linear", electric_field=(0.0, math.sin(angle), math.cos(angle)))
    path = folded(lines=(source,))
    swing = swings_of(path, source, legs_of(path))[1]
    assert swing.worst is not known
    ideal = folded(lines=(source,), mirrors="ideal")
    assert not swings_of(ideal, source, legs_of(ideal))[1].worst


@pytest.mark.parametrize(
    ("word", "first", "second"),
    [
        ("unknown", "worst axis", "worst axis"),
        ("circular", "unpolarized", "worst axis"),
        ("unpolarized", "unpolarized", "unpolarized"),
        ("linear", "worst axis", "worst axis"),
    ],
)
def test_every_word_on_both_sides_of_a_real_mirror(word, first, second):
    source = line(polarization=word)
    path = folded(lines=(source,))
    assert [swing.words for swing in swings_of(path, source, legs_of(path))] == [first, second]
