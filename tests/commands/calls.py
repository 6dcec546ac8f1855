"""Calls of the command line as a user makes them."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).parents[2]
SAMPLE = ROOT / "sample_sites" / "hazed_test_bay.toml"


def run(*arguments, cwd=None, stdin=None, **environment):
    changed = {**os.environ, "SOURCE_DATE_EPOCH": "1767355200", "COLUMNS": "80", "NO_COLOR": "1", **environment}
    changed["PYTHONPATH"] = str(ROOT)
    return subprocess.run(
        [sys.executable, "-m", "lasescatter", *map(str, arguments)],
        capture_output=True, cwd=cwd, input=stdin, env=changed, timeout=120, encoding="utf-8", check=False,
    )  # fmt: skip
