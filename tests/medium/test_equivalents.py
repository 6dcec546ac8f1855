"""Equivalent readings: each read back gives the load it came from."""

from __future__ import annotations

from dataclasses import replace
from types import SimpleNamespace

import pytest

from lasescatter.matter import HenyeyGreenstein, Lognormal, Material, SizeMode
from lasescatter.medium.equivalents import equivalents
from lasescatter.medium.load import Concentration, concentration
from lasescatter.optics.indices import IndexRangeError
from lasescatter.scene import Everywhere, Load, LoadReading

SECTIONS = {550e-9: 2e-12, 532e-9: 3e-12, 1064e-9: 1e-12}
WET = SimpleNamespace(dry_mass=4e-15, mass=6e-15, modes=(SizeMode(Lognormal(0.5e-6, 1.5)),))
HAZE = Load("haze", (SizeMode(Lognormal(0.5e-6, 1.5)),), Material(1.4 + 0j, 1000.0), LoadReading("number", 5e10),
            Everywhere(), None, "haze")  # fmt: skip
AMOUNT = Concentration(5e10, 2e-4, 3e-4, 5e10)


def optics_at(wavelength):
    return SimpleNamespace(extinction=SECTIONS[wavelength])


def without_550(wavelength):
    if wavelength == 550e-9:
        raise IndexRangeError("no data at 550 nm")
    return optics_at(wavelength)


READINGS = equivalents(AMOUNT, optics_at, (532e-9, 1064e-9, 532e-9))


@pytest.mark.parametrize("reading", READINGS, ids=lambda r: f"{r.kind} {r.basis or r.over} at {r.at}")
def test_each_reading_leads_back_to_the_load(reading):
    amount = concentration(replace(HAZE, reading=reading), WET, optics_at, 532e-9)
    assert amount.number == pytest.approx(5e10, rel=1e-12, abs=0)


def test_every_way_of_measuring_is_there():
    kinds = [(reading.kind, reading.at, reading.over) for reading in READINGS]
    assert len(kinds) == 3 + 2 * 7 + 2 and len(set(READINGS)) == len(READINGS)
    assert [reading.basis for reading in READINGS[:3]] == ["dry", "ambient", None]
    for wavelength in (532e-9, 1064e-9):
        assert [(kind, over) for kind, at, over in kinds if at == wavelength] == [
            ("extinction", None), ("obscuration", 1.0), ("obscuration", 0.3048), ("optical_density", None),
            ("attenuation", None), ("transmittance", 1.0), ("transmittance", 10.0),
        ]  # fmt: skip
    assert kinds[-2:] == [("meteorological_optical_range", 550e-9, None), ("visual_range", 550e-9, None)]


def test_ranges_are_left_out_where_550_nm_is_outside_the_data():
    kinds = {reading.kind for reading in equivalents(AMOUNT, without_550, (532e-9,))}
    assert not {"meteorological_optical_range", "visual_range"} & kinds and "extinction" in kinds


def test_masses_and_numbers_only_where_they_are_known():
    kinds = [reading.kind for reading in equivalents(Concentration(5e10, None, None, 5e10), optics_at, (532e-9,))]
    assert kinds[0] == "number" and "mass" not in kinds


def test_of_a_stand_in_only_what_lies_at_its_own_wavelength():
    veil = replace(HAZE, modes=(), material=None, stand_in=HenyeyGreenstein(0.7), albedo=1.0,
                   reading=LoadReading("extinction", 0.1, 532e-9))  # fmt: skip
    nominal = lambda wavelength: SimpleNamespace(extinction=1.0)  # noqa: E731
    amount = concentration(veil, None, nominal, 532e-9)
    readings = equivalents(amount, nominal, (532e-9, 533e-9, 1064e-9))
    assert {reading.at for reading in readings} == {532e-9, 533e-9} and len(readings) == 14
    at_550 = concentration(replace(veil, reading=LoadReading("visual_range", 39.12, 550e-9)), None, nominal, 532e-9)
    kinds = [reading.kind for reading in equivalents(at_550, nominal, (532e-9,))]
    assert kinds == ["meteorological_optical_range", "visual_range"]
