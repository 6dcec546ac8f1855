"""Values with units: conversions against the documents that define them, and the strictness of the grammar."""

from __future__ import annotations

import math
import re
import string
from decimal import Decimal

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from lasescatter.units import (
    KINDS,
    UNITS,
    QuantityError,
    fitting_units,
    parse_obscuration,
    parse_quantity,
    si_text,
    unit_factor,
)

# Text, kind, SI value. Where no source is named the factor is a decimal prefix: SI Brochure, 9th edition (2019),
# table 7. Every value is exact, so the nearest float is due: rel=0, abs=0.
DEFINED = (
    ("5 W", "power", 5.0),
    ("5W", "power", 5.0),
    ("  5   W ", "power", 5.0),
    ("+5 W", "power", 5.0),
    ("2.5e3 mW", "power", 2.5),
    (".5 kW", "power", 500.0),
    ("5. W", "power", 5.0),
    ("1 MW", "power", 1e6),
    ("532nm", "wavelength", 532e-9),
    ("1.064 um", "wavelength", 1.064e-6),
    ("0.5 µm", "length", 0.5e-6),  # micro sign U+00B5
    ("0.5 μm", "length", 0.5e-6),  # Greek mu U+03BC
    ("1 in", "length", 0.0254),  # international yard and pound agreement (1959): 1 in = 25.4 mm exactly
    ("1 ft", "length", 0.3048),  # the same: 1 ft = 0.3048 m exactly
    ("1.2 mrad", "angle", 1.2e-3),
    ("180 deg", "angle", math.pi),  # SI Brochure table 8: 1 deg = pi/180 rad
    ("180 °", "angle", math.pi),
    ("8 ns", "time", 8e-9),
    ("1 ng/m^3", "mass concentration", 1e-12),
    ("1 g/mL", "density", 1000.0),
    ("1013.25 mbar", "pressure", 101325.0),  # SI Brochure (8th edition) table 8: 1 bar = 100 kPa
    ("2 h", "time", 7200.0),  # SI Brochure table 8
    ("1.5 min", "time", 90.0),
    ("20 Hz", "rate", 20.0),
    ("20 /s", "rate", 20.0),
    ("600 /min", "rate", 10.0),
    ("10 mJ", "energy", 0.01),
    ("2.55 mW/cm^2", "irradiance", 25.5),
    ("2.55 mW/cm²", "irradiance", 25.5),
    ("2.55 mW cm^-2", "irradiance", 25.5),
    ("1 uJ/cm^2", "radiant exposure", 0.01),
    ("10 W/(m^2 sr)", "radiance", 10.0),
    ("10 W/(m²·sr)", "radiance", 10.0),
    ("10 W/m^2/sr", "radiance", 10.0),
    ("10 W m^-2 sr^-1", "radiance", 10.0),
    ("1 J/(cm^2*sr)", "radiance dose", 1e4),
    ("0.05 /m", "extinction", 0.05),
    ("0.05/m", "extinction", 0.05),
    ("0.05 m^-1", "extinction", 0.05),
    ("0.3048 /ft", "extinction", 1.0),
    ("0.1 /m", "optical density", 0.1),
    ("0.3048 /ft", "optical density", 1.0),
    ("3 dB/m", "attenuation", 3.0),
    ("3 dB/km", "attenuation", 0.003),
    ("3.048 dB/ft", "attenuation", 10.0),
    ("10 %/m", "obscuration", 10.0),
    ("12 mg/m^3", "mass concentration", 12e-6),
    ("12 ug/L", "mass concentration", 12e-6),  # SI Brochure table 8: 1 L = 1 dm^3
    ("1e5 /cm^3", "number concentration", 1e11),
    ("100 /L", "number concentration", 1e5),
    ("1.06 g/cm^3", "density", 1060.0),
    ("1 kg/L", "density", 1000.0),
    ("20 degC", "temperature", 293.15),  # SI Brochure 2.3.1: t/degC = T/K - 273.15
    ("20 °C", "temperature", 293.15),
    ("-40 degF", "temperature", 233.15),  # -40 degF = -40 degC: NIST SP 811 (2008), B.8
    ("300 K", "temperature", 300.0),
    ("1013.25 hPa", "pressure", 101325.0),
    ("1 bar", "pressure", 1e5),  # SI Brochure (8th edition) table 8
    ("45 %", "fraction", 0.45),
)


@pytest.mark.parametrize(("text", "kind", "value"), DEFINED)
def test_defined_conversions(text, kind, value):
    assert parse_quantity(text, kind) == value


# Decimal prefixes of the units. SI Brochure, 9th edition (2019), table 7.
PREFIXES = {"f": -15, "p": -12, "n": -9, "u": -6, "m": -3, "k": 3, "M": 6, "G": 9, "c": -2, "h": 2}
PREFIXED = [
    (prefix + plain, plain, kind)
    for plain, kind in (
        ("W", "power"),
        ("J", "energy"),
        ("s", "time"),
        ("Hz", "rate"),
        ("m", "length"),
        ("rad", "angle"),
        ("Pa", "pressure"),
    )
    for prefix in PREFIXES
    if prefix + plain in UNITS
]


