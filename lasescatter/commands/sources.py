"""Where a site file comes from: a path or standard input."""

from __future__ import annotations

import sys
from pathlib import Path

from lasescatter.scene import Scene

STANDARD_INPUT = Path("-")


def site_from(file: Path, rules: Path | None = None) -> Scene:
    """Read a site file, or standard input for "-"; `rules` is a folder with kinds of the user's own.

    Raises
    ------
    SiteError
        If the file cannot be read or its content cannot be used.
    """
    from lasescatter.site.reading import read_site, read_site_text
    from lasescatter.site.syntax import LARGEST_FILE, decoded

    catalogue = None
    if rules is not None:
        from lasescatter.site.catalogue import read_catalogue

        catalogue = read_catalogue(rules)
    if file == STANDARD_INPUT:
        name = "standard input"
        return read_site_text(decoded(sys.stdin.buffer.read(LARGEST_FILE + 1), name), name, catalogue)
    return read_site(file, catalogue)
