"""Growth in moist air: limits and rules of the law, sizes and mixtures of what floats, and OPAC's wet components.

Values of the law itself are in tests/published/test_petters_kreidenweis_2007.py.
"""

from __future__ import annotations

import math

import miepython
import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from lasescatter.matter import (
    Growth,
    IndexTable,
    Lognormal,
    Material,
    ModifiedGamma,
    SingleSize,
    SizeMode,
    SizeTable,
)
from lasescatter.optics.growth import (
    HumidityError,
    as_they_float,
    growth_factor,
    saturation_ratio,
)
from lasescatter.optics.indices import IndexRangeError, volume_mixed

WATER = IndexTable((200e-9, 2e-6), (1.333, 1.333), (0.0, 0.0), (False, True), "water", "test")
WASO_RADII = {0.0: 0.0212, 0.5: 0.0262, 0.7: 0.0285, 0.8: 0.0306, 0.9: 0.0348, 0.95: 0.0399, 0.98: 0.0476, 0.99: 0.0534}
WASO_GROWTH = Growth(None, tuple((h, r / 0.0212) for h, r in WASO_RADII.items()), WATER, "OPAC")
WASO = Material(1.53 + 5.64e-3j, 1800.0, WASO_GROWTH)
WASO_SIZES = Lognormal(0.0212e-6, 2.24)

diameter = st.floats(1e-9, 1e-4)
kappas = st.floats(1e-3, 1.5)
humidity = st.floats(0.0, 0.99)
temperature = st.floats(250, 330)


def grows(kappa: float, index: complex = 1.5 + 0.01j, density: float | None = 1500.0) -> Material:
    return Material(index, density, Growth(kappa, (), WATER, "test"))


def float_one(shape, material, relative_humidity, kelvin=298.15):
    return as_they_float((SizeMode(shape),), material, relative_humidity, kelvin)


@settings(max_examples=300, deadline=None)
@given(d=diameter, kappa=kappas, rh=st.floats(1e-6, 0.99), t=temperature)
def test_the_factor_solves_the_balance(d, kappa, rh, t):
    factor = growth_factor(d, kappa, rh, t)
    assert 1 <= factor <= growth_factor(d, kappa, rh, t, curvature=False) * (1 + 1e-15)
    if factor > 1 + 1e-4:  # below that the rounding of the factor itself shows
        assert saturation_ratio(factor, d, kappa, t) == pytest.approx(rh, rel=1e-10 / (factor - 1), abs=0)


@settings(max_examples=300, deadline=None)
@example(d=6e-5, kappa=1.0, rh=5e-324, t=250.0, more=2.0, damper=0.0)
@given(d=diameter, kappa=kappas, rh=humidity, t=temperature, more=st.floats(1.0, 2.0), damper=st.floats(0, 1))
def test_growth_rises_with_humidity_kappa_and_size(d, kappa, rh, t, more, damper):
    factor = growth_factor(d, kappa, rh, t)
    rounding = 1 + 1e-14
    assert factor <= growth_factor(d, kappa * more, rh, t) * rounding
    assert factor <= growth_factor(d * more, kappa, rh, t) * rounding
    assert factor <= growth_factor(d, kappa, rh + damper * (0.99 - rh), t) * rounding


@settings(max_examples=50, deadline=None)
@given(d=diameter, kappa=kappas, rh=humidity, t=temperature)
def test_no_growth_without_water_or_affinity(d, kappa, rh, t):
    assert growth_factor(d, kappa, 0.0, t) == 1.0
    assert growth_factor(d, 0.0, rh, t) == 1.0
    assert growth_factor(d, 0.0, 1.0, t) == 1.0


@pytest.mark.parametrize("kappa", [0.01, 0.61])
def test_curvature_fades_for_large_particles(kappa):
    plain = growth_factor(1.0, kappa, 0.9, 298.15, curvature=False)
    assert growth_factor(1e-3, kappa, 0.9, 298.15) == pytest.approx(plain, rel=1e-5, abs=0)