@pytest.mark.parametrize(("name", "plain", "kind"), PREFIXED)
def test_prefixes(name, plain, kind):
    assert parse_quantity(f"1 {name}", kind) == float(f"1e{PREFIXES[name[0]]}")
    assert parse_quantity(f"1 {plain}", kind) == 1.0


def test_every_unit_and_kind_is_checked_above():
    """No unit or kind of the allow-list without a case: the list cannot grow unchecked."""
    names = {name for text, _, _ in DEFINED for name in re.findall("[A-Za-z%]+", text.replace("°C", "degC"))}
    assert set(UNITS) - names <= {unit for name, plain, _ in PREFIXED for unit in (name, plain)}
    assert {kind for _, kind, _ in DEFINED} == set(KINDS)


REFUSED = (
    ("", "power", "is empty"),
    ("   ", "power", "is empty"),
    ("5", "power", "has no unit"),
    ("W", "power", "does not begin with a decimal number"),
    ("5 J", "power", "is an energy, and a power is due"),
    ("5 W/m^2", "power", "is an irradiance, and a power is due"),
    ("5 mJ/cm^2", "irradiance", "is a radiant exposure, and an irradiance is due"),
    ("5 m", "extinction", "is a length, and an extinction coefficient is due"),
    ("5 g", "power", "is not a power"),
    ("5 km", "wavelength", "is not read for a wavelength"),
    ("5 W W", "power", "the same unit twice"),
    ("5 mm cm", "length", "two units of the same sort"),
    ("5 m m/m", "length", "the same unit twice"),
    ("5 W 6 W", "power", "has a unit that cannot be read"),
    ("10 000 W", "power", "has two numbers"),
    ("10 1/m", "extinction", "has two numbers"),
    ("5x10^3 W", "power", "has two numbers"),
    ("1,5 W", "power", "inside the number"),
    ("1_000 W", "power", "inside the number"),
    ("0x10 W", "power", "has two numbers"),
    ("1.2.3 W", "power", "does not begin with a decimal number"),
    ("nan W", "power", "is not a finite number"),
    ("-inf W", "power", "is not a finite number"),
    ("Infinity W", "power", "is not a finite number"),
    ("1e41 W", "power", "is not a believable number"),
    ("1e-999 W", "power", "is not a believable number"),
    (f"{'9' * 41} W", "power", "is not a believable number"),
    (f"5 {'W' * 300}", "power", "far too long"),
    ("٣ W", "power", "does not begin with a decimal number"),  # Arabic-Indic three
    ("５ W", "power", "does not begin with a decimal number"),  # full-width five
    ("−5 W", "power", "dash that is not a minus sign"),  # U+2212
    ("5 ± 1 W", "power", "uncertainty"),
    ("5 +/- 1 W", "power", "uncertainty"),
    ("5 mw", "power", "not known (mw)"),
    ("5 watts", "power", "not known (watts)"),
    ("5 W/", "power", "cannot be read"),
    ("5 //m", "extinction", "cannot be read"),
    ("5 ^2", "length", "cannot be read"),
    ("5 m^0", "length", "cannot be read"),
    ("5 m^99", "length", "cannot be read"),
    ("5 m^1.5", "length", "cannot be read"),
    ("5 m**2", "length", "cannot be read"),
    ("5 ((m))", "length", "cannot be read"),
    ("5 (m", "length", "cannot be read"),
    ("5 m)", "length", "cannot be read"),
    ("5 ()", "length", "cannot be read"),
    ("5 W\x00", "power", "cannot be read"),
    ("5 __import__('os')", "power", "cannot be read"),
    ("10 W/m^2 sr", "radiance", "two ways"),
    ("10 W/m^2*sr", "radiance", "two ways"),
    ("5 mW/cm2", "irradiance", "without the sign ^ (cm2)"),
    ("5 m2", "length", "without the sign ^ (m2)"),
    ("0.01 1/m", "extinction", "has two numbers"),
)


@pytest.mark.parametrize(("text", "kind", "wrong"), REFUSED)
def test_refused(text, kind, wrong):
    with pytest.raises(QuantityError) as caught:
        parse_quantity(text, kind)
    assert wrong in caught.value.wrong
    assert caught.value.mend


@pytest.mark.parametrize(
    ("text", "share", "length"),
    [
        ("5 %/ft", 0.05, 0.3048),  # international foot (1959)
        ("10 %/m", 0.1, 1.0),
        ("10%/m", 0.1, 1.0),
        ("0.5 %/cm", 0.005, 0.01),
        ("1 % in^-1", 0.01, 0.0254),
        ("99.5 %/km", 0.995, 1000.0),
    ],
)
def test_an_obscuration_is_a_share_and_a_length(text, share, length):
    assert parse_obscuration(text) == (share, length)


