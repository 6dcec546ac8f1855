"""The catalogue of kinds: the shipped files, a user's folder, and what is told of bad files."""

from __future__ import annotations

import tomllib
from collections import Counter
from pathlib import Path

import pytest

from lasescatter.matter import Lognormal
from lasescatter.optics.coverage import answer_at
from lasescatter.problems import SiteError
from lasescatter.rules import shipped_rules
from lasescatter.site.catalogue import plain_name, read_catalogue
from lasescatter.site.index_file import MARKS

README = Path(__file__).resolve().parents[2] / "README.md"
COVERAGE = tuple(nm * 1e-9 for nm in (266, 355, 405, 450, 520, 532, 638, 808, 905, 1030, 1064, 1550, 10600))
HEAD = "| Kind | Trust | " + " | ".join(f"{wavelength * 1e9:.0f}" for wavelength in COVERAGE) + " |"

KIND = """\
format = "lasescatter kind 1"
name = "bakery flour"
also_called = ["flour dust"]
what = "Flour in the air of a bakery"
density = "1.4 g/cm^3"
index = "flour"

[[sizes]]
shape = "lognormal"
median_diameter = "2 um"
geometric_sd = 2.1

[trust]
mark = "weak"
reason = "invented"

[[load]]
what = "at the mixer"
mass = "3 mg/m^3"
mark = "M"
from = "invented"

[size_span]
what = "median diameter by number"
usual = "2 um"
low = "1 um"
high = "4 um"

[[source]]
of = ["sizes", "density", "size_span"]
from = "invented"
mark = "M"
"""

INDEX = """\
format = "lasescatter index 1"
name = "flour"
what = "Flour"
nodes = [
  { wavelength = "400 nm", n = 1.53, k = 0.001, mark = "M" },
  { wavelength = "1100 nm", n = 1.52, k = 0.001, mark = "M" },
]

[[source]]
marks = ["M"]
from = "invented"
"""


def folder_of(path: Path, kinds: tuple[str, ...] = (), indices: tuple[str, ...] = ()) -> Path:
    for sort, texts in (("particles", kinds), ("indices", indices)):
        (path / sort).mkdir()
        for number, text in enumerate(texts):
            (path / sort / f"own_{number}.toml").write_text(text, encoding="utf-8")
    return path


def coverage_table() -> str:
    """The table of kinds by wavelength, as README.md shows it."""
    rows = [
        f"| {kind.name} | {kind.trust.mark} | " + " | ".join(answer_at(kind, w) for w in COVERAGE) + " |"
        for kind in read_catalogue().kinds.values()
    ]
    return "\n".join([HEAD, "|---|---|" + "---|" * len(COVERAGE), *rows])


# --- The shipped files


def test_every_shipped_file_is_read():
    catalogue = read_catalogue()
    rules = shipped_rules()
    assert len(catalogue.kinds) == len(list((rules / "particles").glob("*.toml"))) >= 30
    assert len(catalogue.indices) == len(list((rules / "indices").glob("*.toml")))
    assert read_catalogue() is catalogue


def test_names_stand_for_one_kind_each():
    catalogue = read_catalogue()
    names = [name for kind in catalogue.kinds.values() for name in (kind.name, *kind.also_called)]
    twice = [name for name, count in Counter(map(plain_name, names)).items() if count > 1]
    assert not twice
    for kind in catalogue.kinds.values():
        for name in (kind.name, *kind.also_called, kind.name.upper().replace(" ", "  ")):
            assert catalogue.named(name) is kind


def test_kinds_that_must_be_there():
    catalogue = read_catalogue()
    for name in (
        "INSO", "WASO", "SOOT", "SSAM", "SSCM", "MINM", "MIAM", "MICM", "MITR", "SUSO", "FOGR", "water mist",
        "chilled low fog", "glycol haze", "heated glycol fog", "glycerol fog", "glycerol haze", "mineral-oil haze",
        "room tobacco smoke", "fresh cigarette smoke", "smouldering smoke", "flaming smoke", "fresh wood smoke",
        "aged wood smoke", "diesel soot", "welding fume", "mineral dust", "sea salt",
    ):  # fmt: skip
        assert catalogue.named(name) is not None, name


def test_misspelt_names_lead_to_kinds():
    catalogue = read_catalogue()
    assert "glycol haze" in catalogue.near("glicol haze")
    assert "diesel soot" in catalogue.near("deisel soot")
    assert "water fog" in catalogue.near("fog") and "glycol haze" in catalogue.near("haze")
    assert catalogue.near("xqzw") == () and catalogue.named("xqzw") is None
    assert catalogue.near("x" * 100_000) == ()


