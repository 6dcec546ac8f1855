"""Spheres: against miepython, against sums written out, and against laws that no sphere escapes."""

from __future__ import annotations

import miepython
import numpy as np
import pytest
from scipy.special import spherical_jn, spherical_yn

from lasescatter.optics import cosines
from lasescatter.optics import partial_waves as waves_module
from lasescatter.optics.angular import AngularTables
from lasescatter.optics.mie import MieSpace, SizeRangeError, averaged, block_edges, combined, sphere
from lasescatter.optics.partial_waves import partial_waves
from lasescatter.optics.recurrences import series_length

RNG = np.random.default_rng(20)


def random_spheres(count, smallest, largest):
    """Index and size parameter: glass-like to metal-like, none to strong absorption."""
    for _ in range(count):
        absorption = RNG.choice([0.0, 10 ** RNG.uniform(-9, 0.7)])
        yield complex(RNG.uniform(0.2, 5.0), absorption), 10 ** RNG.uniform(np.log10(smallest), np.log10(largest))


def literal(index, x, orders):
    """a_n, b_n from spherical Bessel functions, no recurrence of ours (Bohren & Huffman 1983, eq. 4.53)."""
    n = np.arange(1, orders + 1)
    jx, jmx = spherical_jn(n, x), spherical_jn(n, index * x)
    hx = jx + 1j * spherical_yn(n, x)
    d_jx = jx + x * spherical_jn(n, x, derivative=True)
    d_jmx = jmx + index * x * spherical_jn(n, index * x, derivative=True)
    d_hx = d_jx + 1j * (spherical_yn(n, x) + x * spherical_yn(n, x, derivative=True))
    a = (index**2 * jmx * d_jx - jx * d_jmx) / (index**2 * jmx * d_hx - hx * d_jmx)
    b = (jmx * d_jx - jx * d_jmx) / (jmx * d_hx - hx * d_jmx)
    return a, b


def test_random_spheres_against_bessel_functions():
    """Any index but that of the medium, where the direct formula cancels; the worst case is printed."""
    worst = (0.0,)
    for index, x in random_spheres(300, 0.3, 12):
        if abs(index - 1) < 0.1:
            continue
        orders = int(series_length(x))
        a, b = literal(index, x, orders)
        found = sphere(index, x).waves
        off = max(abs(found.a[:, 0] - a).max(), abs(found.b[:, 0] - b).max()) / max(abs(a).max(), abs(b).max())
        if off > worst[0]:
            worst = (float(off), index, x)
    print("worst case against Bessel functions:", worst)
    assert worst[0] < 1e-11


def test_efficiencies_against_miepython():
    worst = {}
    for index, x in random_spheres(400, 1, 1500):
        if abs(index - 1) < 0.01:
            continue
        found, reference = sphere(index, x), miepython.efficiencies_mx(index.conjugate(), x)
        errors = {
            "extinction": abs(found.q_ext / reference[0] - 1),
            "scattering": abs(found.q_sca / reference[1] - 1),
            "back": abs(found.q_back / reference[2] - 1),
            "asymmetry": abs(found.asymmetry - reference[3]),
        }
        for name, error in errors.items():
            if error > worst.get(name, (0.0,))[0]:
                worst[name] = (float(error), index, x)
    print("worst case of each against miepython:", worst)
    # miepython ends the series at Wiscombe's length: that leaves 1e-8, and more in backscatter.
    assert worst["extinction"][0] < 1e-8
    assert worst["scattering"][0] < 1e-8
    assert worst["asymmetry"][0] < 1e-8
    assert worst["back"][0] < 1e-5


def test_amplitudes_against_miepython():
    theta = np.radians(np.linspace(0, 180, 61))
    worst = (0.0,)
    for index, x in random_spheres(60, 0.2, 300):
        s1, s2 = sphere(index, x).amplitudes(theta)
        r1, r2 = miepython.S1_S2(index.conjugate(), x, np.cos(theta), norm="wiscombe")
        # Relative to the local intensity: one amplitude may vanish, both do not.
        local = np.sqrt(abs(r1) ** 2 + abs(r2) ** 2)
        error = max((abs(s1 - np.conj(r1)) / local).max(), (abs(s2 - np.conj(r2)) / local).max())
        if error > worst[0]:
            worst = (float(error), index, x)
    print("worst amplitude against miepython:", worst)
    assert worst[0] < 1e-6


