"""[[particles]]: kinds, spheres of one's own, stand-ins, and the readings of their loads."""

from __future__ import annotations

import math
import shutil

import pytest
from site_cases import AIR, CATALOGUE, FOG, GOOD, TABLES, changed, read_text

from lasescatter.matter import ENTERED, HenyeyGreenstein, IndexTable, Lognormal, Material, MeasuredMatrix, SizeTable
from lasescatter.problems import SiteError
from lasescatter.scene import LoadReading
from lasescatter.site.reading import read_site, read_site_text

SCENE = read_text(GOOD["good_catalogue"])
LOADS = {load.name: load for load in SCENE.loads}


def scene_with(*changes: tuple[str, str]):
    return read_text(changed(GOOD["good_catalogue"], [list(change) for change in changes]))


def test_a_kind_brings_all_that_the_catalogue_says():
    fog = LOADS["hall fog"]
    assert (fog.kind, fog.modes, fog.material) == ("test fog", FOG.modes, FOG.material)
    assert (fog.trust, fog.size_span) == (FOG.trust, FOG.size_span) and fog.stand_in is None


def test_a_kind_by_another_name_with_sizes_index_and_density_of_ones_own():
    fog = LOADS["fog with sizes"]
    assert fog.kind == "test fog" and isinstance(fog.modes[0].shape, SizeTable)
    assert fog.material == Material(1.40 + 1e-7j, 1100.0, FOG.material.growth)
    assert fog.trust == FOG.trust_with_own_sizes and fog.size_span is None


def test_a_kind_with_another_density_alone_keeps_its_sizes_and_their_span():
    scene = scene_with(('kind = "test fog"', 'kind = "test fog"\ndensity = "900 kg/m^3"'))
    fog = scene.loads[0]
    assert fog.material == Material(FOG.material.index, 900.0, FOG.material.growth)
    assert (fog.trust, fog.size_span) == (FOG.trust, FOG.size_span)


def test_a_mixture_keeps_its_parts():
    assert LOADS["hall air"].modes == AIR.modes and LOADS["hall air"].material == AIR.material


def test_spheres_of_ones_own_are_trusted_as_entered():
    drops = LOADS["counted drops"]
    assert drops.kind == "" and drops.trust == ENTERED and isinstance(drops.material.index, IndexTable)
    assert drops.material.index.wavelengths == (400e-9, 532e-9, 700e-9, 1100e-9)


def test_stand_ins_have_an_albedo_and_neither_size_nor_mass():
    dust, veil = LOADS["measured dust"], LOADS["unknown veil"]
    assert isinstance(dust.stand_in, MeasuredMatrix) and dust.albedo == 0.9
    assert veil.stand_in == HenyeyGreenstein(0.7) and veil.albedo == 1.0
    assert [load.modes for load in (dust, veil)] == [(), ()] and dust.material is veil.material is None
    assert (dust.trust.factor, veil.trust.mark, veil.trust.factor) == (1.0, "stand-in", 5.0)


def test_a_matrix_without_f12_is_trusted_less(tmp_path):
    for table in TABLES.iterdir():
        (tmp_path / table.name).write_bytes(table.read_bytes())
    rows = "".join(f"{angle},1\n" for angle in range(0, 181, 5))
    (tmp_path / "matrix.csv").write_text(f"angle [deg],F11\n{rows}", encoding="utf-8")
    dust = read_text(GOOD["good_catalogue"], folder=tmp_path).loads[3]
    assert dust.trust.factor == 2.0 and "twice" in dust.trust.reason


def test_every_reading_in_si():
    assert [load.reading for load in SCENE.loads] == [
        LoadReading("meteorological_optical_range", 120.0, 550e-9),
        LoadReading("mass", 12e-6, basis="ambient"),
        LoadReading("obscuration", 0.05, 880e-9, 0.3048),
        LoadReading("transmittance", 0.95, 532e-9, 3.0),
        LoadReading("optical_density", 1e-4, 530e-9),
        LoadReading("attenuation", 3e-3, 633e-9),
        LoadReading("visual_range", 20e3, 550e-9),
        LoadReading("number", 200e6),
    ]


