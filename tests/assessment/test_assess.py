"""Whole assessments: a folded case by hand, gates, invariance, and what makes a verdict."""

from __future__ import annotations

import math

import numpy as np
import pytest
from assessment.sites import Everywhere, LoadReading, bay, beam, haze, limit, line, observer, replace, skin
from numpy.testing import assert_allclose

from lasescatter.assessment.assess import assess
from lasescatter.matter import Lognormal, Material, SingleSize, SizeMode
from lasescatter.problems import SiteError
from lasescatter.scene import Pulses, Stop


def only(scene):
    return assess(scene).observers[0]


def test_bay_is_below_and_about_a_thousandth_of_the_eye_limit():
    """Side scatter of 2 W in thin haze is about a thousandth of an eye limit (common practice, no source)."""
    found = only(bay())
    assert found.verdict == "below limit"
    thermal = next(c for c in found.comparisons if c.hazard == "retina thermal")
    scattered = dict(thermal.by_origin)["scattered"] / thermal.limit_value
    assert 1e-4 < scattered < 1e-2


def test_mirror_folded_linear_beam_by_hand():
    """Air only, 532 nm, vertical field, a fold of 90°: E3 on both legs with the running integral of the depolarised
    dipole pattern in closed form (Chandrasekhar's phase function; Delta and beta for 288.15 K as in the values
    computed from Bodhaine et al. 1999: Delta 0.957969, beta 1.316e-5 m⁻¹), s-polarised at the mirror."""
    green = line(power=5.0, polarization="linear", electric_field=(0.0, 0.0, 1.0), key="k", name="b")
    path = beam((0.0, 0.0, 0.0), (6.0, 0.0, 0.0), (6.0, 4.0, 0.0), lines=(green,), name="b", leaves_site=False,
                stop=Stop(0.0, (0.0, -1.0, 0.0)), mirror_reflectance=(0.95,))  # fmt: skip
    place = np.array([2.0, 1.5, 0.4])
    scene = bay(beams=(path,), loads=(), observers=(observer(position=tuple(place)),),
                air=bay().air.__class__(288.15, 101_325.0, 0.0))  # fmt: skip
    delta, beta, purity = 0.957969, 1.316e-5, 99 / 101

    def running(theta, double):
        """Integral of F11 + q cos(2 phi) F12 over theta, over 4 pi."""
        dipole = 0.75 * (1.5 * theta + math.sin(2 * theta) / 4)
        other = -0.75 * (theta / 2 - math.sin(2 * theta) / 4)
        return (delta * dipole + (1 - delta) * theta + purity * double * delta * other) / (4 * math.pi)

    total = 0.0
    for start, direction, length, power in (
        ([0, 0, 0], [1, 0, 0], 6.0, 5.0),
        ([6, 0, 0], [0, 1, 0], 4.0, 5.0 * 0.95),
    ):
        relative = place - np.array(start, dtype=float)
        s0 = float(relative @ direction)
        across = relative - s0 * np.array(direction)
        b = float(np.linalg.norm(across))
        double = 2 * (across[2] / b) ** 2 - 1
        angles = math.atan2(b, s0), math.atan2(b, s0 - length)
        total += power * beta / b * (running(angles[1], double) - running(angles[0], double))
    # Extinction by air over ten metres is 1e-4; the inputs have four digits.
    assert_allclose(only(scene).total("scattered"), total, rtol=1e-3)


