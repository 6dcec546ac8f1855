"""`check`: read and validate only."""

from __future__ import annotations

import json
from pathlib import Path

import typer

from lasescatter.commands.sources import site_from
from lasescatter.report.own_kinds import own_kinds
from lasescatter.report.size_movement import size_request
from lasescatter.report.text_page import TextPage
from lasescatter.report.typography import abridged, plain

TITLE = 200
"""A longer title is cut."""


def check_site(file: Path, rules: Path | None, as_json: bool, quiet: bool) -> None:
    """Read a site file and say what is in it, and what had better be stated."""
    from rich.console import Console

    scene = site_from(file, rules)
    counts = {
        "beams": len(scene.beams),
        "loads": len(scene.loads),
        "observers": len(scene.observers),
        "limits": len(scene.limits),
    }
    if as_json:
        asked = [load.name for load in scene.loads if load.size_span is not None]
        told = {"valid": True, "title": scene.title, "reference": scene.reference, **counts, "size_not_stated": asked}
        typer.echo(json.dumps(told))
    elif not quiet:
        listed = ", ".join(f"{count} {name if count != 1 else name[:-1]}" for name, count in counts.items())
        page = TextPage(Console(highlight=False, markup=False))
        page.say(f"{abridged(plain(scene.title), TITLE)}: the file can be read: {listed}.")
        if not scene.limits:
            page.say("It has no limits: every observer will be not established.")
        for load in scene.loads:
            if load.size_span is not None:
                page.say(size_request(load, load.size_span), indent=2)
    if not quiet:
        hints = TextPage(Console(stderr=True, highlight=False, markup=False))
        for line in own_kinds(scene.loads):
            hints.say(line, indent=2)
