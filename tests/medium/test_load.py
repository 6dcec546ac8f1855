"""Loads: each reading to an extinction coefficient, to an amount, and what the result rests on."""

from __future__ import annotations

import math
from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest

from lasescatter.matter import (
    ENTERED,
    HenyeyGreenstein,
    IndexTable,
    Lognormal,
    Material,
    MeasuredMatrix,
    SizeMode,
    SizeTable,
)
from lasescatter.medium import load as loads
from lasescatter.medium.load import assumptions_of, concentration, extinction_of
from lasescatter.optics.growth import as_they_float
from lasescatter.optics.sizes import particle_optics
from lasescatter.scene import Box, Everywhere, Load, LoadReading

# Cross sections of an invented drop: 2 um² at 550 nm, 3 um² at 532 nm.
SECTIONS = {550e-9: 2e-12, 532e-9: 3e-12}
MODES = (SizeMode(Lognormal(0.5e-6, 1.5)),)
WET = SimpleNamespace(dry_mass=4e-15, mass=6e-15, modes=MODES)
UNWEIGHED = SimpleNamespace(dry_mass=None, mass=None, modes=MODES)
HAZE = Load("haze", MODES, Material(1.4 + 0j, 1000.0), LoadReading("number", 1e9),
            Everywhere(), None, "haze")  # fmt: skip
VEIL = replace(HAZE, modes=(), material=None, stand_in=HenyeyGreenstein(0.7), albedo=1.0)


def optics_at(wavelength):
    return SimpleNamespace(extinction=SECTIONS[wavelength], scattering=0.5 * SECTIONS[wavelength])


def amount_of(reading, floating=WET, load=HAZE):
    return concentration(replace(load, reading=reading), floating, optics_at, 532e-9)


ALIKE = (
    LoadReading("extinction", 0.1, 550e-9),
    LoadReading("meteorological_optical_range", math.log(20) / 0.1, 550e-9),
    LoadReading("visual_range", math.log(50) / 0.1, 550e-9),
    LoadReading("obscuration", 1 - math.exp(-0.1), 550e-9, 1.0),
    LoadReading("obscuration", 1 - math.exp(-0.03048), 550e-9, 0.3048),
    LoadReading("optical_density", 0.1 * math.log10(math.e), 550e-9),
    LoadReading("attenuation", 1.0 * math.log10(math.e), 550e-9),
    LoadReading("transmittance", math.exp(-0.3), 550e-9, 3.0),
)


@pytest.mark.parametrize("reading", ALIKE, ids=lambda reading: f"{reading.kind} {reading.over}")
def test_readings_of_one_load_agree(reading):
    """Beer–Lambert: what is left over L is exp(−K L)."""
    assert extinction_of(reading) == pytest.approx(0.1, rel=1e-14, abs=0)
    assert amount_of(reading).number == pytest.approx(0.1 / 2e-12, rel=1e-14, abs=0)


@pytest.mark.parametrize("share", [1e-9, 1e-6, 0.3, 1 - 1e-9])
def test_small_and_large_shares_lose_no_digits(share):
    """−ln(1 − s) by its series where s is small: s + s²/2 + s³/3."""
    found = extinction_of(LoadReading("obscuration", share, 550e-9, 2.0))
    expected = (share + share**2 / 2 + share**3 / 3) / 2 if share < 1e-3 else -math.log(1 - share) / 2
    assert found == pytest.approx(expected, rel=1e-14, abs=0)


def test_a_length_must_be_there_where_it_is_due():
    with pytest.raises(ValueError, match="length"):
        extinction_of(LoadReading("transmittance", 0.5, 550e-9))


def test_mass_and_number_are_no_extinction():
    assert extinction_of(LoadReading("mass", 1e-6, basis="dry")) is None
    assert extinction_of(LoadReading("number", 1e9)) is None


def test_amounts():
    by_number = amount_of(LoadReading("number", 1e9))
    assert (by_number.number, by_number.extinction_scale) == (1e9, 1e9)
    assert (by_number.dry_mass, by_number.mass) == (pytest.approx(4e-6, rel=1e-15), pytest.approx(6e-6, rel=1e-15))
    assert by_number.extinction(optics_at(532e-9)) == pytest.approx(3e-3, rel=1e-15, abs=0)
    assert by_number.scattering(optics_at(532e-9)) == pytest.approx(1.5e-3, rel=1e-15, abs=0)


def test_a_dry_mass_is_more_than_the_same_mass_with_water():
    dry = amount_of(LoadReading("mass", 12e-6, basis="dry"))
    ambient = amount_of(LoadReading("mass", 12e-6, basis="ambient"))
    assert dry.dry_mass == pytest.approx(12e-6, rel=1e-15) and ambient.mass == pytest.approx(12e-6, rel=1e-15)
    assert dry.number / ambient.number == pytest.approx(1.5, rel=1e-14)


def test_a_reading_is_carried_through_the_particles_own_spectrum():
    amount = amount_of(LoadReading("extinction", 0.1, 550e-9))
    assert amount.extinction(optics_at(532e-9)) == pytest.approx(0.15, rel=1e-14, abs=0)


def test_an_extinction_without_wavelength_is_taken_at_the_sites_own():
    assert amount_of(LoadReading("extinction", 0.3)).number == pytest.approx(1e11, rel=1e-14, abs=0)


def test_without_density_there_is_no_mass():
    amount = amount_of(LoadReading("number", 1e9), UNWEIGHED)
    assert amount.mass is None and amount.dry_mass is None
    with pytest.raises(ValueError, match="density"):
        amount_of(LoadReading("mass", 1e-6, basis="dry"), UNWEIGHED)