def test_polydisperse_case_against_a_literal_sum():
    """Haze of Mie spheres summed sphere size by sphere size with miepython, element by element in Cartesian
    coordinates, against the whole program."""
    import miepython
    from exposure.literal import literal_sum

    median, sd, index, wavelength = 0.2e-6, 1.4, 1.45 + 0.001j, 532e-9
    load = haze(modes=(SizeMode(Lognormal(median, sd)),), material=Material(index, None),
                reading=LoadReading("number", 5e9), region=Everywhere())  # fmt: skip
    scene = bay(loads=(load,))
    grid = np.radians(np.linspace(0, 180, 721))
    logs = np.linspace(-6, 6, 301) * math.log(sd)
    weight = np.exp(-0.5 * (logs / math.log(sd)) ** 2)
    weight /= weight.sum()
    f11, f12 = np.zeros_like(grid), np.zeros_like(grid)
    extinction = scattering = 0.0
    for log, w in zip(logs, weight, strict=True):
        radius = median * math.exp(log)
        x = 2 * math.pi * radius / wavelength
        q_ext, q_sca, _, _ = miepython.efficiencies_mx(complex(index.real, -index.imag), x)
        s1, s2 = miepython.S1_S2(complex(index.real, -index.imag), x, np.cos(grid), norm="wiscombe")
        area = math.pi * radius**2
        extinction += w * q_ext * area
        scattering += w * q_sca * area
        k = 2 * math.pi / wavelength
        f11 += w * (abs(s1) ** 2 + abs(s2) ** 2) / 2 * 4 * math.pi / k**2
        f12 += w * (abs(s2) ** 2 - abs(s1) ** 2) / 2 * 4 * math.pi / k**2
    f11, f12 = f11 / scattering, f12 / scattering
    number = 5e9
    everywhere = lambda x: np.ones(x.shape[:-1])  # noqa: E731
    slow = literal_sum(
        [0, 0, 1.2], [9, 0, 1.2], [4, 1.5, 1.6],
        [(number * scattering, number * extinction, lambda t: np.interp(t, grid, f11),
          lambda t: np.interp(t, grid, f12), everywhere)],
        elements=40_000, axis=[0, 0, 1], purity=99 / 101,
    )  # fmt: skip
    found = only(scene)
    ours = sum(row.program for row in found.hand_checks if row.component == "test haze") / 2.0
    # Air's own extinction (1.3e-5 /m over ten metres) is not in the literal sum: 2e-4.
    assert_allclose(ours, slow, rtol=5e-4)


def test_translating_and_turning_the_site_changes_nothing():
    """A quarter turn about z and a shift: box faces stay square to the axes."""
    scene = bay()
    here = only(scene)

    def moved(p):
        return (-p[1] + 5.0, p[0] - 3.0, p[2] + 0.5)

    low, high = moved((1.0, -2.0, 0.0)), moved((8.0, 2.0, 3.0))
    box = scene.loads[0].region.__class__(
        tuple(map(min, zip(low, high, strict=True))), tuple(map(max, zip(low, high, strict=True)))
    )
    path = scene.beams[0]
    path = replace(path, points=tuple(moved(p) for p in path.points), stop=Stop(0.3, (0.0, -1.0, 0.0)))
    there = only(
        bay(
            beams=(path,), loads=(replace(scene.loads[0], region=box),),
            observers=(replace(scene.observers[0], position=moved(scene.observers[0].position)),),
        )
    )  # fmt: skip
    for name in ("scattered", "scattered_compared", "diffuse"):
        assert_allclose(there.total(name), here.total(name), rtol=1e-6)


def test_mirror_image_places_of_an_unpolarized_beam_get_the_same():
    scene = bay()
    plain = replace(scene.beams[0].lines[0], polarization="unpolarized", electric_field=None)
    path = replace(scene.beams[0], lines=(plain,))
    sides = tuple(observer(name=str(y), key=str(y), position=(4.0, y, 1.6)) for y in (1.5, -1.5))
    found = assess(bay(beams=(path,), observers=sides)).observers
    assert_allclose(found[0].total("scattered"), found[1].total("scattered"), rtol=1e-9)


def test_direct_beam_within_reach_is_not_established_and_in_it_is_above():
    near = only(bay(observers=(observer(position=(4.0, 0.2, 1.2)),)))
    assert near.verdict == "not established"
    assert any("within reach" in reason for reason in near.reasons)
    inside = only(bay(observers=(observer(position=(4.0, 0.001, 1.2)),)))
    assert inside.verdict == "above limit"
    assert dict(inside.comparisons[0].by_origin)["direct"] > 1e4


