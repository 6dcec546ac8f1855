"""Reading a site file: text to scene, or all that is wrong with it at once."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterator, Mapping
from dataclasses import replace
from itertools import islice
from pathlib import Path
from typing import TYPE_CHECKING, Any

from pydantic import ValidationError

from lasescatter.problems import Problem, SiteError
from lasescatter.scene import Scene
from lasescatter.site.document import SiteTable, length_unit
from lasescatter.site.faults import Fault, Place, quoted
from lasescatter.site.fields import Reading
from lasescatter.site.ledger import Ledger
from lasescatter.site.spelling import with_placeholders
from lasescatter.site.syntax import LARGEST_FILE, decoded, parsed
from lasescatter.site.wording import known_fields, problem_of, problems_of

if TYPE_CHECKING:
    from lasescatter.site.catalogue import Catalogue

MOST_PROBLEMS = 300
"""Problems that are told."""
MOST_WORDED = 1000
"""Faults that are put into words at all: a site with that many is no site."""
MOST_ENTRIES: Mapping[str, int] = {"beam": 100, "particles": 50, "observer": 1000, "limit": 500}
MOST_LINES = 50


def read_site(path: Path, catalogue: Catalogue | None = None) -> Scene:
    """Read a site file.

    Parameters
    ----------
    catalogue : Catalogue, optional
        Kinds of particles. Left out, it is the one that comes with the program, read only where a kind is named.

    Raises
    ------
    SiteError
        With every fault of the file: line, key path, what is wrong, what would be right.
    """
    file = str(path)
    try:
        if not path.is_file():
            what = "this is a folder" if path.is_dir() else "there is no such file"
            raise SiteError([Problem("", what, "Give the path of a site file")], file)
        size = path.stat().st_size
        if size > LARGEST_FILE:
            raise SiteError([Problem("", f"the file has {size / 1e6:.1f} MB",
                                     f"A site file has at most {LARGEST_FILE / 1e6:g} MB")], file)  # fmt: skip
        content = path.read_bytes()
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise SiteError(
            [Problem("", f"the file cannot be read ({reason})", "Check path and permissions")], file
        ) from None
    return read_site_text(decoded(content, file), file, catalogue, path.parent)


def read_site_text(
    text: str, file: str = "standard input", catalogue: Catalogue | None = None, folder: Path | None = None
) -> Scene:
    """Read a site file's text.

    Parameters
    ----------
    file : str
        Its name in errors.
    catalogue : Catalogue, optional
        As in `read_site`.
    folder : Path, optional
        Where the files that it names are; left out, the current folder.

    Raises
    ------
    SiteError
        As `read_site`; also where the catalogue cannot be read.
    """
    document, index = parsed(text, file)
    crowded = [problem_of(fault, document, index) for fault in _crowded_lists(document)]
    if crowded:
        raise SiteError(crowded, file)
    problems = [problem_of(fault, document, index) for fault in _repeated_names(document)]
    if catalogue is None and _names_a_kind(document):
        from lasescatter.site.catalogue import read_catalogue

        catalogue = read_catalogue()
    reading = Reading(length_unit(document.get("lengths_in")), folder, catalogue)
    site = None
    try:
        site = SiteTable.model_validate(with_placeholders(document, known_fields()), context=reading)
    except ValidationError as error:
        problems += islice(problems_of(error.errors(include_url=False), document, index), MOST_WORDED)
    if reading.bare_lengths and "lengths_in" not in document:
        fault = Fault(("lengths_in",), "the key is missing and points are given as plain numbers",
                      'Say in which unit they are, for example lengths_in = "m"')  # fmt: skip
        problems.append(problem_of(fault, document, index))
    if site is None or problems:
        raise SiteError(_shortened(problems), file)
    ledger = Ledger(document, index)
    scene = site.to_scene(ledger)
    return replace(scene, inputs=ledger.lines(site), source=document, files=dict(sorted(reading.files.items())))


def _names_a_kind(document: Mapping[str, Any]) -> bool:
    """Whether some particles are of a kind of the catalogue."""
    entries = document.get("particles")
    entries = [entries] if isinstance(entries, Mapping) else entries
    return isinstance(entries, list) and any(isinstance(entry, Mapping) and "kind" in entry for entry in entries)


def _shortened(problems: list[Problem]) -> list[Problem]:
    ordered = list(SiteError(problems).problems)
    if len(ordered) <= MOST_PROBLEMS:
        return ordered
    return [*ordered[:MOST_PROBLEMS], Problem("", "further faults are not listed", "Mend those above first")]


def _lists(document: Mapping[str, Any]) -> Iterator[tuple[Place, list[Any], int]]:
    """The lists of tables, each with its place and the most entries it may have."""
    for name, most in MOST_ENTRIES.items():
        entries = document.get(name)
        if isinstance(entries, list):
            yield (name,), entries, most
    beams = document.get("beam")
    for number, beam in enumerate(beams if isinstance(beams, list) else ()):
        if isinstance(beam, Mapping) and isinstance(beam.get("line"), list):
            yield ("beam", number, "line"), beam["line"], MOST_LINES


def _crowded_lists(document: Mapping[str, Any]) -> Iterator[Fault]:
    """Lists with more entries than any work is done for."""
    for place, entries, most in _lists(document):
        if len(entries) > most:
            yield Fault((*place, most), f"there are {len(entries)} entries", f"Keep it to {most}")


def _repeated_names(document: Mapping[str, Any]) -> Iterator[Fault]:
    """Names that stand for two things; names that look the same are the same."""
    for place, entries, _ in _lists(document):
        seen = set()
        for number, entry in enumerate(entries):
            name = entry.get("name") if isinstance(entry, Mapping) else None
            if not isinstance(name, str) or not name.strip():
                continue
            same = unicodedata.normalize("NFC", name.strip())
            if same in seen:
                yield Fault((*place, number, "name"), f"{quoted(name)} is used twice",
                            "Give each entry a name of its own: results are told by name")  # fmt: skip
            seen.add(same)
