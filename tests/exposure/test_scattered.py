"""The scattered irradiance against closed forms, energy balance and a literal sum."""

from __future__ import annotations

import numpy as np
import pytest
from exposure.literal import literal_sum
from exposure.media import PLAIN, air_matrix, component, dipole, isotropic, leg, linear, mixture
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from lasescatter.exposure.fraction import greatest_over_fraction
from lasescatter.exposure.legs import WORST
from lasescatter.exposure.scattered import scattered
from lasescatter.exposure.thickness import optical_thickness
from lasescatter.medium.profiles import UprightBox


def received(one_leg, medium, points, swing=PLAIN, least=0.0):
    points = np.atleast_2d(np.asarray(points, dtype=float))
    lights = scattered((one_leg,), (swing,), medium, points, np.full((1, len(points)), least))
    return lights, lights[0].light.by_component.sum(axis=0)


def test_endless_line_of_isotropic_scatterers_closed_form():
    """E = beta_sca P/(4 b) beside a line without ends: the inverse squares sum to pi/b (elementary integral)."""
    both = [leg([0, 0, 0], direction=[1, 0, 0]), leg([0, 0, 0], direction=[-1, 0, 0])]
    medium = mixture(component(isotropic(), scattering=3e-4))
    for b in (0.01, 1.0, 250.0):
        total = sum(received(half, medium, [0.3, b, 0])[1][0] for half in both)
        assert_allclose(total, 3e-4 / (4 * b), rtol=1e-6)


def test_long_beam_falls_as_one_over_distance():
    """E3 with fixed angles: doubling b beside a long beam halves the irradiance (1/b law)."""
    medium = mixture(component(air_matrix()))
    _, e = received(leg([-5e3, 0, 0], [5e3, 0, 0]), medium, [[0, 1, 0], [0, 2, 0], [0, 4, 0]])
    assert_allclose(e[:-1] / e[1:], 2.0, rtol=2e-3)


def test_dipole_pattern_of_a_linear_beam():
    """The dipole pattern: sin² of the angle from the dipole's axis (textbook law; physics E5). A short element of beam
    along x with its field along z, seen from all round."""
    medium = mixture(component(dipole()))
    short = leg([-1e-4, 0, 0], [1e-4, 0, 0])
    rng = np.random.default_rng(5)
    directions = rng.normal(size=(60, 3))
    directions /= np.linalg.norm(directions, axis=1)[:, None]
    _, e = received(short, medium, 2.0 * directions, linear([0, 0, 1]))
    expected = 1e-3 * 2e-4 / (4 * np.pi) / 4.0 * 1.5 * (1 - directions[:, 2] ** 2)
    assert_allclose(e, expected, rtol=1e-5, atol=1e-5 * expected.max() / 1.5)


def test_field_axis_null_and_twice_the_unpolarised_at_right_angles():
    """A pure dipole sends nothing along its axis and, at right angles to it, twice the unpolarised value."""
    medium = mixture(component(dipole()))
    short = leg([-1e-4, 0, 0], [1e-4, 0, 0])
    points = [[0, 0, 1], [0, 1, 0]]
    _, along_z = received(short, medium, points, linear([0, 0, 1]))
    _, plain = received(short, medium, points)
    assert along_z[0] <= 1e-7 * plain[0]
    assert_allclose(along_z[1], 2 * plain[1], rtol=1e-7)


def test_worst_axis_is_never_below_any_axis():
    medium = mixture(component(air_matrix()))
    points = np.random.default_rng(2).normal(loc=[0, 3, 0], size=(20, 3))
    path = leg([-2, 0, 0], [2, 0, 0])
    _, worst = received(path, medium, points, WORST)
    for turn in np.linspace(0, np.pi, 13):
        _, known = received(path, medium, points, linear([0, np.cos(turn), np.sin(turn)]))
        assert np.all(known <= worst * (1 + 1e-9))


