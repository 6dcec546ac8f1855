"""Loads as they float: moist air, kinds of several parts, stand-ins, masses dry and ambient; air that thins."""

from __future__ import annotations

import math
from itertools import pairwise

import numpy as np
import pytest
from assessment.sites import Everywhere, LoadReading, bay, beam, haze, line, observer, replace
from numpy.testing import assert_allclose

from lasescatter.assessment.assess import assess
from lasescatter.assessment.record import record, record_text
from lasescatter.matter import (
    Growth,
    HenyeyGreenstein,
    IndexTable,
    Lognormal,
    Material,
    MeasuredMatrix,
    SizeMode,
    Trust,
)
from lasescatter.problems import SiteError
from lasescatter.scene import Air, Stop

WATER = IndexTable((300e-9, 1600e-9), (1.335, 1.335), (1e-9, 1e-9), (False, False), "water", "invented")
SALT = Growth(0.61, (), WATER, "Petters & Kreidenweis (2007), table 1: ammonium sulphate")
MOIST = Air(298.15, 101_325.0, 0.80)
DARK = replace(bay().beams[0], stop=Stop(0.0, (-1.0, 0.0, 0.0)))


def only(scene):
    return assess(scene).observers[0]


def summary(scene, name="test haze"):
    return next(c for c in assess(scene).components if c.name == name)


def grown(dry_diameter: float, kappa: float, humidity: float, temperature: float) -> float:
    """Growth factor: kappa-Köhler, Petters & Kreidenweis (2007), eq. 6, with 0.072 J/m² and water of 997.05 kg/m³."""
    kelvin = 4 * 0.072 * 0.01801528 / (8.314462618 * temperature * 997.05)
    low, high = 1.0, 10.0
    for _ in range(200):
        factor = (low + high) / 2
        balance = (factor**3 - 1) / (factor**3 - 1 + kappa) * math.exp(kelvin / (dry_diameter * factor))
        low, high = (factor, high) if balance < humidity else (low, factor)
    return factor


def test_a_growing_load_is_the_load_of_its_wet_sizes_and_index():
    dry, median, sd = 1.53 + 1e-7j, 0.12e-6, 1.6
    load = haze(modes=(SizeMode(Lognormal(median, sd)),), material=Material(dry, 1770.0, SALT))
    # The whole mode takes the factor of its median weighted by r⁶ (a lognormal: median·exp(6 ln² sd)).
    factor = grown(2 * median * math.exp(6 * math.log(sd) ** 2), 0.61, 0.80, 298.15)
    assert factor > 1.3
    share = factor**-3
    wet = haze(
        modes=(SizeMode(Lognormal(median * factor, sd)),),
        material=Material(share * dry + (1 - share) * (1.335 + 1e-9j), 1770.0 * share + 997.05 * (1 - share)),
    )
    for reading in (LoadReading("extinction", 0.01, 532e-9), LoadReading("number", 3e10)):
        moist, by_hand = (
            only(bay(loads=(replace(entry, reading=reading),), air=MOIST, beams=(DARK,))) for entry in (load, wet)
        )
        assert_allclose(moist.total("scattered"), by_hand.total("scattered"), rtol=1e-6, atol=0)
        for first, second in zip(moist.comparisons, by_hand.comparisons, strict=True):
            assert first.ratio_high == pytest.approx(second.ratio_high, rel=1e-6)
    printed = summary(bay(loads=(load,), air=MOIST))
    assert printed.growth_factor == pytest.approx(factor, rel=1e-9)
    assert printed.index == pytest.approx(share * dry + (1 - share) * (1.335 + 1e-9j), rel=1e-9)
    assert any("grow" in entry.name for entry in assess(bay(loads=(load,), air=MOIST)).assumptions)
    assert not any("grow" in entry.name for entry in assess(bay(loads=(load,))).assumptions)