@pytest.mark.parametrize(
    "arguments", [(0.0, 0.3, 0.5, 298.0), (1e-7, -0.1, 0.5, 298.0), (1e-7, 0.3, -0.1, 298.0), (1e-7, 0.3, 0.5, 0.0),
                  (float("nan"), 0.3, 0.5, 298.0), (1e-7, 0.3, float("nan"), 298.0)],
)  # fmt: skip
def test_what_is_no_physical_value_is_refused(arguments):
    with pytest.raises(ValueError, match="no physical value"):
        growth_factor(*arguments)


def test_too_humid_is_refused_where_something_grows():
    with pytest.raises(HumidityError, match=r"99\.5 % is above 99 %"):
        growth_factor(1e-7, 0.3, 0.995, 298.15)
    with pytest.raises(HumidityError, match="99 %"):
        float_one(WASO_SIZES, WASO, 0.995)
    assert float_one(WASO_SIZES, Material(1.53 + 0j, None), 1.0).factors == (1.0,)
    assert float_one(WASO_SIZES, grows(0.0), 1.0).factors == (1.0,)


def test_a_list_of_factors_is_not_carried_on():
    short = Material(1.5 + 0j, None, Growth(None, ((0.0, 1.0), (0.8, 1.4)), WATER, "test"))
    assert float_one(WASO_SIZES, short, 0.8).factors == (1.4,)
    with pytest.raises(HumidityError, match="85 % is above 80 %"):
        float_one(WASO_SIZES, short, 0.85)


def test_listed_factors_are_met():
    for relative_humidity, radius in WASO_RADII.items():
        (factor,) = float_one(WASO_SIZES, WASO, relative_humidity).factors
        assert factor == pytest.approx(radius / 0.0212, rel=1e-12, abs=0)


@settings(max_examples=100, deadline=None)
@given(rh=humidity, damper=st.floats(0, 1))
def test_between_listed_factors_growth_rises(rh, damper):
    (low,), (high,) = (float_one(WASO_SIZES, WASO, h).factors for h in (rh, rh + damper * (0.99 - rh)))
    assert 1 <= low <= high * (1 + 1e-14)


def test_opac_water_soluble_component():
    """OPAC data files (Hess, Koepke & Schult 1998), 532 nm and wet density: printed to 0.001 and 0.01 g/cm³.

    Water is taken as n = 1.333, where OPAC's differs by up to 0.001.
    """
    for rh, index, density in (
        (0.5, 1.437 + 2.99e-3j, 1420),
        (0.8, 1.399 + 1.88e-3j, 1270),
        (0.95, 1.363 + 8.46e-4j, 1120),
    ):
        floating = float_one(WASO_SIZES, WASO, rh)
        (found,) = floating.indices(532e-9)
        assert found.real == pytest.approx(index.real, rel=0, abs=1.5e-3)
        assert found.imag == pytest.approx(index.imag, rel=6e-3, abs=0)
        mean = floating.mass / (floating.dry_mass / 1800 * floating.factors[0] ** 3)
        assert mean == pytest.approx(density, rel=0, abs=10)
    (eighty,) = float_one(WASO_SIZES, WASO, 0.8).indices(532e-9)
    assert eighty.real == pytest.approx(1.3985, rel=0, abs=5e-5)


def test_the_factor_of_a_mode_is_that_of_its_large_particles():
    """Median weighted by r⁶."""
    shape = Lognormal(0.05e-6, 1.7)
    median = 2 * 0.05e-6 * math.exp(6 * math.log(1.7) ** 2)
    expected = growth_factor(median, 0.3, 0.9, 298.15)
    assert float_one(shape, grows(0.3), 0.9).factors[0] == pytest.approx(expected, rel=1e-12, abs=0)


@pytest.mark.parametrize(("smallest", "largest"), [(None, 0.2e-6), (0.1e-6, None), (0.02e-6, 0.4e-6)])
def test_the_typical_size_of_a_cut_mode(smallest, largest):
    """Against the median of a fine sum of r⁶ between the cuts."""
    u = np.linspace(math.log(smallest or 1e-10), math.log(largest or 1e-3), 400_001)
    mass = np.exp(6 * u - 0.5 * ((u - math.log(0.05e-6)) / math.log(1.7)) ** 2)
    running = np.cumsum(mass)
    median = 2 * math.exp(u[np.searchsorted(running, running[-1] / 2)])
    (factor,) = float_one(Lognormal(0.05e-6, 1.7, smallest, largest), grows(0.3), 0.9).factors
    assert factor == pytest.approx(growth_factor(median, 0.3, 0.9, 298.15), rel=1e-6, abs=0)


