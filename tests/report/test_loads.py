"""Loads in the report: kind, sizes, index, trust, equivalent readings, light over uncertain sizes."""

from __future__ import annotations

import math
import re
from dataclasses import replace
from io import BytesIO

import pytest
from pypdf import PdfReader

from lasescatter.assessment.outcome import Assessment
from lasescatter.matter import ENTERED, Trust
from lasescatter.report.document import pdf_bytes
from lasescatter.report.loads import air_words, index_words
from lasescatter.report.quantities import digits
from lasescatter.report.readings import reading_rows, reading_words
from lasescatter.report.size_movement import extremes, relative, size_request, size_warnings
from lasescatter.report.trust_words import trust_effect, trust_word
from lasescatter.scene import Air, LoadReading

from .conftest import MADE_AT
from .invented import LOADS, MORE_LOADS, SIZES, SPAN, WEAK, assessment, many, readings


def printed(made: Assessment) -> str:
    """All text of the report without any space, so that line ends do not matter."""
    pages = PdfReader(BytesIO(pdf_bytes(made, "A4", MADE_AT))).pages
    return joined(" ".join(page.extract_text() for page in pages))


def joined(text: str) -> str:
    return "".join(text.split()).replace("\u00a0", "")


@pytest.fixture(scope="module")
def everything() -> str:
    """A site with every sort of load, in the standard atmosphere, with something left out."""
    made = assessment()
    rules = {"particles": {LOADS[0].kind: {"what": "Droplets of <glycol> & water that a hazer makes"}}}
    air = Air(287.37, 99_890.0, 0.6, "standard atmosphere", 120.0)
    scene = replace(made.scene, loads=LOADS + MORE_LOADS, rules=rules, air=air)
    return printed(replace(made, scene=scene, gaps=('"mixture" is left out at 532 nm: <no data>',)))


@pytest.mark.parametrize(
    "wanted",
    [
        # The kind and what it is, with everything a user may type shown as typed.
        "Load: test haze",
        "glycol & <haze>, from the catalogue that comes with the program: Droplets of <glycol> & water that a",
        "described by the user: sizes and index",
        "described by the user: a stand-in for the scattering matrix, without sizes or mass",
        # Sizes, dry and as they float.
        "lognormal, median radius 300 nm, geometric standard deviation 1.6 (by number)",
        "70.0 % by number: lognormal, median radius 100 nm, geometric standard deviation 2, none above 5 µm",
        "20.0 % by number: table of 3 radii, 100 nm to 400 nm",
        "10.0 % by number: one radius, 2 µm",
        "radii up to 1.093 times the dry ones at 60 % relative humidity; effective radius 870 nm",
        # Material and index.
        "density 1060 kg/m³; index from the table “glycol <mix>”, 400 nm to 1100 nm (invented for this test)",
        "density not stated",
        "532 nm: 1.4100 + 1.00e-6i; 1064 nm: 1.4100 + 1.00e-6i; 650 nm: 1.4100 + 1.00e-6i",
        "532 nm, 1064 nm, 650 nm: not established, this load is left out there",
        # Each mode of a mixture by itself, and what it is made of.
        "mode 1: 70.0 % by number: lognormal",
        "mode 1: density 1800 kg/m³; index 1.53 + 0.008i at every wavelength; takes up no water",
        # Stand-ins.
        "Henyey–Greenstein with asymmetry 0.8, named by the user",
        "measured, file matrix <a>.csv: F11 at 3 angles; F11 was divided by 1.2500 to bring its mean",
        # Trust and what it does.
        "weak, factor 3: sizes of one hazer in one room, <b>index</b> from a data sheet & invented.",
        "below limit is said only where 3 times that light, with everything else that arrives, stays within the limit",
        "stand-in, factor 5: a stand-in.",
        "entered by the user, factor 1: sizes and index are the user's own. No factor is put on the light",
        # Readings as taken on site.
        "Read on site: extinction coefficient 0.01 1/m at 550 nm.",
        "Read on site: mass of particles 0.05 mg/m³.",
        "Read on site: transmittance 0.8 over 3 m at 650 nm.",
        "Read on site: visual range (2 % contrast) 50 m at 550 nm.",
        "Read on site: number of particles 1000 1/cm³.",
        # The air and what is left out.
        "1976 standard atmosphere with z = 0 at 120 m above sea level: there 14.22 °C, 998.9 hPa, relative humidity",
        '"mixture" is left out at 532 nm: <no data>',
    ],
)  # fmt: skip
def test_what_the_page_says_of_a_load(everything: str, wanted: str) -> None:
    assert joined(wanted) in everything


