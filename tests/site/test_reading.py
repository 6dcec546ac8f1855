"""Site files to scenes: what becomes of each key, and that nothing but its own error ever leaves the reader."""

from __future__ import annotations

import dataclasses
import json
import math
import random
import tomllib
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from site_cases import GOOD, changed, read_text

from lasescatter.matter import Lognormal, Material, ModifiedGamma, SingleSize, SizeMode
from lasescatter.problems import SiteError
from lasescatter.scene import Air, Box, Everywhere, LoadReading, Pulses, Scene, Stop
from lasescatter.site.reading import MOST_ENTRIES, MOST_LINES, MOST_PROBLEMS, read_site
from lasescatter.site.syntax import LARGEST_FILE

CONTINUOUS = read_text(GOOD["good_continuous"])
PULSED = read_text(GOOD["good_pulsed"])
COUNTED = read_text(GOOD["good_counted"])
SAMPLE = Path(__file__).parents[2] / "sample_sites" / "hazed_test_bay.toml"


def scene_with(*changes: tuple[str, str], base: str = "good_continuous") -> Scene:
    return read_text(changed(GOOD[base], [list(change) for change in changes]))


def problems_with(*changes: tuple[str, str], base: str = "good_continuous"):
    with pytest.raises(SiteError) as caught:
        scene_with(*changes, base=base)
    return caught.value.problems


def test_air_and_head():
    assert (CONTINUOUS.title, CONTINUOUS.reference) == ("Invented bay", "IB-1 rev A")
    assert CONTINUOUS.air == Air(293.15, 101325.0, 0.45)
    assert PULSED.air == Air(293.15, 101325.0, 0.0)
    standard = COUNTED.air
    assert (standard.model, standard.ground_altitude) == ("standard atmosphere", 2000.0)
    assert standard.relative_humidity == 0
    # U.S. Standard Atmosphere 1976 at 2 km, as in rules/published/standard_atmosphere_1976.toml.
    assert standard.temperature == pytest.approx(275.154, rel=0, abs=5e-4)
    assert standard.pressure == pytest.approx(7.95014e4, rel=0, abs=5e-2)
    assert CONTINUOUS.not_judged == (("skin", "covered by the clothing rule for this bay"),)
    assert [hazard for hazard, _ in COUNTED.not_judged] == ["retina thermal", "retina photochemical", "cornea and lens"]
    assert PULSED.length_unit.name == "ft" and PULSED.length_unit.metres == 0.3048


def test_a_continuous_beam():
    (beam,) = CONTINUOUS.beams
    (line,) = beam.lines
    assert line.name == beam.name == "main beam" and line.key == beam.key == 'beam["main beam"]'
    assert (line.wavelength, line.power, line.pulses) == (532e-9, 2.0, None)
    assert (line.diameter, line.divergence) == (3e-3, 1e-3)
    assert line.electric_field == (0.0, 0.0, 1.0) and line.polarization_ratio == 100
    assert beam.points == ((0, 0, 1.2), (9, 0, 1.2), (9, 3, 1.2)) and beam.mirror_reflectance == (0.99,)
    assert beam.stop == Stop(0.3, (0.0, -1.0, 0.0)) and not beam.leaves_site


def test_lines_take_what_they_leave_out_from_the_beam():
    (beam,) = PULSED.beams
    infrared, green = beam.lines
    assert infrared.pulses == Pulses(10e-3, 8e-9, 20.0, None, 1.5) and infrared.power == pytest.approx(0.2, rel=1e-15)
    assert (infrared.diameter, infrared.divergence) == (10e-3, 1e-3)
    assert (green.diameter, green.divergence, green.power) == (8e-3, 0.8e-3, 1.0)
    assert green.key == 'beam["range beam"].line["green"]'
    assert (infrared.polarization, infrared.electric_field) == ("circular", None)
    assert (green.electric_field, green.polarization_ratio) == ((0.0, 0.0, 1.0), 50.0)
    assert beam.leaves_site and beam.stop is None
    assert beam.points[1] == pytest.approx((30 * 0.3048, 0.0, 4 * 0.3048), rel=1e-15)


def test_counted_pulses_have_no_mean_power():
    (line,) = COUNTED.beams[0].lines
    assert line.pulses == Pulses(0.1, 5e-9, None, 1, 1.0) and line.power == 0.0


