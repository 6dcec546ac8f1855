"""Comparison with hand-entered limits: values, times, pulses, trains, bounds."""

from __future__ import annotations

import math

import numpy as np
import pytest
from exposure.beams import line, train
from hypothesis import given
from hypothesis import strategies as st
from limits.entries import limit

from lasescatter.limits.compare import Received, compare, pulses_within
from lasescatter.limits.verdict import margin

ONE = Received((("scattered", 1.0),), 1.0)


def bounded(value, low, high):
    return Received((("scattered", value),), low, (("numerical error", high - value),))


def test_continuous_light_against_irradiance_and_dose():
    source = line(power=3.0)
    assert compare(limit(value=10.0), "b", source, ONE, 100, 100).ratio == pytest.approx(0.3, rel=1e-12)
    dose = compare(limit(quantity="radiant exposure", value=600.0), "b", source, ONE, 100, 100)
    assert dose.exposure == pytest.approx(300.0, rel=1e-12)
    assert dose.ratio == pytest.approx(0.5, rel=1e-12)


def test_wavelength_and_time_outside_the_limit_do_not_concern_it():
    assert compare(limit(), "b", line(wavelength=1064e-9), ONE, 100, 100) is None
    assert compare(limit(), "b", line(), ONE, 1.0, 1.0) is None
    assert compare(limit(), "b", line(wavelength=700e-9), ONE, 100, 100) is not None
    assert compare(limit(per="pulse"), "b", line(), ONE, 100, 100) is None


def test_limit_for_shorter_times_still_counts_at_its_end():
    """The ratio for a time is the largest over all shorter times: 18 t^-0.25 at 10 s is 10.12, not 7.6 at 300 s."""
    short = limit(value=18.0, time_exponent=-0.25, durations=(18e-6, 10.0))
    found = compare(short, "b", line(power=5.0), ONE, 300, 300)
    assert found.time == 10.0
    assert found.limit_value == pytest.approx(18 * 10**-0.25, rel=1e-12)
    assert "up to 10 s" in found.note


def test_a_train_needs_its_rule():
    source = line(wavelength=1064e-9, power=0.2, pulses=train(10e-3, 10e-9, 20.0))
    entry = limit(
        quantity="radiant exposure", value=5e-2, wavelengths=(1050e-9, 1400e-9), durations=(1e-9, 50e-6),
        per="pulse", train="none",
    )  # fmt: skip
    found = compare(entry, "b", source, ONE, 10.0, 10.0)
    assert found.pulses == 200
    assert found.limit_value == 5e-2
    assert found.exposure == pytest.approx(10e-3, rel=1e-12)
    silent = compare(limit(**{**entry.__dict__, "train": None}), "b", source, ONE, 10.0, 10.0)
    assert isinstance(silent, str) and "train of 200 pulses" in silent


def test_single_pulse_needs_no_train_rule():
    source = line(power=0.0, pulses=train(10e-3, 10e-9, None).__class__(10e-3, 10e-9, None, 1))
    entry = limit(quantity="radiant exposure", value=5e-3, durations=(1e-9, 18e-6), per="pulse")
    assert compare(entry, "b", source, ONE, 10.0, 10.0).ratio == pytest.approx(2.0, rel=1e-12)


def test_pulses_counted():
    assert pulses_within(line(), 10.0) == 0
    assert pulses_within(line(pulses=train(rate=20.0)), 10.0) == 200
    assert pulses_within(line(pulses=train(rate=20.0)), 1e-6) == 1


def test_bounds_decide_the_verdict():
    entry = limit(value=1.0)
    assert compare(entry, "b", line(), bounded(0.9, 0.8, 0.95), 10, 10).verdict == "below limit"
    assert compare(entry, "b", line(), bounded(0.9, 0.8, 1.01), 10, 10).verdict == "not established"
    assert compare(entry, "b", line(), bounded(1.1, 1.05, 1.2), 10, 10).verdict == "above limit"
    assert compare(entry, "b", line(), bounded(1.1, 0.99, 1.2), 10, 10).verdict == "not established"


def test_optical_density_brings_the_exposure_to_the_limit():
    found = compare(limit(value=10.0), "b", line(power=5000.0), ONE, 10, 10)
    assert found.exposure * 10**-found.optical_density == pytest.approx(10.0, rel=1e-12)
    assert compare(limit(value=10.0), "b", line(power=5.0), ONE, 10, 10).optical_density == 0


@given(
    power=st.floats(1e-3, 1e3), more=st.floats(1.0, 100.0), t=st.floats(0.3, 3e4), longer=st.floats(1.0, 50.0),
    exponent=st.sampled_from([0.0, 0.25, 0.75, -0.25]), rate=st.sampled_from([None, 3.0, 1e4]),
)  # fmt: skip
def test_more_power_or_a_longer_time_never_lowers_the_ratio(power, more, t, longer, exponent, rate):
    dose = exponent >= 0
    entry = limit(
        quantity="radiant exposure" if dose else "irradiance", value=18.0, time_exponent=exponent, durations=(0.25, 3e4)
    )

    def ratio(p, time):
        pulses = None if rate is None else train(p / rate, 1e-8, rate)
        return compare(entry, "b", line(power=p, pulses=pulses), ONE, time, time).ratio

    assert ratio(power * more, t) >= ratio(power, t) * (1 - 1e-12)
    assert ratio(power, min(t * longer, 3e4)) >= ratio(power, t) * (1 - 1e-9)


@given(
    t=st.floats(0.3, 300.0), rate=st.floats(0.05, 40.0), exponent=st.sampled_from([0.0, 0.25, 0.75]),
    start=st.sampled_from([1e-3, 0.25, 10.0]), dose=st.booleans(),
)  # fmt: skip
def test_train_ratio_is_the_largest_over_all_shorter_times(t, rate, exponent, start, dose):
    """Against brute force: every time on a fine grid, with the pulses that fit into it."""
    if t <= start:
        return
    power = exponent if dose else exponent - 1.0
    entry = limit(quantity="radiant exposure" if dose else "irradiance", value=18.0, time_exponent=power,
                  durations=(start, 3e4))  # fmt: skip
    source = line(power=rate, pulses=train(1.0, 1e-8, rate))
    found = compare(entry, "b", source, ONE, t, t).ratio
    grid = np.linspace(start, t, 4001)
    pulses = np.maximum(1, np.ceil(rate * grid * (1 - 1e-12)))
    ratios = (pulses if dose else pulses / grid) / (18.0 * grid**power)
    assert found >= ratios.max() * (1 - 1e-9)
    assert found <= ratios.max() * (1 + 2 * (t - start) / 4000 / start) + 1e-12


def test_margin_has_one_form():
    assert margin(0.036) == "0.036 of the limit (28 times below)"
    assert margin(3.2) == "3.2 of the limit (3.2 times above)"
    assert margin(6.7e-4) == "6.7e-4 of the limit (1500 times below)"
    assert margin(8.59e-5) == "8.6e-5 of the limit (12000 times below)"
    assert margin(0.974) == "0.974 of the limit (1.03 times below)"
    assert margin(1.04) == "1.04 of the limit (1.04 times above)"
    assert margin(0.0) == "0 of the limit (nothing arrives)"
    assert margin(None) == "no ratio"
    assert math.isfinite(float(margin(1e-12).split()[0]))
