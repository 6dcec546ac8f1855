"""The depolarised Rayleigh matrix of Hansen & Travis (1974)."""

from __future__ import annotations

import numpy as np
import pytest
from published.printed import cases, of, printed

from lasescatter.optics.air import air_optics, rayleigh_elements

CASES = cases("hansen_travis_1974.toml")


def named(case, f11, f12, f22, f33, f44):
    return {"F11": f11, "F12": f12, "F22": f22, "F33": f33, "F44": f44, "-F12/F11": -f12 / f11}[case["quantity"]]


@pytest.mark.parametrize("case", CASES, ids=lambda c: f"{c['quantity']} at {c['inputs']['angle']:g}")
def test_element(case):
    given = case["inputs"]
    assert named(case, *rayleigh_elements(given["depolarisation"], np.radians(given["angle"]))) == of(case)


def test_air_has_this_matrix():
    air = air_optics(532e-9, 293.15, 101_325.0)
    assert air.depolarisation == printed(f"{CASES[0]['inputs']['depolarisation']:.6f}")
    for case in CASES:
        if case["quantity"] in ("F11", "F12"):
            f11, f12 = air.matrix.at(np.radians(case["inputs"]["angle"]))
            assert {"F11": f11, "F12": f12}[case["quantity"]] == of(case)
