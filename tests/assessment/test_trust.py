"""How far a load is trusted: what its factor does to the bounds, the verdict and the reasons."""

from __future__ import annotations

import numpy as np
import pytest
from assessment.sites import Everywhere, LoadReading, bay, haze, limit, observer, replace, skin
from numpy.testing import assert_allclose

from lasescatter.assessment.assess import assess
from lasescatter.assessment.components import extinction_trust
from lasescatter.matter import IndexTable, Material, Trust
from lasescatter.scene import Stop

NOT_JUDGED = (("skin", "covered by the clothing rule"), ("retina photochemical", "covered elsewhere"))


def weak(factor: float = 3.0) -> Trust:
    return Trust("weak", factor, "invented")


def dark_stop():
    """The bay's beam on a stop that sends nothing back."""
    return replace(bay().beams[0], stop=Stop(0.0, (-1.0, 0.0, 0.0)))


def eye_only(value: float, loads, **changes):
    return bay(beams=(dark_stop(),), loads=loads, limits=(limit(value=value),), not_judged=NOT_JUDGED, **changes)


def only(scene):
    return assess(scene).observers[0]


def test_factor_multiplies_the_scattered_part_of_the_upper_bound_and_decides_below():
    """Bound = air + factor × load: the load's part is the bound of the same load without its air."""
    high = {t: only(eye_only(1.0, (haze(trust=weak(t)),))).comparisons[0].ratio_high for t in (1.0, 3.0)}
    by_load = (high[3.0] - high[1.0]) / 2
    air = only(eye_only(1.0, ())).comparisons[0].ratio_high
    # Air in haze is shielded and its bound is not; their errors share one line: parts in a thousand of the small one.
    assert_allclose(high[1.0] - by_load, air, rtol=1e-2)
    edge = air + 3 * by_load
    assert_allclose(high[3.0], edge, rtol=1e-4)
    for value, verdict in ((high[3.0] * (1 + 1e-9), "below limit"), (high[3.0] * (1 - 1e-9), "not established")):
        found = only(eye_only(value, (haze(trust=weak()),)))
        assert found.verdict == verdict
        assert only(eye_only(value, (haze(),))).verdict == "below limit"
        if verdict == "not established":
            assert any('held back by trust in "test haze" (weak, ×3)' in reason for reason in found.reasons)


def test_central_value_and_lower_bound_stay():
    plain, doubted = (only(bay(loads=(haze(trust=trust),))).comparisons for trust in (weak(1.0), weak(5.0)))
    for first, second in zip(plain, doubted, strict=True):
        assert second.ratio == first.ratio
        assert second.ratio_low == first.ratio_low
        assert second.ratio_high > first.ratio_high
        assert second.ratio_high_trusted == pytest.approx(first.ratio_high, rel=1e-12)


def test_above_stands_whatever_the_factor():
    ratio = only(eye_only(1.0, (haze(),))).comparisons[0].ratio
    found = only(eye_only(ratio * 0.98, (haze(trust=weak(5.0)),)))
    assert found.verdict == "above limit"


def test_each_load_has_its_own_factor():
    first, second = haze(name="first", key="1"), haze(name="second", key="2", reading=LoadReading("number", 1e9))
    both = only(bay(loads=(replace(first, trust=weak(1.5)), replace(second, trust=weak(5.0)))))
    one, other = (
        only(bay(loads=(replace(first, trust=weak(1.5)), second))),
        only(bay(loads=(first, replace(second, trust=weak(5.0))))),
    )
    for limit_both, limit_one, limit_other in zip(both.comparisons, one.comparisons, other.comparisons, strict=True):
        added, alone, apart = (dict(c.allowances) for c in (limit_both, limit_one, limit_other))
        assert added['trust in "first" (weak, ×1.5)'] == pytest.approx(alone['trust in "first" (weak, ×1.5)'], rel=1e-9)
        assert added['trust in "second" (weak, ×5)'] == pytest.approx(apart['trust in "second" (weak, ×5)'], rel=1e-9)


