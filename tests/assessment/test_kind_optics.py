"""A kind by itself: against published spheres, over its sizes, outside its data, and for stated loads."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from lasescatter.assessment.kind_optics import kind_optics, reach_of
from lasescatter.matter import ENTERED, Growth, IndexTable, Kind, Material, SingleSize, SizeMode, SizeSpan
from lasescatter.problems import SiteError
from lasescatter.scene import Air, LoadReading

WAVELENGTH = 628.3185307179586e-9
"""So that a radius of 1 µm has the size parameter 10."""
SALT = IndexTable((500e-9, 550e-9, 700e-9), (1.5, 1.5, 1.5), (0.0, 0.0, 0.0), (True, False, False), "salt", "invented")
WATER = IndexTable((400e-9, 600e-9), (1.33, 1.33), (0.0, 0.0), (False, False), "water", "invented")
GROWTH = Growth(1.0, (), WATER, "invented")


def kind(
    radius: float, index: complex | IndexTable, span: SizeSpan | None = None, growth: Growth | None = None
) -> Kind:
    return Kind(
        "spheres", (), "Spheres", (SizeMode(SingleSize(radius)),), Material(index, 2000.0, growth), ENTERED, ENTERED,
        span, (), (), "test",
    )  # fmt: skip


def test_values_of_a_published_sphere() -> None:
    """Wiscombe, NCAR/TN-140+STR (1979, revised 1996), printed output: m = 1.5, x = 10 and m = 1.33 + 1e-5i, x = 100."""
    for x, index, q_ext, q_sca, g, digits in (
        (10.0, 1.5 + 0j, 2.881999, 2.881999, 0.742913, 5e-7),
        (100.0, 1.33 + 1e-5j, 2.101321, 2.096594, 0.868959, 5e-7),
    ):
        radius = x * WAVELENGTH / (2 * math.pi)
        (at,) = kind_optics(kind(radius, index), (WAVELENGTH,)).wavelengths
        assert at.usual is not None and at.gap == ""
        area = math.pi * radius**2
        assert at.usual.extinction == pytest.approx(q_ext * area, rel=digits, abs=0)
        assert at.usual.albedo == pytest.approx(q_sca / q_ext, rel=2 * digits, abs=0)
        assert at.usual.asymmetry == pytest.approx(g, rel=2 * digits, abs=0)
        # A sphere's extinction per mass: 3 Q / (4 rho r).
        assert at.usual.mass_extinction_dry == pytest.approx(3 * q_ext / (4 * 2000 * radius), rel=digits, abs=0)
        assert at.usual.effective_radius == pytest.approx(radius, rel=1e-12, abs=0)


def test_small_spheres_scatter_as_dipoles() -> None:
    """Rayleigh's limit (Bohren & Huffman 1983, section 5.2): F11 = 3(1 + cos²)/4, all of it polarized at 90 deg."""
    (at,) = kind_optics(kind(1e-9, 1.5 + 0j), (WAVELENGTH,)).wavelengths
    assert at.usual is not None
    for angle, value in zip((30, 90, 150), at.usual.phase, strict=True):
        dipole = 0.75 * (1 + math.cos(math.radians(angle)) ** 2) / (4 * math.pi)
        assert value == pytest.approx(dipole, rel=1e-3, abs=0)
    assert at.usual.polarization == pytest.approx(1.0, rel=1e-3, abs=0)


def test_every_radius_moves_with_the_size() -> None:
    span = SizeSpan("diameter", 2e-6, 1e-6, 3e-6, "invented")
    (at,) = kind_optics(kind(1e-6, 1.5 + 0j, span), (WAVELENGTH,)).wavelengths
    assert [size.size for size in at.sizes] == [1e-6, 2e-6, 3e-6]
    for size in at.sizes:
        (alone,) = kind_optics(kind(size.size / 2, 1.5 + 0j), (WAVELENGTH,)).wavelengths
        assert alone.usual is not None
        assert size.values.extinction == pytest.approx(alone.usual.extinction, rel=1e-9, abs=0)
        assert size.values.phase == pytest.approx(alone.usual.phase, rel=1e-2, abs=0)
        assert size.values.effective_radius == pytest.approx(size.size / 2, rel=1e-9, abs=0)


