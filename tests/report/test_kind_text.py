"""Kinds of particles on a terminal, as JSON and as a drawing: invented values, read back from what is shown."""

from __future__ import annotations

import io
import json
import re
from dataclasses import replace
from pathlib import Path
from xml.etree import ElementTree

import numpy as np
import pytest
from matplotlib import rc_context
from PIL import Image
from rich.cells import cell_len
from rich.console import Console

from lasescatter.assessment.kind_optics import KindAtWavelength, KindOptics, KindValues, LoadOfKind, Reach, SizeValues
from lasescatter.matter import Growth, IndexTable, Kind, Lognormal, Material, SizeMode, Trust, TypicalLoad
from lasescatter.report.curves import Curve, draw_curves
from lasescatter.report.ink import RC
from lasescatter.report.kind_curves import write_curves
from lasescatter.report.kind_json import kind_in_full, kind_summary
from lasescatter.report.kind_text import print_kind, print_list, reach_words
from lasescatter.scene import Air, LoadReading

from .invented import ANGLES, INDEX, SPAN, WEAK, phase, readings

WATER = IndexTable((300e-9, 2e-6), (1.34, 1.30), (1e-9, 1e-3), (False, False), "water", "invented for this test")
CHECKED = Trust("checked", 1.5, "invented for this test")
HAZE = Kind(
    "glycol haze", ("stage haze",), "Droplets that a hazer makes",
    (SizeMode(Lognormal(0.3e-6, 1.6)),), Material(INDEX, 1060.0, Growth(0.3, (), WATER, "invented")), WEAK, CHECKED,
    SPAN, (TypicalLoad("a beam just seen", "0.5 mg/m^3", "mass", "no source", "M"),),
    ("sizes: invented for this test [M]",), "rules/particles/glycol_haze.toml",
)  # fmt: skip
SOOT = Kind(
    "soot\x1b\u202e", (), "Black", (SizeMode(Lognormal(0.1e-6, 1.5)),), Material(1.95 + 0.79j, 1800.0),
    Trust("non-spheres", 3.0, "aggregates"), CHECKED, None, (), (), "own/particles/soot.toml",
)  # fmt: skip


def values(scale: float = 1.0) -> KindValues:
    return KindValues(
        1.4312 + 2.5e-6j, 4.321e-13 * scale, 3500.0 * scale, 4600.0 * scale, 0.9987, 0.7321, 5.55e-7 * scale,
        (0.321, 0.0123, 0.0234), -0.0567, 4.3e-4, 2.1e-5, 777,
    )  # fmt: skip


def at(wavelength: float) -> KindAtWavelength:
    f11, f12 = phase("test haze", wavelength)
    sizes = tuple(SizeValues(size, values(size / 1e-6)) for size in (0.5e-6, 1.0e-6, 1.5e-6))
    curve = (tuple(ANGLES), tuple(f11), tuple(f12))
    return KindAtWavelength(wavelength, "", WEAK, values(wavelength / 532e-9), sizes, *curve)


OUTSIDE = KindAtWavelength(10.6e-6, "the index of glycol is not known there", WEAK, None, (), (), (), ())
FOUND = KindOptics(
    HAZE, Air(relative_humidity=0.6), 1.234, (at(532e-9), at(1064e-9), OUTSIDE),
    (
        LoadOfKind(LoadReading("mass", 8e-6, basis="dry"), "",
                   (*readings(0.3, 532e-9, 1e-5), *readings(0.1, 1064e-9, 1e-5))),
        LoadOfKind(LoadReading("extinction", 1.0, 13e-6), "the index at 13000 nm is not known", ()),
    ),
)  # fmt: skip


def shown(print_it, thing, width: int = 80, encoding: str = "utf-8", terminal: bool = False) -> str:
    raw = io.BytesIO()
    target = io.TextIOWrapper(raw, encoding=encoding, newline="\n")
    print_it(thing, Console(file=target, width=width, force_terminal=terminal, no_color=True))
    target.flush()
    return raw.getvalue().decode(encoding)


