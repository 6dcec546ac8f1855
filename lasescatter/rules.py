"""Where the data of `rules/` is: beside the package in a checkout, inside it in an installed wheel."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Any


def shipped_rules() -> Path:
    """Folder of the data that comes with the program.

    Raises
    ------
    FileNotFoundError
        If the installation is incomplete.
    """
    package = Path(__file__).resolve().parent
    for folder in (package / "_rules", package.parent / "rules"):
        if (folder / "cautions.toml").is_file():
            return folder
    raise FileNotFoundError(f"the rules folder is missing beside or inside {package}; install the program again")


def read_rules(name: str) -> dict[str, Any]:
    """One TOML file of the rules folder, by its path below it, for example "published/bodhaine_1999.toml"."""
    with (shipped_rules() / name).open("rb") as file:
        return tomllib.load(file)