def test_medians_by_diameter_and_by_mass_and_cut_sizes():
    """Mass median to number median of a lognormal: exp(−3 ln² s) (textbook identity)."""
    first, second = (mode.shape for mode in LOADS["sieved drops"].modes)
    assert first == Lognormal(0.3e-6, 1.4, smallest=0.1e-6)
    assert second.median_radius == pytest.approx(1.5e-6 * math.exp(-3 * math.log(1.5) ** 2), rel=1e-12, abs=0)
    assert (second.geometric_sd, second.smallest, second.largest) == (1.5, None, 4e-6)


@pytest.mark.parametrize(
    ("written", "share", "over"),
    [('"10 %/m"', 0.1, 1.0), ('"0.5 %/in"', 0.005, 0.0254), ('"2%/ft"', 0.02, 0.3048), ('"1 %/km"', 0.01, 1e3)],
)
def test_obscuration_over_any_unit_of_length(written, share, over):
    reading = scene_with(('"5 %/ft"', written)).loads[2].reading
    assert (reading.value, reading.over) == (share, over)


def test_a_transmittance_as_a_number_or_in_per_cent():
    assert scene_with(('"95 %"', "0.95")).loads[3].reading == LOADS["measured dust"].reading


def test_a_mass_is_dry_unless_it_says_otherwise_and_the_default_is_listed_for_what_grows():
    scene = scene_with(('as = "ambient"\n', ""))
    assert scene.loads[1].reading == LoadReading("mass", 12e-6, basis="dry")
    taken = {line.key: line.read for line in scene.inputs if not line.stated}
    assert taken['particles["fog with sizes"].load.as'] == "dry (the larger exposure)"


def test_what_a_kind_brought_is_listed_in_si_behind_its_entry():
    lines = [line for line in SCENE.inputs if line.key.startswith('particles["hall fog"]')]
    told = {line.key.partition("].")[2]: line for line in lines}
    assert told["kind"].written == "test fog" and told["kind"].stated
    for words in ("Invented drops", "takes up water, by kappa 0.2", "weak, factor 3"):
        assert words in told["kind"].read
    assert told["sizes"].read == "lognormal, median radius 4e-07 m, geometric sd 1.5 (from the kind)"
    assert told["index"].read == "1.43 + 1e-06i (from the kind)"
    assert told["density"].read == "1060 kg/m³ (from the kind)"
    assert not any(told[key].stated for key in ("sizes", "index", "density"))
    keys = [line.key for line in SCENE.inputs]
    assert keys.index('particles["hall fog"].density') < keys.index('particles["fog with sizes"].name')
    parts = [line.read for line in SCENE.inputs if line.key.startswith('particles["hall air"].sizes[')]
    assert len(parts) == 2 and "share 0.9 by number, index 1.53 + 0i, density 1800 kg/m³" in parts[0]


def test_what_files_became_is_listed():
    told = {line.key: line.read for line in SCENE.inputs}
    assert "F11 divided by " in told['particles["measured dust"].matrix_file']
    assert told['particles["counted drops"].sizes.file'].startswith("6 radii from 1e-07 m to 3.2e-06 m")
    assert told['particles["counted drops"].load.obscuration'] == "0.05 over 0.3048 m"


def test_files_and_rules_travel_with_the_scene():
    assert set(SCENE.files) == {"sizes.csv", "counts.csv", "index.csv", "matrix.csv"}
    assert SCENE.files["index.csv"] == (TABLES / "index.csv").read_text(encoding="utf-8")
    assert SCENE.rules == {
        "particles": {"test fog": FOG.data, "test air": AIR.data},
        "indices": {**FOG.indices, **AIR.indices},
    }
    without = read_text(GOOD["good_continuous"])
    assert without.rules == {} and without.files == {}