@pytest.mark.parametrize("extinction", [0.002, 0.02, 0.04])
@pytest.mark.parametrize("share", [0.3, 1.0])
def test_bound_of_a_load_by_mass_holds_for_a_load_that_is_off_by_its_factor(extinction, share):
    """Three times the mass extinction at the same phase function: light, higher orders and walls of that load."""
    component = next(c for c in assess(bay()).components if c.name == "test haze")
    mass = extinction / component.mass_extinction
    stated = only(bay(loads=(haze(reading=LoadReading("mass", mass), trust=weak()),)))
    truth = only(bay(loads=(haze(reading=LoadReading("mass", mass * (1 + 2 * share))),)))
    for bound, real in zip(stated.comparisons, truth.comparisons, strict=True):
        assert real.ratio <= real.ratio_high <= bound.ratio_high * (1 + 1e-9)


def test_reading_of_extinction_fixes_the_thickness_and_mass_does_not():
    component = next(c for c in assess(bay()).components if c.name == "test haze")
    optical, by_mass = (
        only(bay(loads=(haze(reading=reading, trust=weak()),)))
        for reading in (LoadReading("extinction", 0.01, 532e-9), LoadReading("mass", component.mass))
    )
    assert optical.optical_thickness == pytest.approx(by_mass.optical_thickness, rel=1e-9)
    causes = [{cause for c in found.comparisons for cause, _ in c.allowances} for found in (optical, by_mass)]
    whose = 'trust in the optical thickness of "test haze" (×3)'
    doubted = {f"{whose} for higher orders", f"{whose} for walls"}
    assert not doubted & causes[0]
    assert doubted <= causes[1]


def test_the_gate_on_thickness_is_that_of_the_stated_load():
    """Optical thickness 0.4, three times that may be: not too thick, but the bound takes 1 + 1.5 × 1.2."""
    component = next(c for c in assess(bay()).components if c.name == "test haze")
    box = replace(haze().region, low=(1.0, -2.0, 0.0), high=(8.0, 2.0, 3.0))
    load = haze(reading=LoadReading("mass", component.mass * 4.3), region=box, trust=weak())
    found = only(eye_only(1e3, (load,)))
    assert 0.3 < found.optical_thickness < 0.5
    assert found.verdict == "below limit"


def test_extinction_between_wavelengths_is_trusted_by_the_steepest_spectrum():
    """Rayleigh scattering, λ⁻⁴, is the steepest spectrum of spheres that do not absorb (Bohren & Huffman 1983,
    section 5.1)."""
    optical = haze(reading=LoadReading("optical_density", 0.01, 550e-9))
    assert extinction_trust(optical, 550e-9, 3.0) == 1.0
    assert extinction_trust(optical, 550.9e-9, 3.0) == 1.0
    assert extinction_trust(optical, 532e-9, 3.0) == pytest.approx((550 / 532) ** 4, rel=1e-12)
    assert extinction_trust(optical, 1064e-9, 3.0) == 3.0
    for kind in ("mass", "number"):
        assert extinction_trust(haze(reading=LoadReading(kind, 1.0)), 550e-9, 3.0) == 3.0


def test_an_unconfirmed_index_is_weak_at_its_wavelengths_only():
    table = IndexTable(
        (400e-9, 500e-9, 600e-9, 700e-9), (1.42,) * 4, (1e-6,) * 4, (True, False, False, True), "invented", "nowhere"
    )
    load = haze(material=Material(table, 1060.0), trust=Trust("checked", 1.5, "seen"), region=Everywhere())

    def trust(wavelength):
        path = replace(bay().beams[0], lines=(replace(bay().beams[0].lines[0], wavelength=wavelength),))
        return next(c for c in assess(bay(beams=(path,), loads=(load,))).components if c.name == "test haze").trust

    assert trust(532e-9) == load.trust
    for wavelength in (450e-9, 650e-9):
        assert (trust(wavelength).mark, trust(wavelength).factor) == ("weak", 3.0)
        assert f"{wavelength * 1e9:g} nm" in trust(wavelength).reason


@pytest.mark.parametrize("quantity", ["irradiance", "radiance"])
@pytest.mark.parametrize("acceptance", [None, 0.1])
def test_every_kind_of_limit_carries_the_factor(quantity, acceptance):
    """The upper bound of three times the load's light, in each limit's own field."""
    entry = limit(quantity=quantity, acceptance=acceptance)
    stated = only(bay(limits=(entry,), loads=(haze(trust=weak()),))).comparisons[0]
    cause = 'trust in "test haze" (weak, ×3)'
    scattered = dict(stated.by_origin)["scattered"]
    assert dict(stated.allowances)[cause] >= 2 * scattered * 0.98


