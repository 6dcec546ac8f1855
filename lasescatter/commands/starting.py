"""`new`: a starter site file."""

from __future__ import annotations

from pathlib import Path

import typer

from lasescatter.problems import Problem, SiteError


def new_site(file: Path, starter: str, quiet: bool) -> None:
    """Write a starter site; an existing file is never touched."""
    from lasescatter.site.starters import STARTERS, starter_text

    if starter not in STARTERS:
        known = ", ".join(STARTERS)
        raise SiteError(
            [Problem("--starter", f'there is no starter "{starter}"', f"Use one of: {known}")], "command line"
        )
    try:
        with file.open("x", encoding="utf-8") as target:
            target.write(starter_text(starter))
    except FileExistsError as fault:
        problem = Problem("FILE", f"{file} exists already", "Give a new name; nothing was written")
        raise SiteError([problem], "command line") from fault
    except (FileNotFoundError, NotADirectoryError, IsADirectoryError) as fault:
        problem = Problem("FILE", f"{file} cannot be written: {fault.strerror}", "Give a file in a folder that exists")
        raise SiteError([problem], "command line") from fault
    if not quiet:
        typer.echo(f"Wrote {file}. Next: edit it, then run  lasescatter assess {file}")
