"""Size distributions: against scipy's, and the radii they are cut at against what is lost."""

from __future__ import annotations

import numpy as np
import pytest
from published.printed import printed
from scipy import stats
from scipy.integrate import quad

from lasescatter.matter import Lognormal, ModifiedGamma, SingleSize, SizeTable
from lasescatter.optics import cosines
from lasescatter.optics.distributions import check_shape, corners, density, log_radius_limits, mean_power
from lasescatter.optics.mie import SizeRangeError, averaged, combined

SHAPES = [
    Lognormal(0.3e-6, 1.05),
    Lognormal(0.3e-6, 1.6),
    Lognormal(0.05e-6, 2.2),
    ModifiedGamma(4e-6, 6, 1),
    ModifiedGamma(0.07e-6, 2, 0.5),
    ModifiedGamma(10e-6, 3, 1.77),
    ModifiedGamma(0.5e-6, 0.3, 3),
]


def reference(shape):
    """The same distribution from scipy."""
    if isinstance(shape, Lognormal):
        return stats.lognorm(np.log(shape.geometric_sd), scale=shape.median_radius)
    scale = shape.mode_radius * (shape.gamma / shape.alpha) ** (1 / shape.gamma)
    return stats.gengamma((shape.alpha + 1) / shape.gamma, shape.gamma, scale=scale)


@pytest.mark.parametrize("shape", SHAPES, ids=str)
def test_density_against_scipy(shape):
    other = reference(shape)
    radius = other.ppf([0.001, 0.03, 0.5, 0.9, 0.9999])
    assert density(shape, np.log(radius)) == pytest.approx(radius * other.pdf(radius), rel=1e-9, abs=0)


@pytest.mark.parametrize("shape", SHAPES, ids=str)
def test_moments_against_a_sum(shape):
    """The trapezoid rule over so wide a range of ln r is exact to rounding."""
    u = np.log(reference(shape).median()) + np.linspace(-30, 30, 60_001)
    number = density(shape, u) * (u[1] - u[0])
    assert number.sum() == pytest.approx(1, rel=1e-10, abs=0)
    for power in (1, 2, 3, 6):
        assert mean_power(shape, power) == pytest.approx((number * np.exp(power * u)).sum(), rel=1e-9, abs=0)


def test_mode_of_the_modified_gamma():
    """Deirmendjian's mode radius is where n(r), not n(r) r, is greatest."""
    shape = ModifiedGamma(4e-6, 6, 1)
    radius = np.linspace(3.9e-6, 4.1e-6, 2001)
    number = density(shape, np.log(radius)) / radius
    assert radius[number.argmax()] == pytest.approx(4e-6, rel=1e-4)


@pytest.mark.parametrize(
    ("shape", "expected"), [(ModifiedGamma(0.07, 2, 0.5), "0.4812"), (ModifiedGamma(4, 6, 1), "6.000")]
)
def test_deirmendjian_effective_radii(shape, expected):
    """Haze L and Cloud C1, in micrometres: computed for the published parameters, not printed (mark K)."""
    assert mean_power(shape, 3) / mean_power(shape, 2) == printed(expected)


@pytest.mark.parametrize("power", [0, 1, 2, 3, 6])
@pytest.mark.parametrize(
    "shape",
    [
        Lognormal(0.2e-6, 1.8, 0.1e-6, 0.5e-6),
        Lognormal(0.2e-6, 2.2, None, 0.3e-6),
        Lognormal(0.2e-6, 1.5, 0.25e-6, None),
        SizeTable((0.1e-6, 0.15e-6, 0.3e-6, 0.9e-6), (0.0, 1.0, 0.8, 0.1)),
    ],
    ids=str,
)
def test_moments_of_cut_and_tabulated_sizes_against_quadrature(shape, power):
    low, high = log_radius_limits(shape, 1e7, 0.5, 1e-12)
    if isinstance(shape, Lognormal):
        low = np.log(shape.smallest) if shape.smallest else low - 5
        high = np.log(shape.largest) if shape.largest else high + 1
    corners_inside = [c for c in corners(shape) if low < c < high]
    found, _ = quad(lambda u: float(np.exp(power * u) * density(shape, np.array([u]))[0]) * 1e6**power, low, high,
                    points=corners_inside or None, epsabs=0, epsrel=1e-10, limit=200)  # fmt: skip
    assert mean_power(shape, power) * 1e6**power == pytest.approx(found, rel=1e-8, abs=0)


@pytest.mark.parametrize(
    ("shape", "words"),
    [
        (Lognormal(1e-6, 1.5, 2e-6, 1e-6), "smallest radius 2e-06"),
        (SizeTable((1e-6,), (1.0,)), "number of rows 1"),
        (SizeTable((1e-6, 2e-6), (0.0, 0.0)), "number of rows 2"),
        (SizeTable((2e-6, 1e-6), (1.0, 1.0)), "step of the radii -1e-06"),
    ],
)
def test_bad_cuts_and_tables_are_refused_by_name(shape, words):
    with pytest.raises(SizeRangeError, match=words):
        check_shape(shape)


def test_single_size():
    assert mean_power(SingleSize(2e-6), 3) == pytest.approx(8e-18, rel=1e-12, abs=0)


@pytest.mark.parametrize("shape", SHAPES, ids=str)
@pytest.mark.parametrize(("index", "wavelength"), [(1.43, 2e-6), (1.33 + 1e-8j, 0.5e-6), (1.75 + 0.44j, 1e-6)], ids=str)
def test_cut_tails_are_as_small_as_promised(shape, index, wavelength):
    """What the radii beyond the limits scatter at any angle, and take from the beam, against the whole."""
    tail = 1e-5
    wavenumber, contrast = 2 * np.pi / wavelength, abs(index - 1)
    low, high = log_radius_limits(shape, wavenumber, contrast, tail)
    lowest, highest = log_radius_limits(shape, wavenumber, contrast, 1e-9)
    assert lowest < low < high < highest

    def summed(first, last):
        u = np.linspace(first, last, 250)
        return averaged(index, wavenumber * np.exp(u), density(shape, u) * (u[1] - u[0]))

    def intensity(part):
        degree = whole.matrix.shape[1] - 1
        return cosines.to_samples(part.matrix[0], degree)

    below, above = summed(lowest, low), summed(high, highest)
    whole = combined([below, summed(low, high), above])
    for part in (below, above):
        assert (intensity(part) / intensity(whole)).max() < 1.1 * tail
        assert part.extinction < 1.1 * tail * whole.extinction


@pytest.mark.parametrize(
    ("shape", "words"),
    [
        (Lognormal(0.0, 1.6), ["median radius", "above 0"]),
        (Lognormal(1e-6, 1.0), ["geometric standard deviation 1 ", "above 1, up to 10"]),
        (Lognormal(1e-6, 11.0), ["geometric standard deviation 11 "]),
        (ModifiedGamma(-1e-6, 6, 1), ["mode radius"]),
        (ModifiedGamma(1e-6, 0, 1), ["alpha 0 "]),
        (ModifiedGamma(1e-6, 6, 0.01), ["gamma 0.01 ", "0.1 to 20"]),
        (SingleSize(float("nan")), ["radius nan"]),
    ],
)
def test_what_is_no_distribution_is_refused_by_name(shape, words):
    with pytest.raises(SizeRangeError) as caught:
        check_shape(shape)
    for word in words:
        assert word in str(caught.value)
