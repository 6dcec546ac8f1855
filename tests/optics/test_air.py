"""Air: what the published tables do not say. The tables are in tests/published."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from lasescatter.optics.air import (
    AirRangeError,
    air_optics,
    depolarisation,
    king_factor,
    saturation_pressure,
    vapour_refractivity,
)


def test_scattering_is_cross_section_times_number():
    air = air_optics(532e-9, 293.15, 98_000.0)
    assert air.number == pytest.approx(98_000.0 / (1.380649e-23 * 293.15), rel=1e-12, abs=0)
    assert air.scattering == pytest.approx(air.number * air.cross_section, rel=1e-12, abs=0)


def test_cross_section_does_not_depend_on_the_state_of_the_air():
    cold, hot = air_optics(1064e-9, 250.0, 50_000.0), air_optics(1064e-9, 310.0, 105_000.0)
    assert cold.cross_section == hot.cross_section
    assert hot.scattering / cold.scattering == pytest.approx(105 / 50 * 250 / 310, rel=1e-12, abs=0)


def test_inverse_fourth_power_of_wavelength():
    """1/λ⁴ but for dispersion and King factor (together 7 % from 532 to 266 nm, 3 % from 1064 to 532 nm)."""
    for wavelength, extra in ((532e-9, 0.033), (1064e-9, 0.0085), (1600e-9, 0.003)):
        ratio = (
            air_optics(wavelength / 1.25, 288.0, 1e5).cross_section / air_optics(wavelength, 288.0, 1e5).cross_section
        )
        assert 1.25**4 < ratio < 1.25**4 * (1 + extra)


def test_depolarisation_and_king_factor_are_inverse():
    king = king_factor(532e-9)
    rho = depolarisation(king)
    assert (6 + 3 * rho) / (6 - 7 * rho) == pytest.approx(king, rel=1e-12, abs=0)


def test_linear_light_along_and_across_its_field():
    """At 90° a linearly polarised beam sends F11 ± F12: 1.479 across its field, 0.0420 along it (sheet value, K)."""
    f11, f12 = air_optics(532e-9, 288.15, 101_325.0).matrix.at(np.pi / 2)
    assert f11 - f12 == pytest.approx(1.47898, rel=5e-6, abs=0)
    assert f11 + f12 == pytest.approx(0.04203, rel=2e-4, abs=0)


def test_extinction_to_backscatter_ratio():
    """Sheet values (K): 8.506 sr at 355 nm, 8.492 sr at 1064 nm; 8π/3 would be without depolarisation."""
    for wavelength, expected in ((355e-9, 8.506), (1064e-9, 8.492)):
        f11, _ = air_optics(wavelength, 288.15, 101_325.0).matrix.at(np.pi)
        assert 4 * np.pi / f11 == pytest.approx(expected, rel=7e-5, abs=0)


@pytest.mark.parametrize(
    ("wavelength", "temperature", "pressure", "words"),
    [
        (199e-9, 293.0, 1e5, ["wavelength 199 nm", "200 to 1700 nm"]),
        (1701e-9, 293.0, 1e5, ["wavelength 1701 nm", "200 to 1700 nm"]),
        (10.6e-6, 293.0, 1e5, ["wavelength 10600 nm", "200 to 1700 nm"]),
        (float("nan"), 293.0, 1e5, ["wavelength nan"]),
        (532e-9, 0.0, 1e5, ["temperature 0 K", "above 0"]),
        (532e-9, 293.0, -5.0, ["pressure -5 Pa", "above 0"]),
        (532e-9, float("inf"), 1e5, ["temperature inf K"]),
    ],
)
def test_outside_the_range_is_refused_by_name(wavelength, temperature, pressure, words):
    with pytest.raises(AirRangeError) as caught:
        air_optics(wavelength, temperature, pressure)
    for word in words:
        assert word in str(caught.value)


@pytest.mark.parametrize("wavelength", [200e-9, 1700e-9])
def test_ends_of_the_range_are_inside(wavelength):
    assert air_optics(wavelength, 293.15, 101_325.0).scattering > 0


def test_saturation_pressure_at_the_fixed_points_of_water():
    """Triple point 273.16 K and 611.657 Pa; normal boiling point 99.974 °C (both IAPWS)."""
    assert saturation_pressure(273.16) == pytest.approx(611.657, rel=1e-5, abs=0)
    assert saturation_pressure(273.15 + 99.974) == pytest.approx(101_325.0, rel=5e-4, abs=0)


def test_vapour_takes_the_place_of_dry_air():
    dry, moist = air_optics(532e-9, 293.15, 101_325.0), air_optics(532e-9, 293.15, 101_325.0, 0.5)
    assert moist.number == dry.number and dry.vapour == 0
    assert moist.vapour / moist.number == pytest.approx(0.5 * 2339.2 / 101_325, rel=1e-4, abs=0)
    assert moist.refractivity == dry.refractivity


@pytest.mark.parametrize(("celsius", "less"), [(20, 0.0066), (40, 0.021), (65, 0.071)])
def test_saturated_air_scatters_less(celsius, less):
    """Refractivities of vapour and air at the same state, 2.40e-4 and 2.78e-4 (Ciddor; Peck & Reeder), and no
    depolarisation: 0.71 of dry air's cross section."""
    kelvin = 273.15 + celsius
    dry, moist = air_optics(532e-9, kelvin, 101_325.0), air_optics(532e-9, kelvin, 101_325.0, 1.0)
    assert 1 - moist.scattering / dry.scattering == pytest.approx(less, rel=0.02, abs=0)
    vapour = vapour_refractivity(532e-9) * 101_325 / 1333 * 293.15 / 288.15
    ratio = (vapour / dry.refractivity) ** 2 * 1.0005 / dry.king_factor
    share = saturation_pressure(kelvin) / 101_325
    assert moist.scattering / dry.scattering == pytest.approx(1 - share * (1 - ratio), rel=1e-4, abs=0)


