"""Time exponents and the train rule against worked limits of 2006/25/EC (mark D: arithmetic from read coefficients)."""

from __future__ import annotations

import pytest
from exposure.beams import line, train
from limits.entries import limit
from published.printed import cases, of

from lasescatter.limits.compare import Received, compare

CASES = cases("eu_2006_25.toml")
OVER_AN_EXPOSURE = [case for case in CASES if case["quantity"] == "radiant exposure limit"]
IN_A_TRAIN = [case for case in CASES if case["quantity"] == "limit of a pulse in a train"]
ONE = Received((("scattered", 1.0),), 1.0)
BAND = (400e-9, 1400e-9)


@pytest.mark.parametrize("case", OVER_AN_EXPOSURE, ids=lambda c: c["name"])
def test_limit_over_an_exposure(case):
    given = case["inputs"]
    entry = limit(quantity="radiant exposure", value=given["coefficient"], time_exponent=given["exponent"],
                  wavelengths=BAND, durations=(18e-6, 10.0))  # fmt: skip
    time = given["time"]
    found = compare(entry, "beam", line(wavelength=given["wavelength"]), ONE, time, time)
    assert found.limit_value == of(case)


@pytest.mark.parametrize("case", IN_A_TRAIN, ids=lambda c: c["name"])
def test_limit_of_a_pulse_in_a_train(case):
    given = case["inputs"]
    source = line(wavelength=given["wavelength"], power=0.2, pulses=train(10e-3, given["pulse"], given["rate"]))
    entry = limit(quantity="radiant exposure", value=given["coefficient"], wavelengths=BAND, durations=(1e-9, 50e-6),
                  per="pulse", train="N^-1/4")  # fmt: skip
    assert compare(entry, "beam", source, ONE, given["time"], given["time"]).limit_value == of(case)
