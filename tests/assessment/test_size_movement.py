"""Light over the sizes that a kind may have: computed as for a load of that size, and carried by the upper bounds."""

from __future__ import annotations

import numpy as np
import pytest
from assessment.sites import LoadReading, bay, haze, limit, line, observer, replace, skin
from numpy.testing import assert_allclose

from lasescatter.assessment.assess import assess
from lasescatter.assessment.record import record
from lasescatter.assessment.size_movement import COARSE, peak_over, scaled, sizes_over
from lasescatter.matter import (
    ENTERED,
    Lognormal,
    Material,
    ModifiedGamma,
    SingleSize,
    SizeMode,
    SizeSpan,
    SizeTable,
    Trust,
)
from lasescatter.optics.distributions import mean_power
from lasescatter.scene import Box, Stop

SPAN = SizeSpan("count median radius", 0.35e-6, 0.12e-6, 1.1e-6, "invented")
PLACES = tuple(
    observer(name=f"place {i}", key=f"place {i}", position=p)
    for i, p in enumerate([(4.0, 1.5, 1.6), (8.5, 1.0, 1.4), (-1.0, 1.0, 1.2), (4.0, 0.0, 2.7)])
)


def uncertain(**changes):
    return haze(**{"kind": "glycol haze", "size_span": SPAN, "trust": Trust("weak", 3.0, "invented"), **changes})


def two_lines():
    lines = tuple(
        line(name=f"{w * 1e9:.0f}", key=f"{w}", wavelength=w, polarization="linear", electric_field=(0.0, 0.0, 1.0))
        for w in (532e-9, 1064e-9)
    )
    return replace(bay().beams[0], lines=lines, stop=Stop(0.0, (-1.0, 0.0, 0.0)))


def test_five_sizes_spread_in_the_logarithm_with_the_usual_one():
    sizes = sizes_over(SPAN)
    assert len(sizes) == 5 and SPAN.usual in sizes
    assert (sizes[0], sizes[-1]) == (SPAN.low, SPAN.high)
    even = np.geomspace(SPAN.low, SPAN.high, 5)
    assert sum(abs(s / e - 1) < 1e-12 for s, e in zip(sizes, even, strict=True)) == 4
    assert sizes_over(replace(SPAN, usual=SPAN.low)) == pytest.approx(even, rel=1e-12)


@pytest.mark.parametrize(
    "shape",
    [
        Lognormal(0.3e-6, 1.5),
        Lognormal(0.3e-6, 1.5, 0.1e-6, 1e-6),
        ModifiedGamma(4e-6, 6, 1),
        SingleSize(1e-6),
        SizeTable((0.1e-6, 0.2e-6, 0.5e-6), (0.0, 1.3, 0.0)),
    ],
)
def test_every_radius_moves_in_proportion(shape):
    """The mean of r^p over a distribution goes with the factor to the p."""
    load = haze(modes=(SizeMode(shape, 0.4), SizeMode(SingleSize(2e-6), 0.6)))
    moved = scaled(load, 1.7)
    assert moved.reading == load.reading
    for before, after in zip(load.modes, moved.modes, strict=True):
        assert after.weight == before.weight
        for power in (2, 3):
            assert_allclose(mean_power(after.shape, power), 1.7**power * mean_power(before.shape, power), rtol=1e-9)


def test_a_peak_between_sizes_is_met():
    """A parabola in logarithms is met exactly; what rises or falls to an end keeps its largest value."""
    sizes = sizes_over(SPAN)
    logs = np.log(np.array(sizes) / 0.41e-6)
    peaked, rising, hollow = 3.0 * np.exp(-0.8 * logs**2), np.exp(logs), np.exp(logs**2)
    found = peak_over(sizes, np.stack([peaked, rising, hollow, np.zeros(5)], axis=1))
    assert_allclose(found, [3.0, rising.max(), hollow.max(), 0.0], rtol=1e-12, atol=0)
    assert found[0] > peaked.max() * (1 + 1e-3)


def test_light_at_each_size_is_that_of_a_load_of_that_size():
    found = assess(bay(beams=(two_lines(),), loads=(uncertain(),), observers=PLACES))
    (movement,) = found.size_movements
    assert (movement.load, movement.kind, movement.what) == ("test haze", "glycol haze", SPAN.what)
    for i, size in enumerate(movement.sizes):
        load = replace(scaled(uncertain(), size / SPAN.usual), size_span=None)
        there = assess(bay(beams=(two_lines(),), loads=(load,), observers=PLACES)).observers
        for j, person in enumerate(there):
            # F11 of the other sizes is good to this; the usual size has the optics of every load, and their integral.
            tolerance = 1e-3 if size == SPAN.usual else COARSE.f11
            entry = next(line for line in person.lines if line.line == movement.line[j])
            # Of a thin load alone: the whole but for the light of the air, at full load.
            assert entry.load_fraction == 1
            own = sum(row.program for row in person.hand_checks if (row.line, row.component) == (entry.line, load.name))
            assert_allclose(movement.scattered[j][i], own, rtol=tolerance)


