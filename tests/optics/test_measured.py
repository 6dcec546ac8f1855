"""Stand-ins for spheres: a measured table read back, and Henyey–Greenstein's function, on their grids of angles."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from lasescatter.matter import HenyeyGreenstein, MeasuredMatrix
from lasescatter.optics.measured import MatrixError, stand_in_optics


def mean_of_lines(angles, values):
    """½ ∫ f sin(theta) of straight lines between nodes, by five-point Gauss–Legendre on quarters of each step."""
    fine = np.unique(
        np.concatenate([angles[:-1] + part * np.diff(angles) for part in (0, 0.25, 0.5, 0.75)] + [angles[-1:]])
    )
    x, w = np.polynomial.legendre.leggauss(5)
    middle, half = (fine[1:] + fine[:-1]) / 2, np.diff(fine) / 2
    places = middle[:, None] + half[:, None] * x
    return float(np.sum(np.interp(places, angles, values) * np.sin(places) @ w * half) / 2)


def sphere_mean(function, panels=4000):
    """½ ∫ f sin(theta) d(theta) by five-point Gauss–Legendre on equal panels."""
    x, w = np.polynomial.legendre.leggauss(5)
    edges = np.linspace(0, np.pi, panels + 1)
    places = (edges[1:] + edges[:-1])[:, None] / 2 + np.pi / panels / 2 * x
    return float(np.sum(function(places) * np.sin(places) @ w) * np.pi / panels / 4)


def table_of(angles, f11, share_12=None, **others):
    """A table as the reading of a file leaves it."""
    angles, f11 = np.asarray(angles, dtype=float), np.asarray(f11, dtype=float)
    mean = mean_of_lines(angles, f11)
    f11 = f11 / mean
    f12 = None if share_12 is None else tuple(f11 * share_12)
    return MeasuredMatrix(tuple(angles), tuple(f11), f12, others.get("f33"), others.get("f34"), mean, "dust.csv")


def henyey_greenstein(g, theta):
    return (1 - g * g) / (1 + g * g - 2 * g * np.cos(theta)) ** 1.5


def rayleigh_share(theta):
    return -(np.sin(theta) ** 2) / (1 + np.cos(theta) ** 2)


@settings(max_examples=40, deadline=None)
@given(g=st.floats(-0.99, 0.99))
def test_henyey_greenstein(g):
    optics = stand_in_optics(HenyeyGreenstein(g), 0.9, 532e-9)
    assert optics.asymmetry == pytest.approx(g, rel=0, abs=1e-9)
    theta = np.linspace(0, np.pi, 3001)
    f11, f12 = optics.matrix.at(theta)
    assert_allclose(f11, henyey_greenstein(g, theta), rtol=1e-5 + 1e-12 / (1 - abs(g)) ** 2)
    assert np.all(f12 == 0)
    assert optics.error_f11 <= 1e-5


@pytest.mark.parametrize("g", [-0.99, 0.0, 0.5, 0.99])
def test_henyey_greenstein_adds_up(g):
    """The mean over the sphere, and the running integral against quadrature of the formula."""
    matrix = stand_in_optics(HenyeyGreenstein(g), 1.0, 532e-9).matrix
    assert sphere_mean(lambda theta: matrix.at(theta)[0]) == pytest.approx(1, rel=1e-6, abs=0)
    theta = np.linspace(0, np.pi, 400_001)
    f = henyey_greenstein(g, theta)
    running = np.concatenate([[0.0], np.cumsum((f[1:] + f[:-1]) / 2 * np.diff(theta))]) / (4 * np.pi)
    chosen = slice(None, None, 40_000)
    assert_allclose(matrix.running(theta[chosen])[0], running[chosen], rtol=1e-6, atol=1e-12)


def test_a_stand_in_has_no_size_and_a_nominal_extinction():
    optics = stand_in_optics(HenyeyGreenstein(0.7), 0.8, 1064e-9)
    assert (optics.extinction, optics.scattering, optics.albedo) == (1.0, 0.8, 0.8)
    assert optics.wavelength == 1064e-9
    assert optics.volume is None and optics.effective_radius is None and optics.nodes == 0


tables = st.tuples(
    st.lists(st.floats(0.5, 5.0), min_size=36, max_size=120),
    st.floats(-0.9, 0.9),
    st.integers(0, 2**32 - 1),
)


@settings(max_examples=12, deadline=None)
@given(table=tables)
def test_a_table_read_back_gives_the_same_curve(table):
    """Rows of any spacing, a forward peak and noise of 20 %: each table angle, and the lines between, to 1e-3."""
    steps, g, seed = table
    angles = np.concatenate([[0.0], np.cumsum(steps)]) / np.sum(steps) * np.pi
    angles[-1] = np.pi
    noise = np.random.default_rng(seed)
    f11 = henyey_greenstein(g, angles) * noise.uniform(0.8, 1.2, len(angles))
    measured = table_of(angles, f11, rayleigh_share(angles) * noise.uniform(-1, 1, len(angles)))
    optics = stand_in_optics(measured, 1.0, 532e-9)
    assert optics.error_f11 <= 1e-3
    places = np.concatenate([angles, np.random.default_rng(seed).uniform(0, np.pi, 2000)])
    f11, f12 = optics.matrix.at(places)
    lines_11, lines_12 = (np.interp(places, angles, row) for row in (measured.f11, measured.f12))
    assert np.max(np.abs(f11 / lines_11 - 1)) <= 2e-4 + optics.error_f11
    assert np.max(np.abs(f12 - lines_12) / lines_11) <= 2e-4 + optics.error_f11
    assert np.all(f11 > 0)


@pytest.mark.parametrize("step", [0.25, 0.5, 1.0, 2.0, 5.0])
def test_rows_at_whole_parts_of_a_degree_are_met_exactly(step):
    angles = np.radians(np.arange(0, 180 + step / 2, step))
    angles[-1] = np.pi
    measured = table_of(angles, henyey_greenstein(0.8, angles), rayleigh_share(angles))
    optics = stand_in_optics(measured, 1.0, 532e-9)
    assert_allclose(optics.matrix.at(angles)[0], measured.f11, rtol=1e-5)
    assert_allclose(optics.matrix.at(angles)[1], measured.f12, rtol=1e-5, atol=1e-12)
    assert optics.error_f11 <= 2e-4


def test_mean_and_asymmetry_of_a_table():
    """Against quadrature of the straight lines."""
    angles = np.radians(np.arange(0, 181.0))
    angles[-1] = np.pi
    measured = table_of(angles, henyey_greenstein(0.7, angles))
    optics = stand_in_optics(measured, 1.0, 532e-9)
    assert sphere_mean(lambda theta: optics.matrix.at(theta)[0]) == pytest.approx(1, rel=1e-5, abs=0)
    fine = np.linspace(0, np.pi, 1_800_001)
    lines = np.interp(fine, angles, measured.f11) * np.sin(fine) * np.cos(fine) / 2
    assert optics.asymmetry == pytest.approx(np.trapezoid(lines, fine), rel=1e-5, abs=0)


def test_elements_that_were_not_measured_are_nothing():
    angles = np.linspace(0, np.pi, 91)
    matrix = stand_in_optics(table_of(angles, 1 + np.cos(angles) ** 2), 1.0, 532e-9).matrix
    for element in (matrix.f12, matrix.f33, matrix.f34):
        assert np.all(element == 0)


def test_measured_rayleigh_scattering_scatters_as_air():
    """A table of pure dipole scattering every half degree, against the formula."""
    angles = np.radians(np.arange(0, 180.25, 0.5))
    angles[-1] = np.pi
    cosine = np.cos(angles)
    measured = table_of(angles, 1 + cosine**2, rayleigh_share(angles), f33=tuple(0.9 * cosine))
    matrix = stand_in_optics(measured, 1.0, 532e-9).matrix
    places = np.linspace(0, np.pi, 777)
    f11, f12 = matrix.at(places)
    assert_allclose(f11, 0.75 * (1 + np.cos(places) ** 2), rtol=2e-5)
    assert_allclose(f12, -0.75 * np.sin(places) ** 2, rtol=0, atol=2e-5)


GOOD = table_of(
    np.linspace(0, np.pi, 61), 1 + np.cos(np.linspace(0, np.pi, 61)) ** 2, rayleigh_share(np.linspace(0, np.pi, 61))
)


def changed(**values):
    fields = {name: getattr(GOOD, name) for name in ("angles", "f11", "f12", "f33", "f34", "normalised_by", "file")}
    return MeasuredMatrix(**{**fields, **values})


@pytest.mark.parametrize(
    ("table", "words"),
    [
        (changed(angles=(0.01, *GOOD.angles[1:])), "0 to 180 degrees"),
        (changed(angles=(*GOOD.angles[:-1], 3.1)), "0 to 180 degrees"),
        (changed(angles=(0.0, GOOD.angles[2], GOOD.angles[1], *GOOD.angles[3:])), "ascend"),
        (changed(f11=(-1.0, *GOOD.f11[1:])), "F11 is not above 0"),
        (changed(f11=(0.0, *GOOD.f11[1:])), "F11 is not above 0"),
        (changed(f11=(float("nan"), *GOOD.f11[1:])), "F11 is not above 0"),
        (changed(f11=GOOD.f11[1:]), "F11"),
        (changed(f11=tuple(2 * value for value in GOOD.f11)), "mean of F11 over the sphere is 2"),
        (changed(f12=tuple(-1.01 * value for value in GOOD.f11)), "F12 is not between"),
        (changed(f34=tuple(1.01 * value for value in GOOD.f11)), "F34 is not between"),
        (changed(f33=GOOD.f11[1:]), "F33 is not between"),
    ],
)
def test_what_is_no_matrix_is_refused(table, words):
    with pytest.raises(MatrixError, match=words) as caught:
        stand_in_optics(table, 1.0, 532e-9)
    assert "dust.csv" in str(caught.value)


def test_a_table_too_sharp_for_any_grid_is_refused():
    angles = np.concatenate([np.linspace(0, 1, 20), [1.0 + 1e-7, 1.0 + 2e-7], np.linspace(1.1, np.pi, 40)])
    angles[-1] = np.pi
    f11 = np.ones_like(angles)
    f11[20] = 50.0
    with pytest.raises(MatrixError, match="bends too sharply"):
        stand_in_optics(table_of(angles, f11), 1.0, 532e-9)


@pytest.mark.parametrize("g", [1.0, -1.0, 0.9995, float("nan")])
def test_asymmetry_outside_its_range_is_refused(g):
    with pytest.raises(MatrixError, match="asymmetry"):
        stand_in_optics(HenyeyGreenstein(g), 1.0, 532e-9)


@pytest.mark.parametrize("albedo", [-0.1, 1.1, float("nan")])
def test_albedo_outside_its_range_is_refused(albedo):
    with pytest.raises(MatrixError, match="albedo"):
        stand_in_optics(HenyeyGreenstein(0.5), albedo, 532e-9)


def test_size_of_the_straight_lines_between_rows():
    """The stated size of the assumption: by how much a table's own lines lift its mean over that of the curve."""
    for g, step, lifted in ((0.8, 5, 0.0133), (0.95, 5, 0.220), (0.95, 1, 0.0097)):
        angles = np.radians(np.arange(0, 180.1, step))
        assert mean_of_lines(angles, henyey_greenstein(g, angles)) - 1 == pytest.approx(lifted, rel=0.01, abs=0)