def test_a_stand_in_has_the_extinction_that_was_read_and_nothing_else():
    amount = amount_of(LoadReading("transmittance", math.exp(-0.6), 700e-9, 2.0), None, VEIL)
    assert amount.extinction_scale == pytest.approx(0.3, rel=1e-14) and amount.known_at == 700e-9
    assert amount.number is amount.mass is amount.dry_mass is None
    for kind in ("mass", "number"):
        with pytest.raises(ValueError, match=f"optical reading, not a {kind}"):
            amount_of(LoadReading(kind, 1.0), None, VEIL)


# --- Assumptions

TABLE = IndexTable((4e-7, 7e-7), (1.4, 1.4), (0.0, 0.0), (False, False), "t", "t")
MATRIX = MeasuredMatrix((0.0, math.pi), (1.0, 1.0), None, None, None, 1.0, "m.csv")
GREEN = LoadReading("extinction", 0.1, 532e-9)


def rests_on(load, wavelengths=frozenset({532e-9})):
    return set(assumptions_of((load,), set(wavelengths)))


def test_without_loads_the_air_is_taken_as_clean():
    assert assumptions_of((), {532e-9}) == (loads.CLEAN_AIR,)
    assert loads.CLEAN_AIR in rests_on(replace(HAZE, region=Box((0, 0, 0), (1, 1, 1))))
    assert loads.CLEAN_AIR not in rests_on(HAZE)


@pytest.mark.parametrize("reading", ALIKE, ids=lambda reading: reading.kind)
def test_forward_light_counts_for_what_an_instrument_reads(reading):
    assert (loads.FORWARD_LIGHT in rests_on(replace(HAZE, reading=reading))) == (reading.kind != "visual_range")
    assert (loads.AT_550 in rests_on(replace(HAZE, reading=reading))) == reading.kind.endswith("_range")


def test_masses_and_numbers_say_nothing_of_forward_light():
    assert loads.FORWARD_LIGHT not in rests_on(HAZE)


def test_one_index_counts_where_a_constant_serves_several_wavelengths():
    two = {532e-9, 1064e-9}
    assert loads.ONE_INDEX in rests_on(HAZE, two) and loads.ONE_INDEX not in rests_on(HAZE)
    assert loads.ONE_INDEX in rests_on(replace(HAZE, reading=replace(GREEN, at=633e-9)))
    assert loads.ONE_INDEX not in rests_on(replace(HAZE, material=Material(TABLE, None)), two)
    mixed = (SizeMode(Lognormal(1e-7, 2.0), 1.0, Material(1.5 + 0j, None)),)
    assert loads.ONE_INDEX in rests_on(replace(HAZE, modes=mixed, material=Material(TABLE, None)), two)


def test_spheres_and_stand_ins():
    assert {loads.SPHERES, loads.OWN_PARTICLES} <= rests_on(HAZE)
    assert {loads.SPHERES, loads.KINDS} <= rests_on(replace(HAZE, kind="glycol haze"))
    veil = rests_on(replace(VEIL, reading=GREEN))
    assert loads.STAND_IN in veil and not {loads.SPHERES, loads.NO_F12, loads.ONE_MATRIX} & veil
    dust = rests_on(replace(VEIL, stand_in=MATRIX, reading=GREEN), {532e-9, 1064e-9})
    assert {loads.NO_F12, loads.ONE_MATRIX, loads.OWN_PARTICLES} <= dust and loads.SPHERES not in dust
    whole = replace(VEIL, stand_in=replace(MATRIX, f12=(0.0, 0.0)), reading=GREEN)
    assert loads.NO_F12 not in rests_on(whole)


def test_a_table_of_sizes_ends_where_it_ends():
    cut = (SizeMode(SizeTable((1e-7, 1e-6), (0.4, 0.4))),)
    assert loads.CUT_SIZES in rests_on(replace(HAZE, modes=cut)) and loads.CUT_SIZES not in rests_on(HAZE)


def test_what_errs_is_told_once_for_several_loads():
    found = assumptions_of((HAZE, replace(HAZE, name="second"), replace(VEIL, reading=GREEN)), {532e-9})
    assert len(found) == len(set(found)) and {loads.SPHERES, loads.STAND_IN, loads.PUFFS} <= set(found)
    assert ENTERED.factor == 1.0


def test_a_number_counts_what_lies_between_the_cuts():
    """An optical counter sees particles above its threshold alone: the same sizes as a table give the same light."""
    median, sd, smallest = 0.05e-6, 1.8, 0.15e-6
    cut = Lognormal(median, sd, smallest)
    u = np.linspace(math.log(smallest), math.log(median) + 6 * math.log(sd), 2001)
    heights = np.exp(-0.5 * ((u - math.log(median)) / math.log(sd)) ** 2)
    heights /= np.trapezoid(heights, u)
    table = SizeTable(tuple(np.exp(u).tolist()), tuple(heights.tolist()))
    found = []
    for shape in (cut, table):
        modes, material = (SizeMode(shape),), Material(1.43 + 0j, 1000.0)
        load = Load("drops", modes, material, LoadReading("number", 1e11), Everywhere(), None, "particles")
        floating = as_they_float(modes, material, 0.0, 293.15)
        amount = concentration(load, floating, lambda at, modes=modes: particle_optics(modes, 1.43 + 0j, at), 532e-9)
        assert amount.number == pytest.approx(1e11, rel=1e-12, abs=0)
        found.append((amount.extinction(particle_optics(modes, 1.43 + 0j, 532e-9)), amount.mass))
    assert found[0] == pytest.approx(found[1], rel=2e-3, abs=0)
