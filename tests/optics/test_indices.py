"""Refractive indices: interpolation between nodes, nothing beyond them, and mixtures."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from lasescatter.matter import IndexTable
from lasescatter.optics.indices import IndexRangeError, index_at, unconfirmed_at, volume_mixed


def table_of(*nodes: tuple[float, float, float, bool]) -> IndexTable:
    wavelengths, real, imaginary, unconfirmed = zip(*nodes, strict=True)
    return IndexTable(wavelengths, real, imaginary, unconfirmed, "test liquid", "invented")


@st.composite
def tables(draw: st.DrawFn) -> IndexTable:
    count = draw(st.integers(2, 8))
    steps = draw(st.lists(st.floats(1e-9, 1e-6), min_size=count, max_size=count))
    wavelengths = [200e-9]
    for step in steps[1:]:
        wavelengths.append(wavelengths[-1] + step)
    k = st.one_of(st.just(0.0), st.floats(1e-12, 10))
    nodes = [(w, draw(st.floats(0.05, 5)), draw(k), draw(st.booleans())) for w in wavelengths]
    return table_of(*nodes)


@given(tables(), st.floats(0, 1))
def test_interpolation_stays_between_the_neighbours(table, way):
    first, last = table.wavelengths[0], table.wavelengths[-1]
    wavelength = min(first + way * (last - first), last)
    index = index_at(table, wavelength)
    above = next(n for n, node in enumerate(table.wavelengths) if node >= wavelength * (1 - 1e-9))
    below = above if math.isclose(table.wavelengths[above], wavelength, rel_tol=1e-9) else above - 1
    for value, nodes in ((index.real, table.real), (index.imag, table.imaginary)):
        assert min(nodes[below], nodes[above]) <= value <= max(nodes[below], nodes[above])
    assert unconfirmed_at(table, wavelength) == (table.unconfirmed[below] or table.unconfirmed[above])


@given(tables())
def test_nodes_are_met(table):
    for node, n, k, doubt in zip(table.wavelengths, table.real, table.imaginary, table.unconfirmed, strict=True):
        assert index_at(table, node) == complex(n, k)
        assert unconfirmed_at(table, node) == doubt


@given(tables(), st.floats(1e-6, 10), st.booleans())
def test_nothing_is_known_outside(table, factor, above):
    wavelength = table.wavelengths[-1] * (1 + factor) if above else table.wavelengths[0] / (1 + factor)
    for ask in (index_at, unconfirmed_at):
        with pytest.raises(IndexRangeError):
            ask(table, wavelength)


def test_the_text_names_table_wavelength_and_range():
    table = table_of((400e-9, 1.4, 0.0, False), (700e-9, 1.5, 0.0, False))
    with pytest.raises(IndexRangeError) as caught:
        index_at(table, 1064e-9)
    assert str(caught.value) == (
        "the refractive index of test liquid is not known at 1064 nm: its data reach from 400 nm to 700 nm"
    )


@pytest.mark.parametrize(
    ("first", "second", "middle"),
    [
        (1e-8, 1e-6, 1e-7),  # both weak: halfway in the logarithm
        (1e-4, 1e-2, 1e-3),  # one weak
        (2e-3, 4e-3, 3e-3),  # neither: linear
        (0.0, 1e-6, 5e-7),  # no logarithm of zero
        (0.0, 0.0, 0.0),
    ],
)
def test_how_absorption_is_read(first, second, middle):
    table = table_of((400e-9, 1.4, first, False), (600e-9, 1.5, second, False))
    index = index_at(table, 500e-9)
    assert index.real == pytest.approx(1.45, rel=1e-12, abs=0)
    assert index.imag == pytest.approx(middle, rel=1e-12, abs=1e-30)


def test_a_wavelength_off_a_node_by_rounding_is_the_node():
    table = table_of((1.064e-6, 1.4, 0.0, True), (1.55e-6, 1.5, 0.0, False))
    assert 1550 * 1e-9 > 1.55e-6
    assert index_at(table, 1550 * 1e-9) == 1.5 and not unconfirmed_at(table, 1550 * 1e-9)


def test_a_number_holds_everywhere():
    assert index_at(1.43 + 1e-6j, 10.6e-6) == 1.43 + 1e-6j
    assert not unconfirmed_at(1.43, 10.6e-6)


def test_mixture():
    assert volume_mixed(1.5 + 0.3j, 1.3 + 0.1j, 0.25) == pytest.approx(1.35 + 0.15j, rel=1e-12, abs=0)
    for share in (-0.01, 1.01, math.nan):
        with pytest.raises(ValueError, match="share"):
            volume_mixed(1.5, 1.3, share)