def test_stop_light_is_lamberts_law():
    """E = rho P cos/(pi r²), here seen at an angle from two metres (Lambert's law)."""
    place = np.array([7.2, 0.8, 1.2])
    found = only(bay(observers=(observer(position=tuple(place)),)))
    towards = place - np.array([9, 0, 1.2])
    r = np.linalg.norm(towards)
    expected = 0.3 * 2.0 * (-towards[0] / r) / (math.pi * r**2)
    assert_allclose(sum(line.diffuse_compared for line in found.lines), expected, rtol=1e-9)
    assert found.total("diffuse") < expected


def test_thick_load_is_never_below():
    thick = haze(reading=LoadReading("extinction", 0.2, 532e-9))
    found = only(bay(loads=(thick,)))
    assert found.optical_thickness > 0.5
    assert found.verdict == "not established"
    assert any("too thick" in reason for reason in found.reasons)


def test_between_a_tenth_and_a_half_the_first_order_is_raised():
    found = only(bay(loads=(haze(reading=LoadReading("extinction", 0.04, 532e-9)),)))
    tau = found.optical_thickness
    assert 0.1 < tau < 0.5
    origins = dict(found.comparisons[0].by_origin)
    assert_allclose(origins["allowance for higher orders"] / origins["scattered"], 1.5 * tau, rtol=1e-9)


def test_wide_beam_is_not_established():
    wide = replace(bay().beams[0].lines[0], divergence=12e-3)
    found = only(bay(beams=(replace(bay().beams[0], lines=(wide,)),)))
    assert found.verdict == "not established"
    assert any("10 mrad" in reason for reason in found.reasons)


def test_more_power_never_lowers_any_ratio():
    ratios = []
    for power in (0.5, 2.0, 8.0, 1e4):
        stronger = replace(bay().beams[0].lines[0], power=power)
        ratios.append(only(bay(beams=(replace(bay().beams[0], lines=(stronger,)),))).ratio)
    assert ratios == sorted(ratios)
    assert_allclose(ratios[1] / ratios[0], 4.0, rtol=1e-9)


def test_extinction_of_the_load_comes_out_as_stated():
    for reading in (LoadReading("extinction", 0.01, 532e-9),):
        component = next(c for c in assess(bay(loads=(haze(reading=reading),))).components if c.name == "test haze")
        assert_allclose(component.extinction, 0.01, rtol=1e-12)
        again = haze(reading=LoadReading("mass", component.mass))
        by_mass = next(c for c in assess(bay(loads=(again,))).components if c.name == "test haze")
        assert_allclose(by_mass.extinction, 0.01, rtol=1e-9)
        number = haze(reading=LoadReading("number", component.number), material=Material(1.42 + 1e-6j, None))
        by_number = next(c for c in assess(bay(loads=(number,))).components if c.name == "test haze")
        assert_allclose(by_number.extinction, 0.01, rtol=1e-9)
        assert by_number.mass is None


def test_sizes_outside_the_range_name_their_key():
    with pytest.raises(SiteError, match=r'particles\["test haze"\]\.sizes'):
        assess(bay(loads=(haze(modes=(SizeMode(SingleSize(5e-3)),)),)))


def test_pulsed_beam_per_pulse_and_mean():
    pulsed = replace(bay().beams[0].lines[0], power=0.2, pulses=Pulses(10e-3, 8e-9, 20.0, None))
    found = only(bay(beams=(replace(bay().beams[0], lines=(pulsed,)),)))
    (one,) = found.lines
    assert_allclose(one.pulse_scattered * 20.0, one.scattered, rtol=1e-12)
    assert_allclose(one.pulse_compared * 20.0, one.scattered_compared + one.diffuse_compared, rtol=1e-12)


