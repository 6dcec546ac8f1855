"""Cautions that go with every result, read from `rules/cautions.toml`."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from lasescatter.rules import read_rules

FILE = "cautions.toml"
FOREMOST = 3


@dataclass(frozen=True)
class Caution:
    """One caution."""

    id: str
    text: str
    foremost: bool
    """True: also printed on the terminal."""


def checked(data: dict[str, Any]) -> tuple[tuple[Caution, ...], tuple[str, ...]]:
    """Cautions and the list of what is not covered, from the data of the file.

    Raises
    ------
    ValueError
        Naming every entry that breaks a rule of the file.
    """
    wrong: list[str] = []
    extra = sorted(set(data) - {"caution", "not_covered"})
    if extra:
        wrong.append(f"unknown key(s) {', '.join(extra)}; known are caution and not_covered")
    entries = data.get("caution")
    if not isinstance(entries, list) or not entries:
        wrong.append("no [[caution]] entry; at least one is needed")
        entries = []
    found: list[Caution] = []
    for place, entry in enumerate(entries, start=1):
        faults = _faults(entry, {caution.id for caution in found})
        wrong.extend(f"caution {place}: {fault}" for fault in faults)
        if not faults:
            found.append(Caution(entry["id"], entry["text"].strip(), entry["foremost"]))
    scope = data.get("not_covered")
    if not isinstance(scope, list) or not scope or not all(_is_text(item) for item in scope):
        wrong.append("not_covered must be a list of sentences, at least one")
        scope = []
    leading = sum(caution.foremost for caution in found)
    if found and leading != FOREMOST:
        wrong.append(f"{leading} cautions have foremost = true; the terminal has room for exactly {FOREMOST}")
    if wrong:
        raise ValueError(f"rules/{FILE}: " + "; ".join(wrong))
    return tuple(sorted(found, key=lambda caution: not caution.foremost)), tuple(scope)


def _is_text(value: Any) -> bool:
    return isinstance(value, str) and bool(value.strip())


def _faults(entry: Any, taken: set[str]) -> list[str]:
    if not isinstance(entry, dict):
        return ["not a table"]
    faults = []
    if set(entry) != {"id", "text", "foremost"}:
        faults.append(f"has the keys {', '.join(sorted(entry)) or 'none'}; exactly id, text and foremost are due")
    for key in ("id", "text"):
        if not _is_text(entry.get(key)):
            faults.append(f"{key} must be a text that is not empty")
    if entry.get("id") in taken:
        faults.append(f"the id {entry['id']!r} is used twice")
    if not isinstance(entry.get("foremost"), bool):
        faults.append("foremost must be true or false")
    return faults


@lru_cache(maxsize=1)
def _read() -> tuple[tuple[Caution, ...], tuple[str, ...]]:
    return checked(read_rules(FILE))


def cautions() -> tuple[str, ...]:
    """All cautions, those that matter most first."""
    return tuple(caution.text for caution in _read()[0])


def foremost() -> tuple[str, ...]:
    """The three that matter most."""
    return tuple(caution.text for caution in _read()[0] if caution.foremost)


def not_covered() -> tuple[str, ...]:
    """What no assessment of this program covers."""
    return _read()[1]