def leaves(place: tuple[str, ...], value: object):
    """Every number and quantity of a document, its place without positions in lists."""
    if isinstance(value, dict):
        for key, inner in value.items():
            yield from leaves((*place, key), inner)
    elif isinstance(value, list):
        for inner in value:
            yield from leaves(place, inner)
    elif isinstance(value, int | float) or (isinstance(value, str) and value[:1].isdigit()):
        yield place


def test_every_number_has_a_source():
    """Walked over the raw documents, apart from the reader's own rule."""
    for path in sorted((shipped_rules() / "particles").glob("*.toml")):
        document = tomllib.loads(path.read_text(encoding="utf-8"))
        covered = {tuple(name.split(".")) for source in document["source"] for name in source["of"]}
        for place in leaves((), {key: value for key, value in document.items() if key not in ("source", "name")}):
            if place[0] == "load":
                assert all(load["from"] and load["mark"] in MARKS for load in document["load"]), path.name
            elif place[0] not in ("what", "also_called", "trust"):
                assert place in covered or place[:1] in covered, (path.name, place)
    for path in sorted((shipped_rules() / "indices").glob("*.toml")):
        document = tomllib.loads(path.read_text(encoding="utf-8"))
        marks = {mark for source in document["source"] for mark in source["marks"] if source["from"]}
        assert {node["mark"] for node in document["nodes"]} <= marks, path.name


def test_marks_and_trust_go_together():
    """What is from memory is not called checked, and makes an index unconfirmed."""
    catalogue = read_catalogue()
    factors = {"checked": 1.5, "weak": 3.0, "non-spheres": 3.0}
    for kind in catalogue.kinds.values():
        assert kind.trust.factor == factors[kind.trust.mark] and kind.trust.reason
        assert kind.trust_with_own_sizes.factor == factors[kind.trust_with_own_sizes.mark]
        if kind.trust.mark == "checked":
            assert not any(line.endswith("[M]") for line in kind.sources if not line.startswith("load")), kind.name
    for path in sorted((shipped_rules() / "indices").glob("*.toml")):
        document = tomllib.loads(path.read_text(encoding="utf-8"))
        table = catalogue.indices[document["name"]]
        assert table.unconfirmed == tuple(node["mark"] == "M" for node in document["nodes"])


def test_kinds_of_uncertain_size_say_so():
    catalogue = read_catalogue()
    for name in (
        "glycol haze", "heated glycol fog", "glycerol haze", "glycerol fog", "mineral-oil haze", "smouldering smoke",
        "fresh wood smoke", "aged wood smoke", "room tobacco smoke", "fresh cigarette smoke", "welding fume",
        "mineral dust", "water mist", "chilled low fog",
    ):  # fmt: skip
        kind = catalogue.kinds[name]
        span = kind.size_span
        assert span is not None and span.low <= span.usual <= span.high and span.low < span.high and span.source
        assert len(kind.modes) == 1


def test_mass_median_becomes_number_median():
    (mode,) = read_catalogue().kinds["glycol haze"].modes
    # Hatch & Choate 1929: ln CMD = ln MMD − 3 ln² GSD.
    assert isinstance(mode.shape, Lognormal)
    assert mode.shape.median_radius == pytest.approx(0.35e-6 * 0.6106654, rel=1e-6, abs=0)


def test_air_types_carry_the_material_of_their_parts():
    catalogue = read_catalogue()
    air = catalogue.kinds["continental average air"]
    shares = [mode.weight for mode in air.modes]
    assert shares == pytest.approx([0.4 / 15300.4, 7000 / 15300.4, 8300 / 15300.4], rel=1e-12, abs=0)
    parts = [catalogue.named(code) for code in ("INSO", "WASO", "SOOT")]
    assert [mode.material for mode in air.modes] == [part.material for part in parts]
    assert set(air.indices) == {"insoluble", "water-soluble", "ambient soot", "water"}
    assert set(air.data["parts as read"]) == {part.name for part in parts}


def test_enough_kinds_answer_from_ultraviolet_to_near_infrared():
    """At least twelve everywhere from 355 nm to 1064 nm; more than twelve even on confirmed data alone."""
    kinds = read_catalogue().kinds.values()
    wavelengths = [nm * 1e-9 for nm in range(355, 1065)]
    for enough in ({"yes", "weak"}, {"yes"}):
        assert sum(all(answer_at(kind, w) in enough for w in wavelengths) for kind in kinds) >= 12