def test_single_shot_is_averaged_over_the_exposure():
    shot = replace(bay().beams[0].lines[0], power=0.0, pulses=Pulses(10e-3, 8e-9, None, 1))
    found = only(bay(beams=(replace(bay().beams[0], lines=(shot,)),)))
    (one,) = found.lines
    assert_allclose(one.scattered, one.pulse_scattered / 10.0, rtol=1e-12)


def test_in_the_beam_lines():
    (entry,) = assess(bay()).in_the_beam
    assert [spot.place for spot in entry.spots] == ["start", "stop", "nearest to console operator"]
    assert entry.spots[0].multiple > 1000
    # sqrt(P/(pi EL)) for a white card with the strictest limit, 10 W/m² here.
    assert_allclose(entry.spots[0].diffuse_distance, math.sqrt(2.0 / (math.pi * 10.0)), rtol=1e-9)
    radius = math.hypot(3e-3, 1e-3 * entry.hazard_distance) / 2
    assert_allclose(2.0 * (1 - math.exp(-2 * (3.5e-3 / radius) ** 2)) / (math.pi * 3.5e-3**2), 10.0, rtol=1e-9)


def test_in_the_beam_without_limits_says_why():
    (entry,) = assess(bay(limits=())).in_the_beam
    assert entry.limit is None and "no entered limit" in entry.reason
    assert entry.spots[0].multiple is None


def test_walls_count_in_the_upper_bound_of_skin_only():
    found = only(bay())
    by_hazard = {c.hazard: c for c in found.comparisons}
    walls = [cause for cause, _ in by_hazard["skin"].allowances if cause.startswith("walls")]
    # The tight room about beam and observer: 9 m by 2.5 m by 2.5 m.
    assert walls == ["walls of a room of 102 m²"]
    assert not [cause for cause, _ in by_hazard["retina thermal"].allowances if cause.startswith("walls")]


def test_below_needs_the_whole_reach():
    """Eye 0.26 m from a white stop that gives 0.97 of the limit there: within a reach of 0.1 m it is far above
    (Lambert's law, E = rho P/(pi r²) seen square: 0.3 · 2/(pi · 0.16²) = 7.5 W/m² against 2.8)."""
    close = limit(value=2.85)
    still = observer(position=(8.74, 0.0, 1.2 + 1e-3), reach=1e-4)
    path = replace(bay().beams[0], points=((9.0, -5.0, 1.2), (9.0, 0.0, 1.2)), stop=Stop(0.3, (-0.8, -0.6, 0.0)))
    scene = bay(beams=(path,), limits=(close, skin()), not_judged=(("retina photochemical", "covered elsewhere"),))
    assert only(replace(scene, observers=(still,))).verdict == "below limit"
    moving = only(replace(scene, observers=(replace(still, reach=0.1),)))
    assert moving.verdict == "not established"
    assert any("reach, stop" in reason for reason in moving.reasons)


@pytest.mark.parametrize("reach", [0.1, 0.5])
def test_upper_bound_holds_at_every_place_within_reach(reach):
    """Scattered and stop light at random places within the reach stay under the bound of the stated place."""
    centre = np.array([7.5, 1.0, 1.5])
    home = only(bay(observers=(observer(position=tuple(centre), reach=reach),)))
    bound = {c.limit: c.ratio_high for c in home.comparisons}
    rng = np.random.default_rng(8)
    steps = rng.normal(size=(60, 3))
    steps *= (reach * rng.uniform(0, 1, 60) ** (1 / 3) / np.linalg.norm(steps, axis=1))[:, None]
    people = tuple(observer(name=str(i), key=str(i), position=tuple(centre + s)) for i, s in enumerate(steps))
    for person in assess(bay(observers=people)).observers:
        for comparison in person.comparisons:
            assert comparison.ratio <= bound[comparison.limit]


