"""The sphere of Appendix A of Bohren & Huffman (1983) and its normalised scattering matrix."""

from __future__ import annotations

import numpy as np
import pytest
from published.printed import cases, of
from scipy.interpolate import CubicSpline

from lasescatter.matter import SingleSize, SizeMode
from lasescatter.optics.mie import sphere
from lasescatter.optics.sizes import particle_optics

CASES = cases("bohren_huffman_1983.toml")
EFFICIENCIES = {"extinction efficiency": "q_ext", "scattering efficiency": "q_sca", "backscatter efficiency": "q_back"}
TOTALS = [c for c in CASES if c["quantity"] in EFFICIENCIES]
ELEMENTS = [c for c in CASES if "S11" in c["quantity"]]


def size_parameter(given):
    return 2 * np.pi * given["radius"] / given["wavelength"]


def elements(s1, s2):
    """S11, S12, S33, S34 of amplitudes (eq. 4.77)."""
    power_1, power_2 = abs(s1) ** 2, abs(s2) ** 2
    return (power_1 + power_2) / 2, (power_2 - power_1) / 2, (s1 * s2.conj()).real, (s2 * s1.conj()).imag


def named(case, s11, s12, s33, s34, forward):
    return {"S11/S11(0)": s11 / forward, "-S12/S11": -s12 / s11, "S33/S11": s33 / s11, "S34/S11": s34 / s11}[
        case["quantity"]
    ]


def test_every_entry_is_read():
    assert len(TOTALS) + len(ELEMENTS) == len(CASES) == 87


@pytest.mark.parametrize("case", TOTALS, ids=lambda c: c["quantity"])
def test_totals(case):
    given = case["inputs"]
    assert getattr(sphere(complex(*given["index"]), size_parameter(given)), EFFICIENCIES[case["quantity"]]) == of(case)


@pytest.mark.parametrize("case", ELEMENTS, ids=lambda c: f"{c['quantity']} at {c['inputs']['angle']:g}")
def test_elements_of_the_amplitudes(case):
    given = case["inputs"]
    found = sphere(complex(*given["index"]), size_parameter(given))
    s11, s12, s33, s34 = elements(*found.amplitudes(np.radians([0.0, given["angle"]])))
    assert named(case, s11[1], s12[1], s33[1], s34[1], s11[0]) == of(case)


def test_elements_of_the_particle():
    """The same table from the matrix of `particle_optics`, on whose grid the angles lie only nearly."""
    given = ELEMENTS[0]["inputs"]
    optics = particle_optics((SizeMode(SingleSize(given["radius"])),), complex(*given["index"]), given["wavelength"])
    assert optics.nodes == 1
    matrix = optics.matrix
    for case in ELEMENTS:
        theta = np.radians(case["inputs"]["angle"])
        if case["quantity"] in ("S11/S11(0)", "-S12/S11"):
            f11, f12 = matrix.at(theta)
            assert named(case, f11, f12, 0, 0, matrix.f11[0]) == of(case)
        else:
            ratio = (matrix.f33 if "S33" in case["quantity"] else matrix.f34) / matrix.f11
            found = CubicSpline(matrix.angles, ratio)(theta)
            assert found == pytest.approx(float(case["printed"]), rel=0, abs=of(case).abs + 1e-8)
