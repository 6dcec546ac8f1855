"""The U.S. Standard Atmosphere 1976 against a table and, all the way, against an independent library."""

from __future__ import annotations

import numpy as np
import pytest
from published.printed import cases, of

from lasescatter.standard_atmosphere import HIGHEST, LOWEST, at_altitude

CASES = cases("standard_atmosphere_1976.toml")


@pytest.mark.parametrize("case", CASES, ids=lambda c: f"{c['name']}, {c['quantity']}")
def test_table(case):
    temperature, pressure, density = at_altitude(case["inputs"]["altitude"])
    found = {"K": temperature, "Pa": pressure, "1": density}[case["unit"]]
    assert float(found) == of(case)


def test_against_a_library():
    """ambiance 1.3.1 up to 81 km, where it ends; it rounds the pressures at the layers' bases: 9.1e-6 apart at most."""
    from ambiance import Atmosphere

    altitude = np.linspace(LOWEST, 81_000.0, 3001)
    library, sea_level = Atmosphere(altitude), Atmosphere(0.0)
    temperature, pressure, density = at_altitude(altitude)
    np.testing.assert_allclose(temperature, library.temperature, rtol=1e-12)
    np.testing.assert_allclose(pressure, library.pressure, rtol=1e-5)
    np.testing.assert_allclose(density, library.density / sea_level.density, rtol=1e-5)


def test_top_of_the_model():
    """At 86 km the document prints 186.946 K and 0.37338 Pa (from memory, so within 1e-4)."""
    temperature, pressure, _ = at_altitude(HIGHEST)
    assert float(temperature) == pytest.approx(186.946, rel=1e-4, abs=0)
    assert float(pressure) == pytest.approx(0.37338, rel=1e-4, abs=0)


@pytest.mark.parametrize("altitude", [LOWEST - 1, HIGHEST + 1, float("nan")])
def test_beyond_the_model_is_refused(altitude):
    with pytest.raises(ValueError, match="-5 to 86 km"):
        at_altitude(altitude)