def test_far_ultraviolet_and_carbon_dioxide_lasers_are_weak_or_not_known():
    for kind in read_catalogue().kinds.values():
        assert answer_at(kind, 266e-9) in ("weak", "no") and answer_at(kind, 10.6e-6) in ("weak", "no")
        assert answer_at(kind, 190e-9) == "no" and answer_at(kind, 13e-6) == "no"
    assert answer_at(read_catalogue().kinds["water fog"], 10.6e-6) == "weak"


def test_the_table_of_the_readme_is_that_of_the_catalogue():
    text = README.read_text(encoding="utf-8")
    assert text.count(HEAD) == 1
    table = text[text.index(HEAD) :].split("\n\n")[0].rstrip()
    assert table == coverage_table()


# --- A user's folder


def test_a_folder_adds_kinds(tmp_path):
    catalogue = read_catalogue(folder_of(tmp_path, (KIND,), (INDEX,)))
    kind = catalogue.named("Flour  Dust")
    assert kind is not None and kind.name == "bakery flour" and str(tmp_path) in kind.file
    assert kind.material.density == 1400 and kind.indices["flour"]["nodes"][0]["n"] == 1.53
    assert kind.typical[0].written == "3 mg/m^3" and kind.typical[0].reading == "mass"
    assert set(read_catalogue().kinds) < set(catalogue.kinds)


def test_a_folder_replaces_kinds_and_indices(tmp_path):
    shipped = read_catalogue()
    kind = KIND.replace('"bakery flour"', '"Glycol Haze"').replace('"flour"', '"water"').replace('["flour dust"]', "[]")
    water = INDEX.replace('"flour"', '"Water"').replace("1.53", "1.40")
    catalogue = read_catalogue(folder_of(tmp_path, (kind,), (water,)))
    assert len(catalogue.kinds) == len(shipped.kinds)
    own = catalogue.named("glycol haze")
    assert own is not None and own.material.density == 1400
    assert own.material.index.real[0] == 1.40
    # Every kind that uses this index uses the new one, and water taken up too.
    assert catalogue.kinds["water fog"].material.index.real[0] == 1.40
    assert catalogue.kinds["water-soluble particles"].material.growth.water.real[0] == 1.40
    assert read_catalogue().kinds == shipped.kinds


def test_a_replaced_part_counts_in_mixtures(tmp_path):
    kind = KIND.replace('"bakery flour"', '"ambient soot"').replace('["flour dust"]', "[]")
    catalogue = read_catalogue(folder_of(tmp_path, (kind,), (INDEX,)))
    materials = [mode.material for mode in catalogue.kinds["urban air"].modes]
    assert catalogue.kinds["ambient soot"].material in materials


def test_other_shapes_and_growth(tmp_path):
    text = KIND.replace(
        'shape = "lognormal"\nmedian_diameter = "2 um"\ngeometric_sd = 2.1',
        'shape = "single"\nradius = "0.5 um"\nweight = 0.25\n\n[[sizes]]\nshape = "modified gamma"\n'
        'mode_radius = "4 um"\nalpha = 6\ngamma = 1\nweight = 0.75\n\n'
        '[growth]\nhumidities = ["0 %", "80 %"]\nradii = ["1 um", "1.2 um"]',
    )
    span = KIND[KIND.index("[size_span]") : KIND.index("[[source]]")]
    text = text.replace(span, "").replace('"size_span"]', '"growth"]')
    kind = read_catalogue(folder_of(tmp_path, (text,), (INDEX,))).kinds["bakery flour"]
    assert [mode.weight for mode in kind.modes] == [0.25, 0.75]
    growth = kind.material.growth
    assert growth is not None and growth.kappa is None
    assert growth.factors == ((0.0, 1.0), (0.8, pytest.approx(1.2, rel=1e-12)))


@pytest.mark.parametrize("other", ["fog machine", "heated glycol fog"])
def test_another_name_of_a_user_cannot_take_over_that_of_a_shipped_kind(tmp_path, other):
    error = told(folder_of(tmp_path, (KIND.replace("flour dust", other),), (INDEX,)))
    (problem,) = error.problems
    assert (problem.key, problem.line) == ("also_called", 3)
    assert "heated glycol fog" in problem.wrong and "Leave it out" in problem.mend


def test_kinds_of_a_user_are_marked(tmp_path):
    replacing = KIND.replace('"bakery flour"', '"glycol haze"')
    kinds = read_catalogue(
        folder_of(tmp_path, (KIND.replace("flour dust", "dust of flour"), replacing), (INDEX,))
    ).kinds
    assert {name: kind.origin for name, kind in kinds.items() if kind.origin != "shipped"} == {
        "bakery flour": "added",
        "glycol haze": "replacing",
    }


