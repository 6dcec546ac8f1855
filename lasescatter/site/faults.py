"""Faults of a site file while it is read: where in the file, what is wrong, what would be right.

A place is a path of keys and list positions, as in ("beam", 0, "power"). It is spelled for the user as
the site file's contract spells it: ``beam["alignment beam"].power``; an entry without a usable name is
counted from 1: ``beam[2].power``.
"""

from __future__ import annotations

import json
import re
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from pydantic_core import PydanticCustomError

Place = tuple[str | int, ...]

_BARE_KEY = re.compile(r"[A-Za-z0-9_-]{1,60}")
_SHOWN = 60


@dataclass(frozen=True)
class Fault:
    """One thing wrong. `place` counts from the table whose rule found it."""

    place: Place
    wrong: str
    mend: str


def refusal(wrong: str, mend: str) -> PydanticCustomError:
    """The error that a field raises: both halves of the message travel in its context."""
    return PydanticCustomError("refused", "{wrong}", {"wrong": wrong, "mend": mend})


HERE: Place = ("",)
"""Place of a fault of the very value that is refused."""


def refusals(faults: Sequence[Fault], own: Sequence[Mapping[str, Any]]) -> PydanticCustomError:
    """Several faults of one table at once; `own` are errors of the table's last field itself."""
    return PydanticCustomError("several", "several faults", {"faults": tuple(faults), "own": tuple(own)})


def escaped(text: str) -> str:
    """Text in double quotes on one line, with everything that would not print escaped as TOML does."""
    shown = json.dumps(text, ensure_ascii=False)[1:-1]
    plain = "".join(
        sign if sign.isprintable() else f"\\u{ord(sign):04X}" if ord(sign) < 0x10000 else f"\\U{ord(sign):08X}"
        for sign in shown
    )
    return f'"{plain}"'


def quoted(value: Any) -> str:
    """A value of the file as it is named in a message: short, on one line."""
    if isinstance(value, str):
        return escaped(value if len(value) <= _SHOWN else value[: _SHOWN - 1] + "…")
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int) and abs(value) >= 10**20:
        return "a very large number"
    if isinstance(value, int | float):
        return f"{value:.12g}"
    if isinstance(value, Mapping):
        return "a table"
    if isinstance(value, Sequence):
        return "an empty list" if not value else "a list"
    return f"a date or time ({value})"


def spelled(place: Place, document: Any, spell: Callable[[str], str] = escaped) -> str:
    """A place in the contract's spelling. `document` is the file as parsed; it lends the names.

    `spell` writes a name: in full, or with `quoted` short enough for a message.
    """
    words, here = "", document
    for step in place:
        here = _below(here, step)
        if isinstance(step, int):
            name = here.get("name") if isinstance(here, Mapping) else None
            words += f"[{spell(name)}]" if isinstance(name, str) and name.strip() else f"[{step + 1}]"
        elif _BARE_KEY.fullmatch(step):
            words += f".{step}" if words else step
        else:
            words += f"[{spell(step)}]"
    return words


def place_in_file(place: Place, document: Any) -> Place:
    """`place` without list positions where the file has a single table instead of a list of them."""
    steps: list[str | int] = []
    here = document
    for step in place:
        if isinstance(step, int) and isinstance(here, Mapping):
            continue
        here = _below(here, step)
        steps.append(step)
    return tuple(steps)


def _below(here: Any, step: str | int) -> Any:
    if isinstance(step, str):
        return here.get(step) if isinstance(here, Mapping) else None
    return here[step] if isinstance(here, list) and 0 <= step < len(here) else None