@settings(max_examples=60, deadline=None)
@given(
    wavelength=st.floats(200e-9, 1700e-9),
    temperature=st.floats(203, 338),
    pressure=st.floats(1e3, 120e3),
    humidity=st.floats(0, 1),
)
def test_moist_air_lies_between_dry_air_and_vapour(wavelength, temperature, pressure, humidity):
    dry = air_optics(wavelength, temperature, pressure)
    damp = air_optics(wavelength, temperature, pressure, humidity / 2)
    moist = air_optics(wavelength, temperature, pressure, humidity)
    assert 0.5 * dry.scattering < moist.scattering <= damp.scattering <= dry.scattering * (1 + 1e-15)
    assert 3e-4 * (1 - 1e-9) <= moist.depolarisation <= dry.depolarisation * (1 + 1e-9)
    assert 0 <= moist.vapour <= moist.number
    assert moist.scattering == pytest.approx(moist.cross_section * moist.number, rel=1e-12, abs=0)
    f11, f12 = moist.matrix.at(np.linspace(0, np.pi, 181))
    assert np.all(np.abs(f12) <= f11)


def test_mixed_matrix_is_the_sum_of_its_parts():
    """F11 at 90° of saturated air at 65 °C, from molecules of each kind by their scattering."""
    moist, dry = air_optics(532e-9, 338.15, 101_325.0, 1.0), air_optics(532e-9, 338.15, 101_325.0)
    share = 1 - (moist.number - moist.vapour) * dry.cross_section / moist.scattering
    # Vapour: depolarisation 3e-4, so F11(90°) = 0.75 Δ + 1 − Δ with Δ = (1 − 3e-4)/(1 + 1.5e-4).
    of_vapour = 1 - 0.25 * (1 - 3e-4) / (1 + 1.5e-4)
    expected = (1 - share) * float(dry.matrix.at(np.pi / 2)[0]) + share * of_vapour
    assert float(moist.matrix.at(np.pi / 2)[0]) == pytest.approx(expected, rel=1e-9, abs=0)


@pytest.mark.parametrize("humidity", [-0.01, 1.01, float("nan")])
def test_humidity_outside_its_range_is_refused(humidity):
    with pytest.raises(AirRangeError, match=r"relative humidity .* 0 to 1"):
        air_optics(532e-9, 293.15, 101_325.0, humidity)
