"""A load by mass through the whole program against computed droplets (mark K, an independent library)."""

from __future__ import annotations

import math

import pytest
from assessment.sites import LoadReading, bay, haze
from published.printed import cases, of

from lasescatter.assessment.assess import assess
from lasescatter.matter import Lognormal, Material, SizeMode


@pytest.mark.parametrize("case", cases("droplets.toml"), ids=lambda c: c["quantity"])
def test_droplets(case):
    given = case["inputs"]
    # Mass median to number median of a lognormal (textbook identity).
    median = given["mass_median_diameter"] / 2 * math.exp(-3 * math.log(given["geometric_sd"]) ** 2)
    load = haze(
        modes=(SizeMode(Lognormal(median, given["geometric_sd"])),),
        material=Material(complex(*given["index"]), given["density"]),
        reading=LoadReading("mass", 1e-6, basis="dry"),
    )
    found = next(c for c in assess(bay(loads=(load,))).components if c.name == "test haze")
    ours = {"mass extinction": found.mass_extinction / 1e3, "asymmetry": found.asymmetry}
    assert ours[case["quantity"]] == of(case)