def test_error_of_the_size_average_widens_the_bounds():
    """Large weakly absorbing drops do not reach 1e-3: their own error estimate stands in the ratio's bounds."""
    from lasescatter.assessment.components import SiteOptics

    scene = bay()
    mixture = SiteOptics(scene).mixture(532e-9)
    assert 0 < mixture.error <= 1e-3
    thermal = next(c for c in only(scene).comparisons if c.hazard == "retina thermal")
    scattered = dict(thermal.by_origin)["scattered"] / thermal.limit_value
    assert thermal.ratio_high - thermal.ratio >= mixture.error * scattered * 0.99
    assert thermal.ratio - thermal.ratio_low >= mixture.error * scattered * 0.99


def test_acceptance_field_takes_less_than_the_full_field():
    field = limit(name="narrow", acceptance=0.1)
    found = only(bay(limits=(limit(), field, skin())))
    wide, narrow = (next(c for c in found.comparisons if c.limit == name) for name in ("eye", "narrow"))
    assert dict(narrow.by_origin)["scattered"] < 0.3 * dict(wide.by_origin)["scattered"]
    assert narrow.window is not None


def test_radiance_limit_is_compared_with_the_peak():
    """L = P beta T/(d sin theta) × 2/sqrt(pi), largest along the leg, from the hand-check factors."""
    found = only(bay(limits=(limit(name="bright", quantity="radiance", value=1e6),), loads=()))
    (comparison,) = found.comparisons
    (row,) = found.hand_checks
    d = math.hypot(3e-3, 1e-3 * 0.0) / math.sqrt(2)
    sine = math.sin(row.theta1)
    f11 = 0.957969 * 0.75 * (1 + math.cos(row.theta1) ** 2) + (1 - 0.957969)
    f12 = -0.957969 * 0.75 * sine**2
    beta = row.scattering / (4 * math.pi) * (f11 + row.q * math.cos(2 * row.phi) * f12)
    at_start = 2.0 * beta / (d * sine) * 2 / math.sqrt(math.pi)
    assert dict(comparison.by_origin)["scattered"] == pytest.approx(at_start, rel=2e-3)


def test_many_observers_are_computed_in_parts_like_one_by_one():
    places = np.random.default_rng(1).uniform([-1, 0.6, 0.2], [10, 3, 2], (1100, 3))
    people = tuple(observer(name=f"p{i}", key=f"p{i}", position=tuple(p)) for i, p in enumerate(places))
    together = assess(bay(observers=people, limits=())).observers
    for i in (0, 1023, 1024, 1099):
        alone = only(bay(observers=(people[i],), limits=()))
        assert_allclose(together[i].total("scattered"), alone.total("scattered"), rtol=1e-12)
        assert together[i].optical_thickness == pytest.approx(alone.optical_thickness, rel=1e-12)


def test_a_site_that_would_fill_the_memory_is_refused_first():
    lines = tuple(line(name=str(i), key=str(i), wavelength=(400 + i) * 1e-9) for i in range(50))
    points = tuple((float(i), float(i % 2), 0.0) for i in range(150))
    path = beam(*points, lines=lines, mirror_reflectance=(1.0,) * 148)
    people = tuple(observer(name=str(i), key=str(i)) for i in range(100))
    with pytest.raises(SiteError, match="split the site"):
        assess(bay(beams=(path,), observers=people))


def test_wavelength_outside_the_data_for_air_is_not_established_and_never_extrapolated():
    infrared = replace(bay().beams[0].lines[0], wavelength=10.6e-6, divergence=6e-3)
    path = replace(bay().beams[0], lines=(infrared,))
    far = limit(name="front", tissue="cornea and lens", wavelengths=(1.4e-6, 1e-3), value=1000.0)
    found = assess(bay(beams=(path,), limits=(far, skin(wavelengths=(1.4e-6, 1e-3))), loads=()))
    assert found.observers[0].verdict == "not established"
    assert any("10600 nm is outside the data" in reason for reason in found.observers[0].reasons)
    assert found.observers[0].total("scattered") == 0.0
    assert found.components == ()
    assert found.in_the_beam[0].spots[0].multiple > 1


