"""`new`: a starter site file."""

from __future__ import annotations

from pathlib import Path

import typer

from lasescatter.commands.delivery import is_the_callers, reason
from lasescatter.problems import Problem, SiteError
from lasescatter.report.typography import plain


def new_site(file: Path, starter: str, quiet: bool) -> None:
    """Write a starter site; an existing file is never touched."""
    from lasescatter.site.starters import STARTERS, starter_text

    if starter not in STARTERS:
        known = ", ".join(STARTERS)
        raise SiteError(
            [Problem("--starter", f'there is no starter "{starter}"', f"Use one of: {known}")], "command line"
        )
    text = starter_text(starter)
    try:
        if file.is_dir():
            raise _unusable(f"{plain(str(file))} is a folder", "Give the name of a file to write")
        target = file.open("x", encoding="utf-8")
        try:
            with target:
                target.write(text)
        except OSError:
            # The file is ours: what cannot be written whole is taken away again.
            file.unlink(missing_ok=True)
            raise
    except FileExistsError as fault:
        raise _unusable(f"{plain(str(file))} exists already", "Give a new name; nothing was written") from fault
    except OSError as fault:
        if not is_the_callers(fault):
            raise OSError(fault.errno, f"{reason(fault)}; nothing was written", str(file)) from fault
        wrong = f"{plain(str(file))} cannot be written in the folder {plain(str(file.parent))}: {reason(fault)}"
        raise _unusable(wrong, "Give a file in a folder that exists and that you may write to") from fault
    if not quiet:
        shown = plain(str(file))
        typer.echo(f"Wrote {shown}. Next: edit it, then run  lasescatter assess {shown}")


def _unusable(wrong: str, mend: str) -> SiteError:
    return SiteError([Problem("FILE", wrong, mend)], "command line")
