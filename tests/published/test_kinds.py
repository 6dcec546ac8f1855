"""Kinds of workplaces and fogs against tables of an independent library, code data and a measurement.

Tolerances of the computed tables: half a unit of their last digit, which has two or three digits, and 0.3 % for the
sums over sizes on either side; asymmetry and albedo 0.003, where single resonances of large drops show.
"""

from __future__ import annotations

import math

import pytest
from published.kind_optics import kind_of, mass_extinction, optics_of
from published.printed import cases, half_unit, of

from lasescatter.matter import Lognormal

TABLES = cases("particle_kinds.toml")
EXTINCTION, SHAPE = 3e-3, 3e-3


def name_of(case: dict) -> str:
    given = case["inputs"]
    at = f" {given['wavelength'] * 1e9:.0f} nm" if "wavelength" in given else ""
    return f"{case['name']}{at} {case['quantity']}"


@pytest.mark.parametrize("case", [case for case in TABLES if "wavelength" in case["inputs"]], ids=name_of)
def test_computed_and_measured_optics(case):
    given = case["inputs"]
    kind = kind_of(given["kind"])
    shape, density = kind.modes[0].shape, kind.material.density
    median = None
    if "mass_median_diameter" in given:
        assert isinstance(shape, Lognormal)
        # Mass median to number median of a lognormal (textbook identity).
        median = given["mass_median_diameter"] / 2 * math.exp(-3 * math.log(shape.geometric_sd) ** 2)
    optics = optics_of(kind.name, 0.0, given["wavelength"], median)
    value, digit = float(case["printed"]), half_unit(case["printed"])
    assert density is not None
    if case["quantity"] == "measured mass extinction":
        assert mass_extinction(optics, density) / 1e3 == of(case)
    elif case["quantity"] == "mass extinction":
        assert mass_extinction(optics, density) / 1e3 == pytest.approx(value, rel=0, abs=EXTINCTION * value + digit)
    else:
        ours = {"albedo": optics.albedo, "asymmetry": optics.asymmetry}[case["quantity"]]
        assert ours == pytest.approx(value, rel=0, abs=SHAPE + digit)


@pytest.mark.parametrize("case", [case for case in TABLES if case["quantity"] == "effective radius"], ids=name_of)
def test_effective_radius_of_fogs(case):
    radius = optics_of(case["inputs"]["kind"], 0.0, 0.55e-6).effective_radius
    assert radius is not None and radius * 1e6 == of(case)


@pytest.mark.parametrize("case", cases("lowtran_7_fogs.toml"), ids=name_of)
def test_fogs_of_lowtran(case):
    """The parameters are from memory: this is what vouches for their shape.

    Extinction within 1 % and asymmetry within 0.0045: the code's tables date from size grids of 1979.
    """
    given = case["inputs"]
    optics = optics_of(given["kind"], 0.0, given["wavelength"])
    if case["quantity"] == "asymmetry":
        assert optics.asymmetry == pytest.approx(float(case["printed"]), rel=0, abs=4.5e-3)
    else:
        ratio = optics.extinction / optics_of(given["kind"], 0.0, 0.55e-6).extinction
        assert ratio == pytest.approx(float(case["printed"]), rel=1e-2, abs=0)