def test_a_diameter_at_1_e_becomes_one_at_1_e2():
    """I = exp(-8 r^2/d^2) is 1/e at r = d/(2 sqrt 2) and 1/e^2 at r = d/2: the ratio is sqrt 2 for both keys."""
    (line,) = COUNTED.beams[0].lines
    assert line.diameter == pytest.approx(6e-3 * math.sqrt(2), rel=1e-15, abs=0)
    assert line.divergence == pytest.approx(0.5e-3 * math.sqrt(2), rel=1e-15, abs=0)
    assert math.exp(-8 * (6e-3 / 2) ** 2 / line.diameter**2) == pytest.approx(math.exp(-1), rel=1e-14, abs=0)


@pytest.mark.parametrize(
    ("stated", "path", "axis"),
    [
        ('"vertical"', "[[0, 0, 0], [1, 0, 1], [9, 3, 1]]", (-math.sqrt(0.5), 0, math.sqrt(0.5))),
        ('"horizontal"', "[[0, 0, 0], [1, 0, 1], [9, 3, 1]]", (0, 1, 0)),
        ('"horizontal"', "[[0, 0, 0], [3, 4, 0], [3, 9, 0]]", (-0.8, 0.6, 0)),
        ("[0, 5, 5]", "[[0, 0, 0], [1, 0, 0], [1, 1, 0]]", (0, math.sqrt(0.5), math.sqrt(0.5))),
        ("[3, 0, 4]", "[[0, 0, 0], [1, 0, 0], [1, 1, 0]]", (0, 0, 1)),
    ],
)
def test_the_field_is_made_square_to_the_first_leg(stated, path, axis):
    scene = scene_with(
        ('electric_field = "vertical"', f"electric_field = {stated}"),
        ("path = [[0, 0, 1.2], [9, 0, 1.2], [9, 3, 1.2]]", f"path = {path}"),
        ("facing = [0, -1, 0]", "facing = [-0.5, -1, 0]"),
    )
    field = scene.beams[0].lines[0].electric_field
    assert field == pytest.approx(axis, rel=1e-12, abs=1e-12)


def test_linear_without_a_field_and_silence_mean_the_worst_axis():
    silent = scene_with(('electric_field = "vertical"\n', ""))
    assert silent.beams[0].lines[0].electric_field is None
    unstated = scene_with(('polarization = "linear"\nelectric_field = "vertical"\npolarization_ratio = 100\n', ""))
    assert unstated.beams[0].lines[0].polarization == "unknown"


def test_the_diffraction_limit_named_in_the_message_is_itself_accepted():
    """4 lambda/(pi d) = 0.22579 mrad for 532 nm and 3 mm at 1/e2 (Siegman, Lasers, 1986, eq. 17-6, from memory)."""
    (problem,) = problems_with(('"1.0 mrad"', '"0.22 mrad"'))
    assert "0.226 mrad" in problem.mend
    assert scene_with(('"1.0 mrad"', '"0.226 mrad"')).beams[0].lines[0].divergence == 0.226e-3
    # At 1/e both grow by sqrt 2, so the least stated full angle is half as large.
    (problem,) = problems_with(('"1.0 mrad"', '"0.11 mrad"'), ('"1/e2"', '"1/e"'))
    assert "at least 0.113 mrad" in problem.mend


def test_particles():
    (haze,) = CONTINUOUS.loads
    assert haze.modes == (SizeMode(Lognormal(0.5e-6, 1.6), 1.0),)
    assert haze.material == Material(1.43 + 1e-6j, 1060.0) and haze.steady_by == "haze operator"
    assert haze.reading == LoadReading("extinction", 0.01, 532e-9)
    assert haze.region == Box((1.0, -2.0, 0.0), (8.0, 2.0, 3.0))
    (fog,) = PULSED.loads
    assert fog.modes == (SizeMode(ModifiedGamma(4e-6, 6.0, 1.0), 0.4), SizeMode(SingleSize(0.25e-6), 0.6))
    assert fog.reading == LoadReading("mass", 12e-6, basis="dry")
    assert fog.region == Everywhere() and fog.material == Material(1.33, 1000.0)
    (mist,) = COUNTED.loads
    assert mist.material == Material(1.34, None) and mist.reading == LoadReading("number", 100e6, None)