@pytest.mark.parametrize("reading", [LoadReading("extinction", 0.01, 532e-9), LoadReading("mass", 5e-6)])
def test_upper_bounds_hold_at_every_size(reading):
    """Above a vertically polarized beam, where small particles send nothing, too."""
    scene = bay(beams=(two_lines(),), limits=(limit(wavelengths=(400e-9, 1400e-9)), skin()), observers=PLACES)
    home = assess(replace(scene, loads=(uncertain(reading=reading, trust=ENTERED),)))
    assert any(factor > 1 for factor in home.size_movements[0].factor)
    for size in home.size_movements[0].sizes:
        moved = replace(scaled(uncertain(reading=reading), size / SPAN.usual), size_span=None, trust=ENTERED)
        for bound, real in zip(home.observers, assess(replace(scene, loads=(moved,))).observers, strict=True):
            for high, found in zip(bound.comparisons, real.comparisons, strict=True):
                assert found.ratio_high <= high.ratio_high * (1 + 2 * COARSE.f11)


def test_the_factor_is_the_larger_of_trust_and_movement():
    calm = replace(SPAN, low=0.33e-6, high=0.37e-6)
    (steady,) = assess(bay(loads=(uncertain(size_span=calm),))).size_movements
    assert steady.factor == (3.0,)
    found = assess(bay(loads=(uncertain(trust=ENTERED),), observers=PLACES))
    (movement,) = found.size_movements
    assert all(factor > 1 for factor in movement.factor)
    causes = {cause for person in found.observers for c in person.comparisons for cause, _ in c.allowances}
    assert any(cause.startswith('trust in "test haze" (sizes it may have, ×') for cause in causes)


def test_a_stated_size_does_not_move_and_the_record_holds_what_does():
    assert assess(bay(loads=(haze(kind="glycol haze"),))).size_movements == ()
    found = assess(bay(loads=(uncertain(),)))
    (entry,) = record(found)["size_movements"]
    assert entry["usual_m"] == SPAN.usual
    assert [person["name"] for person in entry["observers"]] == ["console operator"]
    assert len(entry["observers"][0]["own_scattered_w_m2"]) == len(entry["sizes_m"]) == 5
    assert any("usual size" in assumption.name for assumption in found.assumptions)


def test_a_kind_outside_its_data_moves_nothing():
    from lasescatter.matter import IndexTable

    visible = IndexTable((355e-9, 700e-9), (1.43, 1.42), (1e-7, 1e-6), (False, False), "invented glycol", "nowhere")
    load = uncertain(material=Material(visible, 1060.0))
    found = assess(bay(beams=(two_lines(),), loads=(load,)))
    assert any("1064 nm" in gap for gap in found.gaps)
    (movement,) = found.size_movements
    assert movement.line == ("532",)
    assert all(light > 0 for light in movement.scattered[0])


def test_movement_is_that_of_the_load_alone_on_the_line_where_it_moves_most():
    """Neither another load nor a second line at which it moves less makes the movement look smaller."""
    second = haze(name="still", key="still", reading=LoadReading("extinction", 0.005, 532e-9))
    path = two_lines()

    def moved(loads, lines):
        (movement,) = assess(bay(beams=(replace(path, lines=lines),), loads=loads, observers=PLACES)).size_movements
        usual = movement.sizes.index(SPAN.usual)
        return movement, np.array([[value / row[usual] for value in row] for row in movement.scattered])

    singles = {line.name: moved((uncertain(),), (line,))[1] for line in path.lines}
    both, ratios = moved((uncertain(), second), path.lines)
    for i, name in enumerate(both.line):
        farthest = {key: np.abs(np.log(rows[i])).max() for key, rows in singles.items()}
        assert name == max(farthest, key=lambda key: farthest[key])
        # Shielding by the second load, 0.5 % per metre over some metres, moves it a little.
        assert_allclose(ratios[i], singles[name][i], rtol=5e-3)


@pytest.mark.parametrize("quantity", ["irradiance", "radiance"])
def test_a_size_left_out_never_helps(quantity):
    """The upper bound for the usual size holds for every size stated, with what then remains of the doubt."""
    span = replace(SPAN, factor=1.5)
    rule = limit(quantity=quantity, value=1e3)
    person = observer(position=(4.0, 1.5, 1.6))

    def high(load):
        (found,) = assess(bay(loads=(load,), limits=(rule,), observers=(person,))).observers
        return found.comparisons[0].ratio_high

    unstated = high(uncertain(size_span=span, trust=Trust("weak", 3.0, "invented")))
    for size in (span.low, span.usual, span.high):
        stated = uncertain(size_span=None, trust=Trust("weak", span.factor, "size stated"))
        assert high(scaled(stated, size / span.usual)) <= unstated * (1 + 2 * COARSE.f11)


def test_a_load_that_a_beam_misses_leaves_finite_numbers():
    elsewhere = uncertain(region=Box((100.0, 100.0, 0.0), (110.0, 110.0, 3.0)))
    found = assess(bay(loads=(elsewhere,)))
    (movement,) = found.size_movements
    assert np.isfinite(movement.factor).all()
    assert record(found)["digest"]  # which no number but a finite one has
