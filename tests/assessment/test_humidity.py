"""Air whose humidity nobody stated, while particles take up water: dry is the low side, and nothing is below."""

from __future__ import annotations

import pytest
from assessment.sites import LoadReading, bay, beam, haze, limit, line, observer, replace

from lasescatter.assessment.assess import assess
from lasescatter.matter import Growth, IndexTable, Material
from lasescatter.scene import Air, InputLine

WATER = IndexTable((400e-9, 800e-9), (1.34, 1.33), (1e-9, 1e-7), (False, False), "water", "invented")
SILENT = InputLine("air.relative_humidity", "", "0", stated=False)
SAID = InputLine("air.relative_humidity", "0 %", "0")
NAME = "The air is taken as dry although its humidity is not stated"
REASON = 'the humidity of the air is not stated and "test haze" takes up water: state air.relative_humidity'
MASS, NUMBER = LoadReading("mass", 1e-7, basis="dry"), LoadReading("number", 1e8)
OPTICAL = LoadReading("extinction", 0.001, 532e-9)


def salt(reading, kappa=0.6):
    return haze(material=Material(1.5 + 0j, 1770.0, Growth(kappa, (), WATER, "invented")), reading=reading)


def site(reading, entry, **changes):
    values = {"loads": (salt(reading),), "inputs": (entry,), **changes}
    return assess(bay(**values))


@pytest.mark.parametrize(("reading", "open_"), [(MASS, True), (NUMBER, True), (OPTICAL, False)])
def test_by_mass_or_number_it_is_not_established_and_optically_an_assumption(reading, open_):
    silent, said = site(reading, SILENT), site(reading, SAID)
    assert NAME in {entry.name for entry in silent.assumptions}
    assert NAME not in {entry.name for entry in said.assumptions}
    assert said.verdict == "below limit"
    assert silent.verdict == ("not established" if open_ else "below limit")
    assert (REASON in silent.observers[0].reasons) == open_
    assert all((REASON in hazard.reasons) == open_ for hazard in silent.observers[0].hazards)


def test_above_stands():
    found = site(MASS, SILENT, observers=(observer(position=(4.0, 0.001, 1.2)),))
    assert found.verdict == "above limit"


@pytest.mark.parametrize("material", [Material(1.5 + 0j, 1770.0), salt(MASS, kappa=0.0).material])
def test_particles_that_take_up_no_water_ask_for_nothing(material):
    found = site(MASS, SILENT, loads=(replace(salt(MASS), material=material),))
    assert found.verdict == "below limit"
    assert NAME not in {entry.name for entry in found.assumptions}


def test_a_mode_of_its_own_material_asks_too():
    load = salt(MASS)
    (mode,) = load.modes
    own = replace(load, modes=(replace(mode, material=load.material),), material=Material(1.5 + 0j, 1770.0))
    assert site(MASS, SILENT, loads=(own,)).verdict == "not established"


def test_dry_is_the_low_side():
    """At 90 % a kappa of 0.6 makes particles 1.85 times as wide (Petters & Kreidenweis 2007: kappa 0.61, 1.8653)."""
    dry = site(MASS, SAID).observers[0].comparisons[0]
    moist = site(MASS, SAID, air=Air(relative_humidity=0.9)).observers[0].comparisons[0]
    assert dict(moist.by_origin)["scattered"] > 1.5 * dict(dry.by_origin)["scattered"]


def test_only_lines_that_the_load_acts_on_are_held():
    """Outside its data the load is left out and says so itself."""
    far = replace(line(name="far", key="far", wavelength=1550e-9))
    path = beam((0.0, 0.0, 1.2), (9.0, 0.0, 1.2), lines=(bay().beams[0].lines[0], far), key="b")
    front = limit(name="front", tissue="cornea and lens", wavelengths=(1.4e-6, 1e-3), value=1000.0)
    visible = replace(WATER, name="invented salt")
    load = replace(salt(MASS), material=replace(salt(MASS).material, index=visible))
    found = site(MASS, SILENT, beams=(path,), limits=(*bay().limits, front), loads=(load,))
    reasons = {hazard.hazard: hazard.reasons for hazard in found.observers[0].hazards}
    assert REASON in reasons["retina thermal"] and REASON not in reasons["cornea and lens"]