def test_weights_a_little_off_one_are_made_to_add_up():
    scene = scene_with(("weight = 0.6", "weight = 0.5995"), base="good_pulsed")
    assert math.fsum(mode.weight for mode in scene.loads[0].modes) == pytest.approx(1, rel=1e-15)


def test_the_wavelength_of_an_extinction_may_be_left_out_for_one_wavelength():
    scene = scene_with(('at = "532 nm"\n', ""))
    assert scene.loads[0].reading.at == 532e-9


@pytest.mark.parametrize(
    ("text", "index"),
    [
        ('"1.43 + 1e-6i"', 1.43 + 1e-6j),
        ('"1.43+0.01 i"', 1.43 + 0.01j),
        ('"1.43"', 1.43),
        ('"1.43 + 0i"', 1.43),
        ("1.43", 1.43),
        ('"0.2 + 3.4j"', 0.2 + 3.4j),
    ],
)
def test_refractive_indices(text, index):
    assert scene_with(('"1.43 + 1e-6i"', text)).loads[0].material.index == index


def test_observers():
    (operator,) = CONTINUOUS.observers
    assert operator.position == (4, 1.5, 1.6) and operator.reach == 0.25
    assert operator.durations == (10.0,) and operator.daily == 7200.0 and operator.viewing == "deliberate"
    (gate,) = PULSED.observers
    assert gate.durations == (10.0, 100.0) and gate.daily is None and gate.reach == 0.25
    assert gate.position == pytest.approx((12.192, 6.096, 1.524), rel=1e-12)


def test_a_quarter_second_is_accepted_for_unintended_viewing_of_visible_light():
    scene = scene_with(('duration = "10 s"', 'duration = "0.25 s"'), ('"deliberate"', '"unintended"'))
    assert scene.observers[0].durations == (0.25,)


def test_limits():
    (eye,) = CONTINUOUS.limits
    assert (eye.tissue, eye.mechanism, eye.quantity, eye.value) == ("retina", "thermal", "irradiance", 10.0)
    assert eye.wavelengths == (400e-9, 700e-9) and eye.durations == (10.0, 30000.0)
    assert (eye.aperture, eye.per, eye.train, eye.acceptance, eye.time_exponent) == (7e-3, "exposure", None, 0.1, 0.0)
    (pulse,) = PULSED.limits
    assert (pulse.mechanism, pulse.per, pulse.train) == ("thermal", "pulse", "none")
    assert pulse.value == pytest.approx(0.02, rel=1e-15) and pulse.time_exponent == 0.0


@pytest.mark.parametrize(
    ("quantity", "value", "read"),
    [
        ("radiant exposure", "18 J/m^2", 18.0),
        ("radiance", "10 W/(cm^2 sr)", 1e5),
        ("radiance dose", "1e6 J/(m^2 sr)", 1e6),
    ],
)
def test_the_quantity_of_a_limit_decides_its_unit(quantity, value, read):
    scene = scene_with(
        ('quantity = "irradiance"\nvalue = "1.0 mW/cm^2"', f'quantity = "{quantity}"\nvalue = "{value}"')
    )
    assert scene.limits[0].value == read


def test_no_limits_and_no_particles_are_allowed():
    text = GOOD["good_continuous"]
    bare = text[: text.index("[[particles]]")] + text[text.index("[[observer]]") : text.index("[[limit]]")]
    scene = read_text(bare)
    assert scene.limits == () and scene.loads == ()


def numbers_in(value):
    if dataclasses.is_dataclass(value):
        for entry in dataclasses.fields(value):
            yield from numbers_in(getattr(value, entry.name))
    elif isinstance(value, tuple):
        for entry in value:
            yield from numbers_in(entry)
    elif isinstance(value, int | float | complex):
        yield value


@pytest.mark.parametrize("scene", [CONTINUOUS, PULSED, COUNTED])
def test_a_scene_holds_plain_finite_numbers(scene):
    numbers = list(numbers_in(dataclasses.replace(scene, source={})))
    assert len(numbers) > 20
    assert {type(number) for number in numbers} <= {int, float, bool, complex}
    assert all(math.isfinite(abs(number)) for number in numbers)