def test_outside_the_index_nothing_is_told() -> None:
    found = kind_optics(kind(1e-6, SALT), (600e-9, 900e-9, 520e-9), (LoadReading("extinction", 0.1, 900e-9),))
    inside, outside, weak = found.wavelengths
    assert inside.usual is not None and inside.trust.factor == 1
    assert outside.usual is None and outside.phase == () and "500 nm to 700 nm" in outside.gap
    # Between 500 and 550 nm one node has not been seen in its source.
    assert weak.trust.mark == "weak" and weak.trust.factor == 3
    (load,) = found.loads
    assert load.equivalents == () and "900 nm" in load.gap


def test_readings_of_a_load() -> None:
    """Lambert's law and Koschmieder's at 5 % (ln 20 = 2.996, as WMO-No. 8 defines the range)."""
    found = kind_optics(kind(1e-6, 1.5 + 0j), (WAVELENGTH,), (LoadReading("mass", 1e-5, basis="dry"),))
    (load,) = found.loads
    assert found.wavelengths[0].usual is not None
    extinction = 1e-5 * (found.wavelengths[0].usual.mass_extinction_dry or 0)
    readings = {(reading.kind, reading.over): reading.value for reading in load.equivalents}
    assert readings["extinction", None] == pytest.approx(extinction, rel=1e-9, abs=0)
    assert readings["transmittance", 10.0] == pytest.approx(math.exp(-10 * extinction), rel=1e-9, abs=0)
    assert readings["optical_density", None] == pytest.approx(extinction / math.log(10), rel=1e-9, abs=0)
    (visible,) = kind_optics(kind(1e-6, 1.5 + 0j), (550e-9,)).wavelengths
    assert visible.usual is not None
    by_eye = 1e-5 * (visible.usual.mass_extinction_dry or 0)
    assert readings["meteorological_optical_range", None] == pytest.approx(2.996 / by_eye, rel=3e-4, abs=0)


def test_moist_air_makes_soluble_particles_grow() -> None:
    grown = kind(1e-6, SALT, growth=GROWTH)
    dry = kind_optics(grown, (550e-9,))
    wet = kind_optics(grown, (550e-9,), air=Air(relative_humidity=0.8))
    # kappa 1, curvature next to nothing at 1 µm: growth factor³ = 1 + a/(1 − a) (Petters & Kreidenweis 2007, eq. 6).
    assert dry.growth_factor == 1
    assert wet.growth_factor == pytest.approx((1 + 0.8 / 0.2) ** (1 / 3), rel=3e-3, abs=0)
    one, other = dry.wavelengths[0].usual, wet.wavelengths[0].usual
    assert one is not None and other is not None
    assert one.mass_extinction == one.mass_extinction_dry and (other.mass_extinction or 0) > 0
    assert other.index.real == pytest.approx(0.2 * 1.5 + 0.8 * 1.33, rel=1e-3, abs=0)
    ratio = (other.mass_extinction_dry or 0) / (other.mass_extinction or 1)
    # Four fifths of the drop by volume are water.
    assert ratio == pytest.approx((0.2 * 2000 + 0.8 * 1000) / (0.2 * 2000), rel=5e-3, abs=0)
    with pytest.raises(SiteError, match=r"99\.5 %"):
        kind_optics(grown, (550e-9,), air=Air(relative_humidity=0.995))


def test_reach_is_what_all_tables_share() -> None:
    assert reach_of(kind(1e-6, 1.5 + 0j)) is None
    alone = reach_of(kind(1e-6, SALT))
    assert alone is not None and (alone.low, alone.high, alone.weak) == (500e-9, 700e-9, ((500e-9, 550e-9),))
    moist = reach_of(kind(1e-6, SALT, growth=GROWTH))
    assert moist is not None and (moist.low, moist.high) == (500e-9, 600e-9)
    both = replace(SALT, unconfirmed=(True, True, False))
    joined = reach_of(kind(1e-6, both))
    assert joined is not None and joined.weak == ((500e-9, 700e-9),)