def test_other_shapes_take_the_volume_weighted_mean_volume():
    expected = growth_factor(0.2e-6, 0.3, 0.9, 298.15)
    assert float_one(SingleSize(0.1e-6), grows(0.3), 0.9).factors[0] == pytest.approx(expected, rel=1e-12, abs=0)
    # Alpha 2, gamma 1: <r⁶>/<r³> = (8!/5!)(mode/2)³ = 336/8 mode³.
    expected = growth_factor(2 * 42 ** (1 / 3) * 0.1e-6, 0.3, 0.9, 298.15)
    found = float_one(ModifiedGamma(0.1e-6, 2, 1), grows(0.3), 0.9).factors[0]
    assert found == pytest.approx(expected, rel=1e-12, abs=0)


def test_all_radii_of_a_mode_grow():
    modes = (
        SizeMode(Lognormal(1e-7, 1.5, 1e-8, 1e-6), 0.4),
        SizeMode(ModifiedGamma(1e-7, 2, 1), 0.3, grows(0.0)),
        SizeMode(SizeTable((1e-7, 2e-7, 4e-7), (0.5, 1.0, 0.443)), 0.3),
    )
    floating = as_they_float(modes, grows(0.5), 0.9, 298.15)
    first, second, third = floating.factors
    assert first > 1.5 and second == 1.0 and third > first * 0.9
    wet = [mode.shape for mode in floating.modes]
    assert wet[0] == Lognormal(1e-7 * first, 1.5, 1e-8 * first, 1e-6 * first)
    assert wet[1] == modes[1].shape
    assert wet[2] == SizeTable((1e-7 * third, 2e-7 * third, 4e-7 * third), (0.5, 1.0, 0.443))
    assert [mode.weight for mode in floating.modes] == [0.4, 0.3, 0.3]
    assert all(mode.material is None for mode in floating.modes)
    assert float_one(Lognormal(1e-7, 1.5), grows(0.5), 0.9).modes[0].shape.smallest is None


@settings(max_examples=60, deadline=None)
@given(rh=humidity, kappa=kappas, density=st.floats(700, 3000))
def test_masses(rh, kappa, density):
    floating = float_one(SingleSize(1e-7), grows(kappa, density=density), rh)
    dry = 4 / 3 * math.pi * 1e-21 * density
    assert floating.dry_mass == pytest.approx(dry, rel=1e-12, abs=0)
    water = 4 / 3 * math.pi * ((1e-7 * floating.factors[0]) ** 3 - 1e-21) * 997.05
    assert floating.mass == pytest.approx(dry + water, rel=1e-12, abs=0)


def test_mass_of_a_cut_mode():
    """Against a fine sum; the particles beyond the cuts are gone from the sum, and are still counted."""
    shape = Lognormal(1e-7, 1.8, 0.5e-7, 3e-7)
    u = np.linspace(math.log(0.5e-7), math.log(3e-7), 200_001)
    number = np.exp(-0.5 * ((u - math.log(1e-7)) / math.log(1.8)) ** 2) / (math.sqrt(2 * math.pi) * math.log(1.8))
    cubes = float(np.trapezoid(number * np.exp(3 * u), u))
    floating = float_one(shape, grows(0.3, density=1000.0), 0.8)
    assert floating.dry_mass == pytest.approx(1000 * 4 / 3 * math.pi * cubes, rel=1e-7, abs=0)


def test_mass_of_mixed_modes_and_of_unknown_density():
    modes = (SizeMode(SingleSize(1e-7), 0.25), SizeMode(SingleSize(2e-7), 0.75, Material(1.5 + 0j, 2000.0)))
    floating = as_they_float(modes, grows(0.5, density=1000.0), 0.0, 298.15)
    expected = 4 / 3 * math.pi * (0.25 * 1e-21 * 1000 + 0.75 * 8e-21 * 2000)
    assert floating.dry_mass == floating.mass == pytest.approx(expected, rel=1e-12, abs=0)
    floating = as_they_float(modes, grows(0.5, density=None), 0.5, 298.15)
    assert floating.dry_mass is None and floating.mass is None