@pytest.mark.parametrize("name", list(GOOD))
def test_the_source_is_the_file_as_plain_json(name):
    scene = read_text(GOOD[name])
    assert scene.source == tomllib.loads(GOOD[name])
    assert json.loads(json.dumps(scene.source)) == scene.source


def test_inputs_are_listed_as_written_and_in_si_in_file_order():
    inputs = {line.key: line for line in CONTINUOUS.inputs}
    power = inputs['beam["main beam"].power']
    assert (power.written, power.read, power.stated) == ("2 W", "2 W", True)
    assert inputs['beam["main beam"].wavelength'].read == "5.32e-07 m"
    assert inputs['beam["main beam"].path'].written == "[[0, 0, 1.2], [9, 0, 1.2], [9, 3, 1.2]]"
    assert inputs['beam["main beam"].path'].read == "(0, 0, 1.2) m, (9, 0, 1.2) m, (9, 3, 1.2) m"
    assert inputs['limit["eye, green, ten seconds"].value'].read == "10 W/m²"
    assert inputs['particles["test haze"].load.extinction'].read == "0.01 /m"
    stated = [line.key for line in CONTINUOUS.inputs if line.stated]
    assert stated[:3] == ["format", "title", "reference"] and stated[-1].endswith(".entered_by")
    assert len(stated) == len(set(stated))


def test_defaults_taken_are_listed():
    taken = {line.key: line.read for line in PULSED.inputs if not line.stated}
    assert taken["air.temperature"] == "293.15 K" and taken["air.pressure"] == "101325 Pa"
    assert taken['observer["gate"].reach'] == "0.25 m" and taken['observer["gate"].viewing'] == "deliberate"
    assert "30000 s" in taken['observer["gate"].daily']
    assert taken['limit["eye, pulse"].mechanism'] == "thermal"
    counted = {line.key: line.read for line in COUNTED.inputs if not line.stated}
    assert counted["air.temperature"] == "275.154089 K at z = 0, from the model"
    assert counted["air.pressure"] == "79501.425 Pa at z = 0, from the model"
    assert counted["lengths_in"] == "m" and counted['beam["shot"].polarization'] == "unknown (worst axis)"
    assert (
        counted['beam["shot"].pulses.hot_spot'] == "1"
        and counted['beam["shot"].mirror_reflectance'] == "1 at each mirror"
    )


def test_a_diameter_at_1_e_is_listed_with_what_it_became():
    inputs = {line.key: line.read for line in COUNTED.inputs}
    assert inputs['beam["shot"].diameter'] == "0.006 m at 1/e, 0.00848528137 m at 1/e²"


@pytest.mark.parametrize(
    "name",
    ["<b>&", 'say "hi"', "line\nbreak", "back\\slash", "x" * 10_000, "βeam λ 光", "\u202eflip", "a.b[0]", "{0}%s"],
)
def test_names_of_any_kind(name):
    scene = scene_with(('name = "main beam"', f"name = {json.dumps(name, ensure_ascii=True)}"))
    assert scene.beams[0].name == scene.beams[0].lines[0].name == name
    assert "\n" not in scene.beams[0].key and "\u202e" not in scene.beams[0].key
    written = scene.beams[0].key.removeprefix("beam[").removesuffix("]")
    assert tomllib.loads(f"name = {written}")["name"] == name


def test_names_that_look_the_same_are_the_same():
    text = GOOD["good_continuous"]
    block = text[text.index("[[observer]]") : text.index("[[limit]]")]
    twice = text.replace(
        block, block.replace("console operator", "caf\u00e9") + block.replace("console operator", "cafe\u0301 ")
    )
    with pytest.raises(SiteError, match="used twice"):
        read_text(twice)


@pytest.mark.parametrize("table", list(MOST_ENTRIES))
def test_counts_are_bounded(table):
    text = GOOD["good_continuous"] + "".join(f'[[{table}]]\nname = "n{n}"\n' for n in range(MOST_ENTRIES[table]))
    with pytest.raises(SiteError) as caught:
        read_text(text)
    (problem,) = caught.value.problems
    assert f"{MOST_ENTRIES[table] + 1} entries" in problem.wrong and problem.line == text.count("\n") - 1


