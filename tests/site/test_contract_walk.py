"""Every key of the site file's format is either acted on or refused by name."""

from __future__ import annotations

import re

import pytest
from site_cases import GOOD, changed, read_text

from lasescatter.problems import SiteError
from lasescatter.site import contract
from lasescatter.site.reading import read_site_text
from lasescatter.site.starters import STARTERS, starter_text
from lasescatter.site.wording import known_fields

# All keys of the format "lasescatter site 1", typed from its description, by table.
FORMAT = {
    "": "format title reference prepared_by lengths_in not_judged air beam particles observer limit_set limit map room "
    "reading revision control visual_level effort datum screen eyewear scan",
    "not_judged": "retina_thermal retina_photochemical cornea_and_lens skin",
    "air": "temperature pressure relative_humidity model ground_altitude",
    "beam": "name wavelength power pulses line polarization electric_field polarization_ratio mirrors profile diameter "
    "diameter_criterion divergence path mirror_reflectance leaves_site beam_stop from azimuth elevation length scan "
    "waist_at axis_after",
    "beam.beam_stop": "reflectance facing finish",
    "beam.pulses": "energy duration rate count hot_spot",
    "beam.line": "name wavelength power pulses diameter divergence polarization electric_field polarization_ratio",
    "beam.line.pulses": "energy duration rate count hot_spot",
    "particles": "name kind sizes index index_file density matrix_file henyey_greenstein albedo steady_by load region",
    "particles.sizes": "shape median_radius median_diameter mass_median_diameter geometric_sd smallest largest "
    "mode_radius alpha gamma radius file weight",
    "particles.load": "meteorological_optical_range visual_range visibility mass number extinction at obscuration "
    "optical_density attenuation transmittance over as",
    "particles.region": "shape from to base radius height centre bottom top scale_height file",
    "observer": "name position within reach duration durations daily viewing looking background optical_aid eyewear",
    "limit": "name tissue mechanism quantity value time_exponent wavelengths durations aperture per train acceptance "
    "replaces because source entered_by",
}
# Keys of tables that are refused as a whole.
FORMAT_WITHIN = {
    "limit_set": "sets confirmed_by confirmed_on confirmed_rows",
    "map": "plane height from to spacing duration bottom top",
    "room": "from to reflectance open",
    "reading": "position instrument value",
    "revision": "what",
    "control": "what who",
    "visual_level": "name value wavelengths source",
    "optical_aid": "objective magnification transmittance",
}
# Words of the format that are refused by name where others of the same key are read.
WORDS = (
    ('finish = "matt"', 'finish = "glossy"', 'beam["main beam"].beam_stop.finish'),
    ('finish = "matt"', 'finish = "unknown"', 'beam["main beam"].beam_stop.finish'),
    *(
        ('shape = "box"', f'shape = "{word}"', 'particles["test haze"].region.shape')
        for word in ("cylinder", "sphere", "layer", "exponential", "standard atmosphere", "table")
    ),
)

ENTRIES = {entry.table: {} for entry in contract.NOT_BUILT}
for entry in contract.NOT_BUILT:
    ENTRIES[entry.table][entry.key] = entry

# Where a table of the good file begins: a key of that table is put below.
HEADERS = {
    (): 'lengths_in = "m"',
    ("air",): "[air]",
    ("beam",): "[[beam]]",
    ("particles", "load"): "[particles.load]",
    ("particles", "region"): "[particles.region]",
    ("observer",): "[[observer]]",
    ("limit",): "[[limit]]",
}


def spoken(table: tuple[str, ...], key: str) -> str:
    return ".".join((*table, key)).replace(" ", "_")


def all_keys() -> set[str]:
    return {f"{table}.{key}" if table else key for table, keys in FORMAT.items() for key in keys.split()}


def problems_with(old: str, new: str):
    with pytest.raises(SiteError) as caught:
        read_text(changed(GOOD["good_continuous"], [[old, new]]), "site.toml")
    return caught.value.problems


def test_every_key_of_the_format_is_read_or_refused_by_name():
    read = {spoken(table, key) for table, fields in known_fields().items() for key in fields}
    refused = {spoken(entry.table, entry.key) for entry in contract.NOT_BUILT}
    assert not read & refused
    assert read | refused == all_keys()


