"""Direct light: means over apertures against plain two-dimensional sums, and the reach of beams."""

from __future__ import annotations

import math

import numpy as np
import pytest
from exposure.beams import line
from exposure.media import leg
from numpy.testing import assert_allclose

from lasescatter.exposure.direct import aperture_mean, beam_radius, clearance, irradiance, one_over_e_diameter


@pytest.mark.parametrize("profile", ["gaussian", "top-hat"])
@pytest.mark.parametrize("off_axis", [0.0, 1e-3, 3e-3, 5e-3])
def test_aperture_mean_against_a_plain_sum(profile, off_axis):
    """Mean over the aperture against a sum over a fine grid of points in it."""
    aperture, radius = 7e-3, 2e-3
    x = (np.arange(2000) + 0.5) / 2000 * aperture - aperture / 2
    xx, yy = np.meshgrid(x, x)
    inside = xx**2 + yy**2 <= aperture**2 / 4
    values = irradiance(profile, radius, np.hypot(xx + off_axis, yy))
    expected = values[inside].mean()
    assert_allclose(float(aperture_mean(profile, radius, off_axis, aperture)), expected, rtol=2e-3)


def test_whole_beam_through_a_wide_aperture():
    for profile in ("gaussian", "top-hat"):
        assert_allclose(float(aperture_mean(profile, 1e-3, 0.0, 0.1)) * math.pi / 4 * 0.01, 1.0, rtol=1e-12)


def test_small_aperture_tends_to_the_point_value():
    for off_axis in (0.0, 0.7e-3, 1.9e-3):
        for aperture in (1e-4, 1e-6):
            assert_allclose(
                float(aperture_mean("gaussian", 1e-3, off_axis, aperture)),
                float(irradiance("gaussian", 1e-3, off_axis)),
                rtol=20 * (aperture / 1e-3) ** 2 + 1e-9,
            )


def test_far_from_the_beam_there_is_none():
    assert float(aperture_mean("gaussian", 1e-3, 1.0, 7e-3)) == 0.0
    assert np.isfinite(aperture_mean("gaussian", np.full(5, 1e-3), np.linspace(0, 0.02, 5), 7e-3)).all()


def test_beam_grows_as_a_hyperbola():
    """2w = hypot(d, divergence · z); 1/e diameter is 1/sqrt(2) of the 1/e² one (textbook gaussian beam)."""
    source = line(diameter=3e-3, divergence=1e-3)
    assert_allclose(2 * beam_radius(source, [0.0, 4.0]), [3e-3, 5e-3], rtol=1e-12)
    assert_allclose(one_over_e_diameter(source, "gaussian", 4.0), 5e-3 / math.sqrt(2), rtol=1e-12)
    assert_allclose(one_over_e_diameter(source, "top-hat", 4.0), 5e-3, rtol=1e-12)


def test_clearance_of_a_cone_against_dense_sampling():
    source = line(diameter=3e-3, divergence=9e-3)
    path = leg([0, 0, 0], [30, 0, 0])
    points = np.random.default_rng(4).uniform([-3, -2, 0], [34, 2, 0.1], (50, 3))
    s = np.linspace(0, 30, 300_001)
    for point in points:
        distance = np.hypot(s - point[0], np.hypot(point[1], point[2]))
        expected = np.min(distance - 3 * beam_radius(source, s) - 3.5e-3)
        assert_allclose(clearance(path, source, point[None], 3.0, 7e-3)[0], expected, atol=2e-3)
