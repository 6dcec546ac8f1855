"""Phase functions Haze L and Cloud C1: all coefficients that the data carry."""

from __future__ import annotations

from functools import lru_cache

import numpy as np
import pytest
from published.legendre import moments
from published.printed import cases, of

from lasescatter.matter import ModifiedGamma, SizeMode
from lasescatter.optics.sizes import Accuracy, particle_optics

CASES = cases("garcia_siewert_1985.toml")


@lru_cache
def coefficients(name: str) -> np.ndarray:
    given = next(c["inputs"] for c in CASES if c["name"] == name)
    shape = ModifiedGamma(given["mode_radius"], given["alpha"], given["gamma"])
    # Haze L is printed to 1e-5: finer than the accuracy that is usual here.
    accuracy = Accuracy(f11=1e-4, extinction=1e-5, tail=1e-6) if name == "Haze L" else None
    optics = particle_optics((SizeMode(shape),), complex(*given["index"]), given["wavelength"], accuracy=accuracy)
    return moments(optics.matrix.f11, 250, 1000)


@pytest.mark.parametrize("case", CASES, ids=lambda c: f"{c['name']}, l = {c['inputs']['l']}")
def test_coefficient(case):
    assert coefficients(case["name"])[case["inputs"]["l"]] == of(case)