def cells(text: str, label: str) -> list[str]:
    """The cells of the row that begins with a label."""
    (line,) = [line for line in text.splitlines() if line.startswith(label)]
    return line[len(label) :].split()


# ------------------------------------------------------------------ list


def test_list_has_a_row_for_each_kind() -> None:
    text = shown(print_list, [HAZE, SOOT])
    assert text.splitlines()[0].split()[:3] == ["Kind", "Trust", "Answers"]
    # Between 400 and 600 nm one node of the index is unconfirmed; the water reaches farther than the index.
    assert cells(text, "glycol haze") == ["weak", "400-1100", "400-600", "0.5-1.5", "mass"]
    assert cells(text, "soot[U+001B][U+202E]") == ["non-spheres", "any"]
    assert "non-spheres 3; weak 3" in " ".join(text.split())


@pytest.mark.parametrize("width", [40, 80, 200])
def test_no_line_is_too_long(width: int) -> None:
    for text in (shown(print_list, [HAZE, SOOT], width), shown(print_kind, FOUND, width)):
        assert max(cell_len(line) for line in text.splitlines()) <= min(80, width)
        assert "\x1b" not in text and "\u202e" not in text


def test_reach_in_words() -> None:
    assert reach_words(None) == "any: one index for all"
    assert reach_words(Reach(3e-7, 1.1e-6, ())) == "300 to 1100 nm"
    assert reach_words(Reach(3e-7, 1.1e-6, ((3e-7, 4e-7), (1e-6, 1.1e-6)))) == (
        "300 to 1100 nm; weak 300 to 400, 1000 to 1100 nm"
    )
    assert reach_words(Reach(3e-7, 1.1e-6, ((3e-7, 1.1e-6),))) == "300 to 1100 nm, all weak"
    assert reach_words(Reach(3e-7, 2e-7, ())).startswith("none")


# ------------------------------------------------------------------ show


def test_values_stand_under_their_wavelengths() -> None:
    text = shown(print_kind, FOUND)
    head = next(line for line in text.splitlines() if line.split() == ["532", "nm", "1064", "nm"])
    assert head.startswith(" " * 30)
    main = text[text.index(head) :]
    main = main[: main.index("\n\n")]
    assert cells(main, "index n") == ["1.4312", "1.4312"]
    assert cells(main, "index k") == ["2.50e-6", "2.50e-6"]
    assert cells(main, "mass extinction, dry [m²/g]") == ["4.60", "9.20"]
    assert cells(main, "mass extinction, wet [m²/g]") == ["3.50", "7.00"]
    assert cells(main, "extinction per particle [m²]") == ["4.32e-13", "8.64e-13"]
    assert cells(main, "albedo") == ["0.9987", "0.9987"]
    assert cells(main, "asymmetry") == ["0.7321", "0.7321"]
    assert cells(main, "effective radius [µm]") == ["0.555", "1.11"]
    assert cells(main, "F11/(4π) at 90° [1/sr]") == ["0.0123", "0.0123"]
    assert cells(main, "linear polarization at 90°") == ["-0.0567", "-0.0567"]
    assert cells(main, "error of F11 at worst angle") == ["4.3e-4", "4.3e-4"]
    assert cells(main, "trust, factor") == ["3", "3"]


def test_what_is_told_beside_the_values() -> None:
    flat = " ".join(shown(print_kind, FOUND).split())
    for wanted in (
        "Droplets that a hazer makes",
        "Also called: stage haze",
        "Wavelengths: 400 to 1100 nm; weak 400 to 600 nm",
        "Trust: weak, factor 3: sizes of one hazer in one room",
        "Trust where you state the sizes: checked, factor 1.5: invented for this test",
        "below limit is said only where 3 times that light",
        "Size: mass median diameter 1 µm, and may be 0.5 to 1.5 µm: state it in the site file",
        "Typical: a beam just seen: mass = 0.5 mg/m^3",
        "relative humidity 60 %; radii up to 1.234 times the dry ones",
        "10600 nm: not established: the index of glycol is not known there",
        "Load: extinction coefficient 1 1/m at 13000 nm not established: the index at 13000 nm is not known",
        "sizes: invented for this test [M]",
    ):
        assert wanted in flat, wanted
    assert not re.search(r"\b(safe|pass|passed|OK)\b", flat, re.IGNORECASE)


