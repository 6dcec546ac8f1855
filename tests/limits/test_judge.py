"""Verdicts: hazards due, ratios added over beams, reasons that keep a verdict open."""

from __future__ import annotations

import pytest
from exposure.beams import beam, line, train
from limits.entries import blue, limit, observer, skin

from lasescatter.limits.compare import Received
from lasescatter.limits.hazards import hazards_due
from lasescatter.limits.judge import Gate, judge

EYE_BLUE_SKIN = (limit(), blue(), skin())


def received(value, low=None, high=None):
    extra = () if high is None else (("numerical error", high - value),)
    return lambda _line, _limit: Received((("scattered", value),), value if low is None else low, extra)


def judged(limits=EYE_BLUE_SKIN, value=1.0, beams=None, not_judged=(), gates=(), **changes):
    return judge(observer(**changes), beams or (beam(),), limits, received(value), not_judged, gates)


@pytest.mark.parametrize(
    ("nanometres", "expected"),
    [
        (266, {"cornea and lens", "skin"}),
        (399.9, {"cornea and lens", "skin"}),
        (400, {"retina thermal", "retina photochemical", "skin"}),
        (532, {"retina thermal", "retina photochemical", "skin"}),
        (600, {"retina thermal", "retina photochemical", "skin"}),
        (633, {"retina thermal", "skin"}),
        (1064, {"retina thermal", "skin"}),
        (1310, {"retina thermal", "cornea and lens", "skin"}),
        (1400, {"retina thermal", "cornea and lens", "skin"}),
        (1550, {"cornea and lens", "skin"}),
    ],
)
def test_hazards_due_by_wavelength(nanometres, expected):
    """Bands of the published limits (ICNIRP 2013, from memory; stricter side at boundaries)."""
    assert set(hazards_due(line(wavelength=nanometres * 1e-9), 10.0, None)) == expected


def test_blue_hazard_is_not_due_for_a_short_daily_sum():
    assert "retina photochemical" not in hazards_due(line(), 5.0, 5.0)
    assert "retina photochemical" in hazards_due(line(), 5.0, None)


def test_below_and_above():
    assert judged().verdict == "below limit"
    high = judged(value=11.0)
    assert high.verdict == "above limit"
    assert high.ratio == pytest.approx(1.1)
    assert "retina" in high.governing


@pytest.mark.parametrize("missing", ["eye", "blue", "skin"])
def test_a_due_hazard_without_limit_is_not_established_and_named(missing):
    limits = tuple(entry for entry in EYE_BLUE_SKIN if entry.name != missing)
    found = judged(limits)
    assert found.verdict == "not established"
    name = {"eye": "retina thermal", "blue": "retina photochemical", "skin": "skin"}[missing]
    assert any(reason.startswith(f"{name}: no limit covers 532 nm") for reason in found.reasons)


def test_left_out_on_purpose_with_a_reason():
    found = judged((limit(), blue()), not_judged=(("skin", "covered by the clothing rule"),))
    assert found.verdict == "below limit"
    assert [h.not_judged for h in found.hazards if h.hazard == "skin"] == ["covered by the clothing rule"]


def test_nothing_left_to_judge_is_not_below():
    everything = tuple((hazard, "why not") for hazard in ("retina thermal", "retina photochemical", "skin"))
    assert judged(not_judged=everything).verdict == "not established"


def test_no_limits_at_all():
    assert judged(()).verdict == "not established"


def test_time_not_covered():
    found = judged((limit(durations=(10.0, 100.0)), blue(), skin()), durations=(1000.0,))
    assert found.verdict == "not established"
    assert any("for 1000 s" in reason for reason in found.reasons)


def test_gates_hold_back_below_but_never_above():
    assert judged(gates=(Gate("direct light within reach"),)).verdict == "not established"
    assert judged(value=11.0, gates=(Gate("direct light within reach"),)).verdict == "above limit"


