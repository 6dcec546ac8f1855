"""Files that a site file names: where they may be, how large they may be, and what they become.

They lie beside the site file or below it; nothing outside that folder is read, by whatever way it is named.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any, cast

from pydantic import ValidationInfo
from pydantic_core import PydanticCustomError

from lasescatter.problems import SiteError
from lasescatter.site.columns import TableError
from lasescatter.site.faults import HERE, Fault, quoted, refusal, refusals
from lasescatter.site.fields import Marker, Reading
from lasescatter.site.syntax import decoded

LARGEST_TABLE = 1_000_000
"""Of one file. [bytes]"""
LARGEST_TOGETHER = 10_000_000
"""Of all files of a site. [bytes]"""
LONGEST_NAME = 200

_DRIVE = re.compile(r"[A-Za-z]:")


@dataclass(frozen=True)
class FromFile:
    """What a file became."""

    name: str
    """As the site file writes it."""
    content: Any
    told: str
    """What became of it, for the list of inputs."""

    def __str__(self) -> str:
        return self.told


@dataclass(frozen=True)
class TableFile(Marker):
    """The name of a file with a table."""

    make: Callable[[str, str], tuple[Any, str]]
    """From name and text to the content and what to say of it; raises TableError."""
    example: str

    def read(self, value: Any, info: ValidationInfo) -> FromFile:
        name = _name(value, self.example)
        reading = cast(Reading, info.context)
        text = reading.files.get(name)
        if text is None:
            text = _text(name, reading)
            reading.files[name] = text
        known = (name, self.make.__name__)
        if known not in reading.made:
            try:
                content, told = self.make(name, text)
            except TableError as error:
                reading.made[known] = error
            else:
                reading.made[known] = FromFile(name, content, told)
        found = reading.made[known]
        if isinstance(found, TableError):
            raise _several(found)
        return found

    def schema(self) -> dict[str, Any]:
        return {"type": "string", "minLength": 1, "maxLength": LONGEST_NAME, "pattern": r"^[^/\\]"}


def _several(error: TableError) -> PydanticCustomError:
    """All faults of a file, at the key that names it."""
    if len(error.faults) == 1:
        return refusal(*error.faults[0])
    return refusals([Fault(HERE, wrong, mend) for wrong, mend in error.faults], ())


def _name(value: Any, example: str) -> str:
    """A name that stays in the site's folder as far as the name itself tells."""
    mend = f"Write the name of a file beside the site file in quotes, for example {quoted(example)}"
    if not isinstance(value, str):
        raise refusal(f"{quoted(value)} is not the name of a file", mend)
    if not value.strip() or not value.isprintable() or len(value) > LONGEST_NAME:
        raise refusal(f"{quoted(value)} is not a usable name of a file", mend)
    if "\\" in value:
        raise refusal(f"{quoted(value)} has a backslash", f"Write / between folder and file. {mend}")
    if value.startswith(("/", "~")) or _DRIVE.match(value):
        raise refusal(f"{quoted(value)} is not beside the site file",
                      "Put the file into the site file's folder or one below it, and name it from there")  # fmt: skip
    if ".." in value.split("/"):
        raise refusal(f"{quoted(value)} leads out of the site file's folder",
                      "Put the file into that folder or one below it, and name it from there")  # fmt: skip
    return value


def _text(name: str, reading: Reading) -> str:
    """The text of a file in the site's folder."""
    folder = (reading.folder or Path()).resolve()
    try:
        path = (folder / name).resolve()
        if not path.is_relative_to(folder):
            raise refusal(f"{quoted(name)} is a link that leads out of the site file's folder",
                          "Put the file itself into that folder")  # fmt: skip
        if not path.is_file():
            what = "is a folder" if path.is_dir() else "is not there"
            raise refusal(f"{quoted(name)} {what}", "Put the file beside the site file, and name it from there")
        with path.open("rb") as file:
            content = file.read(LARGEST_TABLE + 1)
    except (OSError, ValueError, RuntimeError) as error:
        if isinstance(error, PydanticCustomError):
            raise
        reason = getattr(error, "strerror", None) or "its name cannot be used"
        raise refusal(f"{quoted(name)} cannot be read ({reason})", "Check the name and the permissions") from None
    if len(content) > LARGEST_TABLE:
        raise refusal(f"{quoted(name)} is too large", f"A table has at most {LARGEST_TABLE / 1e6:g} MB")
    if len(content) + sum(len(text) for text in reading.files.values()) > LARGEST_TOGETHER:
        raise refusal("the files of this site are too large together",
                      f"Keep all of them to {LARGEST_TOGETHER / 1e6:g} MB")  # fmt: skip
    try:
        text = decoded(content, name)
    except SiteError as error:
        (problem,) = error.problems
        raise refusal(f"{name}, line {problem.line}: {problem.wrong}", problem.mend) from None
    return text
