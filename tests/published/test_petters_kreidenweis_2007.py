"""Growth in moist air against values of the kappa-Köhler law of Petters & Kreidenweis (2007)."""

from __future__ import annotations

import pytest
from published.printed import cases, of
from scipy.optimize import brentq

from lasescatter.optics.growth import growth_factor, saturation_ratio

CASES = cases("petters_kreidenweis_2007.toml")


def critical(diameter, kappa, temperature):
    """Supersaturation [%] and diameter [nm] at the maximum of the balance: where its slope is 0."""

    def slope(growth):
        step = 1e-5 * growth
        return saturation_ratio(growth + step, diameter, kappa, temperature) - saturation_ratio(
            growth - step, diameter, kappa, temperature
        )

    growth = brentq(slope, 1.01, 60.0, xtol=1e-10)
    return 100 * (saturation_ratio(growth, diameter, kappa, temperature) - 1), 1e9 * diameter * growth


@pytest.mark.parametrize("case", CASES, ids=lambda c: f"{c['quantity']}, {c['name']}")
def test_value(case):
    given = case["inputs"]
    if case["quantity"] == "growth factor without curvature":
        found = growth_factor(1e-7, given["kappa"], given["humidity"], 298.15, curvature=False)
    elif case["quantity"] == "growth factor":
        found = growth_factor(given["diameter"], given["kappa"], given["humidity"], given["temperature"])
    else:
        found = critical(given["diameter"], given["kappa"], given["temperature"])[case["unit"] == "nm"]
    assert found == of(case)