@pytest.mark.parametrize(
    ("index", "x"),
    [(1.55, 1000.0), (1.333, 10_000.0), (1.3337 + 1.475e-9j, 10_000.0), (1.5 + 1j, 20_000.0), (0.05 + 3.4j, 1000.0)],
)
def test_large_spheres_against_miepython(index, x):
    """A start of the downward recurrence too near |mx| leaves the efficiencies right and the angles wrong."""
    found, reference = sphere(index, x), miepython.efficiencies_mx(np.conj(index), x)
    # The metal: 2.2e-9 apart; in extended precision Q_ext is 2.0262324330014, ours to the last digit.
    assert (found.q_ext, found.q_sca) == pytest.approx(reference[:2], rel=5e-9, abs=0)
    assert found.asymmetry == pytest.approx(reference[3], rel=5e-9, abs=0)
    theta = np.radians([0.0, 1.0, 33.0, 90.0, 140.0, 179.0, 180.0])
    s1, s2 = found.amplitudes(theta)
    r1, r2 = miepython.S1_S2(np.conj(index), x, np.cos(theta), norm="wiscombe")
    local = np.sqrt(abs(r1) ** 2 + abs(r2) ** 2)
    assert (abs(s1 - np.conj(r1)) / local).max() < 1e-5
    assert (abs(s2 - np.conj(r2)) / local).max() < 1e-5


def extended_amplitudes(index, x):
    """S(0) and S1(180°) in extended precision, by the logarithmic derivative (Bohren & Huffman 1983, 4.88)."""
    real, complex_ = np.longdouble, np.clongdouble
    m, x = complex_(index), real(x)
    orders = int(x + 8 * np.cbrt(x) + 10)
    derivative = [complex_(0)] * (orders + 1)
    below = complex_(0)
    for n in range(int(abs(m * x) + 30 * np.cbrt(abs(m * x)) + 50), 0, -1):
        below = n / (m * x) - 1 / (below + n / (m * x))
        if n <= orders + 1:
            derivative[n - 1] = below
    psi, chi = (np.cos(x), np.sin(x)), (-np.sin(x), np.cos(x))
    forward = backward = complex_(0)
    for n in range(1, orders + 1):
        psi = psi[1], (2 * n - 1) * psi[1] / x - psi[0]
        chi = chi[1], (2 * n - 1) * chi[1] / x - chi[0]
        xi = psi[0] - 1j * chi[0], psi[1] - 1j * chi[1]
        outer_a, outer_b = derivative[n] / m + n / x, derivative[n] * m + n / x
        a = (outer_a * psi[1] - psi[0]) / (outer_a * xi[1] - xi[0])
        b = (outer_b * psi[1] - psi[0]) / (outer_b * xi[1] - xi[0])
        forward += (n + real(0.5)) * (a + b)
        backward += (n + real(0.5)) * (-1) ** (n + 1) * (a - b)
    return complex(forward), complex(backward)


@pytest.mark.parametrize(("index", "x"), [(1.55, 1000.0), (1.33 + 1e-5j, 2000.0), (0.05 + 3.4j, 1000.0), (1.5, 60.0)])
def test_large_spheres_against_extended_precision(index, x):
    forward, backward = extended_amplitudes(index, x)
    found = sphere(index, x)
    s1, _ = found.amplitudes([0.0, np.pi])
    # The angular functions drift by n² roundings near 0° and 180°.
    assert abs(s1[0] / forward - 1) < 1e-11
    assert abs(s1[1] / backward - 1) < 1e-8
    assert found.q_ext == pytest.approx(4 / x**2 * forward.real, rel=1e-12, abs=0)