def test_a_folder_without_files_is_told(tmp_path):
    (tmp_path / "particles").mkdir()
    (tmp_path / "particles" / "flour.tml").write_text(KIND, encoding="utf-8")
    with pytest.raises(SiteError, match="holds a file"):
        read_catalogue(tmp_path)


def test_the_examples_of_the_readme_read(tmp_path):
    blocks = README.read_text(encoding="utf-8").split("```toml\n")[1:]
    examples = [block.split("```")[0] for block in blocks]
    kinds = tuple(text for text in examples if text.startswith('format = "lasescatter kind'))
    indices = tuple(text for text in examples if text.startswith('format = "lasescatter index'))
    assert kinds and indices
    catalogue = read_catalogue(folder_of(tmp_path, kinds, indices))
    assert len(catalogue.kinds) == len(read_catalogue().kinds) + len(kinds)


def test_folders_that_cannot_be_used(tmp_path):
    (tmp_path / "file").write_text("")
    (tmp_path / "empty").mkdir()
    for name, wrong in (("none", "no such folder"), ("file", "this is a file"), ("empty", "neither particles/ nor")):
        with pytest.raises(SiteError, match=wrong):
            read_catalogue(tmp_path / name)


# --- Bad files: what is told, and where

BAD_KINDS = {
    "misspelt key": ('density = "1.4 g/cm^3"', 'densitty = "1.4 g/cm^3"', 5, "densitty", "not known", '"density"'),
    "key of another table": ('reason = "invented"', 'reason = "x"\nradius = "1 um"', 16, "trust.radius", "not known",
                             "belongs in [sizes]"),
    "no unit": ('median_diameter = "2 um"', "median_diameter = 2", 10, "sizes[1].median_diameter", "has no unit", "um"),
    "wrong unit": ('"1.4 g/cm^3"', '"1.4 g"', 5, "density", "not a density", "g/cm^3"),
    "no density": ('density = "1.4 g/cm^3"\n', "", None, "density", "missing", "Add it"),
    "no median": ('median_diameter = "2 um"\n', "", 8, "sizes[1].median_radius", "median is missing", "exactly one of"),
    "two medians": ('median_diameter = "2 um"', 'median_diameter = "2 um"\nmedian_radius = "1 um"', 10,
                    "sizes[1].median_diameter", "are given", "exactly one of"),
    "width of one": ("geometric_sd = 2.1", "geometric_sd = 1", 11, "sizes[1].geometric_sd", "outside", "above 1"),
    "key of another shape": ("geometric_sd = 2.1", "geometric_sd = 2.1\nalpha = 6", 12, "sizes[1].alpha",
                             "does not belong", "Leave it out"),
    "cuts swapped": ("geometric_sd = 2.1", 'geometric_sd = 2.1\nsmallest = "3 um"\nlargest = "1 um"', 13,
                     "sizes[1].largest", "not above", "Swap"),
    "weight of one mode": ("geometric_sd = 2.1", "geometric_sd = 2.1\nweight = 0.5", 12, "sizes[1].weight", "only one",
                           "Leave weight out"),
    "no such index": ('index = "flour"', 'index = "flower"', 6, "index", "no refractive index", '"flour"'),
    "unknown trust": ('mark = "weak"', 'mark = "good"', 14, "trust.mark", "not a word", '"checked"'),
    "memory called checked": ('mark = "weak"', 'mark = "checked"', 14, "trust.mark", "of mark M", "weak"),
    "no source": ('"density", "size_span"]', '"size_span"]', 5, "density", "no source", "[[source]]"),
    "source of nothing": ('"size_span"]', '"size_span", "colour"]', 30, "source[1].of",
                          "no number", "density"),
    "two readings": ('mass = "3 mg/m^3"', 'mass = "3 mg/m^3"\nnumber = "1 /cm^3"', 20, "load[1].number", "2 readings",
                     "exactly one"),
    "sizes and parts": ("[trust]", '[[part]]\nkind = "ambient soot"\nnumber = "1 /cm^3"\n\n[trust]', 13, "part",
                        "both sizes and parts", "not both"),
    "two laws of growth": ("[trust]", '[growth]\nkappa = 0.2\nhumidities = ["0 %", "80 %"]\n'
                           'radii = ["1 um", "2 um"]\n\n[trust]', 15, "growth.humidities", "both kappa", "Keep one"),
    "humidities out of order": ("[trust]", '[growth]\nhumidities = ["0 %", "80 %", "50 %"]\n'
                                'radii = ["1 um", "2 um", "3 um"]\n\n[trust]', 14, "growth.humidities", "ascend",
                                "ascending"),
    "span without the usual size": ('usual = "2 um"', 'usual = "3 um"', 25, "size_span.usual", "of 2 um",
                                    'usual = "2 um"'),
    "a table for a list of tables": ("[[sizes]]", "[sizes]", 8, "sizes", "list of tables", "[[sizes]]"),
    "a number for a table": ('index = "flour"', 'index = "flour"\ngrowth = 0.1', 7, "growth", "a table is due",
                             "[growth]"),
    "not TOML": ("[trust]", "[trust", 13, "", "not closed", "bracket"),
    "wrong format": ("kind 1", "kind 7", 1, "format", "not a word", "kind 1"),
}  # fmt: skip