@pytest.mark.parametrize(
    ("text", "wrong"),
    [
        ("5 %", "is a percentage, and an obscuration in per cent per length is due"),
        ("5 /ft", "is an extinction coefficient"),
        ("5", "has no unit"),
        ("5 %/s", "is not an obscuration"),
        ("5 %/ft^2", "is not an obscuration"),
        ("5 dB/m", "is an attenuation in decibels per length"),
        ("5 %/m ft", "two ways"),
        ("x" * 300, "far too long"),
    ],
)
def test_what_is_no_obscuration(text, wrong):
    with pytest.raises(QuantityError) as caught:
        parse_obscuration(text)
    assert wrong in caught.value.wrong and caught.value.mend


def test_units_of_a_header():
    assert unit_factor("um", "length") == Decimal("1e-6")
    assert unit_factor("µm", "length") == Decimal("1e-6")
    assert unit_factor("nm", "wavelength") == Decimal("1e-9")
    assert float(180 * unit_factor("deg", "angle")) == math.pi
    refused = (("kg", "is not a length"), ("", "cannot be read"), ("micron", "not known"), ("u" * 300, "too long"))
    for unit, wrong in refused:
        with pytest.raises(QuantityError) as caught:
            unit_factor(unit, "length")
        assert wrong in caught.value.wrong


def test_the_message_names_the_text_and_what_fits():
    with pytest.raises(
        QuantityError, match=r"'5 watts' has a unit that is not known \(watts\)\. .*W, mW.*perhaps W was"
    ):
        parse_quantity("5 watts", "power")


@pytest.mark.parametrize(
    ("text", "kind", "mend"),
    [
        ("2.55 mW/cm2", "irradiance", "Write cm^2;"),
        ("2.55 mW/cm 2", "irradiance", "Write cm^2;"),
        ("10 W/m2", "irradiance", "Write m^2;"),
        ("10 W m-2", "irradiance", "Write m^-2;"),
        ("10 W/(m2 sr)", "radiance", "Write m^2;"),
        ("10 W m-2 sr-1", "radiance", "Write m^-2 and sr^-1;"),
        ("1e5 /cm3", "number concentration", "Write cm^3;"),
        ("1.06 g/cm3", "density", "Write cm^3;"),
        ("0.01 m-1", "extinction", "Write m^-1;"),
        ("0.01 1/m", "extinction", "write 0.01 /m"),
        ("1e5 1/cm^3", "number concentration", "write 1e5 /cm^3"),
        ("20 1/s", "rate", "write 20 /s"),
    ],
)
def test_common_ways_to_write_powers_are_mended(text, kind, mend):
    with pytest.raises(QuantityError) as caught:
        parse_quantity(text, kind)
    assert mend in caught.value.mend


def test_both_readings_of_a_wrong_case_are_offered():
    with pytest.raises(QuantityError) as caught:
        parse_quantity("5 mw", "power")
    assert "mW or MW" in caught.value.mend


@settings(deadline=None)
@given(
    number=st.decimals(allow_nan=False, allow_infinity=False, min_value=-(10**9), max_value=10**9, places=6),
    kind=st.sampled_from([kind for kind in KINDS if kind != "temperature"]),
    data=st.data(),
)
def test_numbers_survive_any_fitting_unit(number, kind, data):
    """The value is the decimal number times the unit's factor, rounded once."""
    unit = data.draw(st.sampled_from(KINDS[kind].fitting))
    one = Decimal(repr(parse_quantity(f"1 {unit}", kind)))
    value = parse_quantity(f"{number} {unit}", kind)
    # `one` is itself a rounded factor (pi in degrees): a few units in the last place of a double.
    assert value == pytest.approx(float(number * one), rel=4e-16, abs=0)


@settings(deadline=None)
@given(value=st.floats(min_value=1e-30, max_value=1e30), kind=st.sampled_from(list(KINDS)))
def test_what_is_printed_reads_back(value, kind):
    """SI text has nine digits and is itself a value that reads, except for the bare fraction."""
    text = si_text(value, kind)
    if kind == "fraction":
        assert float(text) == pytest.approx(value, rel=5e-9, abs=0)
    else:
        assert parse_quantity(text, kind) == pytest.approx(value, rel=5e-9, abs=0)


NEARLY = st.text(alphabet="0123456789.eE+-/*^() \tWmJskgcnuµr²·%±" + string.ascii_lowercase[:6], max_size=30)


@settings(deadline=None)
@given(text=st.one_of(st.text(max_size=60), NEARLY), kind=st.sampled_from(list(KINDS)))
def test_junk_raises_nothing_but_its_own_error(text, kind):
    try:
        value = parse_quantity(text, kind)
    except QuantityError as error:
        assert error.wrong and error.mend and fitting_units(kind)
    else:
        assert math.isfinite(value)
