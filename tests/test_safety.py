"""SAFETY.md lists every assumption that the program can print, with the direction it errs in."""

from __future__ import annotations

import importlib
import pkgutil
from pathlib import Path

import lasescatter
from lasescatter.assumptions import Assumption, merged

SAFETY = (Path(__file__).parents[1] / "SAFETY.md").read_text(encoding="utf-8")


def declared():
    """All assumptions declared in the rooms of physics and judgement."""
    found = {}
    for module in pkgutil.walk_packages(lasescatter.__path__, "lasescatter."):
        room = module.name.split(".")[1]
        if room in ("medium", "exposure", "limits", "assessment", "optics"):
            for value in vars(importlib.import_module(module.name)).values():
                if isinstance(value, Assumption):
                    found[value.name] = value
    return merged(tuple(found.values()))


def test_every_assumption_is_in_the_table_with_its_direction():
    assert len(declared()) > 20
    rows = [[cell.strip() for cell in line.strip("| ").split(" | ")] for line in SAFETY.splitlines() if line[:1] == "|"]
    directions = {row[0]: row[1] for row in rows if len(row) == 3}
    for entry in declared():
        assert directions.get(entry.name) == entry.direction, entry.name
    named = {entry.name for entry in declared()}
    listed = [name for name, direction in directions.items() if direction in ("low", "high", "either")]
    assert set(listed) == named
