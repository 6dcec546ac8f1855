"""Characters, numbers, cautions."""

from __future__ import annotations

import math
import unicodedata

import pytest
from hypothesis import given
from hypothesis import strategies as st

from lasescatter.cautions import FOREMOST, cautions, checked, foremost, not_covered
from lasescatter.report import quantities
from lasescatter.report.typography import BOLD, SANS, abridged, fitted, markup, plain, printable
from lasescatter.scene import LengthUnit, Line, Pulses

METRE, FOOT = LengthUnit("m", 1.0), LengthUnit("ft", 0.3048)


# ---------------------------------------------------------------- characters


@pytest.mark.parametrize(
    ("typed", "shown"),
    [
        ("<b>&", "<b>&"),
        ("漢", "[U+6F22]"),
        ("😀", "[U+1F600]"),
        ("\u202eabc", "[U+202E]abc"),
        ("שלום", "[U+05E9][U+05DC][U+05D5][U+05DD]"),
        ("a\x00b\x1b", "a[U+0000]b[U+001B]"),
        ("one\ntwo\tthree", "one two three"),
        ("\ud800", "[U+D800]"),
        ("beta β, 5 µm, é, ½, ²", "beta β, 5 µm, é, ½, ²"),
        ("e\u0301", "é"),
    ],
)
def test_what_cannot_be_shown_is_a_code_point(typed: str, shown: str) -> None:
    assert printable(typed) == shown


@given(st.text())
def test_printable_never_steers(text: str) -> None:
    for character in printable(text):
        assert unicodedata.category(character) not in {"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"}
        assert ord(character) <= 0xFFFF
    assert printable(printable(text)) == printable(text)


@given(st.text(alphabet=st.characters(max_codepoint=0x24F), max_size=80))
def test_markup_reads_back_as_typed(text: str) -> None:
    """Nothing in it is a tag or an entity to the paragraph reader."""
    from xml.etree import ElementTree

    root = ElementTree.fromstring(f"<p>{markup(text)}</p>")
    assert len(root) == 0
    assert (root.text or "").replace("\u00a0", " ") == printable(text).replace("\u00a0", " ")


def test_runs_of_spaces_are_kept() -> None:
    assert markup("a   b") == "a\u00a0\u00a0 b"
    assert markup("a b") == "a b"


def test_long_texts_are_cut_and_say_so() -> None:
    assert abridged("abc", 10) == "abc"
    shown = abridged("x" * 500, 60)
    assert len(shown) == 60 and shown.endswith("… (500 characters)")


def test_fitted() -> None:
    from reportlab.pdfbase.pdfmetrics import stringWidth

    assert fitted("short", SANS, 7, 100) == "short"
    shown = fitted("a much longer text than fits", BOLD, 7, 60)
    assert shown.endswith("…") and stringWidth(shown, BOLD, 7) <= 60


def test_terminal_text_keeps_han() -> None:
    assert plain("漢字") == "漢字"
    assert plain("a\x1b[31mred") == "a[U+001B][31mred"


# ---------------------------------------------------------------- numbers


@pytest.mark.parametrize(
    ("value", "count", "shown"),
    [
        (0.0, 3, "0"),
        (1.0, 5, "1.0000"),
        (1.23456e-6, 5, "1.2346e-6"),
        (-0.0344092, 5, "-0.034409"),
        (12345.6, 3, "12346"),
        (123456.0, 3, "1.23e5"),
        (123456.0, 6, "123456"),
        (0.00999999, 3, "0.0100"),
        (9.9999e-4, 3, "0.00100"),
        (9.9e-4, 3, "9.90e-4"),
        (None, 3, "–"),
        (math.nan, 3, "–"),
        (math.inf, 3, "no end"),
    ],
)
def test_digits(value: float | None, count: int, shown: str) -> None:
    assert quantities.digits(value, count) == shown


@given(st.floats(min_value=1e-30, max_value=1e30), st.integers(min_value=2, max_value=7))
def test_digits_are_as_many_as_asked(value: float, count: int) -> None:
    assert float(quantities.digits(value, count)) == pytest.approx(value, rel=0.51 * 10.0 ** (1 - count), abs=0)
    assert float(quantities.digits(-value, count)) == -float(quantities.digits(value, count))


@pytest.mark.parametrize(
    ("value", "error", "shown"),
    [
        (1.2345e-6, 2.1e-8, "1.23e-6 ± 2e-8"),
        (1.2345e-6, 3.1e-7, "1.2e-6 ± 3e-7"),
        (1.2345e-6, 4e-6, "1e-6 ± 4e-6"),
        # No more digits than the value has.
        (1.2345e-6, 1e-13, "1.23e-6 ± <1e-8"),
        (0.0123, 1.02e-9, "0.0123 ± <1e-4"),
        (0.0, 0.0, "0 ± 0"),
        (1.5, 0.0, "1.50 ± 0"),
    ],
)
def test_values_with_their_errors(value: float, error: float, shown: str) -> None:
    assert quantities.signed_interval(value, error) == shown


