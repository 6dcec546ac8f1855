"""Light that is not computed is told as that, on every page and on the terminal; never as zero."""

from __future__ import annotations

import io
from dataclasses import replace
from io import BytesIO

import pytest
from pypdf import PdfReader
from rich.console import Console

from lasescatter.assessment.outcome import Assessment, Gap, ObserverOutcome
from lasescatter.limits.verdict import NOT_ESTABLISHED
from lasescatter.report.document import pdf_bytes
from lasescatter.report.left_out import all_left_out, lacking, left_out_at, where_left_out
from lasescatter.report.quantities import digits, signed_interval
from lasescatter.report.size_movement import size_warnings
from lasescatter.report.standing import standing
from lasescatter.report.terminal import print_summary

from .conftest import MADE_AT
from .invented import LOADS, assessment

HAZE, DUST = (load.name for load in LOADS)
WAVES = (532e-9, 1064e-9, 650e-9)


def without(result: Assessment, missing: dict[float, tuple[str, ...]]) -> Assessment:
    """The invented result with the light of some scatterers left out, as an assessment tells it."""
    gaps = tuple(
        Gap(name, at, f"{name} is left out at {at * 1e9:g} nm", True) for at, names in missing.items() for name in names
    )
    components = tuple(c for c in result.components if c.name not in missing.get(c.wavelength, ()))
    dark = {at for at in WAVES if not any(c.wavelength == at for c in components)}
    return replace(
        result, gaps=tuple(gap.reason for gap in gaps), gap_entries=gaps, components=components,
        observers=tuple(_dark(observer, dark) for observer in result.observers), verdict=NOT_ESTABLISHED,
        size_movements=tuple(
            replace(m, scattered=tuple((0.0,) * len(row) for row in m.scattered) if len(dark) == 3 else m.scattered)
            for m in result.size_movements
        ),
    )  # fmt: skip


def _dark(observer: ObserverOutcome, dark: set[float]) -> ObserverOutcome:
    lines = tuple(
        replace(line, scattered=0.0, scattered_error=0.0, scattered_unpolarised=0.0, scattered_compared=0.0)
        if line.wavelength in dark
        else line
        for line in observer.lines
    )
    kept = {line.line for line in lines if line.wavelength not in dark}
    checks = tuple(check for check in observer.hand_checks if check.line in kept)
    tau = 0.0 if len(dark) == 3 else observer.optical_thickness
    return replace(observer, lines=lines, hand_checks=checks, optical_thickness=tau, verdict=NOT_ESTABLISHED)


def printed(made: Assessment) -> str:
    pages = PdfReader(BytesIO(pdf_bytes(made, "A4", MADE_AT))).pages
    return joined(" ".join(page.extract_text() for page in pages))


def joined(text: str) -> str:
    return "".join(text.split()).replace("\u00a0", "")


def section(flat: str, number: int, name: str, next_name: str) -> str:
    """Text of a section without spaces."""
    return flat.rpartition(joined(f"{number} {name}"))[2].partition(joined(f"{number + 1} {next_name}"))[0]


@pytest.fixture(scope="module")
def nothing() -> Assessment:
    return without(assessment(), {at: ("air", HAZE, DUST) for at in WAVES})


@pytest.fixture(scope="module")
def some() -> Assessment:
    """The dust is missing at 1064 nm, everything at 650 nm."""
    return without(assessment(), {1064e-9: (DUST,), 650e-9: ("air", HAZE, DUST)})


def test_who_is_left_out_where(some: Assessment, result: Assessment) -> None:
    assert [left_out_at(some, at) for at in WAVES] == [(), (DUST,), ("air", HAZE, DUST)]
    assert [all_left_out(some, at) for at in WAVES] == [False, False, True]
    assert where_left_out(some, DUST) == (1064e-9, 650e-9)
    assert lacking(some) == f"“{DUST}” at 1064 nm; air, “{HAZE}” and “{DUST}” at 650 nm"
    assert lacking(some, 532e-9) == "" == lacking(result)
    # A reading that is used unchanged leaves nothing out.
    used = replace(result, gap_entries=(Gap(HAZE, 532e-9, "its reading is used unchanged", False),))
    assert lacking(used) == ""


def test_no_page_tells_light_that_is_not_computed_as_zero(nothing: Assessment) -> None:
    flat = printed(nothing)
    listed = joined(f"air, “{HAZE}” and “{DUST}” at 532 nm, 1064 nm and 650 nm")
    exposures = section(flat, 3, "Exposure of each observer", "Comparison with the limits")
    assert "0±0" not in flat
    assert exposures.count("taunotcomputed") == len(nothing.observers) and ";tau=" not in exposures
    # In the text; stated, without F12 and compared, for three lines and their sum; per pulse; tau; whose light it is.
    assert exposures.count("notcomputed") == 1 + len(nothing.observers) * (3 * 4 + 1 + 1 + 1)
    assert exposures.count(listed) == len(nothing.observers)
    particles = section(flat, 6, "Light on air and particles", "Hand check")
    assert joined("No scattered light is computed") in particles
    assert listed in particles
    for absent in ("Asymmetry", "Radii averaged over", "The curve, and the tables", "theta [deg]"):
        assert joined(absent) not in particles
    assert joined("is not computed at 532 nm, 1064 nm, 650 nm, so how it moves with the size is not known") in particles
    for wrong in ("no scattered light of it arrives", "which the rest of this report", "nothing arrives"):
        assert joined(wrong) not in flat
    checks = section(flat, 7, "Hand check", "Inputs as written")
    assert joined("No leg sends scattered light here") not in checks
    assert checks.count(listed) == len(nothing.observers) + 1
    assert joined("tau = not computed") in checks and joined("T = taken as 1") in checks


def test_a_part_that_is_computed_is_marked_as_a_part(some: Assessment) -> None:
    flat = printed(some)
    for observer in some.observers:
        green, train, _ = observer.lines
        told = [signed_interval(line.scattered, line.scattered_error) for line in (green, train)]
        assert joined(f"{told[0]} {digits(green.scattered_unpolarised)}") in flat
        assert joined(f"{told[1]} (part) {digits(train.scattered_unpolarised)} (part)") in flat
        assert joined(f"All lines {digits(observer.total('scattered'))} (part)") in flat
    assert joined("tau = 0.0830 without what is not computed") in flat
    assert joined("At 650 nm its light is not computed.") in flat


def test_first_page_and_terminal_name_whose_light_is_not_computed(some: Assessment, nothing: Assessment) -> None:
    for made in (some, nothing):
        first = joined(PdfReader(BytesIO(pdf_bytes(made, "A4", MADE_AT))).pages[0].extract_text())
        target = io.StringIO()
        print_summary(made, Console(file=target, width=80, no_color=True))
        terminal = joined(target.getvalue())
        for observer in made.observers:
            told = joined(standing(observer, lacking(made)))
            assert told in first and told in terminal
            if observer.ratio is not None:
                assert told.endswith(joined(f"not computed: light of {lacking(made)}"))
        assert joined("light beside the beam alone") not in first + terminal


def test_hint_about_the_size_of_a_load_that_is_not_computed(some: Assessment, nothing: Assessment) -> None:
    (told,) = size_warnings(nothing)
    assert "its light at 532 nm, 1064 nm, 650 nm is not computed, so how it moves is not known" in told
    assert "arrives" not in told and "bounds" not in told
    (told,) = size_warnings(some)
    assert told.endswith("which the bounds carry; its light at 650 nm is not computed")