def test_lines_of_a_beam_are_bounded():
    lines = "".join(f'[[beam.line]]\nname = "n{n}"\nwavelength = "532 nm"\npower = "1 W"\n' for n in range(MOST_LINES))
    problems = problems_with(("[[beam.line]]\nname = \"infrared\"", f"{lines}[[beam.line]]\nname = \"infrared\""),
                             base="good_pulsed")  # fmt: skip
    assert any("52 entries" in problem.wrong for problem in problems)


# --- Files


def test_a_file_is_read(tmp_path):
    file = tmp_path / "site.toml"
    file.write_text(GOOD["good_continuous"], encoding="utf-8")
    assert read_site(file) == CONTINUOUS


def test_line_ends_and_byte_order_mark_of_other_systems(tmp_path):
    file = tmp_path / "site.toml"
    file.write_bytes(b"\xef\xbb\xbf" + GOOD["good_continuous"].replace("\n", "\r\n").encode())
    assert read_site(file) == CONTINUOUS
    broken = GOOD["good_continuous"].replace('power = "2 W"', "power = 2").replace("\n", "\r\n")
    with pytest.raises(SiteError) as caught:
        read_text(broken)
    assert caught.value.problems[0].line == 19


@pytest.mark.parametrize(
    ("content", "line", "words"),
    [
        (b"format = 'x'\ntitle = '\xb5m'\n", 2, "0xb5"),
        ("title = 'µ'".encode("utf-16"), 1, "UTF-16"),
        ("title = 'µ'".encode("utf-16-be"), 1, "UTF-16"),
        (b"# ok\n\x80", 2, "0x80"),
    ],
)
def test_other_encodings_are_named(tmp_path, content, line, words):
    file = tmp_path / "site.toml"
    file.write_bytes(content)
    with pytest.raises(SiteError) as caught:
        read_site(file)
    (problem,) = caught.value.problems
    assert problem.line == line and words in problem.wrong and "UTF-8" in problem.mend


def test_files_that_cannot_be_read(tmp_path):
    for path, words in (
        (tmp_path, "folder"),
        (tmp_path / "none.toml", "no such file"),
        (Path("a\0b"), "cannot be read|no such"),
    ):
        with pytest.raises(SiteError, match=words):
            read_site(path)


def test_files_that_are_too_large(tmp_path):
    file = tmp_path / "large.toml"
    file.write_bytes(b"#" * (LARGEST_FILE + 1))
    with pytest.raises(SiteError, match=r"5\.0 MB"):
        read_site(file)
    with pytest.raises(SiteError, match="characters"):
        read_text("#" * (LARGEST_FILE + 1))


def test_empty_texts():
    for text, wrong in (("", "is empty"), ("\n \n", "is empty"), ("# only a remark", "nothing but remarks")):
        with pytest.raises(SiteError) as caught:
            read_text(text)
        (problem,) = caught.value.problems
        assert wrong in problem.wrong and "lasescatter new" in problem.mend


def test_what_is_missing_from_a_nearly_empty_text_is_told():
    with pytest.raises(SiteError) as caught:
        read_text("[air]")
    assert {"format", "title", "beam", "observer"} <= {problem.key for problem in caught.value.problems}


def test_shares_in_per_cent_are_the_same_as_plain_numbers():
    """Per cent of a stop, of mirrors and of modes: 30 % is 0.3 to the last bit."""
    text = GOOD["good_continuous"].replace("reflectance = 0.3", 'reflectance = "30 %"')
    text = text.replace("mirror_reflectance = [0.99]", 'mirror_reflectance = ["99%"]')
    beam = read_text(text).beams[0]
    assert beam.stop.reflectance == 0.3 and beam.mirror_reflectance == (0.99,)
    listed = {line.key: (line.written, line.read) for line in read_text(text).inputs}
    assert listed['beam["main beam"].beam_stop.reflectance'] == ("30 %", "0.3")
    assert listed['beam["main beam"].mirror_reflectance'] == ('["99%"]', "0.99")
    modes = GOOD["good_pulsed"].replace("weight = 0.4", 'weight = "40 %"').replace("weight = 0.6", 'weight = "60 %"')
    assert read_text(modes).loads == read_text(GOOD["good_pulsed"]).loads


def test_a_plausible_wavelength_is_not_doubted():
    problems = problems_with(('"1.0 mrad"', '"0.1 mrad"'))
    assert problems and all("unit of wavelength" not in problem.mend for problem in problems)