def test_quantities_in_words() -> None:
    assert quantities.wavelength(532e-9) == "532 nm"
    assert quantities.wavelength(632.8e-9) == "632.8 nm"
    assert quantities.length(0.25, METRE) == "0.250 m"
    # 1 ft = 0.3048 m exactly (international foot).
    assert quantities.length(3.048, FOOT) == "10.0 ft (3.05 m)"
    assert quantities.length(None, METRE) == "–"
    assert quantities.small_length(7e-3, None) == "7 mm"
    assert quantities.small_length(8.7e-7) == "870 nm"
    assert quantities.small_length(2.5e-6) == "2.50 µm"
    assert quantities.point((1.2192, 0.0, 3.048), FOOT) == "(4, 0, 10) ft"
    assert quantities.duration(10.0) == "10 s"
    assert quantities.duration(8e-9) == "8 ns"
    assert quantities.duration(0.25) == "250 ms"
    assert quantities.duration(30000.0) == "30000 s (8.33 h)"
    assert quantities.duration(1e-13) == "0.1 ps"
    assert quantities.line_label("beam", "beam") == "beam"
    assert quantities.line_label("beam", "red") == "beam / red"


def test_per_square_centimetre() -> None:
    # 1 mW/cm² = 10 W/m².
    assert quantities.per_square_centimetre(10.0, "W/m²") == "1 mW/cm²"
    assert quantities.per_square_centimetre(0.02, "J/m²") == "2e-6 J/cm²"
    assert quantities.per_square_centimetre(1e4, "W/(m²·sr)") == "1 W/(cm²·sr)"
    assert quantities.per_square_centimetre(1.0, "lx") == ""


def test_light_in_words() -> None:
    line = Line("l", 532e-9, 2.0, None, 3e-3, 1e-3, "linear", None, 100.0, "k")
    assert quantities.light(line) == "2 W continuous"
    train = Line("l", 532e-9, 0.2, Pulses(1e-2, 8e-9, 20.0, None), 3e-3, 1e-3, "linear", None, 100.0, "k")
    assert quantities.light(train) == "0.01 J in 8 ns, at 20 Hz"
    shot = Line("l", 532e-9, 0.0, Pulses(1e-2, 8e-9, None, 1), 3e-3, 1e-3, "linear", None, 100.0, "k")
    assert quantities.light(shot) == "0.01 J in 8 ns, 1 pulse"


# ---------------------------------------------------------------- cautions


def test_cautions_cover_what_must_be_said() -> None:
    """Subjects that every result has to carry, by a word that names each."""
    every = " ".join(cautions()).lower()
    for subject in (
        "edition of the standard", "local codes", "laser safety officer", "entered by the user", "binoculars",
        "glossy", "puffs", "removed", "patients", "skin", "ultraviolet", "aircraft", "ignition",
        "0.25 s", "optical density", "pupils", "medicines", "harmonics", "scanner",
    ):  # fmt: skip
        assert subject in every, subject
    assert "safe " not in every


def test_foremost_come_first() -> None:
    assert len(foremost()) == FOREMOST
    assert cautions()[:FOREMOST] == foremost()
    assert len(cautions()) == len(set(cautions())) >= 16
    assert len(not_covered()) >= 5


GOOD = {"id": "a", "text": "Mind it.", "foremost": True}


def three(*others: dict) -> dict:
    return {
        "caution": [GOOD, {**GOOD, "id": "b"}, {**GOOD, "id": "c"}, *others],
        "not_covered": ["This."],
    }


def test_a_good_file() -> None:
    found, scope = checked(three({"id": "d", "text": " Also. ", "foremost": False}))
    assert [caution.id for caution in found] == ["a", "b", "c", "d"]
    assert found[-1].text == "Also."
    assert scope == ("This.",)


@pytest.mark.parametrize(
    ("data", "told"),
    [
        ({}, "no [[caution]] entry"),
        ({**three(), "cautoin": []}, "unknown key(s) cautoin"),
        ({**three(), "not_covered": "this"}, "not_covered must be a list"),
        (three({"id": "a", "text": "x", "foremost": False}), "caution 4: the id 'a' is used twice"),
        (three({"id": "d", "text": "", "foremost": False}), "caution 4: text must be a text that is not empty"),
        (three({"id": "d", "text": "x", "foremost": "no"}), "caution 4: foremost must be true or false"),
        (three({"id": "d", "text": "x"}), "caution 4: has the keys id, text; exactly id, text and foremost are due"),
        (three({**GOOD, "id": "d"}), "4 cautions have foremost = true"),
        ({"caution": ["x"], "not_covered": ["y"]}, "caution 1: not a table"),
    ],
)
def test_faults_of_the_file_are_named(data: dict, told: str) -> None:
    with pytest.raises(ValueError) as fault:
        checked(data)
    assert told in str(fault.value)
    assert "rules/cautions.toml" in str(fault.value)
