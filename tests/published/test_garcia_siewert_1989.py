"""All four matrix elements of a size distribution, to eight decimals (Evans & Stephens 1991, Table 3)."""

from __future__ import annotations

import numpy as np
import pytest
from published.legendre import moments
from published.printed import cases, of

from lasescatter.matter import ModifiedGamma, SizeMode
from lasescatter.optics.sizes import Accuracy, ParticleOptics, particle_optics

CASES = cases("garcia_siewert_1989.toml")


@pytest.fixture(scope="module")
def particle() -> ParticleOptics:
    given = CASES[0]["inputs"]
    a, b = given["effective_radius"], given["effective_variance"]
    shape = ModifiedGamma(mode_radius=(1 - 3 * b) * a, alpha=(1 - 3 * b) / b, gamma=1)
    fine = Accuracy(f11=1e-8, extinction=1e-8, tail=1e-10)
    return particle_optics((SizeMode(shape),), complex(*given["index"]), given["wavelength"], accuracy=fine)


def test_effective_radius_and_volume(particle):
    """Hansen & Travis (1974): a is the effective radius, b the effective variance: <r³> = a³(1 − b)(1 − 2b)."""
    a, b = 0.2e-6, 0.07
    assert particle.effective_radius == pytest.approx(a, rel=1e-12, abs=0)
    assert particle.volume == pytest.approx(4 / 3 * np.pi * a**3 * (1 - b) * (1 - 2 * b), rel=1e-12, abs=0)


@pytest.mark.parametrize("case", CASES, ids=lambda c: f"{c['quantity'][-3:]}, {c['name']}")
def test_coefficient(particle, case):
    element = case["quantity"][-3:].lower()
    found = moments(getattr(particle.matrix, element), 11, 200)[case["inputs"]["l"]]
    # Printed for exp(+iωt), where F34 has the other sign.
    assert (-found if element == "f34" else found) == of(case)


def test_asymmetry(particle):
    first = next(c for c in CASES if c["inputs"]["l"] == 1 and c["quantity"].endswith("F11"))
    assert 3 * particle.asymmetry == of(first)
    assert 3 * particle.matrix.asymmetry == of(first)