def test_mass_dry_and_ambient_differ_by_the_water():
    load = haze(material=Material(1.53 + 0j, 1770.0, SALT))
    dry, ambient = (
        summary(bay(loads=(replace(load, reading=LoadReading("mass", 1e-6, basis=basis)),), air=MOIST))
        for basis in ("dry", "ambient")
    )
    assert dry.dry_mass == pytest.approx(1e-6, rel=1e-12)
    assert ambient.mass == pytest.approx(1e-6, rel=1e-12)
    volume = dry.growth_factor**3
    water = 1 + (volume - 1) * 997.05 / 1770.0
    assert dry.mass / dry.dry_mass == pytest.approx(water, rel=1e-9)
    assert dry.extinction / ambient.extinction == pytest.approx(water, rel=1e-9)
    assert dry.mass_extinction == pytest.approx(ambient.mass_extinction, rel=1e-12)


def test_air_too_humid_for_what_grows_names_key_and_load():
    load = haze(material=Material(1.53 + 0j, 1770.0, SALT))
    wet = Air(298.15, 101_325.0, 0.995)
    with pytest.raises(SiteError, match=r'air\.relative_humidity.*99.*particles\["test haze"\]'):
        assess(bay(loads=(load,), air=wet))
    assert only(bay(air=wet)).verdict == "below limit"


def test_parts_of_a_kind_scatter_like_loads_of_their_own():
    """Two modes, each of its own material, against two loads with the share of the number each."""
    small, large = Material(1.55 + 0.02j, 1800.0), Material(1.38 + 1e-7j, 1100.0)
    modes = SizeMode(Lognormal(0.08e-6, 1.5), 0.9, small), SizeMode(Lognormal(0.6e-6, 1.4), 0.1, large)
    mixed = haze(modes=modes, material=small, reading=LoadReading("number", 1e10))
    parts = tuple(
        haze(
            name=str(i), key=str(i), modes=(replace(mode, weight=1.0, material=None),), material=mode.material,
            reading=LoadReading("number", 1e10 * mode.weight),
        )
        for i, mode in enumerate(modes)
    )  # fmt: skip
    together, apart = (assess(bay(loads=loads, beams=(DARK,))) for loads in ((mixed,), parts))
    light = [found.observers[0].total("scattered") for found in (together, apart)]
    # Each average is good to a thousandth at its worst angle.
    assert_allclose(*light, rtol=2e-3, atol=0)
    printed = summary(bay(loads=(mixed,)))
    own = [c for c in apart.components if c.name in ("0", "1")]
    assert printed.extinction == pytest.approx(sum(c.extinction for c in own), rel=2e-4)
    assert printed.mass == pytest.approx(sum(c.mass for c in own), rel=1e-9)


def greenstein(g: float, theta):
    return (1 - g**2) / (1 + g**2 - 2 * g * np.cos(theta)) ** 1.5


def matrix(f12: bool) -> MeasuredMatrix:
    """A Rayleigh pattern as measured: the same curve as air's, but for its depolarisation."""
    theta = np.radians(np.linspace(0, 180, 721))
    f11 = 0.75 * (1 + np.cos(theta) ** 2)
    other = tuple((-0.75 * np.sin(theta) ** 2).tolist()) if f12 else None
    return MeasuredMatrix(tuple(theta.tolist()), tuple(f11.tolist()), other, None, None, 1.0, "dust.csv")


def stand_in(of, factor=1.0, **changes):
    reading = changes.pop("reading", LoadReading("extinction", 0.01, 532e-9))
    return haze(
        modes=(), material=None, stand_in=of, albedo=0.8, reading=reading, trust=Trust("stand-in", factor, "invented"),
        **changes,
    )  # fmt: skip


def test_henyey_greenstein_scatters_by_its_formula():
    """E3 by hand: P albedo k/b times the integral of the phase function (Henyey & Greenstein 1941)."""
    thin = stand_in(HenyeyGreenstein(0.7), region=Everywhere(), reading=LoadReading("extinction", 1e-6, 532e-9))
    found = only(bay(loads=(thin,), beams=(DARK,)))
    row = next(row for row in found.hand_checks if row.component == "test haze")
    theta = np.linspace(row.theta1, row.theta2, 20_001)
    integral = np.trapezoid(greenstein(0.7, theta), theta) / (4 * math.pi)
    assert row.program == pytest.approx(2.0 * 0.8 * 1e-6 / row.b * integral, rel=2e-4)
    assert row.integral_12 == pytest.approx(0.0, abs=1e-9)


