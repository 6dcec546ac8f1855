"""The beam as a bright line: windows and radiance against brute force over elements of the beam."""

from __future__ import annotations

import math

import numpy as np
import pytest
from exposure.beams import line
from exposure.media import PLAIN, component, dipole, isotropic, leg, mixture
from numpy.testing import assert_allclose

from lasescatter.exposure.line import TABULATION_ERROR, bright_line, brightest_window, peak_radiance
from lasescatter.exposure.scattered import scattered
from lasescatter.medium.profiles import UprightBox

POINTS = np.array([[2.0, 1.5, 0.0], [-1.0, 0.4, 0.2], [6.0, 1.0, 0.0], [2.2, 0.3, 0.1]])
PATH = leg([0, 0, 0], [4, 0, 0])


def box(low, high):
    return UprightBox(np.array([low, -1.0, -1.0]), np.array([high, 1.0, 1.0]))


def lit(medium, points=POINTS):
    light = scattered((PATH,), (PLAIN,), medium, points, np.zeros((1, len(points))))[0].light
    return light, bright_line(light, medium, points)


def brute_windows(low, high, matrix, scattering, extinction, point, acceptance):
    """Greatest light of any window: short elements of the beam in the box, sorted by their angle, sliding sums."""
    count = 400_000
    s = low + (np.arange(count) + 0.5) * (high - low) / count
    r = np.hypot(point[0] - s, np.hypot(point[1], point[2]))
    angle = np.arccos((point[0] - s) / r)
    # Within the box the way out to the observer is cut at its faces.
    elements = np.stack([s, 0 * s, 0 * s], axis=1)
    towards = (point[None] - elements) / r[:, None]
    face = np.where(towards > 0, np.array([high, 1, 1]), np.array([low, -1, -1]))
    with np.errstate(divide="ignore", invalid="ignore"):
        exits = np.where(towards != 0, (face - elements) / towards, np.inf)
    path = np.minimum(exits.min(axis=1), r)
    light = scattering / (4 * np.pi) * matrix.at(angle)[0] * np.exp(-extinction * (s - low + path)) / r**2
    light *= (high - low) / count
    running = np.concatenate([[0.0], np.cumsum(light)])
    ends = np.searchsorted(angle, angle + acceptance)
    return float((running[ends] - running[:-1]).max()), float(light.sum())


@pytest.mark.parametrize("acceptance", [0.0015, 0.011, 0.11, 0.5])
@pytest.mark.parametrize(("low", "high"), [(1.0, 3.0), (1.35, 1.351), (1.36, 1.361), (1.05, 1.052), (2.0, 2.02)])
def test_window_equals_brute_force(low, high, acceptance):
    """Thin boxes too: their faces may not swallow what lies between them."""
    matrix = dipole()
    medium = mixture(component(matrix, 0.01, 0.3, box(low, high)))
    light, bright = lit(medium)
    found = brightest_window(bright, acceptance, np.ones(len(POINTS)))
    for i, point in enumerate(POINTS):
        best, whole = brute_windows(low, high, matrix, 0.01, 0.3, point, acceptance)
        assert_allclose(light.by_component.sum(axis=0)[i], whole, rtol=1e-4)
        assert_allclose(found.irradiance[i], best, rtol=TABULATION_ERROR)


def test_thinner_load_is_found_where_a_window_is_brighter_through_it():
    """Seen through a thick uniform load a window is brightest at a fraction of it: isotropic light of a short leg."""
    far = np.array([[2.0, 12.0, 0.0]])
    medium = mixture(component(isotropic(), 1.0, 1.0))
    light = scattered((PATH,), (PLAIN,), medium, far, np.zeros((1, 1)))[0].light
    bright = bright_line(light, medium, far)
    found = brightest_window(bright, 0.01, np.ones(1)).irradiance[0]
    stated = max(brightest_window(bright, 0.01, np.ones(1)).irradiance[0], 0)
    single = mixture(component(isotropic(), 0.1, 0.1))
    thin = scattered((PATH,), (PLAIN,), single, far, np.zeros((1, 1)))[0].light
    at_a_tenth = brightest_window(bright_line(thin, single, far), 0.01, np.ones(1)).irradiance[0]
    assert stated == found >= at_a_tenth * (1 - 1e-2)


