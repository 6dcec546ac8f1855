"""What an approximation is: a name, the way it errs, by how much, and where that is known from."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

Direction = Literal["high", "low", "either"]


@dataclass(frozen=True)
class Assumption:
    """One approximation that a result rests on.

    `direction` is that of the estimate: "high" makes the printed exposure larger than the true one
    (cautious), "low" makes it smaller (it can hide a hazard), "either" can do both.
    """

    name: str
    direction: Direction
    size: str
    source: str


def merged(*groups: tuple[Assumption, ...]) -> tuple[Assumption, ...]:
    """The assumptions of all groups, each once, those that err low first."""
    order = {"low": 0, "either": 1, "high": 2}
    once = dict.fromkeys(entry for group in groups for entry in group)
    return tuple(sorted(once, key=lambda entry: order[entry.direction]))