def test_size_is_asked_for_and_its_movement_is_printed(result: Assessment, text: str) -> None:
    flat = joined(text)
    (movement,) = result.size_movements
    low, high = extremes(movement) or (0.0, 0.0)
    for wanted in (
        "State the size. The size of glycol & <haze> is uncertain and the site file does not state it.",
        "Over a mass median diameter of 0.5 to 1.5 µm",
        f"moves from {digits(low)} to {digits(high)} of that at the usual size (1.00 µm)",
        "invented for this test, table <3>",
    ):
        assert joined(wanted) in flat, wanted
    usual = SIZES.index(SPAN.usual)
    for place, row in enumerate(relative(movement)):
        told = [*(digits(value) for value in row), digits(movement.scattered[place][usual])]
        assert joined(" ".join([*told, digits(movement.factor[place])])) in flat


def test_a_stand_in_has_no_sizes_and_one_wavelength(result: Assessment) -> None:
    load, entry = MORE_LOADS[0], result.components[1]
    told = (LoadReading("extinction", 0.07, 650e-9),)
    one = replace(entry, name=load.name, size_nodes=0, error_extinction=0.0, equivalents=told)
    flat = printed(replace(result, scene=replace(result.scene, loads=(load,)), components=(one,), size_movements=()))
    assert joined("stand-in 532 nm no sizes 4.2e-4 –") in flat
    assert joined("at the wavelength it was read at: without sizes it cannot be carried to another") in flat


def test_movement_of_many_observers_shows_those_that_move_most() -> None:
    made = many(20)
    flat = printed(replace(made, components=made.components[:1]))
    assert joined("The 8 observers of 20 whose light moves most are shown.") in flat
    # The stretch of light over sizes grows with the observer's number in this site.
    usual = SIZES.index(SPAN.usual)
    for place, row in enumerate(made.size_movements[0].scattered):
        shown = joined(f"{digits(relative(made.size_movements[0])[place][-1])} {digits(row[usual])} {3 + 0.01 * place}")
        assert (shown in flat) == (place >= 12), place


def test_light_that_does_not_arrive_moves_nowhere(result: Assessment) -> None:
    (movement,) = result.size_movements
    dark = replace(movement, scattered=((0.0,) * len(SIZES),))
    assert extremes(dark) is None
    made = replace(result, size_movements=(dark,), components=(), observers=result.observers[:1])
    assert joined("no scattered light of it arrives") in printed(made)
    (told,) = size_warnings(made)
    assert told == (
        "test haze (glycol & <haze>): size not stated; no light of it arrives over a mass median diameter of 0.5 to "
        "1.5 um"
    )


def test_warning_of_one_line(result: Assessment) -> None:
    (movement,) = result.size_movements
    named = replace(movement, load="glycol haze", kind="glycol haze", scattered=((0.4, 0.7, 1.0, 1.1, 1.3),))
    told = size_warnings(replace(result, size_movements=(named,)))
    assert told == ["glycol haze: size not stated; light is 0.40 to 1.3 times that of the usual size over a "
                    "mass median diameter of 0.5 to 1.5 um, which the bounds carry"]  # fmt: skip
    steering = replace(movement, load="a\x1b[31m\u202eb")
    assert size_warnings(replace(result, size_movements=(steering,)))[0].startswith("a[U+001B][31m[U+202E]b (glycol")


def test_request_for_the_size() -> None:
    told = size_request(LOADS[0], SPAN)
    assert told == (
        "test haze (glycol & <haze>): size not stated (mass median diameter is taken as 1 um; it may be 0.5 to "
        "1.5 um): state it as [particles.sizes], for example with mass_median_diameter and geometric_sd"
    )


# ------------------------------------------------------------------ readings


def test_every_reading_is_printed_under_its_wavelength(result: Assessment, text: str) -> None:
    """Each row of the table, as extracted from the page: name, unit, values in the order of the wavelengths."""
    flat = joined(text)
    entries = [entry for entry in result.components if entry.name == LOADS[0].name]
    rows = reading_rows(reading for entry in entries for reading in entry.equivalents)
    assert len(rows) == 12
    for row in rows:
        shown = " ".join(row.cells[wave] for wave in row.cells)
        assert joined(f"{row.name} {row.unit} {shown}") in flat, row.name
    assert joined("Reading Unit any wavelength 532 nm 1064 nm 650 nm") in flat