@pytest.mark.parametrize("index", [1.33, 1.5 + 1e-6j, 1.5 + 1j, 0.2 + 3j, 10 + 10j])
@pytest.mark.parametrize("x", [0.001, 0.03, 0.5, 0.999999, 1.0, 1.5, 3.0])
def test_coefficients_against_bessel_functions(index, x):
    found = sphere(index, x).waves
    a, b = literal(index, x, 3)
    scale = abs(a[0])
    # b_1 of a small sphere is x² times smaller than a_1 and cancels, in the reference as well.
    assert abs(found.a[:3, 0] - a).max() < 2e-11 * scale
    assert abs(found.b[:3, 0] - b).max() < 2e-11 * scale


@pytest.mark.parametrize("index", [1.33, 1.5 + 1e-8j, 1.5 + 1e-3j, 1.75 + 0.44j])
@pytest.mark.parametrize("x", [1e-6, 1e-5, 1e-4, 1e-3])
def test_rayleigh_limit(index, x):
    """Bohren & Huffman (1983), eqs. 5.7–5.8, with the next order of x² (eq. 5.4) where it can be seen."""
    found = sphere(index, x)
    ratio = (index**2 - 1) / (index**2 + 2)
    assert found.q_sca == pytest.approx(8 / 3 * x**4 * abs(ratio) ** 2, rel=max(3 * x**2, 1e-9), abs=0)
    assert found.asymmetry == pytest.approx(0, abs=x**2)
    if index.imag:
        expected = 4 * x * ratio.imag
        next_order = 1 + x**2 / 15 * (index**2 - 1) / (index**2 + 2) * (index**4 + 27 * index**2 + 38) / (
            2 * index**2 + 3
        )
        expected = 4 * x * (ratio * next_order).imag
        # The printed expansion is that of extinction without radiation damping, that is of absorption.
        assert found.q_abs == pytest.approx(expected, rel=max(x**2, 1e-9), abs=0)
    else:
        assert found.q_abs == 0


def test_faint_absorption_keeps_its_digits():
    """Absorption in proportion to k, though it is 1e-8 of the extinction (a difference would lose all digits)."""
    for x in (0.02, 1.7, 30.0, 400.0):
        weak, weaker = sphere(1.33 + 1e-12j, x), sphere(1.33 + 1e-13j, x)
        assert weak.q_abs / weaker.q_abs == pytest.approx(10, rel=1e-6, abs=0)
        # To first order in k the index's own square gives it: compare with a stronger absorber.
        strong = sphere(1.33 + 1e-7j, x)
        assert strong.q_ext - strong.q_sca == pytest.approx(1e5 * weak.q_abs, rel=0.02, abs=0)


def test_no_absorption_is_exact():
    for x in (1e-6, 0.1, 1.0, 12.0, 777.0):
        found = sphere(1.47, x)
        assert found.q_ext == found.q_sca
        assert found.q_abs == 0


def test_optical_theorem_and_poles():
    """Q_ext = 4 Re S(0)/x²; S1 = S2 forward, S1 = −S2 backward; Q_back from S(180°)."""
    for index, x in [(1.33, 0.01), (1.5 + 0.1j, 3.0), (1.33 + 1e-8j, 100.0), (1.5 + 1j, 5000.0)]:
        found = sphere(index, x)
        s1, s2 = found.amplitudes([0.0, np.pi])
        assert s1[0] == pytest.approx(s2[0], rel=1e-12, abs=0)
        assert s1[1] == pytest.approx(-s2[1], rel=2e-8, abs=0)
        assert found.q_back == pytest.approx(4 * abs(s1[1]) ** 2 / x**2, rel=2e-8, abs=0)
        # The real part is a 1e-8th of the modulus for the smallest of these.
        assert abs(4 * s1[0].real / x**2 - found.q_ext) < 1e-13 * 4 * abs(s1[0]) / x**2 + 1e-10 * found.q_ext


def matrix_of(index, x, theta):
    s1, s2 = sphere(index, x).amplitudes(theta)
    power_1, power_2 = abs(s1) ** 2, abs(s2) ** 2
    return np.array([(power_1 + power_2) / 2, (power_2 - power_1) / 2, (s1 * s2.conj()).real, (s2 * s1.conj()).imag])