def test_ratios_add_over_beams_whichever_limit_judged_them():
    """Two beams at 0.6 of different limits for the same tissue and mechanism exceed together."""
    green, red = line(name="green", key="g"), line(name="red", wavelength=660e-9, key="r")
    beams = (beam(lines=(green,), name="one"), beam(lines=(red,), name="two"))
    limits = (
        limit(name="green eye", value=10.0, wavelengths=(500e-9, 600e-9)),
        limit(name="red eye", value=20.0, wavelengths=(600e-9, 700e-9)),
        blue(value=1e3),
        skin(),
    )

    def by_line(source, _limit):
        value = 6.0 if source.name == "green" else 12.0
        return Received((("scattered", value),), value)

    found = judge(observer(), beams, limits, by_line, (), ())
    thermal = next(h for h in found.hazards if h.hazard == "retina thermal")
    assert thermal.ratio == pytest.approx(1.2)
    assert found.verdict == "above limit"


def test_per_line_the_largest_ratio_counts():
    found = judged((limit(value=10.0), limit(name="stricter", value=4.0), blue(), skin()), value=2.0)
    thermal = next(h for h in found.hazards if h.hazard == "retina thermal")
    assert thermal.ratio == pytest.approx(0.5)
    assert thermal.parts[0][1] == "stricter"


def test_pulsed_line_needs_a_limit_per_pulse_and_one_over_the_exposure():
    pulsed = beam(lines=(line(power=0.2, pulses=train()),))
    over = (limit(), blue(), skin())
    found = judged(over, value=1e-6, beams=(pulsed,))
    assert found.verdict == "not established"
    assert any("no limit per pulse" in reason for reason in found.reasons)
    short = {"quantity": "radiant exposure", "durations": (1e-9, 18e-6), "per": "pulse", "train": "none"}
    both = (*over, limit(name="eye pulse", value=5e-3, **short), skin(name="skin pulse", value=200.0, **short))
    assert judged(both, value=1e-6, beams=(pulsed,)).verdict == "below limit"
    only = (*(entry for entry in both if entry.per == "pulse"), blue())
    assert any("no limit over the exposure" in reason for reason in judged(only, value=1e-6, beams=(pulsed,)).reasons)


def test_femtosecond_pulses_are_never_below():
    short = {"quantity": "radiant exposure", "durations": (1e-15, 18e-6), "per": "pulse", "train": "none"}
    limits = (
        *EYE_BLUE_SKIN,
        limit(name="eye pulse", value=5e-3, **short),
        skin(name="skin pulse", value=200.0, **short),
    )
    pulsed = beam(lines=(line(power=0.2, pulses=train(duration=50e-15)),))
    found = judged(limits, value=1e-6, beams=(pulsed,))
    assert found.verdict == "not established"
    assert any("100 fs" in reason for reason in found.reasons)


def test_quarter_second_counts_for_visible_light_only():
    quick = (
        limit(value=25.0, durations=(0.25, 10.0), wavelengths=(400e-9, 1400e-9)),
        blue(),
        skin(durations=(0.25, 10.0)),
    )
    visible = judged(quick, durations=(0.25,), viewing="unintended")
    assert visible.verdict == "below limit"
    invisible = judged(quick, durations=(0.25,), viewing="unintended", beams=(beam(lines=(line(wavelength=808e-9),)),))
    assert invisible.verdict == "not established"
    assert any("400–700 nm only" in reason for reason in invisible.reasons)


def test_photochemical_time_is_the_daily_sum():
    """Without a stated sum a working day of 30 000 s counts (contract: needed for blue dose)."""
    found = judged((limit(), blue(quantity="radiant exposure", value=1e5), skin()), value=5.0)
    dose = next(c for c in found.comparisons if c.hazard == "retina photochemical")
    assert dose.time == 30_000.0
    assert found.verdict == "above limit"
    short = judged((limit(), blue(quantity="radiant exposure", value=1e5), skin()), value=5.0, daily=600.0)
    assert next(c for c in short.comparisons if c.hazard == "retina photochemical").time == 600.0


def test_several_durations_are_judged_each():
    limits = (limit(value=18.0, time_exponent=-0.25, durations=(0.25, 10.0)), blue(), skin(durations=(0.25, 3e4)))
    found = judged(limits, durations=(1.0, 60.0))
    assert {c.duration for c in found.comparisons} == {1.0, 60.0}
    assert found.verdict == "not established"  # no thermal limit covers 60 s