def test_sizes_have_a_table_for_each_wavelength() -> None:
    text = shown(print_kind, FOUND)
    for wavelength in (532, 1064):
        block = text[text.index(f"At {wavelength} nm over mass median diameter") :]
        block = block[: block.index("\n\n")]
        assert block.splitlines()[1].split() == ["0.5", "µm", "1", "µm", "1.5", "µm"]
        assert cells(block, "mass extinction, dry [m²/g]") == ["2.30", "4.60", "6.90"]


def test_equivalent_readings_of_a_load() -> None:
    text = shown(print_kind, FOUND)
    block = text[text.index("Load: mass of particles 8 mg/m³, without water taken up") :]
    block = block[: block.index("\n\n")]
    assert "At the usual size, 1 µm; at another size" in block
    head = block[block.index("Instruments") :].splitlines()
    assert head[0].split() == ["Instruments", "would", "read", "any", "532", "nm", "1064", "nm"]
    assert head[1].split() == ["wavelength"]
    assert cells(block, "extinction coefficient [1/m]") == ["0.300", "0.100"]
    assert cells(block, "transmittance over 10 m") == ["0.0498", "0.368"]
    assert cells(block, "number of particles [1/cm³]") == ["5400"]


def test_more_wavelengths_than_fit_side_by_side() -> None:
    many = tuple(at(wavelength * 1e-9) for wavelength in (405, 450, 532, 638, 905, 1064))
    loads = (replace(FOUND.loads[0], equivalents=tuple(r for e in many for r in readings(0.1, e.wavelength, 1e-5))),)
    text = shown(print_kind, replace(FOUND, wavelengths=many, loads=loads))
    heads = [line.split("nm") for line in text.splitlines() if re.fullmatch(r"[ 0-9nm]+", line) and "nm" in line]
    assert [len(head) - 1 for head in heads] == [4, 2]
    assert max(map(len, text.splitlines())) <= 80
    assert len(cells_of(text, "extinction coefficient [1/m]")) == 6


def cells_of(text: str, label: str) -> list[str]:
    return [cell for line in text.splitlines() if line.startswith(label) for cell in line[len(label) :].split()]


def test_a_plain_terminal_is_enough() -> None:
    text = shown(print_kind, FOUND, encoding="ascii")
    assert "\\xb5m" in text and "532 nm" in text


# ------------------------------------------------------------------ JSON


def test_json_has_plain_types_and_units() -> None:
    full = json.loads(json.dumps(kind_in_full(FOUND), allow_nan=False))
    assert full["name"] == "glycol haze" and full["trust"] == {"mark": "weak", "factor": 3.0, "reason": WEAK.reason}
    assert full["answers_m"] == [400e-9, 1100e-9] and full["weak_m"] == [[400e-9, 600e-9]]
    assert full["size"]["low_m"] == 0.5e-6
    green, _, outside = full["wavelengths"]
    assert green["index"] == [1.4312, 2.5e-6] and green["mass_extinction_dry_m2_per_kg"] == 4600.0
    assert green["f11_per_4pi_sr_90_deg"] == 0.0123 and len(green["f11_per_4pi_sr"]) == len(ANGLES)
    assert [size["size_m"] for size in green["sizes"]] == [0.5e-6, 1.0e-6, 1.5e-6]
    assert outside == {"wavelength_m": 10.6e-6, "not_established": OUTSIDE.gap}
    first, second = full["loads"]
    assert first["reading"] == {
        "reading": "mass", "value": 8e-6, "unit": "kg/m^3", "at_m": None, "over_m": None, "as": "dry",
    }  # fmt: skip
    assert len(first["equivalents"]) == 24 and second["not_established"]
    assert kind_summary(SOOT)["answers_m"] is None


