"""`check`: read and validate only."""

from __future__ import annotations

import json
from pathlib import Path

import typer

from lasescatter.commands.sources import site_from
from lasescatter.report.typography import abridged, plain

TITLE = 200
"""A longer title is cut."""


def check_site(file: Path, as_json: bool, quiet: bool) -> None:
    """Read a site file and say what is in it."""
    scene = site_from(file)
    counts = {
        "beams": len(scene.beams),
        "loads": len(scene.loads),
        "observers": len(scene.observers),
        "limits": len(scene.limits),
    }
    if as_json:
        typer.echo(json.dumps({"valid": True, "title": scene.title, "reference": scene.reference, **counts}))
    elif not quiet:
        listed = ", ".join(f"{count} {name if count != 1 else name[:-1]}" for name, count in counts.items())
        typer.echo(f"{abridged(plain(scene.title), TITLE)}: the file can be read: {listed}.")
        if not scene.limits:
            typer.echo("It has no limits: every observer will be not established.")
