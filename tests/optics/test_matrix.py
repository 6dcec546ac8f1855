"""Cosine series, splines and scattering matrices: against scipy and against closed forms."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.fft import dct
from scipy.integrate import quad, simpson
from scipy.interpolate import CubicSpline

from lasescatter.optics import cosines
from lasescatter.optics.air import air_optics, rayleigh_matrix
from lasescatter.optics.matrix import SPLINE_ERROR, ScatteringMatrix, from_series
from lasescatter.optics.mie import averaged, sphere
from lasescatter.optics.spline import EvenSpline

RNG = np.random.default_rng(3)
THETA = np.concatenate(([0.0, 1e-9, np.pi - 1e-9, np.pi], RNG.uniform(0, np.pi, 500)))


@pytest.mark.parametrize("size", [2, 3, 8, 9, 257])
def test_cosine_transform_against_scipy(size):
    values = RNG.normal(size=(4, size))
    assert cosines.transform(values) == pytest.approx(dct(values, type=1), rel=1e-12, abs=1e-12)


def test_series_and_samples_are_inverse():
    values = RNG.normal(size=(4, 33))
    series = cosines.from_samples(values)
    assert cosines.to_samples(series, 32) == pytest.approx(values, rel=1e-12, abs=1e-13)
    finer = cosines.to_samples(series, 96)
    assert finer[:, ::3] == pytest.approx(values, rel=1e-12, abs=1e-13)
    literal = np.cos(np.outer(np.pi * np.arange(97) / 96, np.arange(33))) @ series.T
    assert finer == pytest.approx(literal.T, rel=1e-11, abs=1e-12)
    with pytest.raises(ValueError, match="31 intervals cannot carry a series of degree 32"):
        cosines.to_samples(series, 31)


@pytest.mark.parametrize("length", [1, 2, 5, 8])
def test_means_over_the_sphere(length):
    series = RNG.normal(size=length)

    def value(theta):
        return float(np.cos(np.arange(length) * theta) @ series)

    mean = quad(lambda t: value(t) * np.sin(t) / 2, 0, np.pi, epsabs=1e-13)[0]
    cosine = quad(lambda t: value(t) * np.sin(t) * np.cos(t) / 2, 0, np.pi, epsabs=1e-13)[0]
    assert cosines.sphere_mean(series) == pytest.approx(mean, rel=0, abs=1e-12)
    assert cosines.sphere_mean_cosine(series) == pytest.approx(cosine, rel=0, abs=1e-12)


def test_spline_against_scipy():
    values = RNG.normal(size=65)
    angles = np.linspace(0, np.pi, 65)
    found, reference = EvenSpline(values), CubicSpline(angles, values, bc_type="clamped")
    assert found(THETA) == pytest.approx(reference(THETA), rel=0, abs=1e-12)
    assert found.integral(THETA) == pytest.approx(reference.antiderivative()(THETA), rel=0, abs=1e-12)
    assert found.curvature == pytest.approx(reference(angles, 2), rel=1e-9, abs=1e-9)
    turns = found.sign_changes()
    assert reference(turns) == pytest.approx(0, abs=1e-10)
    assert turns.size == np.count_nonzero(np.diff(np.sign(values)))


def test_spline_takes_any_shape_and_clamps():
    spline = EvenSpline(np.cos(np.linspace(0, np.pi, 129)))
    angles = np.array([[0.2, 0.4], [2.0, 3.0]])
    assert spline(angles) == pytest.approx(np.cos(angles), rel=0, abs=1e-8)
    assert spline(np.array([-1e-12, np.pi + 1e-12])) == pytest.approx([1.0, -1.0], rel=1e-12)
    assert float(spline(np.float64(1.0))) == pytest.approx(np.cos(1.0), rel=0, abs=1e-8)


def mie_series():
    """A few spheres from small to large, unequal weights: many sign changes of F12."""
    x = np.array([0.5, 3.0, 11.0, 40.0])
    return averaged(1.5 + 1e-3j, x, np.array([100.0, 5.0, 1.0, 0.2])).matrix


@pytest.fixture(scope="module")
def mie() -> tuple[ScatteringMatrix, np.ndarray]:
    series = mie_series()
    matrix, error = from_series(series)
    assert error <= SPLINE_ERROR
    return matrix, series / cosines.sphere_mean(series[0])


def test_mean_of_f11_is_one_and_elements_are_bounded(mie):
    matrix, _ = mie
    for one in (matrix, rayleigh_matrix(0.0284)):
        fine = np.linspace(0, np.pi, 40_001)
        f11, f12 = one.at(fine)
        assert simpson(f11 * np.sin(fine), x=fine) / 2 == pytest.approx(1, rel=1e-8, abs=0)
        assert (abs(f12) <= f11).all()
        assert (one.f12**2 + one.f33**2 + one.f34**2 <= one.f11**2 * (1 + 1e-12)).all()


def test_at_agrees_with_the_cosine_series(mie):
    matrix, series = mie
    literal = np.cos(np.outer(THETA, np.arange(series.shape[1]))) @ series[:2].T
    f11, f12 = matrix.at(THETA)
    assert (abs(f11 - literal[:, 0]) / literal[:, 0]).max() < SPLINE_ERROR
    assert (abs(f12 - literal[:, 1]) / literal[:, 0]).max() < SPLINE_ERROR
    assert (matrix.f33[0], matrix.f33[-1]) == pytest.approx((matrix.f11[0], -matrix.f11[-1]), rel=1e-9, abs=0)


def test_running_agrees_with_the_closed_form_and_with_at(mie):
    matrix, series = mie
    b11, b12, absolute = matrix.running(THETA)
    assert b11 == pytest.approx(cosines.running(series[0], THETA) / (4 * np.pi), rel=1e-6, abs=1e-12)
    assert b12 == pytest.approx(cosines.running(series[1], THETA) / (4 * np.pi), rel=1e-5, abs=1e-7)
    assert b11[0] == b12[0] == absolute[0] == 0
    # |F12|: by quadrature of `at` between its sign changes.
    fine = np.linspace(0, np.pi, 400_001)
    values = np.abs(matrix.at(fine)[1])
    summed = np.concatenate(((0,), np.cumsum((values[1:] + values[:-1]) / 2) * (fine[1] - fine[0])))
    assert absolute == pytest.approx(np.interp(THETA, fine, summed) / (4 * np.pi), rel=1e-6, abs=1e-9)
    assert (absolute >= np.abs(b12) - 1e-15).all()
    assert absolute.max() > 1.1 * np.abs(b12).max()


def test_running_and_at_take_any_shape(mie):
    matrix, _ = mie
    angles = RNG.uniform(0, np.pi, (3, 5))
    for values in (*matrix.at(angles), *matrix.running(angles)):
        assert values.shape == (3, 5)
    flat = matrix.running(angles.ravel())
    for values, line in zip(matrix.running(angles), flat, strict=True):
        assert (values.ravel() == line).all()


def test_running_of_rayleigh_in_closed_form():
    """rho = 0: F11 = ¾(1 + cos²), F12 = −¾ sin², never of another sign."""
    matrix = rayleigh_matrix(0.0)
    b11, b12, absolute = matrix.running(THETA)
    double = np.sin(2 * THETA) / 2
    assert b11 == pytest.approx(0.375 * (3 * THETA + double) / (4 * np.pi), rel=1e-10, abs=1e-15)
    assert b12 == pytest.approx(-0.375 * (THETA - double) / (4 * np.pi), rel=1e-7, abs=1e-13)
    assert absolute == pytest.approx(-b12, rel=1e-12, abs=1e-13)
    assert matrix.asymmetry == pytest.approx(0, abs=1e-14)
    assert matrix.at(np.pi / 2)[1] / matrix.at(np.pi / 2)[0] == pytest.approx(-1, rel=1e-12)


def test_asymmetry(mie):
    matrix, series = mie
    assert matrix.asymmetry == pytest.approx(cosines.sphere_mean_cosine(series[0]), rel=1e-12, abs=0)
    x = 6.0
    single, _ = from_series(averaged(1.44, np.array([x]), np.ones(1)).matrix)
    assert single.asymmetry == pytest.approx(sphere(1.44, x).asymmetry, rel=1e-10, abs=0)


@pytest.mark.parametrize("x", [30.0, 300.0])
def test_grid_follows_a_single_large_sphere(x):
    """Lobes as narrow as π/x, near-nulls between them: right to 1e-5 of the lobe at any angle."""
    series = averaged(1.33, np.array([x]), np.ones(1)).matrix
    matrix, error = from_series(series)
    assert error <= SPLINE_ERROR
    s1, s2 = sphere(1.33, x).amplitudes(THETA)
    exact = (abs(s1) ** 2 + abs(s2) ** 2) / 2 / cosines.sphere_mean(series[0])
    lobe = np.max([matrix.at(THETA + shift)[0] for shift in np.linspace(-0.5, 0.5, 11) * np.pi / x], axis=0)
    assert (abs(matrix.at(THETA)[0] - exact) / lobe).max() < 1.5 * SPLINE_ERROR


def test_greatest_near_against_plain_search():
    """Largest F11 + |F12| within an angle: every node in reach looked at one by one."""
    matrix = air_optics(532e-9, 288.15, 101_325.0).matrix
    total = matrix.f11 + np.abs(matrix.f12)
    rng = np.random.default_rng(6)
    theta, within = rng.uniform(0, np.pi, 200), rng.uniform(0, 2, 200) ** 3
    step = np.pi / (matrix.angles.size - 1)
    for angle, reach, found in zip(theta, within, matrix.greatest_near(theta, within), strict=True):
        inside = (matrix.angles >= angle - reach - step) & (matrix.angles <= angle + reach + step)
        assert found <= total[inside].max()
        strictly = (matrix.angles >= angle - reach) & (matrix.angles <= angle + reach)
        if strictly.any():
            assert found >= total[strictly].max()
        f11, f12 = matrix.at(angle)
        assert found >= (f11 + np.abs(f12)) * (1 - 1e-5)