def test_files_are_looked_for_beside_the_site_file(tmp_path):
    for table in TABLES.iterdir():
        (tmp_path / table.name).write_bytes(table.read_bytes())
    (tmp_path / "hall.toml").write_text(GOOD["good_catalogue"], encoding="utf-8")
    assert read_site(tmp_path / "hall.toml", CATALOGUE) == SCENE


def test_files_of_standard_input_are_looked_for_in_the_current_folder(monkeypatch):
    monkeypatch.chdir(TABLES)
    assert read_site_text(GOOD["good_catalogue"], catalogue=CATALOGUE) == SCENE


def test_the_shipped_catalogue_is_read_where_a_kind_is_named():
    text = changed(GOOD["good_continuous"], [
        ['index = "1.43 + 1e-6i"\ndensity = "1.06 g/cm^3"\n', 'kind = "glycol haze"\n'],
        ['[particles.sizes]\nshape = "lognormal"\nmedian_radius = "0.5 um"\ngeometric_sd = 1.6\n', ""],
    ])  # fmt: skip
    (haze,) = read_site_text(text).loads
    assert haze.kind == "glycol haze" and haze.modes and haze.material.density
    with pytest.raises(SiteError, match=r'Perhaps "glycol haze"'):
        read_site_text(text.replace('"glycol haze"', '"glicol haze"'))


def test_dots_in_a_message_stay():
    text = GOOD["good_catalogue"].replace('"sizes.csv"', '"../sizes.csv"')
    with pytest.raises(SiteError) as caught:
        read_text(text)
    assert '"../sizes.csv" leads out' in str(caught.value)


def test_air_too_humid_for_what_takes_up_water_is_told_at_reading():
    with pytest.raises(SiteError) as caught:
        scene_with(('relative_humidity = "80 %"', 'relative_humidity = "99.5 %"'))
    (problem,) = caught.value.problems
    assert problem.key == "air.relative_humidity"
    assert problem.line is not None
    assert "takes up water" in problem.wrong and "99 %" in problem.wrong


def test_weights_of_cut_modes_are_shares_of_what_is_left():
    """Of two modes alike but for a cut at the median, equal shares: the cut one stands for twice its share whole."""
    text = (
        'shape = "lognormal"\nmedian_diameter = "0.6 um"\ngeometric_sd = 1.4\nsmallest = "0.1 um"\nweight = 0.75',
        'shape = "lognormal"\nmedian_diameter = "0.6 um"\ngeometric_sd = 1.4\nsmallest = "0.3 um"\nweight = 0.5',
    )
    other = ('mass_median_diameter = "3 um"\ngeometric_sd = 1.5\nlargest = "4 um"\nweight = 0.25',
             'median_diameter = "0.6 um"\ngeometric_sd = 1.4\nweight = 0.5')  # fmt: skip
    load = next(load for load in scene_with(text, other).loads if load.name == "sieved drops")
    assert [mode.weight for mode in load.modes] == pytest.approx([2 / 3, 1 / 3], rel=1e-12, abs=0)


def test_cuts_that_leave_nothing_are_refused():
    with pytest.raises(SiteError, match="next to nothing"):
        scene_with(('smallest = "0.1 um"', 'smallest = "20 um"'))


@pytest.mark.parametrize(("last", "factor"), [("0", 1.0), ("9e9", 3.0)])
def test_a_table_that_ends_in_its_midst_is_trusted_less(tmp_path, last, factor):
    folder = tmp_path / "site"
    shutil.copytree(TABLES, folder)
    (folder / "counts.csv").write_text(f"radius [um], dN/dlnr\n0.1, 0\n0.3, 5\n1, {last}\n", encoding="utf-8")
    load = next(load for load in read_text(GOOD["good_catalogue"], folder=folder).loads if load.name == "counted drops")
    assert load.trust.factor == factor
