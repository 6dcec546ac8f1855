"""Air that thins with height: its columns against plain quadrature of its own density, and beams without end."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from exposure.media import PLAIN, isotropic, leg
from hypothesis import given, settings
from hypothesis import strategies as st

from lasescatter import standard_atmosphere as model
from lasescatter.exposure.scattered import scattered
from lasescatter.exposure.thickness import optical_thickness
from lasescatter.medium.atmosphere import StandardAtmosphere, air_profile
from lasescatter.medium.mixture import Component, Mixture
from lasescatter.medium.profiles import Unbounded
from lasescatter.optics.air import air_optics
from lasescatter.scene import Air

SEA = StandardAtmosphere(0.0)
GAUSS = np.polynomial.legendre.leggauss(12)
altitude = st.floats(-5_000, 86_000)
ground = st.floats(-400, 9_000)


def at(height, east=0.0):
    return np.array([east, 0.0, height])


def by_quadrature(atmosphere, low, high):
    """Vertical column by twelve-point Gauss–Legendre on pieces of at most 2 km between the kinks."""
    g = atmosphere.ground_altitude
    edges = [low, *(k - g for k in model.BOUNDARIES if low < k - g < high), high]
    total = 0.0
    for a, b in pairwise(edges):
        ends = np.linspace(a, b, int((b - a) / 2000) + 2)
        middle, half = (ends[1:] + ends[:-1]) / 2, np.diff(ends) / 2
        places = np.zeros((len(half), 12, 3))
        places[..., 2] = middle[:, None] + half[:, None] * GAUSS[0]
        total += float(np.sum(atmosphere.value(places) @ GAUSS[1] * half))
    return total


def test_value_is_one_at_the_site_and_nothing_above_the_model():
    for height in (-400.0, 0.0, 1234.5, 9000.0):
        high = StandardAtmosphere(height)
        assert high.value(at(0.0)) == 1.0
        assert high.value(at(85_999.0 - height)) > 0 == high.value(at(86_001.0 - height))
    assert SEA.value(at(-100.0)) > 1
    # Below the model the density stays; it is not carried on.
    assert SEA.value(at(-50_000.0)) == SEA.value(at(-5_000.0))


@settings(max_examples=300, deadline=None)
@given(ground=ground, low=altitude, rise=st.one_of(st.floats(1e-6, 1e3), st.floats(1e3, 91_000)))
def test_column_equals_quadrature(ground, low, rise):
    atmosphere = StandardAtmosphere(ground)
    low, high = low - ground, min(low + rise, 86_000) - ground
    if high - low < 1e-7:
        return
    expected = by_quadrature(atmosphere, low, high)
    # The rounding of the two heights themselves bounds how well a short rise is known.
    digits = 4 * np.spacing(1e5) / (high - low)
    assert atmosphere.column(at(low), at(high)) == pytest.approx(expected, rel=1e-11 + digits, abs=0)


@settings(max_examples=200, deadline=None)
@given(a=altitude, b=altitude, east=st.floats(0, 1e6))
def test_a_slant_segment_has_its_length_times_the_mean_density(a, b, east):
    slant = SEA.column(at(a), at(b, east))
    upright = SEA.column(at(a), at(b))
    if abs(b - a) > 1e-3:
        assert slant == pytest.approx(upright / abs(b - a) * np.hypot(b - a, east), rel=1e-9, abs=0)
    assert slant == SEA.column(at(b, east), at(a))


@settings(max_examples=200, deadline=None)
@given(z=altitude, east=st.floats(1e-6, 1e9))
def test_a_level_segment_has_its_length_times_the_density(z, east):
    assert SEA.column(at(z), at(z, east)) == pytest.approx(float(SEA.value(at(z))) * east, rel=1e-12, abs=0)


@settings(max_examples=200, deadline=None)
@given(a=altitude, b=altitude, share=st.floats(0, 1), east=st.floats(0, 1e5))
def test_columns_add_along_a_segment(a, b, share, east):
    start, end = at(a), at(b, east)
    middle = start + share * (end - start)
    parts = SEA.column(start, middle) + SEA.column(middle, end)
    assert parts == pytest.approx(float(SEA.column(start, end)), rel=1e-9, abs=1e-9)


@pytest.mark.parametrize("boundary", model.BOUNDARIES[1:-1])
@pytest.mark.parametrize("rise", [1e-3, 1.0, 49.0, 51.0])
def test_columns_across_a_kink(boundary, rise):
    low, high = boundary - 0.3 * rise, boundary + 0.7 * rise
    assert SEA.column(at(low), at(high)) == pytest.approx(by_quadrature(SEA, low, high), rel=1e-11, abs=0)


def test_columns_out_of_the_model_end():
    whole = float(SEA.column(at(0.0), at(86_000.0)))
    for height in (86_001.0, 1e6, 1e12, 1e18):
        assert SEA.column(at(0.0), at(height)) == pytest.approx(whole, rel=1e-12, abs=0)
        assert SEA.column(at(87_000.0), at(max(height, 90_000.0), 5.0)) == 0
    assert SEA.column(at(85_990.0), at(86_010.0)) == pytest.approx(by_quadrature(SEA, 85_990.0, 86_000.0), rel=1e-9)


def test_shape_of_arrays():
    places = np.random.default_rng(3).uniform(-1e3, 9e4, (4, 15, 3))
    assert SEA.column(at(1.0), places).shape == (4, 15) == SEA.value(places).shape
    assert SEA.column(at(1.0), places)[2, 7] == SEA.column(at(1.0), places[2, 7])
    assert len(SEA.edges()[0]) == 0 and np.isinf(SEA.shortest_dimension())


def test_span_ends_at_the_top():
    up, down = np.array([0.6, 0, 0.8]), np.array([0.6, 0, -0.8])
    assert StandardAtmosphere(6_000.0).span(at(0.0), up, np.inf) == (0.0, pytest.approx(100_000.0))
    assert SEA.span(at(0.0), up, 50.0) == (0.0, 50.0)
    assert SEA.span(at(94_000.0), down, np.inf) == (pytest.approx(10_000.0), np.inf)
    assert SEA.span(at(0.0), np.array([1.0, 0, 0]), np.inf) == (0.0, np.inf)
    assert SEA.span(at(87_000.0), np.array([1.0, 0, 0]), np.inf) is None
    assert SEA.span(at(87_000.0), up, np.inf) is None


@settings(max_examples=200, deadline=None)
@given(z=altitude, within=st.floats(0, 5e3), share=st.floats(-1, 1))
def test_nothing_near_is_denser_than_the_bound(z, within, share):
    near = SEA.value(at(z + share * within))
    assert near <= SEA.greatest_near(at(z), within) * (1 + 1e-12)
    if near > 0:
        assert SEA.value(at(z)) <= near * np.exp(SEA.steepness() * abs(share) * within) * (1 + 1e-12) or z > 86_000


def test_profile_of_the_sites_air():
    assert air_profile(Air()) == Unbounded()
    assert air_profile(Air(model="standard atmosphere", ground_altitude=120.0)) == StandardAtmosphere(120.0)


def literal_sum_without_end(direction, observer, beta, matrix, atmosphere):
    """E2 without the angle as variable: 20 000 elements at distances in geometric steps, inverse squares."""
    edges = np.concatenate([[0.0], np.geomspace(1e-2, 1e9, 2500)])
    if direction[2] > 0:
        kinks = model.BOUNDARIES - atmosphere.ground_altitude
        edges = np.sort(np.concatenate([edges, kinks[kinks > 0] / direction[2]]))
    x, w = np.polynomial.legendre.leggauss(8)
    middle, half = (edges[1:] + edges[:-1]) / 2, np.diff(edges) / 2
    s, weight = (middle[:, None] + half[:, None] * x).ravel(), (half[:, None] * w).ravel()
    places = s[:, None] * direction
    r = np.linalg.norm(observer - places, axis=1)
    s0 = observer @ direction
    angle = np.arctan2(np.linalg.norm(observer - s0 * direction), s0 - s)
    tau = beta * (atmosphere.column(np.zeros(3), places) + atmosphere.column(places, observer + 0 * places))
    f11, _ = matrix.at(angle)
    return float(np.sum(weight * beta * atmosphere.value(places) * f11 / (4 * np.pi) * np.exp(-tau) / r**2))


@pytest.mark.parametrize("ground_altitude", [0.0, 1500.0])
@pytest.mark.parametrize("elevation", [0.0, 20.0, 90.0, -1.0])
@pytest.mark.parametrize("aside", [50.0, 5000.0])
def test_beam_that_leaves_the_site(ground_altitude, elevation, aside):
    """An ultraviolet beam, where air is thickest: measured worst deviation 2.2e-7, within the integral's own estimate
    of its error."""
    angle = np.radians(elevation)
    direction = np.array([np.cos(angle), 0.0, np.sin(angle)])
    optics = air_optics(355e-9, 288.15, 101_325.0)
    atmosphere = StandardAtmosphere(ground_altitude)
    air = Component("air", optics.scattering, optics.scattering, optics.matrix, atmosphere, True)
    observer = np.array([0.0, aside, 0.0])
    lights = scattered(
        (leg(np.zeros(3), direction=direction),), (PLAIN,), Mixture((air,)), observer[None], np.zeros((1, 1))
    )
    found = float(lights[0].light.by_component.sum())
    expected = literal_sum_without_end(direction, observer, optics.scattering, optics.matrix, atmosphere)
    assert found == pytest.approx(expected, rel=1e-6, abs=0)


def test_thinning_air_sends_less_than_uniform_air():
    optics = air_optics(532e-9, 288.15, 101_325.0)
    up = leg(np.zeros(3), direction=[0.0, 0.0, 1.0])
    observer = np.array([[50.0, 0.0, 0.0]])

    def light(profile):
        mixture = Mixture((Component("air", optics.scattering, optics.scattering, optics.matrix, profile, True),))
        return float(scattered((up,), (PLAIN,), mixture, observer, np.zeros((1, 1)))[0].light.by_component.sum())

    assert 0.97 < light(SEA) / light(Unbounded()) < 0.99


def test_across_takes_the_densest_air_of_beam_and_observer():
    """A beam down a slope of 2 km: there the air is 1.2 times as dense as at z = 0."""
    air = Component("air", 1e-6, 1e-6, isotropic(), StandardAtmosphere(2_000.0), True)
    down = leg(at(0.0), at(-2_000.0, 100.0))
    observer = np.array([at(-2_000.0, 150.0)])
    lights = scattered((down,), (PLAIN,), Mixture((air,)), observer, np.zeros((1, 1)))
    farthest = np.hypot(2_000.0, 150.0)
    dense = 1 / float(model.at_altitude(2_000.0)[2])
    assert optical_thickness(lights, Mixture((air,)), observer).total[0] == pytest.approx(
        1e-6 * dense * 2 * farthest, rel=1e-9
    )


def test_greatest_extinctions_within_a_distance():
    air = Component("air", 1e-5, 1e-5, isotropic(), SEA, True)
    haze = Component("haze", 1e-3, 1e-3, isotropic(), Unbounded(), False)
    mixture = Mixture((air, haze))
    assert mixture.greatest_extinctions(np.array([at(100.0)]), 100.0)[:, 0] == pytest.approx([1e-5, 1e-3], rel=1e-12)
    assert mixture.steepness == SEA.steepness() == pytest.approx(1 / 5812, rel=1e-3)
