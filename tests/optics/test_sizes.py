"""Averages over sizes: is the error what the estimate says, and do the numbers agree with literal sums."""

from __future__ import annotations

from dataclasses import replace

import miepython
import numpy as np
import pytest

from lasescatter.matter import Lognormal, ModifiedGamma, SingleSize, SizeMode, SizeTable
from lasescatter.optics.distributions import density, log_radius_limits, mean_power
from lasescatter.optics.matrix import from_series
from lasescatter.optics.mie import SizeRangeError, averaged, sphere
from lasescatter.optics.sizes import Accuracy, particle_optics

WAVELENGTH = 532e-9
ANGLES = np.linspace(0, np.pi, 9001)
FINE = Accuracy(f11=1.5e-4, extinction=1e-5, tail=1e-6, work=1e13)


def one(shape):
    return (SizeMode(shape),)


def errors(found, reference):
    """Largest relative error of F11 (and of F12, to F11) at any angle, and that of the extinction."""
    (f11, f12), (r11, r12) = found.matrix.at(ANGLES), reference.matrix.at(ANGLES)
    matrix = max(float(abs(f11 / r11 - 1).max()), float((abs(f12 - r12) / r11).max()))
    return matrix, abs(found.extinction / reference.extinction - 1)


def assert_honest(found, reference):
    matrix, extinction = errors(found, reference)
    print(f"{found.nodes} radii: F11 {matrix:.1e}, estimate {found.error_f11:.1e};", end=" ")
    print(f"extinction {extinction:.1e}, estimate {found.error_extinction:.1e}")
    assert found.error_f11 <= 1e-3
    assert found.error_extinction <= 1e-4
    assert matrix <= found.error_f11
    assert extinction <= found.error_extinction


# Weakly absorbing and wide, haze, smoke, nearly one size: where resonances are hardest. With the steps of a sum.
HARD = [
    (Lognormal(1e-6, 1.6), 1.33 + 1e-8j, 60_000),
    (Lognormal(1e-6, 1.6), 1.5 + 0j, 80_000),
    (Lognormal(0.25e-6, 1.6), 1.43 + 1e-6j, 20_000),
    (Lognormal(0.5e-6, 1.6), 1.43 + 1e-6j, 40_000),
    (Lognormal(0.1e-6, 2.2), 1.43 + 1e-6j, 40_000),
    (Lognormal(0.1e-6, 1.6), 1.55 + 0.02j, 3_000),
    (Lognormal(3e-6, 1.05), 1.5 + 0j, 100_000),
    (Lognormal(0.21e-6, 1.55), 1.3657 + 0j, 20_000),
    (ModifiedGamma(0.07e-6, 2, 0.5), 1.33 + 1e-9j, 40_000),
]


@pytest.mark.parametrize(("shape", "index", "steps"), HARD, ids=str)
def test_estimate_holds_for_hard_distributions(shape, index, steps):
    """Against equal steps of ln r from end to end, with nodes that have nothing to do with the panels."""
    wavenumber = 2 * np.pi / WAVELENGTH
    low, high = log_radius_limits(shape, wavenumber, abs(index - 1), 1e-6)
    u = np.linspace(low, high, steps)
    literal = averaged(index, wavenumber * np.exp(u), density(shape, u) * (u[1] - u[0]))
    matrix, _ = from_series(literal.matrix)
    found = particle_optics(one(shape), index, WAVELENGTH)
    assert_honest(found, replace(found, matrix=matrix, extinction=literal.extinction / wavenumber**2))


def test_estimate_holds_for_a_fog():
    shape, index = ModifiedGamma(2e-6, 6, 1), 1.334 + 1.5e-9j
    fine = Accuracy(f11=2.5e-4, extinction=2e-5, tail=1e-6, work=1e13)
    assert_honest(
        particle_optics(one(shape), index, WAVELENGTH), particle_optics(one(shape), index, WAVELENGTH, accuracy=fine)
    )


def random_distributions(seeds):
    for seed in seeds:
        rng = np.random.default_rng(seed)
        index = complex(rng.uniform(1.3, 1.6), rng.choice([0.0, 10 ** rng.uniform(-9, -2)]))
        if rng.random() < 0.7:
            shape = Lognormal(WAVELENGTH * 10 ** rng.uniform(-1.2, 0), rng.uniform(1.03, 1.8))
        else:
            shape = ModifiedGamma(WAVELENGTH * 10 ** rng.uniform(-0.5, 0.3), rng.uniform(1, 8), rng.uniform(0.9, 2))
        yield one(shape), index