def test_many_faults_are_cut_short():
    text = GOOD["good_continuous"].replace("[air]", "[air]\n" + "\n".join(f"k{n} = 1" for n in range(5000)))
    with pytest.raises(SiteError) as caught:
        read_text(text)
    assert len(caught.value.problems) == MOST_PROBLEMS + 1
    assert "not listed" in caught.value.problems[-1].wrong


# --- Mutilated files


def attempt(text: str) -> None:
    """Read a text: a scene, or the reader's own error with something to say."""
    try:
        scene = read_text(text)
    except SiteError as error:
        assert error.problems
        for problem in error.problems:
            assert problem.wrong and problem.mend
            assert problem.line is None or 1 <= problem.line <= text.count("\n") + 1
    else:
        assert isinstance(scene, Scene)


JUNK = st.sampled_from(
    ['"', "'", "[", "]", "{", "}", "=", ",", "\n", "#", "[[beam]]\n", "0", "-", "nan", "inf", '""', "[]", "{}", "true",
     '"2 W"', "1e400", "9" * 400, "2026-12-01", '"\\u0000"', "'''", '"""', ".", "\t", "\x00", "é", "name = 1\n"]
)  # fmt: skip


@settings(max_examples=300, suppress_health_check=[HealthCheck.too_slow], deadline=None)
@given(st.sampled_from(list(GOOD)), st.data())
def test_mutilated_files_raise_nothing_else(name, data):
    text = GOOD[name]
    for _ in range(data.draw(st.integers(1, 3))):
        start = data.draw(st.integers(0, len(text)))
        length = data.draw(st.sampled_from([0, 1, 2, 10, 60]))
        text = text[:start] + data.draw(JUNK) + text[start + length :]
    attempt(text)


@settings(max_examples=200, suppress_health_check=[HealthCheck.too_slow], deadline=None)
@given(st.sampled_from(list(GOOD)), st.integers(0, 2**32))
def test_shuffled_lines_raise_nothing_else(name, seed):
    chance = random.Random(seed)
    lines = GOOD[name].split("\n")
    for _ in range(chance.randint(1, 4)):
        first, second = chance.randrange(len(lines)), chance.randrange(len(lines))
        lines[first] = lines[second]
    attempt("\n".join(lines))


WRONG_VALUES = (
    "0", "-1", "1e308", "-0.0", "nan", "inf", "9" * 400, "true", '""', '"x"', '"2 W"', '"-5 m"', '"1e40 m"', "[]",
    "[[]]", "[1]", "[1, 2, 3]", "[0, 0, 0]", "[nan, 0, 0]", "[[0, 0, 0], [0, 0, 0]]", '["a", "b"]', "{}",
    "{ a = 1 }", "[{}]", '{ between = ["1 W", "2 W"] }', "2026-12-01", "07:32:00", "[[1e300, 0, 0], [0, 0, 1e300]]",
    '["10 s"]', "[1e-320, 0, 0]",
)  # fmt: skip


@pytest.mark.parametrize("name", list(GOOD))
def test_every_value_replaced_by_every_wrong_one(name):
    """Each key of the good files in turn gets every second value of the list."""
    lines = GOOD[name].split("\n")
    tried = 0
    for number, line in enumerate(lines):
        key, equals, _ = line.partition(" = ")
        if not equals or line.startswith("#"):
            continue
        for value in WRONG_VALUES[number % 2 :: 2]:
            attempt("\n".join([*lines[:number], f"{key} = {value}", *lines[number + 1 :]]))
            tried += 1
    assert tried > 250


@settings(max_examples=100, deadline=None)
@given(st.binary(max_size=300))
def test_any_bytes_raise_nothing_else(tmp_path_factory, content):
    file = tmp_path_factory.mktemp("any") / "site.toml"
    file.write_bytes(content)
    with pytest.raises(SiteError):
        read_site(file)


def test_the_sample_reads():
    scene = read_site(SAMPLE)
    assert len(scene.observers) == 3 and scene.beams[0].lines[0].power == 2.0
    # Nobody in the sample counts on turning away: whoever looks on purpose is judged for 10 s.
    assert {(observer.viewing, observer.durations) for observer in scene.observers} == {("deliberate", (10.0,))}
    assert all(len(line) <= 100 for line in SAMPLE.read_text(encoding="utf-8").split("\n"))