@pytest.mark.parametrize("f12", [True, False])
def test_a_measured_matrix_with_and_without_f12(f12):
    """A dipole of purity 99/101 seen from beside the beam, in closed form; without F12 light is as unpolarized."""
    place = observer(position=(4.5, 1.5, 1.2))
    load = stand_in(matrix(f12), region=Everywhere(), reading=LoadReading("extinction", 1e-6, 532e-9))
    found = only(bay(loads=(load,), beams=(DARK,), observers=(place,)))
    row = next(row for row in found.hand_checks if row.component == "test haze")

    def running(t):
        even, odd = 0.75 * (1.5 * t + math.sin(2 * t) / 4), -0.75 * (t / 2 - math.sin(2 * t) / 4)
        return even - (99 / 101 * odd if f12 else 0.0)  # phi = 90 degrees

    expected = 2.0 * 0.8 * 1e-6 / 1.5 * (running(row.theta2) - running(row.theta1)) / (4 * math.pi)
    assert row.program == pytest.approx(expected, rel=2e-4)


def test_a_stand_in_away_from_its_reading_is_not_established():
    load = stand_in(HenyeyGreenstein(0.7), factor=5.0, reading=LoadReading("extinction", 0.002, 550e-9))
    found = assess(bay(loads=(load,), beams=(DARK,)))
    assert found.observers[0].verdict == "not established"
    (gap,) = found.gaps
    assert gap == (
        'extinction of "test haze" at 532 nm is not known: it was read at 550 nm and no sizes are given; the reading '
        "is used unchanged"
    )
    near = stand_in(HenyeyGreenstein(0.7), factor=5.0, reading=LoadReading("extinction", 0.002, 533e-9))
    assert assess(bay(loads=(near,), beams=(DARK,))).gaps == ()
    printed = summary(bay(loads=(load,)))
    assert printed.extinction == pytest.approx(0.002, rel=1e-12)
    assert (printed.number, printed.mass, printed.index, printed.effective_radius) == (None, None, None, None)


def test_steady_loads_of_a_kind_are_not_thinned():
    thick = haze(reading=LoadReading("extinction", 2.0, 532e-9), kind="glycol haze")
    moving, steady = (
        only(bay(loads=(replace(thick, steady_by=role),))).lines[0] for role in (None, "duty laser safety officer")
    )
    assert steady.load_fraction == 1.0 > moving.load_fraction
    assert steady.scattered_compared == pytest.approx(steady.scattered, rel=1e-9)


def test_instruments_read_the_load_as_stated():
    """2.996/MOR at 5 % and 3.912/V at 2 % (WMO-No. 8; Koschmieder 1924), both at 550 nm."""
    load = haze(reading=LoadReading("meteorological_optical_range", 300.0, 550e-9))
    readings = summary(bay(loads=(load,))).equivalents
    mor = next(r.value for r in readings if r.kind == "meteorological_optical_range")
    visual = next(r.value for r in readings if r.kind == "visual_range")
    assert mor == pytest.approx(300.0, rel=1e-9)
    assert visual / mor == pytest.approx(math.log(50) / math.log(20), rel=1e-12)
    assert {r.at for r in readings if r.kind == "extinction"} == {532e-9}


def test_standard_atmosphere_sends_less_from_a_vertical_beam():
    """Air alone, 10 km straight up, against elements of the beam with the troposphere's density in closed form,
    (1 − 0.0065 h/288.15)^4.2559 over geopotential height h (U.S. Standard Atmosphere 1976, eqs. 18, 33a, 42)."""
    from exposure.literal import literal_sum

    green = line(name="up", key="up", divergence=1e-4)
    path = beam((0.0, 0.0, 0.0), (0.0, 0.0, 10_000.0), lines=(green,), name="up", key="up", leaves_site=False,
                stop=Stop(0.0, (0.0, 0.0, -1.0)))  # fmt: skip
    place = observer(position=(800.0, 0.0, 0.0))
    air = Air(288.15, 101_325.0, 0.0, "standard atmosphere", 0.0)
    scene = bay(beams=(path,), loads=(), observers=(place,), air=air)
    thin, uniform = only(scene), only(replace(scene, air=replace(air, model="uniform")))
    assert thin.total("scattered") < uniform.total("scattered")
    delta, beta = 0.957969, 1.316e-5

    def density(points):
        z = points[..., 2]
        height = 6_356_766.0 * z / (6_356_766.0 + z)
        return np.where(z >= 0, (1 - 0.0065 * height / 288.15) ** 4.2558797, 0.0)

    slow = literal_sum(
        [0, 0, 0], [0, 0, 10_000.0], [800.0, 0, 0],
        [(beta, beta, lambda t: delta * 0.75 * (1 + np.cos(t) ** 2) + 1 - delta, lambda t: 0 * t, density)],
        elements=20_000,
    )  # fmt: skip
    # beta is printed with four digits.
    assert_allclose(thin.total("scattered"), slow, rtol=1e-3, atol=0)
    names = {entry.name for entry in assess(scene).assumptions}
    assert any("Standard Atmosphere" in name for name in names)
    assert not any("same all over the site" in name for name in names)
    for row in thin.hand_checks:
        by_hand = row.power * row.scattering / row.b * row.integral * math.exp(-row.tau_beam - row.tau_sight)
        assert by_hand == pytest.approx(row.hand, rel=1e-9)


