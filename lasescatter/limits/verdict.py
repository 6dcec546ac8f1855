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


def few_digits(value: float) -> str:
    """A positive number to two digits, three between a half and two, without an exponent where it reads well."""
    if value == 0:
        return "0"
    digits = 3 if 0.5 <= value <= 2 else 2
    if not 1e-3 <= abs(value) < 1e6:
        mantissa, exponent = f"{value:.{digits - 1}e}".split("e")
        return f"{mantissa}e{int(exponent)}"
    rounded = float(f"{value:.{digits - 1}e}")
    return f"{rounded:.{max(0, digits - 1 - math.floor(math.log10(abs(rounded))))}f}"


def margin(ratio: float | None) -> str:
    """A ratio of exposure to limit in words: "0.036 of the limit (28 times below)"."""
    if ratio is None or not math.isfinite(ratio):
        return "no ratio"
    if ratio <= 0:
        return "0 of the limit (nothing arrives)"
    if ratio <= 1:
        return f"{few_digits(ratio)} of the limit ({few_digits(1 / ratio)} times below)"
    return f"{few_digits(ratio)} of the limit ({few_digits(ratio)} times above)"
