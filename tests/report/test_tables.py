"""The CSV table and the terminal summary."""

from __future__ import annotations

import csv
import io
from dataclasses import replace
from pathlib import Path

import pytest
from rich.cells import cell_len
from rich.console import Console

from lasescatter.assessment.outcome import Assessment
from lasescatter.cautions import foremost
from lasescatter.limits.verdict import margin
from lasescatter.report.csv_table import HEADS, text_cell, write_csv
from lasescatter.report.terminal import print_summary

from .invented import HOSTILE, assessment, many


def table(assessment: Assessment, folder: Path) -> list[dict[str, str]]:
    path = folder / "t.csv"
    write_csv(assessment, path)
    with path.open(encoding="utf-8", newline="") as source:
        reader = csv.DictReader(source)
        rows = list(reader)
        assert tuple(reader.fieldnames or ()) == HEADS
    return rows


def test_every_comparison_comes_back(result: Assessment, tmp_path: Path) -> None:
    rows = table(result, tmp_path)
    wanted = [(observer, entry) for observer in result.observers for entry in (observer.comparisons or (None,))]
    assert len(rows) == len(wanted)
    for row, (observer, entry) in zip(rows, wanted, strict=True):
        assert row["observer"] == text_cell(observer.name)
        assert tuple(float(row[axis]) for axis in ("x_m", "y_m", "z_m")) == observer.position
        assert row["observer_verdict"] == observer.verdict
        assert float(row["scattered_stated_w_m2"]) == observer.total("scattered")
        if entry is None:
            assert row["limit"] == row["ratio"] == row["verdict"] == ""
            continue
        assert (row["limit"], row["beam"], row["line"]) == (entry.limit, entry.beam, entry.line)
        assert (row["unit"], row["verdict"]) == (entry.unit, entry.verdict)
        for head, value in (
            ("exposure_in_unit", entry.exposure), ("limit_in_unit", entry.limit_value), ("ratio", entry.ratio),
            ("ratio_low", entry.ratio_low), ("ratio_high", entry.ratio_high), ("duration_s", entry.duration),
            ("counted_s", entry.counted),
        ):  # fmt: skip
            assert float(row[head]) == value
        told = "; ".join(f"{cause}: {amount!r}" for cause, amount in entry.allowances)
        assert row["allowances_in_unit"] == told
        origins = dict(entry.by_origin)
        assert float(row["scattered_in_unit"]) == origins["scattered"]
        assert float(row["stop_in_unit"]) == origins["stop"]
        assert float(row["direct_in_unit"]) == origins["direct"]
        assert row["higher_orders_allowance_in_unit"] == ""


def test_every_unit_is_in_a_head_or_a_column() -> None:
    for head in HEADS:
        if any(word in head for word in ("exposure", "stated", "compared", "direct", "nearest", "duration", "time")):
            assert head.endswith(("_w_m2", "_in_unit", "_m", "_s")), head


def test_a_formula_is_not_run(tmp_path: Path) -> None:
    typed = ('=HYPERLINK("x")', "-2+3", 'a "quoted", text')
    made = assessment(tuple((name, (4.0 + place, 1.5, 1.6)) for place, name in enumerate(typed)))
    names = [row["observer"] for row in table(made, tmp_path)]
    assert '\'=HYPERLINK("x")' in names and "'-2+3" in names and 'a "quoted", text' in names


def test_control_characters_are_left_out() -> None:
    assert text_cell("a\x00b\x1b[31m\x7f\x85c\nd\te") == "ab[31mc d e"
    assert text_cell("\x00=1+1") == "'=1+1"
    assert text_cell("\t=1+1") == "' =1+1"


def test_lone_surrogates_and_nul_are_written(tmp_path: Path) -> None:
    made = assessment((("a\ud800b\x00", (4.0, 1.5, 1.6)),))
    assert table(made, tmp_path)[0]["observer"].startswith("a\\ud800b")


# ---------------------------------------------------------------- terminal


def summary(assessment: Assessment, width: int = 80, encoding: str = "utf-8", terminal: bool = False) -> str:
    raw = io.BytesIO()
    target = io.TextIOWrapper(raw, encoding=encoding, newline="\n")
    console = Console(file=target, width=width, force_terminal=terminal, no_color=True)
    print_summary(assessment, console)
    target.flush()
    return raw.getvalue().decode(encoding)


@pytest.mark.parametrize("width", [40, 80, 200])
def test_no_line_is_too_long(result: Assessment, width: int) -> None:
    for made in (result, many(40), assessment((("漢字" * 60, (4.0, 1.5, 1.6)), ("y" * 500, (5.0, 1.0, 1.0))))):
        for line in summary(made, width).splitlines():
            assert cell_len(line) <= min(80, width), line


def test_it_says_what_matters(result: Assessment) -> None:
    shown = " ".join(summary(result).split())
    assert "In the beam: up to 5200 times the limit" in shown
    assert f"Beside the beam, worst of 3 observers: {result.verdict} (retina thermal only; not judged: skin)" in shown
    assert "site verdict" not in shown.lower()
    # The second beam of the fixture leaves the site, with two lines.
    assert shown.count("the beam leaves the site: nothing ends it") == 2
    for observer in result.observers:
        assert margin(observer.ratio) in shown
    for caution in foremost():
        assert caution in shown
    assert "SAFETY.md" in shown and "PDF" in shown
    assert "skin: not judged, covered by the clothing rule" in shown
    assert "5200 at the worst place (start) for 10 s" in shown
    assert "no multiple, no limit covers 650 nm for 10 s" in shown
    assert shown.index("Somebody in the beam itself") < shown.index("Beside the beam, worst of")


def test_no_colour_and_no_steering_when_piped(result: Assessment) -> None:
    made = replace(result, observers=(replace(result.observers[0], name="a\x1b[31m[bold]:smile:"),))
    shown = summary(made)
    assert "\x1b" not in shown
    assert "a[U+001B][31m[bold]:smile:" in shown


def test_names_are_not_read_as_markup(result: Assessment) -> None:
    assert HOSTILE.split("漢")[0].strip() in " ".join(summary(result, terminal=True).split())


def test_a_plain_terminal_is_enough(result: Assessment) -> None:
    assert "\\u6f22" in summary(result, encoding="ascii")


def test_many_observers_are_counted_and_the_worst_listed() -> None:
    made = many(40)
    shown = summary(made)
    lines = shown.splitlines()
    counts = {verdict: sum(o.verdict == verdict for o in made.observers) for verdict in ("above limit", "below limit")}
    told = next(line for line in lines if line.startswith("40 observers:"))
    for verdict, count in counts.items():
        assert f"{count} {verdict}" in told
    first = next(i for i, line in enumerate(lines) if "look at first" in line)
    assert "above limit: place" in lines[first + 1]
    assert shown.count("place ") >= 20