def test_a_beam_that_leaves_the_site_downwards_meets_ground_that_is_not_computed():
    def leaving(z):
        path = replace(bay().beams[0], points=((0.0, 0.0, 1.2), (9.0, 0.0, z)), leaves_site=True, stop=None)
        return only(bay(beams=(path,), loads=()))

    assert leaving(1.2).verdict == "below limit"
    assert leaving(3.0).verdict == "below limit"
    down = leaving(1.0)
    assert down.verdict == "not established"
    assert any("downwards" in reason for reason in down.reasons)


def test_assumptions_in_force():
    names = {entry.name for entry in assess(bay()).assumptions}
    assert "Air outside the stated loads holds no particles" in names
    filled = {entry.name for entry in assess(bay(loads=(haze(region=Everywhere()),))).assumptions}
    assert "Air outside the stated loads holds no particles" not in filled
    close = assess(bay(observers=(observer(position=(4.0, 1.5, 1.6), reach=0.05),)))
    assert any("less than 0.25 m" in entry.name for entry in close.assumptions)
    assert [entry.direction for entry in close.assumptions] == sorted(
        (entry.direction for entry in close.assumptions), key=["low", "either", "high"].index
    )


def _ratios(scene, place, reach=0.0, name="eye"):
    found = only(replace(scene, observers=(observer(position=place, reach=reach),)))
    comparison = next(c for c in found.comparisons if c.limit == name)
    return comparison, found


def _big_drops_without_stop_light():
    """Light that goes forward within a few degrees."""
    path = replace(bay().beams[0], stop=Stop(0.0, (-1.0, 0.0, 0.0)))
    drops = haze(modes=(SizeMode(Lognormal(5e-6, 1.3)),), material=Material(1.33 + 0j, None),
                 region=haze().region.__class__((0.0, -2.0, 0.0), (9.0, 2.0, 3.0)))  # fmt: skip
    return bay(beams=(path,), loads=(drops,), limits=(limit(value=0.08), skin()))


def test_reach_bound_covers_the_forward_peak():
    """A head beyond the end of the beam that moves towards its axis meets the forward peak."""
    scene = _big_drops_without_stop_light()
    bound, found = _ratios(scene, (10.0, 0.3, 1.2), reach=0.25)
    there, _ = _ratios(scene, (9.95, 0.15, 1.2))
    assert there.ratio > 1
    assert bound.ratio_high >= there.ratio
    assert found.verdict == "not established"


def test_reach_bound_covers_the_polarization_null():
    small = haze(modes=(SizeMode(Lognormal(0.03e-6, 1.2)),), reading=LoadReading("extinction", 0.3, 532e-9),
                 region=haze().region.__class__((3.9, -2.0, 0.0), (4.1, 2.0, 3.0)))  # fmt: skip
    path = replace(bay().beams[0], stop=Stop(0.0, (-1.0, 0.0, 0.0)))
    scene = bay(beams=(path,), loads=(small,), limits=(limit(value=3.67e-4), skin()))
    bound, _ = _ratios(scene, (4.0, 0.0, 2.2), reach=0.25)
    there, _ = _ratios(scene, (4.0, 0.21, 2.1))
    assert there.ratio > 2 * bound.ratio
    assert bound.ratio_high >= there.ratio


def test_radiance_bound_sees_round_the_edge_of_the_stop():
    scene = bay(limits=(limit(name="bright", quantity="radiance", value=4e3), skin()))
    bound, _ = _ratios(scene, (9.05, 0.3, 1.2), reach=0.25, name="bright")
    there, _ = _ratios(scene, (8.85, 0.3, 1.2), name="bright")
    assert there.ratio > 1
    assert bound.ratio_high >= there.ratio