def test_peak_radiance_is_e4():
    """L = P beta T/(d sin theta) with 2/sqrt(pi) peak over mean for a gaussian, at its largest along the leg."""
    medium = mixture(component(isotropic(), 0.01))
    _, bright = lit(medium, POINTS[:1])
    source = line(diameter=3e-3 * math.sqrt(2), divergence=0.0)
    peak = peak_radiance(bright, source, "gaussian", np.ones(1), 0.0, medium)
    assert not peak.void[0]
    # Least sine at the start: the observer stands at (2, 1.5).
    expected = 0.01 / (4 * math.pi) / (3e-3 * 1.5 / 2.5) * 2 / math.sqrt(math.pi)
    assert_allclose(peak.radiance[0], expected, rtol=1e-5)
    assert_allclose(peak.within_reach[0], expected, rtol=1e-5)
    assert_allclose(peak.by_component[0, 0], expected, rtol=1e-5)


@pytest.mark.parametrize(("low", "high"), [(1.35, 1.351), (1.36, 1.361)])
def test_peak_radiance_of_a_thin_box(low, high):
    medium = mixture(component(isotropic(), 2.0, 0.0, box(low, high)))
    _, bright = lit(medium, POINTS[:1])
    source = line(diameter=3e-3 * math.sqrt(2), divergence=0.0)
    radiance = peak_radiance(bright, source, "gaussian", np.ones(1), 0.0, medium).radiance
    sine = 1.5 / math.hypot(1.5, 2 - low)
    expected = 2.0 / (4 * math.pi) / (3e-3 * sine) * 2 / math.sqrt(math.pi)
    assert_allclose(radiance[0], expected, rtol=1e-3)


def test_radiance_across_a_gaussian_beam_integrates_to_the_irradiance():
    """Peak over mean: a gaussian stripe with 1/e diameter d has peak 2/sqrt(pi) of the mean over d (line integral)."""
    x = np.linspace(-4, 4, 20_001)
    stripe = np.exp(-4 * x**2)  # 1/e at x = ±1/2: d = 1
    assert_allclose(1.0 / np.trapezoid(stripe, x), 2 / math.sqrt(math.pi), rtol=1e-9)


@pytest.mark.parametrize(("place", "reach"), [((40.0, 0.01, 0.0), 0.0), ((8.0, 0.3, 0.0), 0.31)])
def test_end_on_is_void_also_from_within_reach(place, reach):
    medium = mixture(component(isotropic(), 0.01))
    _, bright = lit(medium, np.array([place]))
    assert peak_radiance(bright, line(), "gaussian", np.ones(1), reach, medium).void[0]


def test_ripples_of_large_single_spheres_are_resolved():
    """20 µm drops of one size ripple every 13 mrad: windows and peak against elements of the beam."""
    from lasescatter.matter import SingleSize, SizeMode
    from lasescatter.optics.sizes import particle_optics

    matrix = particle_optics((SizeMode(SingleSize(20e-6)),), 1.33 + 0j, 532e-9).matrix
    medium = mixture(component(matrix, 0.01, 0.0, box(1.0, 3.0)))
    _, bright = lit(medium)
    for acceptance in (0.0015, 0.011, 0.1):
        found = brightest_window(bright, acceptance, np.ones(len(POINTS)))
        for i, point in enumerate(POINTS):
            best, _ = brute_windows(1.0, 3.0, matrix, 0.01, 0.0, point, acceptance)
            assert_allclose(found.irradiance[i], best, rtol=TABULATION_ERROR)
    source = line(diameter=3e-3 * math.sqrt(2), divergence=0.0)
    radiance = peak_radiance(bright, source, "gaussian", np.ones(len(POINTS)), 0.0, medium).radiance
    for i, point in enumerate(POINTS):
        s = np.linspace(1.0, 3.0, 400_001)
        angle = np.arctan2(math.hypot(point[1], point[2]), point[0] - s)
        seen = 0.01 / (4 * math.pi) * matrix.at(angle)[0] / (3e-3 * np.sin(angle)) * 2 / math.sqrt(math.pi)
        assert_allclose(radiance[i], seen.max(), rtol=TABULATION_ERROR)


def test_endless_leg_within_reach_is_void_not_a_crash():
    endless = leg([0, 0, 0], direction=[1, 0, 0])
    medium = mixture(component(isotropic(), 0.01))
    points = np.array([[3.0, 0.1, 0.0], [3.0, 2.0, 0.0]])
    light = scattered((endless,), (PLAIN,), medium, points, np.zeros((1, 2)), 0.25)[0].light
    peak = peak_radiance(bright_line(light, medium, points), line(), "gaussian", np.ones(2), 0.25, medium)
    assert peak.void[0]
    assert np.isfinite(peak.within_reach).all()
    assert np.isfinite(peak.by_component).all()
