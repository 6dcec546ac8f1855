"""`particles list` and `particles show`, rules of one's own, and the request for a size."""

from __future__ import annotations

import json
import math
import re
import shutil
from pathlib import Path

import pytest
from commands.calls import ROOT, SAMPLE, run
from pypdf import PdfReader

SHIPPED = ROOT / "rules"
HAZE = ("particles", "show", "glycol haze", "--wavelength", "532 nm")


@pytest.fixture
def own(tmp_path: Path) -> Path:
    """A folder with one kind of one's own, and glycol haze replaced."""
    folder = tmp_path / "rules of mine"
    (folder / "particles").mkdir(parents=True)
    text = (SHIPPED / "particles" / "glycol_haze.toml").read_text(encoding="utf-8")
    replaced = re.sub(r'mass_median_diameter = "[^"]+"', 'mass_median_diameter = "1.1 um"', text)
    replaced = re.sub(r'(?m)^usual = "[^"]+"', 'usual = "1.1 um"', replaced)
    assert replaced.count('"1.1 um"') == 2
    (folder / "particles" / "glycol_haze.toml").write_text(replaced, encoding="utf-8")
    added = re.sub(r'(?m)^name = ".*"', 'name = "haze of hall four"', text)
    added = re.sub(r"(?m)^also_called = .*\n", "", added)
    (folder / "particles" / "mine.toml").write_text(added, encoding="utf-8")
    return folder


def hazed(tmp_path: Path, kind: str = "glycol haze", sizes: str = "") -> Path:
    """The sample bay with a kind in place of its own haze."""
    text = SAMPLE.read_text(encoding="utf-8")
    start = text.index("[[particles]]")
    end = text.index("[[observer]]")
    load = f'[[particles]]\nname = "test haze"\nkind = "{kind}"\n{sizes}'
    load += '[particles.load]\nextinction = "0.004 /m"\nat = "532 nm"\n[particles.region]\nshape = "everywhere"\n\n'
    site = tmp_path / "bay.toml"
    site.write_text(text[:start] + load + text[end:], encoding="utf-8")
    return site


# ------------------------------------------------------------------ list


def test_list_names_every_shipped_kind():
    done = run("particles", "list")
    assert done.returncode == 0 and done.stderr == ""
    assert max(map(len, done.stdout.splitlines())) <= 80 and "\x1b" not in done.stdout
    kinds = json.loads(run("particles", "list", "--json").stdout)
    assert len(kinds) == len(list((SHIPPED / "particles").glob("*.toml"))) >= 26
    flat = "".join(done.stdout.split())
    for kind in kinds:
        assert "".join(kind["name"].split(" ")[:1]) in flat
        assert kind["trust"]["factor"] >= 1 and kind["what"]
        low, high = kind["answers_m"]
        assert low < 405e-9 < high


def test_list_with_rules_of_ones_own(own: Path):
    shipped = {kind["name"]: kind for kind in json.loads(run("particles", "list", "--json").stdout)}
    kinds = {kind["name"]: kind for kind in json.loads(run("particles", "list", "--json", "--rules", own).stdout)}
    assert set(kinds) - set(shipped) == {"haze of hall four"}
    usual = [found["glycol haze"]["size"]["usual_m"] for found in (kinds, shipped)]
    assert usual[0] == pytest.approx(1.1e-6, rel=1e-12, abs=0) and usual[1] < 1e-6
    assert {name: kind["origin"] for name, kind in kinds.items() if kind["origin"] != "shipped"} == {
        "haze of hall four": "added",
        "glycol haze": "replacing",
    }
    listed = " ".join(run("particles", "list", "--rules", own).stdout.split())
    assert "haze of hall four (own)" not in shipped and listed.count("(own") == 2
    shown = run("particles", "show", "haze of hall four", "-w", "532 nm", "--rules", own)
    assert "From: particles/mine.toml of the user's own rules folder, beside" in " ".join(shown.stdout.split())


def test_show_takes_532_nm_where_no_wavelength_is_given():
    done, asked = run(*HAZE[:3]), run(*HAZE[:3], "--wavelength", "532 nm")
    assert done.returncode == 0 and done.stdout == asked.stdout
    assert done.stderr == "no --wavelength was given: 532 nm is shown\n" and asked.stderr == ""


def test_modes_of_a_mixture_are_shown_one_by_one():
    done = run("particles", "show", "urban air", "-w", "532 nm", "--humidity", "70 %")
    flat = " ".join(done.stdout.split())
    # Hess, Koepke & Schult 1998, table 4: urban air is 1.5, 28000 and 130000 particles per cm³ of these three.
    for name, number in (("insoluble particles", 1.5), ("water-soluble particles", 28000), ("ambient soot", 130000)):
        share = float(re.search(rf"- {name}: (\S+) % by number", flat)[1])
        assert share == pytest.approx(100 * number / 158001.5, rel=5e-3, abs=0)
        assert f"{name}, n" in flat


# ------------------------------------------------------------------ show


