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


@pytest.mark.parametrize("case", [c for c in CASES if c["quantity"] == "mean over aperture"], ids=lambda c: c["name"])
def test_mean_over_aperture(case):
    given = case["inputs"]
    radius = given["diameter_1e_m"] / math.sqrt(2)
    mean = given["power_w"] * float(aperture_mean("gaussian", radius, 0.0, given["aperture_m"]))
    assert mean == printed(case["printed"])


def test_gaussian_peak_formula():
    """E0 = 8 P/(pi d²) at the 1/e² diameter (textbook)."""
    assert float(irradiance("gaussian", 1.5e-3, 0.0)) == pytest.approx(8 / (math.pi * 9e-6), rel=1e-12, abs=0)
