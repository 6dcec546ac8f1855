"""Where a site file comes from: a path or standard input."""

from __future__ import annotations

import sys
from pathlib import Path

from lasescatter.problems import Problem, SiteError
from lasescatter.scene import Scene

STANDARD_INPUT = Path("-")


def site_from(file: Path) -> Scene:
    """Read a site file, or standard input for "-".

    Raises
    ------
    SiteError
        If the file cannot be read or its content cannot be used.
    """
    from lasescatter.site.reading import read_site, read_site_text

    if file == STANDARD_INPUT:
        data = sys.stdin.buffer.read()
        try:
            text = data.decode("utf-8-sig")
        except UnicodeDecodeError as fault:
            problem = Problem("", f"the text is not UTF-8 (byte {fault.start})", "Save it as UTF-8")
            raise SiteError([problem], "standard input") from fault
        return read_site_text(text, "standard input")
    return read_site(file)