def test_air_follows_one_over_wavelength_to_the_fourth():
    """Molecular cross-sections fall as 1/lambda⁴ but for dispersion (Rayleigh's law). Dispersion and King factor
    between 532 and 1064 nm: n−1 2.7820e-4 and 2.7398e-4, F 1.04899 and 1.04721 (Peck & Reeder 1972, Bates 1984,
    computed for standard air)."""
    from lasescatter.optics.air import air_optics

    e = {}
    for wavelength in (532e-9, 1064e-9):
        air = air_optics(wavelength, 288.15, 101_325.0)
        medium = mixture(component(air.matrix, scattering=air.scattering))
        e[wavelength] = received(leg([-50, 0, 0], [50, 0, 0]), medium, [0, 2, 0])[1][0]
    dispersion = (2.7820e-4 / 2.7398e-4) ** 2 * 1.04899 / 1.04721
    assert_allclose(e[532e-9] / e[1064e-9], 16 * dispersion, rtol=1e-3)


@pytest.mark.parametrize("kind", ["dipole", "isotropic", "air"])
def test_flux_through_a_closed_surface_equals_the_power_scattered(kind):
    """Conservation of energy: E2 with the surface's normal, over a sphere round a thin leg, gives beta_sca ell P."""
    matrix = {"dipole": dipole, "isotropic": isotropic, "air": air_matrix}[kind]()
    _closed_surface(matrix, linear([0, 0.6, 0.8]))


def test_flux_through_a_closed_surface_for_mie_spheres():
    """The same for water-like drops of 1 µm median, whose light goes mostly forward."""
    from lasescatter.matter import Lognormal, SizeMode
    from lasescatter.optics.sizes import particle_optics

    optics = particle_optics((SizeMode(Lognormal(0.4e-6, 1.5)),), 1.43 + 1e-6j, 532e-9)
    _closed_surface(optics.matrix, linear([0, 0.6, 0.8]))


def _closed_surface(matrix, swing):
    radius, centre = 3.0, np.array([0.5, 0.2, -0.1])
    mu, w = np.polynomial.legendre.leggauss(160)
    turn = 2 * np.pi * (np.arange(24) + 0.5) / 24
    sine = np.sqrt(1 - mu**2)
    # The sphere's poles lie on the leg's direction, so that the rings share the forward peak.
    normal = np.stack(
        [np.repeat(mu, 24), np.outer(sine, np.cos(turn)).ravel(), np.outer(sine, np.sin(turn)).ravel()], axis=1
    )
    points = centre + radius * normal
    area = np.repeat(w, 24) * radius**2 * 2 * np.pi / 24
    path = leg([-1, 0.1, 0.1], [1.5, 0.1, 0.1])
    lights, _ = received(path, mixture(component(matrix, scattering=2e-3)), points, swing)
    nodes = lights[0].nodes
    sight = lights[0].light.sight
    s = sight.s0[nodes.owner] - sight.b[nodes.owner] / np.tan(nodes.theta)
    out = points[nodes.owner] - (path.origin + s[:, None] * path.direction)
    out /= np.linalg.norm(out, axis=1)[:, None]
    facing = np.einsum("ij,ij->i", out, normal[nodes.owner])
    flux = np.sum(nodes.weight * nodes.emitted.sum(axis=0) * facing * area[nodes.owner])
    assert_allclose(flux, 2e-3 * path.length, rtol=2e-4)


BOX = UprightBox(np.array([0.5, -1.0, -1.0]), np.array([2.5, 1.2, 0.8]))