BAD_INDICES = {
    "negative absorption": ('n = 1.52, k = 0.001', 'n = 1.52, k = -0.001', 6, "nodes[2].k", "outside", "from 0"),
    "out of order": ('"1100 nm"', '"300 nm"', 6, "nodes[2].wavelength", "not above", "ascending"),
    "a single node": ('  { wavelength = "1100 nm", n = 1.52, k = 0.001, mark = "M" },\n', "", 4, "nodes", "1 node",
                      "at least two"),
    "mark without source": ('n = 1.52, k = 0.001, mark = "M"', 'n = 1.52, k = 0.001, mark = "S"', 6, "nodes[2].mark",
                            "no source", "[[source]]"),
    "unknown mark": ('n = 1.52, k = 0.001, mark = "M"', 'n = 1.52, k = 0.001, mark = "Q"', 6, "nodes[2].mark",
                     "not a word", '"P"'),
    "misspelt key of a node": ('wavelength = "1100 nm"', 'wavelenght = "1100 nm"', 6, "nodes[2].wavelenght",
                               "not known", '"wavelength"'),
    "no wavelength": ('wavelength = "1100 nm", ', "", 6, "nodes[2].wavelength", "missing", "Add it"),
}  # fmt: skip


def told(folder: Path):
    with pytest.raises(SiteError) as caught:
        read_catalogue(folder)
    return caught.value


@pytest.mark.parametrize("what", [*BAD_KINDS, *BAD_INDICES])
def test_faults_are_told_with_file_line_key_and_mend(what, tmp_path):
    of_kind = what in BAD_KINDS
    old, new, line, key, wrong, mend = (BAD_KINDS if of_kind else BAD_INDICES)[what]
    good = KIND if of_kind else INDEX
    assert good.count(old) == 1
    bad = good.replace(old, new)
    error = told(folder_of(tmp_path, (bad,) if of_kind else (), (INDEX,) if of_kind else (bad,)))
    (problem,) = error.problems
    assert problem.key == key and problem.line == line, str(error)
    assert wrong in problem.wrong and mend in problem.mend, str(error)
    name = "particles/own_0.toml" if of_kind else "indices/own_0.toml"
    place = f"{name}, line {line}:" if line else f"{name}:"
    assert f"{tmp_path}/{place}" in str(error)


def test_faults_of_all_files_are_told_at_once(tmp_path):
    mixture = (
        'format = "lasescatter kind 1"\nname = "mixed air"\nwhat = "Air"\n'
        '[[part]]\nkind = "urban air"\nnumber = "1 /cm^3"\n[[part]]\nkind = "ambient sot"\nnumber = "1 /cm^3"\n'
        '[trust]\nmark = "weak"\nreason = "invented"\n[[source]]\nof = ["part"]\nfrom = "invented"\nmark = "M"\n'
    )
    no_unit = KIND.replace('_diameter = "2 um"', "_diameter = 2")
    no_index = KIND.replace('"flour"', '"flur"').replace("bakery", "mill")
    kinds = (no_unit, no_index, KIND, mixture, KIND)
    error = told(folder_of(tmp_path, kinds, (INDEX.replace("1.52", "0"), INDEX)))
    found = [(Path(problem.file or "").name, problem.line, problem.key) for problem in error.problems]
    assert found == [
        ("own_0.toml", 6, "nodes[2].n"),
        ("own_0.toml", 10, "sizes[1].median_diameter"),
        ("own_1.toml", 6, "index"),
        ("own_3.toml", 5, "part[1].kind"),
        ("own_3.toml", 8, "part[2].kind"),
        ("own_4.toml", 2, "name"),
        ("own_4.toml", 3, "also_called"),
    ]


def test_a_file_that_is_no_text_is_refused(tmp_path):
    folder = folder_of(tmp_path)
    (folder / "particles" / "odd.toml").write_bytes(b"\xff\xfe\x00")
    (problem,) = told(folder).problems
    assert "UTF-16" in problem.wrong and (problem.file or "").endswith("odd.toml")