def test_show_reads_well_at_80_columns():
    done = run(*HAZE, "--wavelength", "10.6 um", "--load", "mass=8 mg/m^3", "--humidity", "60 %")
    assert done.returncode == 0 and done.stderr == ""
    assert max(map(len, done.stdout.splitlines())) <= 80 and "\x1b" not in done.stdout
    for wanted in ("index n", "mass extinction", "albedo", "asymmetry", "effective radius", "F11/(4π) at 90°",
                   "linear polarization at 90°", "error of F11", "meteorological optical range", "attenuation [dB/m]",
                   "10600 nm: not established", "Sources:"):  # fmt: skip
        assert wanted in done.stdout, wanted


def test_show_as_json_obeys_lamberts_law():
    done = run(*HAZE, "--wavelength", "1064 nm", "--json", "--load", "transmittance=0.8, over=3 m, at=532 nm")
    found = json.loads(done.stdout)
    green, infrared = found["wavelengths"]
    (load,) = found["loads"]
    told = {(r["reading"], r["at_m"], r["over_m"]): r["value"] for r in load["equivalents"]}
    extinction = -math.log(0.8) / 3
    assert told["extinction", 532e-9, None] == pytest.approx(extinction, rel=1e-9, abs=0)
    assert told["attenuation", 532e-9, None] == pytest.approx(10 * extinction / math.log(10), rel=1e-9, abs=0)
    # Carried to the other wavelength through the kind's own spectrum.
    carried = extinction * infrared["extinction_m2"] / green["extinction_m2"]
    assert told["extinction", 1064e-9, None] == pytest.approx(carried, rel=1e-9, abs=0)
    # The haze takes up no water: its mass is the same with and without.
    assert told["mass", None, None] * green["mass_extinction_dry_m2_per_kg"] == pytest.approx(
        extinction, rel=1e-9, abs=0
    )


def test_other_names_of_a_kind_will_do():
    one, other = (run("particles", "show", name, "-w", "532 nm", "--json") for name in ("glycol haze", "STAGE  haze"))
    assert one.returncode == 0 and one.stdout == other.stdout


@pytest.mark.parametrize("suffix", ["svg", "png", "pdf"])
def test_curves_are_drawn(suffix: str, tmp_path: Path):
    target = tmp_path / "new" / f"haze.{suffix}"
    first = run(*HAZE, "--plot", target)
    assert first.returncode == 0 and f"wrote {target}" in first.stderr
    before = target.read_bytes()
    again = run(*HAZE, "--plot", target, "--json")
    assert "(replaced)" in again.stderr and json.loads(again.stdout)
    assert target.read_bytes() == before and [path.name for path in target.parent.iterdir()] == [target.name]


def test_nothing_is_drawn_where_nothing_is_known(tmp_path: Path):
    done = run("particles", "show", "glycol haze", "-w", "10.6 um", "--plot", tmp_path / "haze.svg")
    assert done.returncode == 0 and "nothing was drawn" in done.stderr
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["hazze", "-w", "532 nm"], 'KIND: there is no kind "hazze". Perhaps "glycol haze"'),
        (["\x1b[31mqqqq", "-w", "532 nm"], "there is no kind"),
        (["glycol haze", "-w", "532"], '--wavelength: "532" has no unit'),
        (["glycol haze", "-w", "532 mm"], "outside what is accepted for a wavelength"),
        (["glycol haze", "-w", "532 nm", "--humidity", "60"], '--humidity: "60" has no unit'),
        (["glycol haze", "-w", "532 nm", "--humidity", "160 %"], "no relative humidity"),
        (["water-soluble particles", "-w", "532 nm", "--humidity", "99.5 %"], "--humidity: "),
        (["glycol haze", "-w", "532 nm", "--plot", "x.gif"], "--plot: x.gif has no ending that can be drawn"),
        (["glycol haze", "-w", "532 nm", "--plot", ""], "--plot: the name is empty"),
        (["glycol haze", "-w", "532 nm", "--plot", "file/x.png"], "--plot: "),
        (["glycol haze", "-w", "532 nm", "--rules", "absent"], "absent: there is no such folder"),
        (["glycol haze", "-w", "532 nm", "--rules", "."], ".: the folder holds neither particles/ nor indices/"),
        (["glycol haze", "-w", "532 nm", "--rules", ""], "--rules: the name is empty"),
        (["glycol haze", "-w", "532 nm", "--load", "mass=8"], "--load mass: 8 has no unit"),
        (["glycol haze", "-w", "532 nm", "--load", "0,8"], '--load: "0" is no key with its value'),
        (["glycol haze", "-w", "532 nm", "--load", "mass=1 g/m^3, mass=2 g/m^3"], "mass: the key is given twice"),
        (["glycol haze", "-w", "532 nm", "--load", "at=532 nm"], "--load: the load has no reading"),
        (["glycol haze", "-w", "532 nm", "--load", "visibility=8 m"], "--load visibility: "),
        (["glycol haze", "-w", "532 nm", "--load", "masss=8 mg/m^3"], "--load masss: "),
        (["glycol haze", "-w", "532 nm", "--load", "obscuration=5 %/ft"], "--load at: the key is missing"),
        (["glycol haze", "-w", "532 nm", "--load", "transmittance=0.8, at=532 nm"], "--load over: the key is missing"),
        (["glycol haze", "-w", "532 nm", "-w", "1064 nm", "--load", "extinction=0.1 /m"], "--load at: the key is"),
        (["glycol haze", "-w", "532 nm", "--load", 'mass="8 mg/m^3" \n [x]'], "--load mass: "),
    ],
)  # fmt: skip
def test_bad_calls_say_what_is_right(arguments, words, tmp_path: Path):
    (tmp_path / "file").write_text("kept", encoding="utf-8")
    done = run("particles", "show", *arguments, cwd=tmp_path)
    assert done.returncode == 2, done.stderr
    assert words in done.stderr and "Traceback" not in done.stderr and "\x1b" not in done.stderr
    assert done.stdout == "" and [path.name for path in tmp_path.iterdir()] == ["file"]