def test_error_stays_under_three_times_the_estimate():
    """A hundred seeds. Convergence is not monotone: one estimate may fall short, none by much."""
    worst = []
    for modes, index in random_distributions(range(100)):
        found = particle_optics(modes, index, WAVELENGTH)
        assert found.error_f11 <= 1e-3
        assert found.error_extinction <= 1e-4
        matrix, extinction = errors(found, particle_optics(modes, index, WAVELENGTH, accuracy=FINE))
        worst.append((matrix / found.error_f11, extinction / found.error_extinction, modes, index))
    print("largest errors over their estimates:", max(worst, key=lambda row: row[0]), max(row[1] for row in worst))
    assert max(row[0] for row in worst) < 3
    assert max(row[1] for row in worst) < 3
    assert sum(max(row[:2]) > 1 for row in worst) <= 3


def test_estimate_is_honest_where_the_work_bound_stops_it():
    shape, index = Lognormal(1e-6, 1.6), 1.33 + 1e-8j
    found = particle_optics(one(shape), index, WAVELENGTH, accuracy=Accuracy(work=1e7))
    matrix, extinction = errors(found, particle_optics(one(shape), index, WAVELENGTH))
    assert found.error_f11 > 1e-3
    assert 1e-3 < matrix <= found.error_f11
    assert extinction <= found.error_extinction


def test_against_a_literal_sum_of_miepython():
    """No quadrature, panel or block of ours: equal steps of ln r from end to end, one sphere at a time."""
    shape, index = Lognormal(0.1e-6, 1.6), 1.55 + 0.02j
    found = particle_optics(one(shape), index, WAVELENGTH)
    u = np.linspace(np.log(0.003e-6), np.log(3e-6), 300)
    number = density(shape, u) * (u[1] - u[0])
    theta = np.radians(np.arange(0, 181, 10))
    extinction = scattering = forward = 0.0
    s11, s12 = np.zeros(theta.size), np.zeros(theta.size)
    for radius, count in zip(np.exp(u), number, strict=True):
        x = 2 * np.pi * radius / WAVELENGTH
        q_ext, q_sca, _, g = miepython.efficiencies_mx(index.conjugate(), x)
        s1, s2 = miepython.S1_S2(index.conjugate(), x, np.cos(theta), norm="wiscombe")
        extinction += count * np.pi * radius**2 * q_ext
        scattering += count * np.pi * radius**2 * q_sca
        forward += count * np.pi * radius**2 * q_sca * g
        s11 += count * (abs(s1) ** 2 + abs(s2) ** 2) / 2
        s12 += count * (abs(s2) ** 2 - abs(s1) ** 2) / 2
    factor = 4 * np.pi * (WAVELENGTH / (2 * np.pi)) ** 2 / scattering
    f11, f12 = found.matrix.at(theta)
    assert found.extinction == pytest.approx(extinction, rel=3e-5, abs=0)
    assert found.scattering == pytest.approx(scattering, rel=3e-5, abs=0)
    assert found.albedo == pytest.approx(scattering / extinction, rel=3e-5, abs=0)
    assert found.asymmetry == pytest.approx(forward / scattering, rel=3e-5, abs=0)
    assert f11 == pytest.approx(factor * s11, rel=1e-4, abs=0)
    assert abs(f12 - factor * s12).max() < 1e-4 * (factor * s11).max()
    assert (abs(f12 - factor * s12) < 1e-4 * f11).all()


def test_single_size_is_one_sphere():
    found = particle_optics(one(SingleSize(0.6e-6)), 1.45 + 1e-3j, 633e-9)
    x = 2 * np.pi * 0.6e-6 / 633e-9
    single = sphere(1.45 + 1e-3j, x)
    area = np.pi * 0.6e-6**2
    assert found.nodes == 1
    assert found.error_extinction == 0
    assert found.error_f11 < 1e-5
    assert found.extinction == pytest.approx(area * single.q_ext, rel=1e-12, abs=0)
    assert found.albedo == pytest.approx(single.q_sca / single.q_ext, rel=1e-12, abs=0)
    assert found.asymmetry == pytest.approx(single.asymmetry, rel=1e-10, abs=0)
    assert found.volume == pytest.approx(4 / 3 * np.pi * 0.6e-6**3, rel=1e-12, abs=0)
    assert found.effective_radius == pytest.approx(0.6e-6, rel=1e-12, abs=0)
    f11, _ = found.matrix.at(np.pi)
    assert f11 == pytest.approx(single.q_back / single.q_sca, rel=1e-9, abs=0)


def test_narrow_distribution_tends_to_one_sphere():
    narrow = particle_optics(one(Lognormal(0.2e-6, 1.0005)), 1.43, WAVELENGTH)
    single = particle_optics(one(SingleSize(0.2e-6)), 1.43, WAVELENGTH)
    matrix, extinction = errors(narrow, single)
    assert matrix < 1e-4
    assert extinction < 1e-4


