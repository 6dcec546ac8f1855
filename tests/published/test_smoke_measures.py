"""Readings of a load against the definitions of their measures and the published pairs of values."""

from __future__ import annotations

import math
from types import SimpleNamespace

import pytest
from published.printed import cases, of

from lasescatter.matter import Lognormal, Material, SizeMode
from lasescatter.medium.equivalents import equivalents
from lasescatter.medium.load import Concentration, concentration, extinction_of
from lasescatter.scene import Everywhere, Load, LoadReading
from lasescatter.units import parse_obscuration

AT = 550e-9
CASES = cases("smoke_measures.toml")
MASS = "mass"


def reading_of(inputs) -> LoadReading:
    return LoadReading(inputs["kind"], inputs["value"], AT, inputs.get("over"))


def read_by_another(reading: LoadReading, kind: str, over: float | None = None) -> float:
    """The load read again by another instrument at the same wavelength."""
    scale = extinction_of(reading)
    others = equivalents(Concentration(None, None, None, scale), lambda _: SimpleNamespace(extinction=1.0), (AT,))
    return next(other.value for other in others if other.kind == kind and other.over == over)


@pytest.mark.parametrize(
    "case", [c for c in CASES if c["quantity"] != MASS], ids=lambda c: f"{c['name']}: {c['quantity']}"
)
def test_readings(case):
    given, quantity = reading_of(case["inputs"]), case["quantity"]
    if quantity == "transmittance":
        found = math.exp(-extinction_of(given) * case["inputs"]["over"])
    elif quantity == "extinction":
        found = read_by_another(given, "extinction")
    elif quantity == "extinction per km less 0.0120":
        found = read_by_another(given, "extinction") * 1e3 - 0.0120
    elif quantity == "per cent per m":
        found = read_by_another(given, "obscuration", 1.0) * 100
    else:
        kinds = {"optical density": "optical_density", "decibels": "attenuation",
                 "meteorological optical range": "meteorological_optical_range"}  # fmt: skip
        found = read_by_another(given, kinds[quantity])
    assert found == of(case)


@pytest.mark.parametrize("case", [c for c in CASES if c["quantity"] == MASS], ids=lambda c: c["name"])
def test_what_an_extinction_weighs(case):
    """One particle of unit mass whose cross section is the specific extinction."""
    given = case["inputs"]
    load = Load("smoke", (SizeMode(Lognormal(1e-7, 2.0)),), Material(1.5 + 0j, 1.0), reading_of(given), Everywhere(),
                None, "smoke")  # fmt: skip
    optics = SimpleNamespace(extinction=given["mass_extinction"])
    amount = concentration(load, SimpleNamespace(dry_mass=1.0, mass=1.0, modes=load.modes), lambda _: optics, AT)
    assert amount.mass * 1e6 == of(case)


def test_the_foot_of_an_obscuration_is_that_of_the_set_point():
    assert parse_obscuration("8 %/ft") == (0.08, 0.3048)