@pytest.mark.parametrize("index", [1.33, 1.55 + 0.02j, 0.2 + 3j, 2.0 + 1e-4j])
def test_average_is_the_sum_of_its_spheres(index):
    """All blocks, both sides of x = 1, unequal weights: against one sphere at a time, angle by angle."""
    x = np.concatenate((10 ** RNG.uniform(-2, 2, 60), [1.0, 300.0], block_edges()[:6]))
    weight = RNG.uniform(0.1, 2, x.size)
    found = averaged(index, x, weight)
    intervals = found.matrix.shape[1] - 1
    theta = np.linspace(0, np.pi, intervals + 1)
    expected = sum(w * matrix_of(index, size, theta) for size, w in zip(x, weight, strict=True))
    sampled = cosines.to_samples(found.matrix, intervals)
    assert (abs(sampled - expected) / expected[0]).max() < 1e-9
    q_sca = np.array([sphere(index, size).q_sca for size in x])
    q_abs = np.array([sphere(index, size).q_abs for size in x])
    assert found.scattering == pytest.approx(np.pi * (weight * x**2) @ q_sca, rel=1e-12, abs=0)
    assert found.absorption == pytest.approx(np.pi * (weight * x**2) @ q_abs, rel=1e-12, abs=0)


def test_splits_of_the_radii_add_up():
    x = 10 ** RNG.uniform(-3, 2.3, 200)
    weight = RNG.uniform(0, 1, 200)
    whole = averaged(1.4 + 1e-5j, x, weight)
    for parts in (
        np.array_split(np.arange(200), 7),
        [[0], np.arange(1, 200)],
        [np.arange(0, 200, 2), np.arange(1, 200, 2)],
    ):
        total = combined([averaged(1.4 + 1e-5j, x[part], weight[part]) for part in parts])
        assert total.scattering == pytest.approx(whole.scattering, rel=1e-12, abs=0)
        assert total.absorption == pytest.approx(whole.absorption, rel=1e-12, abs=0)
        assert abs(total.matrix - whole.matrix).max() < 1e-12 * abs(whole.matrix).max()


def test_closed_forms_of_the_cosine_series():
    """Scattering and asymmetry from the angles agree with those from the orders."""
    for index, x in [(1.33, 0.05), (1.5 + 0.01j, 7.0), (1.33 + 1e-8j, 200.0)]:
        one = averaged(index, np.array([x]), np.array([2.5]))
        single = sphere(index, x)
        mean = cosines.sphere_mean(one.matrix[0])
        assert 4 * np.pi * mean == pytest.approx(one.scattering, rel=1e-11, abs=0)
        assert one.scattering == pytest.approx(2.5 * np.pi * x**2 * single.q_sca, rel=1e-12, abs=0)
        assert cosines.sphere_mean_cosine(one.matrix[0]) / mean == pytest.approx(single.asymmetry, rel=1e-9, abs=0)


def test_tables_that_are_too_large_to_keep_give_the_same():
    x = np.linspace(200.0, 220.0, 30)
    weight = np.ones(30)
    kept, pieces = MieSpace(), MieSpace()
    pieces.tables = AngularTables(kept_bytes=0)
    whole = averaged(1.33, x, weight, kept)
    assert abs(whole.matrix - averaged(1.33, x, weight, pieces).matrix).max() < 1e-13 * abs(whole.matrix).max()


def test_a_space_that_was_used_before_changes_nothing():
    """Larger and smaller sums, real and complex ones, in turn: nothing of the one is left in the next."""
    space = MieSpace()
    for index, x in (
        (1.5 + 0.1j, np.linspace(1, 300, 900)),
        (1.33 + 1e-8j, np.linspace(0.02, 9, 40)),
        (1.33, np.linspace(50, 60, 7)),
        (2 + 1j, np.linspace(1e-4, 0.5, 30)),
        (1.33 + 1e-8j, np.linspace(20, 90, 2000)),
    ):
        weight = RNG.uniform(0.1, 2, x.size)
        fresh, used = averaged(index, x, weight), averaged(index, x, weight, space)
        assert (fresh.matrix == used.matrix).all()
        assert fresh.absorption == used.absorption