def test_nothing_is_renormalised_away():
    """A quarter of the particles far too small to scatter lowers the mean cross section by a quarter."""
    small, large = Lognormal(1e-9, 1.3), Lognormal(0.3e-6, 1.5)
    alone = particle_optics(one(large), 1.43, WAVELENGTH)
    mixed = particle_optics((SizeMode(small, 0.25), SizeMode(large, 0.75)), 1.43, WAVELENGTH)
    assert mixed.scattering == pytest.approx(0.75 * alone.scattering, rel=1e-4, abs=0)
    assert mixed.volume == pytest.approx(0.75 * alone.volume, rel=1e-5, abs=0)


def test_modes_add_by_number():
    modes = (
        SizeMode(Lognormal(0.1e-6, 1.5), 0.7),
        SizeMode(ModifiedGamma(1e-6, 6, 1), 0.2),
        SizeMode(SingleSize(0.8e-6), 0.1),
    )
    index = 1.4 + 1e-4j
    mixed = particle_optics(modes, index, WAVELENGTH)
    parts = [particle_optics(one(mode.shape), index, WAVELENGTH) for mode in modes]
    weights = [mode.weight for mode in modes]
    scattering = sum(w * p.scattering for w, p in zip(weights, parts, strict=True))
    f11 = sum(w * p.scattering * p.matrix.at(ANGLES)[0] for w, p in zip(weights, parts, strict=True)) / scattering
    assert mixed.scattering == pytest.approx(scattering, rel=2e-4, abs=0)
    assert (abs(mixed.matrix.at(ANGLES)[0] / f11 - 1)).max() < 2.2e-3
    assert mixed.volume == pytest.approx(
        sum(w * p.volume for w, p in zip(weights, parts, strict=True)), rel=1e-12, abs=0
    )
    second = sum(mode.weight * mean_power(mode.shape, 2) for mode in modes)
    third = sum(mode.weight * mean_power(mode.shape, 3) for mode in modes)
    assert mixed.effective_radius == pytest.approx(third / second, rel=1e-12, abs=0)


def test_no_absorption_means_albedo_one():
    found = particle_optics(one(Lognormal(0.3e-6, 1.5)), 1.43, WAVELENGTH)
    assert found.albedo == 1
    assert found.extinction == found.scattering


def test_rayleigh_limit():
    """Particles far smaller than the wavelength: F12/F11 = −sin²/(1 + cos²), cross section by the sixth moment."""
    shape, index = Lognormal(0.5e-9, 1.2), 1.43
    found = particle_optics(one(shape), index, 1064e-9)
    wavenumber = 2 * np.pi / 1064e-9
    factor = 8 / 3 * np.pi * wavenumber**4 * ((index**2 - 1) / (index**2 + 2)) ** 2
    assert found.scattering == pytest.approx(factor * mean_power(shape, 6), rel=5e-5, abs=0)
    theta = np.linspace(0, np.pi, 37)
    f11, f12 = found.matrix.at(theta)
    assert f11 == pytest.approx(0.75 * (1 + np.cos(theta) ** 2), rel=1e-4, abs=0)
    assert f12 == pytest.approx(-0.75 * np.sin(theta) ** 2, rel=0, abs=1e-4)


def test_medium_scales_index_and_wavelength():
    """Only the relative index and the size parameter count."""
    in_water = particle_optics(one(Lognormal(0.3e-6, 1.3)), 1.33 * 1.2, 1.33 * WAVELENGTH, medium_index=1.33)
    in_air = particle_optics(one(Lognormal(0.3e-6, 1.3)), 1.2, WAVELENGTH)
    assert in_water.extinction == pytest.approx(in_air.extinction, rel=1e-9, abs=0)
    assert in_water.asymmetry == pytest.approx(in_air.asymmetry, rel=1e-9, abs=0)


def test_same_numbers_to_the_last_bit():
    first, again = (particle_optics(one(Lognormal(0.3e-6, 1.6)), 1.43 + 1e-6j, WAVELENGTH) for _ in range(2))
    assert first.extinction == again.extinction
    assert (first.matrix.f11 == again.matrix.f11).all()
    assert (first.matrix.f34 == again.matrix.f34).all()


