"""Starter files read as they are, and the schema agrees with the reader."""

from __future__ import annotations

import re
import tomllib
from pathlib import Path

import jsonschema
import pytest
from site_cases import GOOD, read_text

from lasescatter.medium.load import concentration
from lasescatter.optics.growth import as_they_float
from lasescatter.optics.sizes import particle_optics
from lasescatter.site.reading import read_site, read_site_text
from lasescatter.site.schema import site_schema
from lasescatter.site.starters import STARTERS, starter_text

SAMPLES = sorted((Path(__file__).parents[2] / "sample_sites").glob("*.toml"))
TEXTS = {**GOOD, **{name: starter_text(name) for name in STARTERS}}
VALIDATOR = jsonschema.Draft202012Validator(site_schema())


def test_the_schema_is_a_schema():
    jsonschema.Draft202012Validator.check_schema(site_schema())


@pytest.mark.parametrize("name", list(TEXTS))
def test_good_files_satisfy_the_schema(name):
    text = TEXTS[name]
    read_text(text) if name in GOOD else read_site_text(text)
    VALIDATOR.validate(tomllib.loads(text))


@pytest.mark.parametrize("file", SAMPLES, ids=[file.name for file in SAMPLES])
def test_samples_read_and_satisfy_the_schema(file):
    read_site(file)
    VALIDATOR.validate(tomllib.loads(file.read_text(encoding="utf-8")))


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ('power = "2 W"', "power = 2"),
        ('power = "2 W"', 'power = "W"'),
        ('power = "2 W"', 'powr = "2 W"'),
        ('finish = "matt"', 'finish = "glossy"'),
        ('name = "main beam"\n', ""),
        ("position = [4, 1.5, 1.6]", "position = [4, 1.5]"),
        ("reflectance = 0.3", "reflectance = 3"),
        ("reflectance = 0.3", 'reflectance = "0.3"'),
        ("geometric_sd = 1.6", "geometric_sd = 1"),
        ('"lasescatter site 1"', '"lasescatter site 2"'),
        ('shape = "lognormal"', 'shape = "lognormal"\nfile = 3'),
        ('index = "1.43 + 1e-6i"', 'kind = ""'),
        ('index = "1.43 + 1e-6i"', 'index_file = "/index.csv"'),
        ('index = "1.43 + 1e-6i"', "henyey_greenstein = 1"),
        ('index = "1.43 + 1e-6i"', "albedo = 0"),
        ('extinction = "0.01 /m"', 'obscuration = "5 /ft"'),
        ('extinction = "0.01 /m"', "transmittance = 2"),
        ('extinction = "0.01 /m"', 'mass = "1 mg/m^3"\nas = "wet"'),
        ('"skin" =', '"scalp" ='),
        ("[[observer]]", "[[people]]"),
    ],
)
def test_bad_files_do_not(old, new):
    text = GOOD["good_continuous"]
    assert text.count(old) == 1
    with pytest.raises(jsonschema.ValidationError):
        VALIDATOR.validate(tomllib.loads(text.replace(old, new)))


def test_every_key_of_the_schema_is_explained_with_an_example():
    schema = site_schema()
    tables = {"": schema, **schema["$defs"]}
    assert len(tables) >= 12
    for name, table in tables.items():
        assert table["additionalProperties"] is False, name
        for key, field in table["properties"].items():
            assert field.get("description") and field.get("examples"), (name, key)


def test_the_examples_satisfy_their_own_key():
    schema = site_schema()
    for name, table in {"": schema, **schema["$defs"]}.items():
        for key, field in table["properties"].items():
            if "$ref" in str(field):
                continue  # an example of a whole table shows only its first keys
            for example in field["examples"]:
                assert not list(jsonschema.Draft202012Validator(field).iter_errors(example)), (name, key, example)


def test_shares_in_per_cent_satisfy_the_schema():
    text = GOOD["good_continuous"].replace("reflectance = 0.3", 'reflectance = "30 %"')
    VALIDATOR.validate(tomllib.loads(text.replace("mirror_reflectance = [0.99]", 'mirror_reflectance = ["99.5%"]')))


def test_the_schema_knows_no_null():
    assert "'null'" not in str(site_schema())


# Keys whose example value says all there is to say.
PLAIN = {"title", "reference", "prepared_by", "temperature", "pressure", "relative_humidity", "name", "power", "source"}
PLAIN |= {"entered_by", "mirror_reflectance", '"skin"'}


@pytest.mark.parametrize("name", STARTERS)
def test_starters_are_commented_and_narrow(name):
    """Each key has a remark on its line or above it where it first occurs."""
    lines = starter_text(name).split("\n")
    assert all(len(line) <= 100 for line in lines)
    explained = {line.split(" = ")[0] for line in lines if " = " in line and " # " in line}
    keys = {line.split(" = ")[0] for line in lines if " = " in line and not line.startswith("#")}
    assert keys - explained <= PLAIN


@pytest.mark.parametrize("name", STARTERS)
def test_all_that_a_user_must_replace_begins_with_example(name):
    """Whoever leaves any of it as it is leaves a mark on which the verdict depends."""
    text = starter_text(name)
    scene = read_site_text(text)
    texts = [scene.title, scene.reference, scene.prepared_by, *(reason for _, reason in scene.not_judged)]
    texts += [words for limit in scene.limits for words in (limit.source, limit.entered_by)]
    assert len(texts) >= 9 and all(words.startswith("EXAMPLE: ") for words in texts), texts
    # What stands ready behind a # as well; and the top of the file says what the word means.
    held_back = re.findall(r'^# (?:"[a-z ]+"|steady_by) = "([^"]*)"', text, re.MULTILINE)
    assert all(words.startswith("EXAMPLE: ") for words in held_back)
    assert "begins with the word EXAMPLE" in text.partition("format =")[0]


def test_there_is_no_other_starter():
    with pytest.raises(ValueError, match="indoor, outdoor, pulsed"):
        starter_text("space")


def test_the_readings_that_the_indoor_starter_lists_are_of_one_load():
    """Each in place of the stated one, through the kind's own optics; the remarks have two digits."""
    text = starter_text("indoor")
    stated = re.search(r"^meteorological_optical_range = .*$", text, re.MULTILINE)[0]
    listed = re.findall(r'^#   (\w+ = "[^"]+")', text, re.MULTILINE)
    assert len(listed) == 8
    numbers = [_number_of(text)]
    for reading in listed:
        at = "" if reading.startswith(("visual", "mass", "number")) else '\nat = "532 nm"'
        over = '\nover = "3 m"' if reading.startswith("transmittance") else ""
        numbers.append(_number_of(text.replace(stated, reading + at + over)))
    assert numbers == pytest.approx([numbers[0]] * 9, rel=0.025, abs=0)


def _number_of(text: str) -> float:
    scene = read_site_text(text)
    (load,) = scene.loads
    floating = as_they_float(load.modes, load.material, scene.air.relative_humidity, scene.air.temperature)

    def optics_at(wavelength):
        return particle_optics(floating.modes, floating.indices(wavelength), wavelength)

    return concentration(load, floating, optics_at, 532e-9).number
