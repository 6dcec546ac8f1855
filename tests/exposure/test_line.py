"""The beam as a bright line: windows against brute force, radiance against its formula."""

from __future__ import annotations

import math

import numpy as np
import pytest
from exposure.beams import line
from exposure.media import PLAIN, component, dipole, isotropic, leg, mixture
from numpy.testing import assert_allclose

from lasescatter.exposure.line import bright_line, brightest_window, peak_radiance
from lasescatter.exposure.scattered import scattered
from lasescatter.medium.profiles import UprightBox

POINTS = np.array([[2.0, 1.5, 0.0], [-1.0, 0.4, 0.2], [6.0, 1.0, 0.0], [2.2, 0.3, 0.1]])
BOX = UprightBox(np.array([1.0, -1, -1]), np.array([3.0, 1, 1]))
PATH = leg([0, 0, 0], [4, 0, 0])


def lit(medium, points=POINTS):
    light = scattered((PATH,), (PLAIN,), medium, points, np.zeros((1, len(points))))[0].light
    return light, bright_line(light, medium, points, np.ones(len(points)))


def test_tabulated_brightness_adds_up_to_the_integral():
    light, bright = lit(mixture(component(dipole(), 0.01, 0.2, BOX)))
    assert_allclose(np.trapezoid(bright.brightness, bright.theta), light.by_component.sum(axis=0), rtol=2e-3)
    whole = brightest_window(bright, 4.0)
    assert_allclose(whole.irradiance, light.by_component.sum(axis=0), rtol=2e-3)


@pytest.mark.parametrize("acceptance", [0.011, 0.11, 0.5])
def test_window_equals_brute_force(acceptance):
    """All windows of a fine grid of starts, each integrated by a plain sum."""
    _, bright = lit(mixture(component(dipole(), 0.01, 0.3, BOX)))
    found = brightest_window(bright, acceptance)
    for i in range(len(POINTS)):
        theta, value = bright.theta[i], bright.brightness[i]
        width = min(acceptance, theta[-1] - theta[0])
        starts = np.linspace(theta[0], theta[-1] - width, 1500)
        best = 0.0
        for start in starts:
            t = np.linspace(start, start + width, 400)
            best = max(best, np.trapezoid(np.interp(t, theta, value), t))
        assert_allclose(found.irradiance[i], best, rtol=3e-3)
        assert found.high[i] - found.low[i] == pytest.approx(width, rel=1e-9)


def test_peak_radiance_is_e4():
    """L = P beta T/(d sin theta) with 2/sqrt(pi) peak over mean for a gaussian, at its largest along the leg."""
    medium = mixture(component(isotropic(), 0.01))
    _, bright = lit(medium, POINTS[:1])
    source = line(diameter=3e-3 * math.sqrt(2), divergence=0.0)
    radiance, void = peak_radiance(bright, source, "gaussian")
    assert not void[0]
    # Least sine at the start: the observer stands at (2, 1.5).
    expected = 0.01 / (4 * math.pi) / (3e-3 * 1.5 / 2.5) * 2 / math.sqrt(math.pi)
    assert_allclose(radiance[0], expected, rtol=1e-6)


def test_radiance_across_a_gaussian_beam_integrates_to_the_irradiance():
    """Peak over mean: a gaussian stripe with 1/e diameter d has peak 2/sqrt(pi) of the mean over d (line integral)."""
    x = np.linspace(-4, 4, 20_001)
    stripe = np.exp(-4 * x**2)  # 1/e at x = ±1/2: d = 1
    assert_allclose(1.0 / np.trapezoid(stripe, x), 2 / math.sqrt(math.pi), rtol=1e-9)


def test_end_on_is_void():
    medium = mixture(component(isotropic(), 0.01))
    _, bright = lit(medium, np.array([[40.0, 0.01, 0.0]]))
    _, void = peak_radiance(bright, line(), "gaussian")
    assert void[0]