def test_every_key_that_is_read_arrives_among_the_inputs():
    """No key is read and then dropped: each is listed, as written and in SI, for some good file."""
    listed = set()
    scenes = [*map(read_text, GOOD.values()), *(read_site_text(starter_text(name)) for name in STARTERS)]
    for scene in scenes:
        for line in scene.inputs:
            if line.stated:
                path = re.sub(r'^not_judged\["([^"]*)"\]', lambda found: f"not_judged.{found[1]}", line.key)
                listed.add(re.sub(r'\["[^"]*"\]|\[\d+\]', "", path).replace(" ", "_").replace("line.pulses", "pulses"))
    tables = {".".join(table) for table in known_fields()} - {""}
    read = {spoken(table, key) for table, fields in known_fields().items() for key in fields} - tables
    read = {key.replace("line.pulses", "pulses") for key in read}  # the same table in both places
    assert read <= listed, sorted(read - listed)


@pytest.mark.parametrize("entry", contract.NOT_BUILT, ids=[spoken(e.table, e.key) for e in contract.NOT_BUILT])
def test_a_key_that_is_not_built_is_refused_by_name(entry):
    header = HEADERS[entry.table]
    found = [p for p in problems_with(header, f"{header}\n{entry.key} = {entry.example}") if p.key.endswith(entry.key)]
    assert len(found) == 1
    (problem,) = found
    if entry.key == "scan":
        assert problem.wrong == "moving beams are not computed; do not put a fixed path in their place"
    elif entry.key == "visibility":
        assert "can mean two things" in problem.wrong
    else:
        assert "not built yet" in problem.wrong
    assert problem.mend
    line = changed(GOOD["good_continuous"], [[header, f"{header}¤"]]).partition("¤")[0].count("\n") + 2
    assert problem.line == line


@pytest.mark.parametrize(
    ("table", "key"), [(table, key) for table, keys in FORMAT_WITHIN.items() for key in keys.split()]
)
def test_keys_of_tables_that_are_not_built_are_refused_with_their_table(table, key):
    owner, header = (("observer",), "[[observer]]") if table == "optical_aid" else ((), 'lengths_in = "m"')
    problems = problems_with(header, f"{header}\n{table} = {{ {key} = 1 }}")
    assert [p.wrong for p in problems if p.key.endswith(table)] == [ENTRIES[owner][table].message]


@pytest.mark.parametrize(("old", "new", "key"), WORDS)
def test_words_that_are_not_built_are_refused_by_name(old, new, key):
    found = [problem for problem in problems_with(old, new) if problem.key == key]
    assert len(found) == 1
    assert "is not built yet" in found[0].wrong and new.split('"')[1] in found[0].wrong


def test_values_that_are_not_built_are_refused():
    uncertain = problems_with('power = "2 W"', 'power = "2 W ± 5 %"')
    between = problems_with('power = "2 W"', 'power = { between = ["1 W", "2 W"] }')
    assert ["not built yet" in problem.wrong for problem in (*uncertain, *between)] == [True, True]


def test_a_bare_visibility_is_explained():
    (problem,) = problems_with('extinction = "0.01 /m"\nat = "532 nm"', 'visibility = "100 m"')
    for words in ("meteorological_optical_range", "5 %", "visual_range", "2 %"):
        assert words in problem.wrong


def test_a_key_that_stands_for_others_brings_one_message():
    problems = problems_with("path = [[0, 0, 1.2], [9, 0, 1.2], [9, 3, 1.2]]\nmirror_reflectance = [0.99]\n",
                             'azimuth = "35 deg"\n')  # fmt: skip
    assert 'beam["main beam"].azimuth' in [problem.key for problem in problems]
    assert 'beam["main beam"].path' not in [problem.key for problem in problems]


def test_not_built_outside_its_table_says_where_it_belongs():
    (problem,) = problems_with("[air]", '[air]\nazimuth = "35 deg"')
    assert "not built yet" in problem.wrong and "[[beam]]" in problem.wrong