def test_rows_of_readings_agree_with_one_another() -> None:
    """Lambert's law ties the figures, printed to three digits; 0.3 per metre is 1.30 dB/m."""
    extinction = 0.3
    rows = {row.name: row for row in reading_rows(readings(extinction, 532e-9, 1e-5))}

    def at(name: str) -> float:
        return float(rows[name].cells[532e-9])

    assert at("attenuation") == pytest.approx(10 * extinction / math.log(10), rel=5e-3, abs=0)
    assert at("obscuration over 1 m") == pytest.approx(100 * (1 - math.exp(-extinction)), rel=5e-3, abs=0)
    assert at("obscuration over 1 ft") == pytest.approx(100 * (1 - math.exp(-0.3048 * extinction)), rel=5e-3, abs=0)
    assert at("transmittance over 10 m") == pytest.approx(math.exp(-3.0), rel=5e-3, abs=0)
    assert [rows[name].unit for name in ("attenuation", "obscuration over 1 m", "extinction coefficient")] == [
        "dB/m", "%", "1/m",
    ]  # fmt: skip


def test_mass_is_one_row_where_no_water_is_taken_up() -> None:
    dry, wet = LoadReading("mass", 2e-6, basis="dry"), LoadReading("mass", 2e-6, basis="ambient")
    (row,) = reading_rows([dry, wet])
    assert (row.name, row.unit, row.cells) == ("mass of particles", "mg/m³", {None: "2.00"})
    names = [row.name for row in reading_rows([dry, replace(wet, value=3e-6)])]
    assert names == ["mass of particles, without water taken up", "mass of particles, with water taken up"]


@pytest.mark.parametrize(
    ("reading", "words"),
    [
        (LoadReading("mass", 8e-6, basis="dry"), "mass of particles 8 mg/m³, without water taken up"),
        (LoadReading("mass", 1.2e-3, basis="ambient"), "mass of particles 1.2 g/m³, with water taken up"),
        (LoadReading("mass", 3e-12), "mass of particles 0.003 µg/m³"),
        (LoadReading("number", 1e11), "number of particles 100000 1/cm³"),
        (
            LoadReading("meteorological_optical_range", 120.0, 550e-9),
            "meteorological optical range (5 % contrast) 120 m at 550 nm",
        ),
        (LoadReading("obscuration", 0.05, 880e-9, 0.3048), "obscuration 5 % over 1 ft at 880 nm"),
        (LoadReading("optical_density", 0.1, 650e-9), "optical density 0.1 1/m at 650 nm"),
        (LoadReading("attenuation", 3.0, 650e-9), "attenuation 3 dB/m at 650 nm"),
        (LoadReading("transmittance", 0.8, 650e-9, 3.0), "transmittance 0.8 over 3 m at 650 nm"),
    ],
)
def test_readings_in_words(reading: LoadReading, words: str) -> None:
    assert reading_words(reading) == words


def test_mass_of_particles_that_take_up_no_water_is_their_mass() -> None:
    assert reading_words(LoadReading("mass", 8e-6, basis="dry"), grows=False) == "mass of particles 8 mg/m³"


@pytest.mark.parametrize(
    ("left", "told"), [(1 - 2.5e-6, "0.99999750"), (0.99643, "0.99643"), (0.951, "0.951"), (1 - 1e-12, "1.00000000")]
)
def test_a_transmittance_near_one_is_told_with_more_digits(left: float, told: str) -> None:
    (row,) = reading_rows([LoadReading("transmittance", left, 532e-9, 1.0)])
    assert row.cells[532e-9] == told


# ------------------------------------------------------------------ words


def test_trust_in_words() -> None:
    assert trust_word(WEAK) == "weak, factor 3"
    assert trust_word(Trust("checked", 1.5, "")) == "checked, factor 1.5"
    assert trust_effect(ENTERED) == "No factor is put on the light that it scatters."
    assert "1.5 times that light" in trust_effect(Trust("checked", 1.5, ""))
    assert not re.search(r"\b(safe|pass|ok)\b", trust_effect(WEAK), re.IGNORECASE)


def test_own_matrix_without_f12_is_no_doubt_about_its_data() -> None:
    assert trust_word(Trust("entered", 2.0, "linear light may be up to twice")) == "entered by the user, no F12 given"
    assert trust_word(ENTERED) == "entered by the user, factor 1"


def test_air_in_words() -> None:
    assert air_words(Air()) == "the same everywhere, 20 °C, 1013.25 hPa, relative humidity 0 %"


def test_an_index_as_it_is_entered() -> None:
    assert index_words(1.43 + 1e-6j) == "1.43 + 1e-6i"
    assert index_words(1.33 + 0j) == "1.33"