def test_indices_are_mixed_by_volume_and_where_known():
    modes = (SizeMode(SingleSize(1e-6), 0.5), SizeMode(SingleSize(2e-6), 0.5, Material(1.7 + 0.1j, None)))
    floating = as_they_float(modes, grows(0.6), 0.9, 298.15)
    wet, dry = floating.indices(532e-9)
    assert dry == 1.7 + 0.1j
    assert wet == volume_mixed(1.5 + 0.01j, 1.333 + 0j, floating.factors[0] ** -3)
    assert 1.333 < wet.real < 1.5
    with pytest.raises(IndexRangeError, match="water"):
        floating.indices(3e-6)
    # Dry particles need no index of water.
    assert as_they_float(modes, grows(0.6), 0.0, 298.15).indices(3e-6) == (1.5 + 0.01j, 1.7 + 0.1j)


def test_unconfirmed_data_are_known_as_such():
    floating = float_one(SingleSize(1e-6), grows(0.6), 0.9)
    assert floating.unconfirmed(532e-9)  # the upper node of this table of water is
    assert not floating.unconfirmed(200e-9)
    assert not float_one(SingleSize(1e-6), grows(0.6), 0.0).unconfirmed(532e-9)


def test_a_mode_without_material_is_refused():
    with pytest.raises(ValueError, match="no material"):
        as_they_float((SizeMode(SingleSize(1e-6)),), None, 0.5, 298.15)


@pytest.mark.parametrize(
    ("relative_humidity", "high", "off"), [(0.8, 1.04, 0.015), (0.95, 1.17, 0.05), (0.99, 1.65, 0.13)]
)
@pytest.mark.parametrize("kappa", [0.1, 0.61])
@pytest.mark.parametrize("sd", [1.4, 2.2])
def test_one_factor_for_a_mode_beside_growth_size_by_size(sd, kappa, relative_humidity, high, off):
    """The stated size of the assumption: light to 5–175° at 532 nm, given by number and by extinction."""
    width = math.log(sd)
    median = 0.1e-6 / 2 * math.exp(-3 * width**2)
    u = math.log(median) + width * np.linspace(-1.3, 5.7, 160)
    number = np.exp(-0.5 * ((u - math.log(median)) / width) ** 2)
    cosines = np.cos(np.radians([5, 30, 60, 90, 120, 150, 175]))

    def light(factors):
        total, extinction = np.zeros(len(cosines)), 0.0
        for radius, weight, factor in zip(np.exp(u), number, factors, strict=True):
            index = volume_mixed(1.53 + 0.005j, 1.333 + 0j, factor**-3).conjugate()
            x = 2 * math.pi * radius * factor / 532e-9
            area = weight * (radius * factor) ** 2
            total += area * miepython.i_unpolarized(index, x, cosines, norm="qsca")
            extinction += area * miepython.efficiencies_mx(index, x)[0]
        return total, extinction

    one, each = (
        light(
            as_they_float((SizeMode(Lognormal(median, sd)),), grows(kappa), relative_humidity, 298.15).factors * len(u)
        ),
        light([growth_factor(2 * radius, kappa, relative_humidity, 298.15) for radius in np.exp(u)]),
    )
    by_number = one[0] / each[0]
    by_extinction = by_number * each[1] / one[1]
    assert by_number.min() > 0.99 and by_number.max() < high
    assert abs(by_extinction - 1).max() < off


def test_the_stated_size_of_one_factor_is_no_empty_phrase():
    """Growth at the largest particles is well above that at the mass median."""
    width = math.log(2.2)
    median = 0.05e-6 * math.exp(-3 * width**2)
    (factor,) = float_one(Lognormal(median, 2.2), grows(0.1), 0.99).factors
    assert factor > 1.15 * growth_factor(0.1e-6, 0.1, 0.99, 298.15)
