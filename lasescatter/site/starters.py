"""Starter files: commented sites that read as they are, to be filled in by the user."""

from __future__ import annotations

from pathlib import Path

STARTERS = ("indoor", "outdoor", "pulsed")

_FOLDER = Path(__file__).parent / "starter_files"


def starter_text(name: str) -> str:
    """The text of a starter file.

    Raises
    ------
    ValueError
        If there is no starter of that name.
    """
    if name not in STARTERS:
        raise ValueError(f"there is no starter {name!r}; the starters are {', '.join(STARTERS)}")
    return (_FOLDER / f"{name}.toml").read_text(encoding="utf-8")
