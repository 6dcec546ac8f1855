"""The three verdicts, their order, and the one form in which a margin is written."""

from __future__ import annotations

import math
from collections.abc import Iterable
from typing import Literal

Verdict = Literal["below limit", "above limit", "not established"]

BELOW: Verdict = "below limit"
ABOVE: Verdict = "above limit"
NOT_ESTABLISHED: Verdict = "not established"


def worst(verdicts: Iterable[Verdict]) -> Verdict:
    """The worst of several: above, then not established, then below; of none: not established."""
    found = set(verdicts)
    for verdict in (ABOVE, NOT_ESTABLISHED, BELOW):
        if verdict in found:
            return verdict
    return NOT_ESTABLISHED


def three_digits(value: float) -> str:
    """A positive number to two or three digits, without an exponent where it reads well."""
    if value == 0:
        return "0"
    if 1e-3 <= abs(value) < 1e5:
        digits = max(0, 1 - math.floor(math.log10(abs(value))))
        return f"{value:.{digits}f}"
    return f"{value:.1e}"


def margin(ratio: float | None) -> str:
    """A ratio of exposure to limit in words: "0.036 of the limit (28 times below)"."""
    if ratio is None or not math.isfinite(ratio):
        return "no ratio"
    if ratio <= 0:
        return "0 of the limit (nothing arrives)"
    if ratio <= 1:
        return f"{three_digits(ratio)} of the limit ({three_digits(1 / ratio)} times below)"
    return f"{three_digits(ratio)} of the limit ({three_digits(ratio)} times above)"
