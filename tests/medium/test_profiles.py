"""Profiles in space: columns against chord lengths and plain sampling."""

from __future__ import annotations

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from lasescatter.medium.profiles import Unbounded, UprightBox

BOX = UprightBox(np.array([0.0, -1.0, 0.5]), np.array([2.0, 1.0, 3.0]))
place = st.tuples(*[st.floats(-4, 6, allow_nan=False)] * 3)


def test_chords_by_hand():
    assert_allclose(BOX.column(np.array([-1.0, 0, 1]), np.array([5.0, 0, 1])), 2.0)
    assert_allclose(BOX.column(np.array([0.5, 0, 1]), np.array([1.0, 0, 1])), 0.5)
    assert_allclose(BOX.column(np.array([-1.0, 0, 0.4]), np.array([5.0, 0, 0.4])), 0.0)
    # Corner to corner: the space diagonal of 2 × 2 × 2.5.
    assert_allclose(BOX.column(BOX.low, BOX.high), np.sqrt(4 + 4 + 6.25))
    assert_allclose(Unbounded().column(np.zeros(3), np.array([3.0, 4.0, 0])), 5.0)


@settings(max_examples=60, deadline=None)
@given(a=place, b=place)
def test_column_equals_sampling(a, b):
    a, b = np.asarray(a), np.asarray(b)
    t = (np.arange(20_000) + 0.5) / 20_000
    sampled = BOX.value(a + t[:, None] * (b - a)).mean() * np.linalg.norm(b - a)
    assert_allclose(BOX.column(a, b), sampled, atol=2.1 * np.linalg.norm(b - a) / 20_000)


@settings(max_examples=60, deadline=None)
@given(a=place, b=place, share=st.floats(0, 1))
def test_columns_add_along_a_segment(a, b, share):
    a, b = np.asarray(a), np.asarray(b)
    middle = a + share * (b - a)
    assert_allclose(BOX.column(a, middle) + BOX.column(middle, b), BOX.column(a, b), atol=1e-9)


def test_span_and_shortest_dimension():
    assert BOX.span(np.array([-1.0, 0, 1]), np.array([1.0, 0, 0]), 10.0) == (1.0, 3.0)
    assert BOX.span(np.array([-1.0, 0, 1]), np.array([1.0, 0, 0]), 2.0) == (1.0, 2.0)
    assert BOX.span(np.array([-1.0, 5, 1]), np.array([1.0, 0, 0]), 10.0) is None
    assert BOX.shortest_dimension() == 2.0
    assert len(BOX.edges()[0]) == 12
