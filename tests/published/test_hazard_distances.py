"""Direct and diffuse distances against worked values (marks D and M are kept in the data)."""

from __future__ import annotations

import math

import numpy as np
import pytest
from exposure.beams import line
from published.printed import cases, printed

from lasescatter.exposure.direct import aperture_mean, hazard_distance, irradiance
from lasescatter.exposure.surfaces import stop_light
from lasescatter.scene import Stop

CASES = cases("hazard_distances.toml")


@pytest.mark.parametrize("case", [c for c in CASES if c["quantity"] == "hazard distance"], ids=lambda c: c["name"])
def test_hazard_distance(case):
    given = case["inputs"]
    # An aperture of 0 stands for the peak: one that is far smaller than the beam.
    aperture = given["aperture_m"] or 1e-7
    source = line(diameter=given["diameter_1e_m"] * math.sqrt(2), divergence=given["divergence_1e_rad"] * math.sqrt(2))
    multiple = given["power_w"] / (math.pi / 4 * aperture**2) / given["limit_w_m2"]
    distance = hazard_distance(source, "gaussian", multiple, aperture)
    assert distance == printed(case["printed"])
    # The irradiance there is the limit: the mean over the aperture by another road.
    radius = math.hypot(source.diameter, source.divergence * distance) / 2
    there = given["power_w"] * float(aperture_mean("gaussian", radius, 0.0, aperture))
    assert there == pytest.approx(given["limit_w_m2"], rel=1e-6, abs=0)


@pytest.mark.parametrize("case", [c for c in CASES if c["quantity"] == "diffuse distance"], ids=lambda c: c["name"])
def test_diffuse_distance(case):
    given = case["inputs"]
    stop = Stop(
        given["reflectance"],
        (1.0, 0.0, 0.0),
    )
    view = math.radians(given["view_deg"])
    r = float(case["printed"])
    point = np.array([[r * math.cos(view), r * math.sin(view), 0.0]])
    there = given["power_w"] * stop_light(stop, np.zeros(3), point)[0]
    # The printed distance is rounded, so the limit comes out to twice its relative rounding.
    rounding = 0.5 * 10.0 ** -len(case["printed"].split(".")[1]) / r
    assert there == pytest.approx(given["limit_w_m2"], rel=2 * rounding, abs=0)


def test_tros_example_over_seven_millimetres():
    """100 mW, 1064 nm, d63 = 2 mm: 2598 W/m² over 7 mm (inputs: TROS Laserstrahlung Teil 2 section 5.1; result D)."""
    radius = 2e-3 / math.sqrt(2)
    assert 0.1 * float(aperture_mean("gaussian", radius, 0.0, 7e-3)) == pytest.approx(2598, rel=0, abs=0.5)


def test_gaussian_peak_formula():
    """E0 = 8 P/(pi d²) at the 1/e² diameter (textbook)."""
    assert float(irradiance("gaussian", 1.5e-3, 0.0)) == pytest.approx(8 / (math.pi * 9e-6), rel=1e-12, abs=0)