@pytest.mark.parametrize("quantity", ["irradiance", "radiance"])
@pytest.mark.parametrize("acceptance", [None, 0.1])
def test_bound_of_every_kind_of_limit_holds_within_reach(quantity, acceptance):
    rng = np.random.default_rng(17)
    entry = limit(quantity=quantity, acceptance=acceptance)
    for centre in ([4.0, 1.2, 1.5], [9.6, 0.8, 1.3], [-0.8, 0.7, 1.0]):
        home = only(bay(limits=(entry,), observers=(observer(position=tuple(centre), reach=0.3),)))
        bound = home.comparisons[0].ratio_high if home.comparisons else np.inf
        steps = rng.normal(size=(25, 3))
        steps *= (0.3 * rng.uniform(0, 1, 25) ** (1 / 3) / np.linalg.norm(steps, axis=1))[:, None]
        people = tuple(
            observer(name=str(i), key=str(i), position=tuple(np.array(centre) + s), reach=0.0)
            for i, s in enumerate(steps)
        )
        for person in assess(bay(limits=(entry,), observers=people)).observers:
            for comparison in person.comparisons:
                assert comparison.ratio <= bound * (1 + 1e-6)


def test_adding_a_limit_never_shortens_the_hazard_distance():
    """Per place the largest multiple over the limits; the hazard distance is the longest over the eye limits."""
    eye = limit(value=25.0)
    narrow = skin(value=50.0, aperture=1e-3)
    (alone,) = assess(bay(limits=(eye,))).in_the_beam
    (both,) = assess(bay(limits=(eye, narrow))).in_the_beam
    assert both.hazard_distance == pytest.approx(alone.hazard_distance, rel=1e-12)
    assert both.hazard_limit == "eye"
    (narrow_alone,) = assess(bay(limits=(narrow,))).in_the_beam
    for spot, first, second in zip(both.spots, alone.spots, narrow_alone.spots, strict=True):
        assert spot.multiple == pytest.approx(max(first.multiple, second.multiple), rel=1e-12)
        assert spot.diffuse_distance == pytest.approx(max(first.diffuse_distance, second.diffuse_distance), rel=1e-12)


def test_a_point_on_a_straight_path_is_no_mirror():
    middle = replace(
        bay().beams[0], points=((0.0, 0.0, 1.2), (5.0, 0.0, 1.2), (9.0, 0.0, 1.2)), mirror_reflectance=(1.0,)
    )
    for mirrors in ("real", "ideal"):
        path = replace(middle, mirrors=mirrors)
        assert_allclose(only(bay(beams=(path,))).total("scattered"), only(bay()).total("scattered"), rtol=1e-6)


def test_behind_the_laser_on_its_axis_a_far_box_is_still_seen():
    """Backscatter of a box 1 km ahead, seen from the axis: P beta(pi) (1/r1 − 1/r2) T² (integral of 1/r²)."""
    from lasescatter.scene import Box

    far = haze(
        reading=LoadReading("extinction", 0.01, 532e-9), region=Box((1000.1234, -5.0, 0.0), (1001.1234, 5.0, 9.0))
    )
    path = beam((0.0, 0.0, 2.0), (9.0, 0.0, 2.0), lines=(line(name="b", key="b", divergence=1e-4),))
    found = only(bay(beams=(path,), loads=(far,), observers=(observer(position=(-1.0, 0.0, 2.0)),)))
    row = next(r for r in found.hand_checks if r.component == "test haze")
    optics = next(c for c in assess(bay(beams=(path,), loads=(far,))).components if c.name == "test haze")
    r1, r2 = 1001.1234, 1002.1234
    expected = optics.scattering * optics.phase[-1] * (1 / r1 - 1 / r2) * math.exp(-2 * 0.005 - 2 * 1.28e-5 * 1e3)
    assert_allclose(row.program, expected, rtol=2e-3)


def test_hot_spot_multiplies_the_peak_radiance_of_the_stop():
    bright = limit(
        name="bright", quantity="radiance dose", value=1e6, durations=(1e-9, 1e-6), per="pulse", train="none"
    )
    ratios = []
    for hot in (1.0, 3.0):
        pulsed = replace(bay().beams[0].lines[0], power=0.2, pulses=Pulses(10e-3, 8e-9, 20.0, None, hot))
        found = only(bay(beams=(replace(bay().beams[0], lines=(pulsed,)),), limits=(bright,)))
        ratios.append(dict(found.comparisons[0].by_origin)["stop"])
    assert ratios[1] == pytest.approx(3 * ratios[0], rel=1e-12)


