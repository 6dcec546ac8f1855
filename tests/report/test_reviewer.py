"""A reviewer with the paper and a pocket calculator: nothing is taken but the text of the sample's PDF."""

from __future__ import annotations

import math
import re
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest
from pypdf import PdfReader

from lasescatter.assessment.assess import assess
from lasescatter.report.document import write_pdf
from lasescatter.site.reading import read_site
from report.pdf_text import hand_check_blocks, stop_check_blocks

SAMPLE = Path(__file__).parents[2] / "sample_sites" / "hazed_test_bay.toml"
NUMBER = re.compile(r"-?[\d.]+(e-?\d+)?")
TABLE_HEAD = re.compile(r"^(.+), ([\d.]+) nm$")


@pytest.fixture(scope="module")
def pages(tmp_path_factory):
    path = tmp_path_factory.mktemp("paper") / "report.pdf"
    write_pdf(assess(read_site(SAMPLE)), path)
    return [page.extract_text() for page in PdfReader(path).pages]


def tables_of_b(pages):
    """Angle [deg], F11/(4 pi), F12/(4 pi), B11, B12, |B12| of each component as printed, row by row up to 180°."""
    lines = [line.strip() for line in "\n".join(pages).splitlines()]
    tables, numbers = {}, None
    for line, after in pairwise(lines):
        head = TABLE_HEAD.match(line)
        if head and after == "theta [deg]":
            numbers = tables.setdefault(head[1], [])
        elif numbers is not None and NUMBER.fullmatch(line):
            numbers.append(float(line))
            if len(numbers) % 6 == 0 and numbers[-6] == 180.0:
                numbers = None
    return {name: np.array(values).reshape(-1, 6) for name, values in tables.items()}


def component_of(block):
    return re.search(r"component (.+) – ", block["head"])[1]


def test_every_block_comes_out_within_five_per_cent_from_the_tables_of_b(pages):
    blocks = hand_check_blocks(pages)
    tables = tables_of_b(pages)
    assert set(tables) >= {"air", "test haze"}
    assert len(blocks) == 9
    for block in blocks.values():
        component = component_of(block)
        angle, _, _, b11, b12, _ = tables[component].T
        value = {name: float(text) for name, text in block.items() if NUMBER.fullmatch(text)}
        between = [
            float(np.interp(value["theta2"], angle, column) - np.interp(value["theta1"], angle, column))
            for column in (b11, b12)
        ]
        turned = between[0] + value["q"] * math.cos(2 * math.radians(value["phi"])) * between[1]
        passed = math.exp(-value["tau_beam"] - value["tau_sight"])
        by_hand = value["P"] / value["b"] * value["beta_sca"] * turned * passed
        assert by_hand == pytest.approx(value["E_program"], rel=0.05, abs=0), block["head"]


def test_angles_follow_from_the_printed_geometry(pages):
    """E1: cot theta1 = s0/b where the component begins with the leg, as air does."""
    for block in hand_check_blocks(pages).values():
        if component_of(block) != "air":
            continue
        b, s0, length = (float(block[name]) for name in ("b", "s0", "length"))
        assert float(block["theta1"]) == pytest.approx(math.degrees(math.atan2(b, s0)), rel=2e-4)
        assert float(block["theta2"]) == pytest.approx(math.degrees(math.atan2(b, s0 - length)), rel=2e-4)


def test_stop_light_by_lamberts_law_and_the_sums_of_the_blocks(pages):
    """E = rho P cos/(pi r²), and E_program and E_stated add up to the exposure table's scattered and stop light."""
    stops = stop_check_blocks(pages)
    assert len(stops) == 3
    exposures = re.findall(r"alignment\s+beam\s+([\d.e-]+) ± \S+\s+(?:[\d.e-]+\s+){3}([\d.e-]+)", "\n".join(pages))
    assert len(exposures) == 3
    for number, block in stops.items():
        value = {name: float(text) for name, text in block.items() if NUMBER.fullmatch(text)}
        by_hand = value["rho"] * value["P"] * value["cos"] / (math.pi * value["r"] ** 2)
        # Five printed digits in each factor.
        assert by_hand == pytest.approx(value["E_compared"], rel=3e-4, abs=0)
        assert by_hand * math.exp(-value["tau"]) == pytest.approx(value["E_stated"], rel=3e-4, abs=0)
        assert math.exp(-value["tau"]) == pytest.approx(value["T"], rel=1e-4, abs=0)
        assert block["head"].startswith(f"observer {number}, stop of A, 532 nm")
        scattered, stop = exposures[number - 1]
        # The table prints three digits.
        assert float(stop) == pytest.approx(value["E_stated"], rel=6e-3, abs=0)
        own = [b for b in hand_check_blocks(pages).values() if b["head"].startswith(f"observer {number},")]
        assert sum(float(b["E_program"]) for b in own) == pytest.approx(float(scattered), rel=6e-3, abs=0)