def test_without_loads_nothing_is_doubted():
    for found in only(bay(loads=())).comparisons:
        assert not [cause for cause, _ in found.allowances if cause.startswith("trust")]
    assert np.isfinite(only(bay(loads=(), observers=(observer(reach=0.0),), limits=(skin(),))).ratio)


def by_mass(extinction, **changes):
    """The test haze by the mass that gives it an extinction at 532 nm."""
    component = next(c for c in assess(bay()).components if c.name == "test haze")
    return haze(reading=LoadReading("mass", extinction / component.mass_extinction), **changes)


def test_the_bound_of_the_orders_not_computed_can_be_redone_by_hand():
    """1 + 1.5 × tau at the doubted thickness, each load's own by its own factor: a doubted trace of dust does not
    raise the haze that was read optically."""
    dust = by_mass(2e-5, name="dust", key="dust", trust=weak())
    thick = haze(reading=LoadReading("extinction", 0.04, 532e-9))
    found = only(eye_only(1e3, (thick, dust)))
    (entry,) = found.lines
    assert 0.1 < entry.optical_thickness < entry.thickness_within_reach < entry.thickness_doubted
    # Across: the box is 3 m high, and what the head may add is twice its reach of 0.25 m.
    assert entry.thickness_doubted - entry.thickness_within_reach <= 2 * 2e-5 * 10
    (comparison,) = found.comparisons
    (cause,) = [cause for cause, _ in comparison.allowances if cause.endswith("higher orders")]
    assert cause == 'trust in the optical thickness of "dust" (×3) for higher orders'
    plain = only(eye_only(1e3, (thick, replace(dust, trust=weak(1.0)))))
    assert comparison.ratio_high == pytest.approx(plain.comparisons[0].ratio_high, rel=5e-3)
    light = (1 + 1.5 * entry.thickness_doubted) / (1 + 1.5 * entry.thickness_within_reach)
    trusted = comparison.ratio_high - dict(comparison.allowances)[cause] / comparison.limit_value
    assert comparison.ratio_high / trusted == pytest.approx(light, rel=1e-3)


def test_doubted_thickness_above_two_is_never_below():
    """Orders two and up are one to two times the first near 2 (trials for an open bay): beyond there is no figure."""
    for factor, verdict in ((3.0, "below limit"), (5.0, "not established")):
        found = only(eye_only(1e4, (by_mass(0.057, trust=weak(factor)),)))
        assert found.thickness_within_reach < 0.5
        assert (found.thickness_doubted > 2) == (factor == 5.0)
        assert found.verdict == found.hazards[0].verdict == verdict
        told = [reason for reason in found.reasons if "too thick" in reason]
        assert len(told) == (factor == 5.0)
        assert all('"test haze" (×5)' in reason and reason in found.hazards[0].reasons for reason in told)


def test_doubted_thickness_bounds_that_of_any_load_within_its_factor():
    for share in (0.3, 1.0):
        stated = only(bay(loads=(by_mass(0.02, trust=weak()), by_mass(0.01, name="other", key="o", trust=weak(1.5)))))
        truth = only(
            bay(loads=(by_mass(0.02 * (1 + 2 * share)), by_mass(0.01 * (1 + share / 2), name="other", key="o")))
        )
        assert truth.thickness_within_reach <= stated.thickness_doubted * (1 + 1e-9)


def test_one_factor_and_several_are_told_apart():
    first, second = haze(name="first", key="1", trust=weak()), haze(name="second", key="2", trust=weak(5.0))
    high = only(eye_only(1.0, (first,))).comparisons[0].ratio_high
    (one,) = only(eye_only(high * 0.99, (first,))).reasons
    assert 'held back by trust in "first" (weak, ×3); without it the' in one
    high = only(eye_only(1.0, (first, second))).comparisons[0].ratio_high
    (two,) = only(eye_only(high * 0.99, (first, second))).reasons
    assert '"second" (weak, ×5); without all of these the' in two