def test_optical_density_of_a_hazard_is_that_of_the_sum():
    lines = tuple(
        replace(bay().beams[0].lines[0], name=str(i), key=str(i), wavelength=(530 + i) * 1e-9) for i in range(3)
    )
    near = observer(position=(8.7, 0.3, 1.2), reach=0.01)
    found = only(bay(beams=(replace(bay().beams[0], lines=lines),), observers=(near,), limits=(limit(value=2.0),)))
    thermal = next(h for h in found.hazards if h.hazard == "retina thermal")
    assert thermal.ratio > 1
    assert thermal.optical_density == pytest.approx(math.log10(thermal.ratio), rel=1e-12)
    assert thermal.optical_density > max(c.optical_density for c in found.comparisons)


def test_a_role_that_vouches_is_somebody():
    thick = LoadReading("extinction", 2.0, 532e-9)

    def fraction(role):
        return only(bay(loads=(haze(reading=thick, steady_by=role),))).lines[0].load_fraction

    assert fraction("duty laser safety officer") == 1.0
    assert fraction("EXAMPLE: role") == fraction(None) < 1.0


@pytest.mark.parametrize("distance", [0.2505, 0.252, 0.26, 0.27, 0.3])
def test_no_place_within_reach_of_a_below_is_in_direct_light(distance):
    """Reach and beam add: a head at 0.252 m that moves 0.25 m is in the beam."""
    home = only(bay(loads=(), observers=(observer(position=(4.0, distance, 1.2), reach=0.25),)))
    moved = only(bay(loads=(), observers=(observer(position=(4.0, distance - 0.25, 1.2), reach=0.0),)))
    if moved.verdict != "below limit":
        assert home.verdict != "below limit"
    if home.verdict == "below limit":
        assert moved.verdict == "below limit"


def test_thickness_allows_for_the_reach():
    """Just under the step at optical thickness 0.1 the upper bound already takes the place behind it."""
    everywhere = haze(reading=LoadReading("extinction", 0.00125, 532e-9), region=Everywhere())
    plain = replace(bay().beams[0].lines[0], polarization="unpolarized", electric_field=None)
    path = replace(bay().beams[0], lines=(plain,), points=((0.0, 0.0, 1.2), (1.0, 0.0, 1.2)),
                   stop=Stop(0.0, (-1.0, 0.0, 0.0)))  # fmt: skip
    scene = bay(beams=(path,), loads=(everywhere,), limits=(limit(), skin()))
    home = only(replace(scene, observers=(observer(position=(0.5, 39.58, 1.2), reach=0.1),)))
    there = only(replace(scene, observers=(observer(position=(0.5, 39.68, 1.2), reach=0.0),)))
    assert home.optical_thickness < 0.1 < there.optical_thickness
    assert home.comparisons[0].ratio_high >= there.comparisons[0].ratio


@pytest.mark.parametrize("order", [1, -1])
def test_of_equal_multiples_the_eye_stands_everywhere(order):
    """Limits of the same height for cornea and skin: one name, whichever comes first in the site file."""
    infrared = replace(bay().beams[0].lines[0], wavelength=10.6e-6, divergence=3e-3)
    both = (
        skin(name="skin far", wavelengths=(1.4e-6, 1e-3), value=1000.0, aperture=3.5e-3),
        limit(name="cornea", tissue="cornea and lens", wavelengths=(1.4e-6, 1e-3), value=1000.0, aperture=3.5e-3),
    )
    scene = bay(beams=(replace(bay().beams[0], lines=(infrared,)),), limits=both[::order], loads=())
    (entry,) = assess(scene).in_the_beam
    assert {entry.limit, entry.hazard_limit, *(spot.limit for spot in entry.spots)} == {"cornea"}