@pytest.mark.parametrize("index", [1.33 + 1e-8j, 1.5 + 2e-8j, 3.0 + 1e-8j, 1.05 + 5e-8j])
def test_weak_absorption_to_first_order_is_enough(index, monkeypatch):
    """Real algebra against the complex one, spheres with and without resonances."""
    x = np.sort(RNG.uniform(0.02, 190, 400))[::-1]
    weight = np.ones(400)
    quick = averaged(index, x, weight)
    monkeypatch.setattr(waves_module, "_WEAK_ABSORPTION", 0.0)
    full = averaged(index, x, weight)
    theta = np.linspace(0, np.pi, 2001)
    of_quick, of_full = (np.cos(np.outer(theta, np.arange(s.matrix.shape[1]))) @ s.matrix.T for s in (quick, full))
    assert (abs(of_quick - of_full) / of_full[:, :1]).max() < 1e-9
    assert quick.scattering == pytest.approx(full.scattering, rel=1e-11, abs=0)
    assert quick.absorption == pytest.approx(full.absorption, rel=1e-8, abs=0)


def test_spheres_of_very_different_sizes_together_cannot_overflow():
    """Down to the smallest beside the largest: every one keeps the coefficients it has alone."""
    for index in (1.33, 1.5 + 1j):
        x = np.array([3000.0, 1200.0, 300.0, 60.0, 11.0, 2.0, 1.0, 0.5, 1e-2, 1e-4, 1e-6])
        together = partial_waves(index, x)
        assert np.isfinite([together.total, together.difference]).all()
        assert np.isfinite(together.absorbed).all()
        for column, size in enumerate(x):
            alone = partial_waves(index, np.array([size]))
            own = len(alone.total)
            assert abs(together.a[:own, column] - alone.a[:, 0]).max() < 1e-11 * abs(alone.a).max()
            assert abs(together.b[:own, column] - alone.b[:, 0]).max() < 1e-11 * abs(alone.a).max()
            assert abs(together.total[own:, column]).max(initial=0) < 1e-11 * abs(alone.a).max()


def test_series_length_is_enough():
    """Another third of orders changes no angle: measured against spheres summed with a longer series."""
    for x in (0.3, 8.0, 150.0):
        orders = int(series_length(x))
        a, b = literal(1.5, x, orders + 3)
        tail = abs(np.concatenate((a[orders:], b[orders:]))).max()
        assert tail < 1e-12 * abs(a[0])
        assert partial_waves(1.5, np.array([x])).a.shape == (orders, 1)


@pytest.mark.parametrize(
    ("index", "x", "words"),
    [
        (1.33, 1e-7, ["size parameter", "1e-07", "1e-06 to 20000"]),
        (1.33, 20_001.0, ["size parameter", "20001", "1e-06 to 20000"]),
        (1.33, float("nan"), ["size parameter", "nan"]),
        (25.0, 1.0, ["refractive index", "25", "at most 20"]),
        (1.33 - 0.1j, 1.0, ["refractive index", "imaginary part at least 0"]),
        (-1.33, 1.0, ["refractive index", "real part above 0"]),
        (complex("nan"), 1.0, ["refractive index", "nan"]),
        (1.0 + 0j, 1.0, ["refractive index", "nothing scatters"]),
    ],
)
def test_outside_the_range_is_refused_by_name(index, x, words):
    for refused in (lambda: sphere(index, x), lambda: averaged(index, np.array([2.0, x]), np.ones(2))):
        with pytest.raises(SizeRangeError) as caught:
            refused()
        for word in words:
            assert word in str(caught.value)


@pytest.mark.parametrize(
    ("index", "x"), [(20.0, 20_000.0), (1e-3 + 0j, 20_000.0), (0.05 + 19.9j, 1e-6), (20j + 0.1, 700.0)]
)
def test_corners_of_the_range_are_finite(index, x):
    if abs(index) > 20:
        index *= 20 / abs(index)
    found = sphere(index, x)
    assert np.isfinite([found.q_ext, found.q_sca, found.q_back, found.asymmetry]).all()
    assert 0 < found.q_sca <= found.q_ext * (1 + 1e-12)
    assert -1 <= found.asymmetry <= 1