def test_a_detector_that_cannot_tell_is_a_reason():
    found = judge(observer(), (beam(),), EYE_BLUE_SKIN, lambda _line, _limit: "no radiance there", (), ())
    assert found.verdict == "not established"
    assert any("no radiance there" in reason for reason in found.reasons)


@pytest.mark.parametrize("words", ["EXAMPLE: replace by edition", "todo", "TBD", "Replace by edition", "?", " xxx"])
@pytest.mark.parametrize("key", ["source", "entered_by"])
def test_a_placeholder_is_not_a_limit_anybody_answers_for(words, key):
    found = judged((limit(**{key: words}), blue(), skin()))
    assert found.verdict == "not established"
    assert any("still an example" in reason for reason in found.reasons)
    assert judged((limit(**{key: words}), blue(), skin()), value=11.0).verdict == "above limit"


def test_a_placeholder_leaves_no_hazard_out():
    found = judged((limit(), blue()), not_judged=(("skin", "EXAMPLE: covered by the clothing rule"),))
    assert found.verdict == "not established"
    assert any(reason.startswith("skin: no limit") for reason in found.reasons)


def test_bounds_on_both_sides_name_what_widens_them():
    found = judge(observer(), (beam(),), EYE_BLUE_SKIN, received(9.0, 8.9, 12.0), (), ())
    assert found.verdict == "not established"
    assert any("0.89 and 1.2 of the limit" in reason and "numerical error" in reason for reason in found.reasons)


def test_a_gate_stands_in_the_rows_of_its_hazards_and_comparisons():
    """Rows say what the observer's verdict says; a gate of one line leaves the hazards of another alone."""
    green, far = line(name="green", key="g"), line(name="far", wavelength=1550e-9, key="f")
    beams = (beam(lines=(green, far)),)
    limits = (
        limit(),
        blue(),
        skin(wavelengths=(400e-9, 1e-3)),
        limit(name="front", tissue="cornea and lens", wavelengths=(1400e-9, 1e-3)),
    )
    gate = Gate("a load is left out at 1550 nm", frozenset({"f"}))
    found = judged(limits, beams=beams, gates=(gate,))
    verdicts = {h.hazard: h.verdict for h in found.hazards}
    assert verdicts == {
        "retina thermal": "below limit",
        "retina photochemical": "below limit",
        "cornea and lens": "not established",
        "skin": "not established",
    }
    assert all((gate.reason in h.reasons) == (h.verdict == "not established") for h in found.hazards)
    assert {c.line: c.verdict for c in found.comparisons} == {"green": "below limit", "far": "not established"}
    assert found.reasons == (gate.reason,)
    everywhere = judged(limits, beams=beams, gates=(Gate("for all"),))
    assert {h.verdict for h in everywhere.hazards} == {c.verdict for c in everywhere.comparisons} == {"not established"}


def test_a_gate_leaves_what_is_above_above():
    found = judged(value=11.0, gates=(Gate("direct light within reach"),))
    verdicts = {h.hazard: h.verdict for h in found.hazards}
    assert verdicts == {
        "retina thermal": "above limit", "retina photochemical": "above limit", "skin": "not established",
    }  # fmt: skip
    assert all("direct light within reach" in h.reasons for h in found.hazards)
    assert {c.limit: c.verdict for c in found.comparisons} == {
        "eye": "above limit", "blue": "above limit", "skin": "not established",
    }  # fmt: skip


def test_a_gate_of_a_line_that_acts_on_nothing_judged_still_holds_the_observer():
    far = line(name="far", wavelength=1550e-9, key="f")
    beams = (beam(lines=(line(key="g"), far)),)
    left = (("skin", "covered by the clothing rule"), ("cornea and lens", "goggles by rule"))
    found = judged((limit(), blue()), beams=beams, not_judged=left, gates=(Gate("left out", frozenset({"f"})),))
    assert found.verdict == "not established"
    assert {h.verdict for h in found.hazards} == {"not established"}


def test_against_an_example_no_comparison_is_below():
    found = judged((limit(source="EXAMPLE: edition"), blue(), skin()))
    assert {c.limit: c.verdict for c in found.comparisons} == {
        "eye": "not established", "blue": "below limit", "skin": "below limit",
    }  # fmt: skip
