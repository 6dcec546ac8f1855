"""Other particles on the nodes of one integral give what an integral of their own gives."""

from __future__ import annotations

import numpy as np
import pytest
from exposure.media import PLAIN, component, dipole, isotropic, leg, linear, mixture
from numpy.testing import assert_allclose

from lasescatter.exposure.exchange import exchange
from lasescatter.exposure.fraction import greatest_over_fraction
from lasescatter.exposure.scattered import scattered
from lasescatter.medium.profiles import UprightBox

LEGS = leg([0, 0, 0], [6, 0, 0]), leg([6, 0, 0], [6, 4, 0], number=2, before=6.0, reflected=0.9)
POINTS = np.array([[2.0, 1.5, 0.4], [5.0, -1.0, 0.0], [-2.0, 0.5, 0.3], [7.5, 5.0, 1.0]])
REACHES = np.array([0.25, 0.1, 0.0, 0.4])
BOX = UprightBox(np.array([1.0, -2.0, -1.0]), np.array([7.0, 3.0, 1.0]))


@pytest.mark.parametrize("steady", [False, True])
@pytest.mark.parametrize("extinction", [0.05, 1.5])
@pytest.mark.parametrize("swings", [(PLAIN, PLAIN), (linear([0.0, 0.0, 1.0]), linear([0.0, 0.0, 1.0]))])
def test_exchange_agrees_with_an_integral_of_its_own(steady, extinction, swings):
    air = component(dipole(), 1e-3, 1e-3, steady=True, name="air")
    rest = component(isotropic(), 0.02, 0.03, BOX, name="rest")
    first = component(dipole(), 0.04, 0.06, BOX, steady)
    other = component(isotropic(), 0.8 * extinction, extinction, BOX, steady)
    least = np.zeros((2, len(POINTS)))
    lights = scattered(LEGS, swings, mixture(air, first, rest), POINTS, least, REACHES)
    found = exchange(lights, mixture(air, first, rest), 1, POINTS, REACHES).light(other)
    own = scattered(LEGS, swings, mixture(air, other, rest), POINTS, least, REACHES)
    expected = greatest_over_fraction(own, mixture(air, other, rest), len(POINTS))
    assert_allclose(found.compared, expected.irradiance, rtol=1e-5, atol=0)
    assert_allclose(found.within_reach, sum(light.light.within_reach[1] for light in own), rtol=1e-4, atol=0)


def test_whole_load_is_worst_where_light_rises_with_it():
    """The shortcut that seeks no fraction agrees with trial at the ladder's fractions."""
    for extinction in (0.01, 0.1, 0.3, 1.0, 4.0):
        medium = mixture(
            component(dipole(), 1e-3, 1e-3, steady=True), component(isotropic(), extinction, extinction, BOX)
        )
        lights = scattered(LEGS, (PLAIN, PLAIN), medium, POINTS, np.zeros((2, len(POINTS))))
        found = greatest_over_fraction(lights, medium, len(POINTS))
        for f in np.linspace(0.02, 1.0, 50):
            thinner = mixture(medium.components[0], component(isotropic(), f * extinction, f * extinction, BOX))
            there = scattered(LEGS, (PLAIN, PLAIN), thinner, POINTS, np.zeros((2, len(POINTS))))
            light = sum(part.light.by_component.sum(axis=0) for part in there)
            assert (light <= found.irradiance * (1 + 1e-5)).all()
