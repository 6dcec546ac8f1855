"""Published values, read from `rules/published/*.toml`.

Every file has `title`, `source` (document, year, table), `mark` (the evidence mark of most entries) and `marks`
(what the marks mean: P seen in the source; S seen second-hand; K computed, not printed; M from memory; some files
keep other letters and explain them). Each entry of `case` is one number:

- `name`: which example, row or test case of the source;
- `quantity`: what the number is;
- `inputs`: a table; the file says in which units;
- `printed`: the number as printed, a string, so that its digits are kept;
- `unit`: of the printed number, "1" where it has none;
- `mark`: evidence mark of this entry;
- `within`: only where half a unit of the last digit is not the right tolerance: an absolute one, a string;
- `note`: anything else, and always the reason for `within`.
"""

from __future__ import annotations

import re
from typing import Any

import pytest

from lasescatter.rules import read_rules


def cases(file: str) -> list[dict[str, Any]]:
    """All entries of a file of `rules/published`."""
    return read_rules(f"published/{file}")["case"]


def half_unit(text: str) -> float:
    """Half a unit of the last printed digit: 0.5e-6 of "0.000321", 0.5e-30 of "4.509e-27"."""
    match = re.fullmatch(r"[+-]?(\d+)(?:\.(\d*))?(?:[eE]([+-]?\d+))?", text)
    if match is None:
        raise ValueError(f"{text!r} is not a printed number")
    decimals, exponent = len(match[2] or ""), int(match[3] or 0)
    return 0.5 * 10.0 ** (exponent - decimals)


def printed(text: str, within: str | None = None) -> Any:
    """The printed number as something to compare with: equal within half a unit of its last digit, or `within`."""
    # A shade more, so that a value exactly halfway does not fail by rounding.
    margin = float(within) if within is not None else half_unit(text)
    return pytest.approx(float(text), rel=0, abs=margin * (1 + 1e-9))


def of(case: dict[str, Any]) -> Any:
    """The printed number of a case with the tolerance that belongs to it."""
    return printed(case["printed"], case.get("within"))
