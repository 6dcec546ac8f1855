"""Files of the user's own in print: every line, in order, cut where they are long."""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import replace
from io import BytesIO

from pypdf import PdfReader

from lasescatter.report.document import pdf_bytes
from lasescatter.report.own_tables import MOST_LINES, paper_lines
from lasescatter.scene import Scene

from .conftest import MADE_AT
from .invented import LOADS, assessment

NUMBERED = re.compile(r"(\d+): (\S+)")


def lines(count: int) -> list[str]:
    return [f"{0.1 * i:.4f},{i * i}" for i in range(count)]


def test_columns_hold_every_line_once_and_in_order() -> None:
    for count in (1, 7, 39, 161, 240):
        found = dict(NUMBERED.findall("\n".join(paper_lines(lines(count)))))
        assert [found[str(i + 1)] for i in range(count)] == lines(count)
        assert max(map(len, paper_lines(lines(count)))) <= 116


def test_a_long_line_goes_on_below() -> None:
    long = "".join(str(i % 10) for i in range(300))
    rows = paper_lines([long, "b"])
    assert "".join(row[6:] for row in rows[:-1]) == long and rows[-1] == "   2: b"
    assert max(map(len, rows)) <= 116


def test_files_are_printed_and_long_ones_cut() -> None:
    made = assessment()
    files = {"dust <i>.csv": "\n".join(lines(30)), "long.csv": "\n".join(lines(MOST_LINES + 60))}
    entry = {"name": LOADS[1].name, "sizes": [{"shape": "table", "file": "dust <i>.csv"}]}
    scene: Scene = replace(made.scene, files=files, source={"particles": [entry]})
    pages = PdfReader(BytesIO(pdf_bytes(replace(made, scene=scene), "A4", MADE_AT))).pages
    text = "\n".join(page.extract_text() for page in pages)
    flat = "".join(text.split())
    # Each line stands once for the short file and once for the long one, as far as that is printed.
    found = Counter(NUMBERED.findall(text))
    for number, line in enumerate(lines(MOST_LINES), start=1):
        assert found[str(number), line] == (2 if number <= 30 else 1), line
    assert not [line for number, line in found if number == str(MOST_LINES + 1)]
    assert f"long.csv,{MOST_LINES + 60}lines;thefirst{MOST_LINES}areprinted,thefulltextisintherecord" in flat
    assert "Owntablesdust<i>.csv:printedattheendofthesectiononinputs" in flat