@settings(max_examples=12, deadline=None)
@given(
    observer=st.tuples(st.floats(-3, 6), st.floats(0.4, 3), st.floats(-2, 2)),
    end=st.tuples(st.floats(2, 6), st.floats(-1, 1), st.floats(-1, 1)),
)
def test_box_and_air_against_the_literal_sum(observer, end):
    """A box of extinguishing haze in air, random places: the integral equals the sum over elements."""
    air, haze = air_matrix(), dipole()
    medium = mixture(component(air, 1.3e-5, 1.3e-5, steady=True, name="air"), component(haze, 0.15, 0.2, BOX))
    path = leg([0, 0, 0], end)
    offset = np.linalg.norm(np.cross(path.direction, np.asarray(observer, dtype=float)))
    if offset < 0.2:
        return
    axis = np.cross(path.direction, [0, 0, 1.0])
    axis /= np.linalg.norm(axis)
    _, e = received(path, medium, observer, linear(axis, 0.98))
    slow = literal_sum(
        [0, 0, 0],
        end,
        observer,
        [
            (1.3e-5, 1.3e-5, lambda t: air.at(t)[0], lambda t: air.at(t)[1], lambda x: np.ones(x.shape[:-1])),
            (0.15, 0.2, lambda t: haze.at(t)[0], lambda t: haze.at(t)[1], lambda x: BOX.value(x)),
        ],
        elements=8_000,
        axis=axis,
        purity=0.98,
    )
    # The literal sum itself counts box faces in steps: 1/400 of the sight line, 1/8000 of the beam.
    assert_allclose(e[0], slow, rtol=1e-3)


def test_unbounded_load_against_the_literal_sum_tightly():
    """Uniform extinction has no faces, so the literal sum is good to its element length squared."""
    haze = dipole()
    medium = mixture(component(haze, 0.05, 0.06))
    path = leg([0, 0, 0], [4, 0.5, -0.3])
    for observer in ([1, 1, 0], [-2, 0.7, 0.4], [6, -1, 0.2], [2, 0.3, 0.3]):
        _, e = received(path, medium, observer)
        slow = literal_sum(
            [0, 0, 0], [4, 0.5, -0.3], observer,
            [(0.05, 0.06, lambda t: haze.at(t)[0], lambda t: haze.at(t)[1], lambda x: np.ones(x.shape[:-1]))],
            elements=40_000,
        )  # fmt: skip
        assert_allclose(e[0], slow, rtol=2e-6)


def test_leg_split_in_two_gives_the_same():
    medium = mixture(component(air_matrix(), 1e-3, 2e-3, BOX), component(dipole(), 2e-3, 0.1))
    points = np.array([[1.0, 2.0, 0.3], [-1, 1, 0], [5, 0.5, 0]])
    whole = scattered((leg([0, 0, 0], [4, 0, 0]),), (PLAIN,), medium, points, np.zeros((1, 3)))
    halves = (leg([0, 0, 0], [1.7, 0, 0]), leg([1.7, 0, 0], [4, 0, 0], number=2, before=1.7))
    split = scattered(halves, (PLAIN, PLAIN), medium, points, np.zeros((2, 3)))
    assert_allclose(
        sum(leg.light.by_component.sum(axis=0) for leg in split), whole[0].light.by_component.sum(axis=0), rtol=1e-6
    )


def test_on_the_axis_beyond_the_end():
    """On the leg's line ahead of it, E = P beta(0) (1/r_end − 1/r_start): the integral of 1/r² (elementary)."""
    medium = mixture(component(dipole(), 1e-3))
    _, e = received(leg([0, 0, 0], [2, 0, 0]), medium, [5, 0, 0])
    assert_allclose(e[0], 1e-3 * 1.5 / (4 * np.pi) * (1 / 3 - 1 / 5), rtol=1e-6)


def test_error_estimate_covers_the_error():
    """The true error against a much tighter run stays within the estimate."""
    medium = mixture(component(dipole(), 0.1, 0.3, BOX))
    points = np.random.default_rng(11).uniform([-2, 0.3, -1], [5, 2, 1], (40, 3))
    path = leg([0, 0, 0], [4, 0.2, 0.1])
    zero = np.zeros((1, 40))
    coarse = scattered((path,), (PLAIN,), medium, points, zero, tolerance=1e-3)[0].light
    fine = scattered((path,), (PLAIN,), medium, points, zero, tolerance=1e-11)[0].light
    gap = np.abs(coarse.by_component.sum(axis=0) - fine.by_component.sum(axis=0))
    assert np.all(gap <= coarse.error + fine.error)
    assert np.all(coarse.error <= 1e-3 * coarse.unpolarised)