# ------------------------------------------------------------------ drawing


@pytest.mark.parametrize("suffix", [".svg", ".png", ".pdf"])
def test_curves_are_written_the_same_every_time(suffix: str, tmp_path: Path) -> None:
    one, other = tmp_path / f"a{suffix}", tmp_path / f"b{suffix.upper()}"
    write_curves(FOUND, one)
    write_curves(FOUND, other)
    assert one.read_bytes() == other.read_bytes()
    if suffix == ".svg":
        assert ElementTree.parse(one).getroot().tag.endswith("svg")
    if suffix == ".png":
        grey = np.asarray(Image.open(one).convert("L"))
        assert 0.005 < (grey < 160).mean() < 0.3
    if suffix == ".pdf":
        assert one.read_bytes().startswith(b"%PDF")


def test_other_endings_are_refused(tmp_path: Path) -> None:
    with pytest.raises(ValueError, match=r"'.gif' is none of .svg, .png, .pdf"):
        write_curves(FOUND, tmp_path / "a.gif")
    assert list(tmp_path.iterdir()) == []


def test_drawn_values_are_those_of_the_kind() -> None:
    entry = at(532e-9)
    with rc_context(RC):
        figure = draw_curves([Curve("532 nm", 0, 0, entry.angles, entry.phase, entry.phase_12)], "a $title$")
        upper, lower, _ = figure.axes
        assert upper.get_yscale() == "log" and lower.get_yscale() == "linear"
        assert upper.get_xlim() == lower.get_xlim() == (0, 180)
        np.testing.assert_allclose(upper.lines[0].get_ydata(), entry.phase, rtol=1e-12, atol=0)
        expected = -np.asarray(entry.phase_12) / np.asarray(entry.phase)
        np.testing.assert_allclose(lower.lines[0].get_ydata(), expected, rtol=1e-12, atol=0)


def test_a_wavelength_outside_the_data_is_named_under_the_curves(tmp_path: Path) -> None:
    with rc_context({**RC, "svg.fonttype": "none"}):
        figure = draw_curves([Curve("532 nm", 0, 0, *phase_curve())], "a kind", 2, "not established: 10600 nm")
    texts = [text.get_text() for axes in figure.axes for text in axes.texts]
    assert texts[-2:] == ["2 more in the tables only", "not established: 10600 nm"]


def phase_curve() -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    return np.asarray(ANGLES), *(np.asarray(part) for part in phase("test haze", 532e-9))


def test_a_limit_for_breathing_is_no_typical_load() -> None:
    limit = TypicalLoad("breathing limit, peak", "50 mg/m^3", "mass", "no source", "M")
    kind = replace(HAZE, typical=(*HAZE.typical, limit))
    text = shown(print_kind, replace(FOUND, kind=kind))
    assert "Typical: a beam just seen: mass = 0.5 mg/m^3" in text
    assert "For comparison: breathing limit, peak: mass = 50 mg/m^3" in text


def test_an_unknown_f12_is_not_drawn_as_none() -> None:
    entry = at(532e-9)
    known = Curve("a", 0, 0, entry.angles, entry.phase, entry.phase_12)
    with rc_context(RC):
        figure = draw_curves([known, replace(known, label="b", phase_12=(0.0,) * len(entry.angles))], "t")
    upper, lower, _ = figure.axes
    # The axis itself is a line of the lower panel.
    assert len(upper.lines) == 2 and len(lower.lines) == 2


def test_curves_of_a_kind_differ_without_colour() -> None:
    entries = [at(wavelength * 1e-9) for wavelength in (405, 450, 532, 638, 905, 1064)]
    curves = [Curve(str(i), i % 4, i // 4, e.angles, e.phase, e.phase_12) for i, e in enumerate(entries)]
    with rc_context(RC):
        lines = draw_curves(curves, "t").axes[0].lines
    assert len({(str(line._unscaled_dash_pattern), line.get_marker()) for line in lines}) == len(entries)
