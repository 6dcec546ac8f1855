"""Efficiencies, asymmetries and amplitudes printed by Wiscombe (1979), all cases, the perfect conductor included."""

from __future__ import annotations

from functools import lru_cache

import numpy as np
import pytest
from published.printed import cases, of
from scipy.special import spherical_jn, spherical_yn

from lasescatter.optics.mie import SphereOptics, sphere

CASES = cases("wiscombe_1979.toml")
EFFICIENCIES = {"extinction efficiency": "q_ext", "scattering efficiency": "q_sca", "asymmetry": "asymmetry"}


@lru_cache
def sphere_of(real: float, imaginary: float, size_parameter: float) -> SphereOptics:
    return sphere(complex(real, imaginary), size_parameter)


def labels(chosen):
    return [f"{c['name']}, {c['quantity']}, {c['inputs'].get('angle', '')}" for c in chosen]


TOTALS = [c for c in CASES if c["quantity"] in EFFICIENCIES]
AMPLITUDES = [c for c in CASES if c["quantity"][:2] in ("S1", "S2")]


def test_every_entry_is_read():
    assert len(TOTALS) + len(AMPLITUDES) == len(CASES) == 193


@pytest.mark.parametrize("case", TOTALS, ids=labels(TOTALS))
def test_totals(case):
    given = case["inputs"]
    found = getattr(sphere_of(*given["index"], given["size_parameter"]), EFFICIENCIES[case["quantity"]])
    assert found == of(case)


@pytest.mark.parametrize("case", AMPLITUDES, ids=labels(AMPLITUDES))
def test_amplitudes(case):
    given = case["inputs"]
    s1, s2 = sphere_of(*given["index"], given["size_parameter"]).amplitudes(np.radians(given["angle"]))
    which, part = case["quantity"].split()
    # Printed for exp(+iωt): the complex conjugate.
    value = np.conj(s1 if which == "S1" else s2)
    assert (value.real if part == "real" else value.imag) == of(case)


def test_small_conductor_against_bessel_functions():
    """Case 1's printed asymmetry is an expansion's; the series agrees with a direct sum (Bohren & Huffman 4.8)."""
    x = 0.099
    n = np.arange(1, 6)
    j, y = spherical_jn(n, x), spherical_yn(n, x)
    h = j + 1j * y
    a = (j + x * spherical_jn(n, x, True)) / (h + x * (spherical_jn(n, x, True) + 1j * spherical_yn(n, x, True)))
    b = j / h
    q_sca = 2 / x**2 * ((2 * n + 1) * (abs(a) ** 2 + abs(b) ** 2)).sum()
    next_orders = (a[:-1] * a[1:].conj() + b[:-1] * b[1:].conj()).real
    cosine = (n * (n + 2) / (n + 1))[:-1] @ next_orders + ((2 * n + 1) / (n * (n + 1))) @ (a * b.conj()).real
    found = sphere_of(np.inf, 0.0, x)
    assert found.q_sca == pytest.approx(q_sca, rel=1e-12, abs=0)
    assert found.asymmetry == pytest.approx(4 / x**2 * cosine / q_sca, rel=1e-12, abs=0)