def test_endless_leg_through_an_extinguishing_load_literal():
    medium = mixture(component(dipole(), 0.05, 0.05))
    _, e = received(leg([0, 0, 0], direction=[1, 0, 0]), medium, [3, 1.5, 0])
    haze = dipole()
    slow = literal_sum(
        [0, 0, 0], [400, 0, 0], [3, 1.5, 0],
        [(0.05, 0.05, lambda t: haze.at(t)[0], lambda t: haze.at(t)[1], lambda x: np.ones(x.shape[:-1]))],
        elements=400_000,
    )  # fmt: skip
    assert_allclose(e[0], slow, rtol=1e-5)


def test_load_fraction_finds_the_thinner_and_brighter_load():
    """Seen through a thick uniform load a thinner one is brighter. The expected optimum comes from a plain grid of
    stated loads, each integrated afresh."""
    points = np.array([[0.0, 6.0, 0.0]])
    path = leg([-1, 0, 0], [1, 0, 0])

    def at(fraction):
        return received(path, mixture(component(isotropic(), fraction, fraction)), points)[1][0]

    full = mixture(component(isotropic(), 1.0, 1.0))
    lights = scattered((path,), (PLAIN,), full, points, np.zeros((1, 1)))
    best = greatest_over_fraction(lights, full, 1)
    grid = np.linspace(0.02, 1, 400)
    values = [at(f) for f in grid]
    assert_allclose(best.irradiance[0], max(values), rtol=1e-4)
    assert best.fraction[0] == pytest.approx(grid[int(np.argmax(values))], abs=0.01)
    assert best.irradiance[0] > 50 * at(1.0)


def test_a_vouched_load_is_taken_as_stated():
    points = np.array([[0.0, 6.0, 0.0]])
    path = leg([-1, 0, 0], [1, 0, 0])
    steady = mixture(component(isotropic(), 1.0, 1.0, steady=True))
    lights = scattered((path,), (PLAIN,), steady, points, np.zeros((1, 1)))
    best = greatest_over_fraction(lights, steady, 1)
    assert best.fraction[0] == 1.0
    assert_allclose(best.irradiance, lights[0].light.by_component.sum(axis=0), rtol=1e-12)


def test_optical_thickness_of_a_box_and_of_all_space():
    """By hand: 2 m of beam in the box at 0.1 /m, shortest side 1.8 m; in all space twice the farthest distance."""
    points = np.array([[2.0, 5.0, 0.0]])
    path = leg([0, 0, 0], [4, 0, 0])
    box = mixture(component(isotropic(), 0.1, 0.1, BOX))
    lights = scattered((path,), (PLAIN,), box, points, np.zeros((1, 1)))
    assert_allclose(optical_thickness(lights, box, points).total, 0.1 * 2.0, rtol=1e-9)
    everywhere = mixture(component(isotropic(), 0.01, 0.01))
    lights = scattered((path,), (PLAIN,), everywhere, points, np.zeros((1, 1)))
    assert_allclose(optical_thickness(lights, everywhere, points).total, 0.01 * 2 * np.hypot(2, 5), rtol=1e-9)


def test_doubted_thickness_of_parts():
    """Two unbounded media: each its own share of twice the farthest distance, and each its own factor."""
    points = np.array([[2.0, 5.0, 0.0]])
    two = mixture(component(isotropic(), 0.01, 0.01), component(isotropic(), 0.002, 0.002, name="other"))
    lights = scattered((leg([0, 0, 0], [4, 0, 0]),), (PLAIN,), two, points, np.zeros((1, 1)))
    found = optical_thickness(lights, two, points)
    across = 2 * np.hypot(2, 5)
    assert_allclose(found.total, 0.012 * across, rtol=1e-9)
    assert_allclose(found.by_component[:, 0], [0.01 * across, 0.002 * across], rtol=1e-9)
    assert_allclose(found.doubted(np.array([1.0, 3.0])), (0.01 + 3 * 0.002) * across, rtol=1e-9)
