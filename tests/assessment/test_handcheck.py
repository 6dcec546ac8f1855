"""Hand-check rows: E3 redone from the printed factors lands near the program; elsewhere the row says why."""

from __future__ import annotations

import math

import pytest
from assessment.sites import Everywhere, LoadReading, bay, haze, observer

from lasescatter.assessment.assess import assess

PLACES = tuple(
    observer(name=f"place {i}", key=f"place {i}", position=p)
    for i, p in enumerate([(4.0, 1.5, 1.6), (1.0, 2.5, 1.0), (8.5, 1.0, 1.4), (-1.0, 1.0, 1.2), (10.5, 0.8, 1.2)])
)


@pytest.mark.parametrize("extinction", [0.002, 0.01, 0.05, 0.3])
@pytest.mark.parametrize("everywhere", [True, False])
def test_rows_agree_or_say_why(extinction, everywhere):
    load = haze(reading=LoadReading("extinction", extinction, 532e-9))
    if everywhere:
        load = haze(reading=load.reading, region=Everywhere())
    rows = 0
    for found in assess(bay(loads=(load,), observers=PLACES)).observers:
        for row in found.hand_checks:
            by_hand = row.power * row.scattering / row.b * row.integral * math.exp(-row.tau_beam - row.tau_sight)
            assert by_hand == pytest.approx(row.hand, rel=1e-9)
            turned = row.q * math.cos(2 * row.phi) * row.integral_12
            assert row.integral == pytest.approx(row.integral_11 + turned, rel=1e-9)
            agrees = abs(row.hand / row.program - 1) <= 0.05
            assert agrees or row.remark.startswith("extinction")
            if found.optical_thickness <= 0.1:
                assert agrees
            rows += 1
    assert rows == 2 * len(PLACES)


def test_rows_add_up_to_the_observer():
    for found in assess(bay(observers=PLACES)).observers:
        assert sum(row.program for row in found.hand_checks) == pytest.approx(found.total("scattered"), rel=1e-12)