@pytest.mark.parametrize(
    ("shape", "index", "wavelength", "words"),
    [
        (
            Lognormal(1e-3, 1.5),
            1.33,
            WAVELENGTH,
            ["size parameter", "1e-06 to 20000", "radius", "a distribution of sizes reaches"],
        ),
        (SingleSize(2e-3), 1.33, WAVELENGTH, ["size parameter", "23621", "1e-06 to 20000"]),
        (SingleSize(1e-14), 1.33, WAVELENGTH, ["size parameter", "1e-06 to 20000"]),
        (Lognormal(1e-14, 1.5), 1.33, WAVELENGTH, ["size parameter", "1e-06 to 20000"]),
        (Lognormal(1e-6, 1.5), 30 + 1j, WAVELENGTH, ["refractive index", "at most 20"]),
        (Lognormal(1e-6, 1.5), 1.33, 0.0, ["wavelength", "above 0"]),
        (Lognormal(1e-6, 1.5), 1.33, float("nan"), ["wavelength nan", "above 0"]),
        (Lognormal(1e-6, 0.9), 1.33, WAVELENGTH, ["geometric standard deviation 0.9"]),
    ],
)
def test_what_is_out_of_range_is_refused_by_name(shape, index, wavelength, words):
    with pytest.raises(SizeRangeError) as caught:
        particle_optics(one(shape), index, wavelength)
    for word in words:
        assert word in str(caught.value)


@pytest.mark.parametrize("weights", [(0.5, 0.4), (1.2, -0.2), ()])
def test_weights_must_be_fractions(weights):
    modes = tuple(SizeMode(SingleSize(1e-6), weight) for weight in weights)
    with pytest.raises(SizeRangeError, match="weights of the size modes"):
        particle_optics(modes, 1.33, WAVELENGTH)


def test_accuracy_needs_thin_tails():
    with pytest.raises(ValueError, match=r"tails of 0.0001 are too much for 0.001 in F11, 0.0001 in extinction"):
        Accuracy(tail=1e-4)


def test_modes_may_differ_in_index():
    modes = (SizeMode(Lognormal(0.2e-6, 1.5), 0.7), SizeMode(Lognormal(0.4e-6, 1.4), 0.3))
    indices = (1.53 + 0.006j, 1.75 + 0.44j)
    both = particle_optics(modes, indices, WAVELENGTH)
    alone = [particle_optics(one(mode.shape), index, WAVELENGTH) for mode, index in zip(modes, indices, strict=True)]
    for name in ("extinction", "scattering", "volume"):
        mixed = sum(mode.weight * getattr(part, name) for mode, part in zip(modes, alone, strict=True))
        assert getattr(both, name) == pytest.approx(mixed, rel=2e-4, abs=0)
    share = [mode.weight * part.scattering / both.scattering for mode, part in zip(modes, alone, strict=True)]
    mixed = sum(s * part.matrix.at(ANGLES)[0] for s, part in zip(share, alone, strict=True))
    assert both.matrix.at(ANGLES)[0] == pytest.approx(mixed, rel=2e-3, abs=0)
    with pytest.raises(SizeRangeError, match="1 refractive indices for 2 size modes"):
        particle_optics(modes, (1.5 + 0j,), WAVELENGTH)


def test_a_cut_distribution_is_what_its_nodes_say():
    """Against miepython sphere by sphere between the cuts; nothing outside them, and no renormalising."""
    shape, index = Lognormal(0.2e-6, 1.8, 0.1e-6, 0.5e-6), 1.5 + 0.01j
    found = particle_optics(one(shape), index, WAVELENGTH)
    u = np.linspace(np.log(0.1e-6), np.log(0.5e-6), 801)
    number = np.exp(-0.5 * ((u - np.log(0.2e-6)) / np.log(1.8)) ** 2) / (np.sqrt(2 * np.pi) * np.log(1.8))
    area = np.pi * np.exp(2 * u)
    q_ext = [miepython.efficiencies_mx(index.conjugate(), 2 * np.pi * np.exp(v) / WAVELENGTH)[0] for v in u]
    assert found.extinction == pytest.approx(np.trapezoid(number * area * q_ext, u), rel=1e-4, abs=0)


def test_a_table_of_a_lognormal_gives_the_lognormal():
    whole, index = Lognormal(0.2e-6, 1.5), 1.45 + 0.01j
    radii = np.exp(np.linspace(np.log(0.02e-6), np.log(2e-6), 200))
    table = SizeTable(tuple(radii.tolist()), tuple(density(whole, np.log(radii)).tolist()))
    of_table, of_whole = (particle_optics(one(shape), index, WAVELENGTH) for shape in (table, whole))
    # Straight lines between 200 rows lie up to 2e-4 off the curve.
    assert of_table.extinction == pytest.approx(of_whole.extinction, rel=1e-3, abs=0)
    assert of_table.volume == pytest.approx(of_whole.volume, rel=1e-3, abs=0)
    assert of_table.effective_radius == pytest.approx(of_whole.effective_radius, rel=1e-3, abs=0)
    assert of_table.matrix.at(ANGLES)[0] == pytest.approx(of_whole.matrix.at(ANGLES)[0], rel=3e-3, abs=0)