def test_an_extinction_needs_no_wavelength_of_its_own_where_there_is_but_one():
    done = run(*HAZE, "--load", "extinction=0.1 /m", "--json")
    (load,) = json.loads(done.stdout)["loads"]
    assert load["reading"]["at_m"] == pytest.approx(532e-9, rel=1e-12, abs=0)


# ------------------------------------------------------------------ sites


def test_check_asks_for_a_size_that_is_uncertain(tmp_path: Path):
    done = run("check", hazed(tmp_path))
    (asked,) = [line for line in done.stdout.splitlines() if "size not stated" in line]
    assert asked.startswith("test haze (glycol haze): size not stated (median diameter by mass is taken as")
    assert max(map(len, done.stdout.splitlines())) <= 80
    assert json.loads(run("check", tmp_path / "bay.toml", "--json").stdout)["size_not_stated"] == ["test haze"]
    assert run("check", tmp_path / "bay.toml", "--quiet").stdout == ""
    sizes = '[particles.sizes]\nshape = "lognormal"\nmedian_radius = "0.3 um"\ngeometric_sd = 1.5\n'
    stated = run("check", hazed(tmp_path, sizes=sizes))
    assert stated.returncode == 0 and "size" not in stated.stdout


def test_assess_warns_of_a_size_that_is_uncertain(tmp_path: Path):
    site = hazed(tmp_path)
    done = run("assess", site, "--out", tmp_path / "out")
    assert done.returncode == 0
    assert re.fullmatch(
        r"test haze \(glycol haze\): size not stated; light is [\d.]+ to [\d.]+ times that of the usual size over a "
        r"median diameter by mass of 0.5 to 1.5 um, which the bounds carry",
        " ".join(done.stderr.split()),
    )
    assert max(map(len, done.stderr.splitlines())) <= 80
    assert "bounds include factor 3 for test haze (weak)" in done.stdout
    table = (tmp_path / "out" / "bay.csv").read_bytes()
    quiet = run("assess", site, "--out", tmp_path / "out2", "--quiet")
    assert quiet.stderr == "" and (tmp_path / "out2" / "bay.csv").read_bytes() == table


def test_rules_of_ones_own_serve_a_site(own: Path, tmp_path: Path):
    site = hazed(tmp_path, "haze of hall four")
    assert "is not a kind of the catalogue" in run("check", site).stderr
    assert run("check", site, "--rules", own).returncode == 0
    done = run("assess", site, "--rules", own, "--out", tmp_path / "out", "--quiet")
    assert done.returncode == 0, done.stderr
    assert done.stderr == ""
    record = json.loads((tmp_path / "out" / "bay.json").read_text(encoding="utf-8"))
    assert "haze of hall four" in json.dumps(record["rules"])
    told = '"haze of hall four" is from particles/mine.toml of the user\'s own rules folder'
    for call in (["check", site], ["assess", site, "--out", tmp_path / "out"]):
        assert told in " ".join(run(*call, "--rules", own).stderr.split())
    first = PdfReader(tmp_path / "out" / "bay.pdf").pages[0].extract_text()
    assert told in " ".join(first.split())
    piped = run("check", "-", "--rules", own, stdin=site.read_text(encoding="utf-8"))
    assert piped.returncode == 0, piped.stderr


@pytest.mark.parametrize("command", [["check", "SITE"], ["assess", "SITE"], ["particles", "list"]])
def test_rules_that_cannot_be_read_are_named(command, tmp_path: Path):
    site = hazed(tmp_path)
    call = [str(site) if word == "SITE" else word for word in command]
    missing = run(*call, "--rules", tmp_path / "absent", cwd=tmp_path)
    assert missing.returncode == 2 and "there is no such folder" in missing.stderr
    broken = tmp_path / "broken" / "particles"
    broken.mkdir(parents=True)
    shutil.copy(SHIPPED / "particles" / "glycol_haze.toml", broken / "x.toml")
    with (broken / "x.toml").open("a", encoding="utf-8") as file:
        file.write("\n[colour]\nof = 1\n")
    told = run(*call, "--rules", tmp_path / "broken", cwd=tmp_path)
    assert told.returncode == 2 and "x.toml, line" in told.stderr and "colour" in told.stderr