def nulls_without_a_reason(value, path=""):
    """Places of a record that are null where no key beside them speaks of a reason."""
    if isinstance(value, dict):
        told = any("reason" in key for key in value)
        for key, entry in value.items():
            if entry is None and not told:
                yield f"{path}.{key}"
            inner = {**entry, **({"reason": ""} if told else {})} if isinstance(entry, dict) else entry
            yield from nulls_without_a_reason(inner, f"{path}.{key}")
    elif isinstance(value, list):
        for i, entry in enumerate(value):
            yield from nulls_without_a_reason(entry, f"{path}[{i}]")


def test_record_of_every_kind_of_load_is_finite_and_reasoned():
    import json

    growing = haze(name="salt", key="1", material=Material(1.53 + 0j, 1770.0, SALT), kind="sea salt",
                   trust=Trust("checked", 1.5, "seen"), reading=LoadReading("mass", 1e-6, basis="dry"))  # fmt: skip
    plain = haze(name="no density", key="2", material=Material(1.4 + 0j, None), reading=LoadReading("number", 1e9))
    measured = stand_in(matrix(True), name="dust", key="3")
    scene = bay(loads=(growing, plain, measured), air=MOIST)
    scene = replace(scene, files={"dust.csv": "angle [deg],F11"}, rules={"particles": {"sea salt": {"name": "x"}}})
    body = record(assess(scene))
    back = json.loads(record_text(body), parse_constant=lambda word: (_ for _ in ()).throw(ValueError(word)))
    assert back == body
    assert back["files"] == scene.files and back["rules"] == scene.rules
    assert list(nulls_without_a_reason(back["particles"], "particles")) == []
    salt = next(entry for entry in back["particles"] if entry["name"] == "salt")
    assert salt["kind"] == "sea salt" and salt["trust"] == {"mark": "checked", "factor": 1.5, "reason": "seen"}
    assert salt["growth_factor"] > 1 and salt["equivalents"]["dry_mass_kg_m3"] == pytest.approx(1e-6, rel=1e-12)
    assert {reading["kind"] for reading in salt["equivalents"]["readings"]} >= {"mass", "number", "visual_range"}
    assert [a for a, b in pairwise(sorted(c["name"] for c in back["particles"])) if a == b] == []


def test_hand_check_in_air_that_thins_agrees_or_says_why():
    up = line(name="up", key="up", divergence=1e-4)
    air = Air(288.15, 101_325.0, 0.0, "standard atmosphere", 0.0)
    agreed = set()
    for top, place in ((500.0, (40.0, 0.0, 0.0)), (30_000.0, (9_000.0, 0.0, 0.0))):
        path = beam((0.0, 0.0, 0.0), (0.0, 0.0, top), lines=(up,), name="up", key="up")
        (row,) = only(bay(beams=(path,), loads=(), observers=(observer(position=place),), air=air)).hand_checks
        agrees = abs(row.hand / row.program - 1) <= 0.05
        assert agrees == (row.remark == "")
        assert agrees or row.remark.startswith("density")
        agreed.add(agrees)
    assert agreed == {True, False}


def test_air_that_cannot_be_names_its_key():
    with pytest.raises(SiteError, match=r"air: pressure 0 Pa"):
        assess(bay(air=Air(293.15, 0.0)))
