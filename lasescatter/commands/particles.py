"""`particles list` and `particles show`: the kinds of the catalogue."""

from __future__ import annotations

import json
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

import typer

from lasescatter.problems import Problem, SiteError
from lasescatter.report.typography import plain

if TYPE_CHECKING:
    from lasescatter.assessment.kind_optics import KindOptics
    from lasescatter.matter import Kind
    from lasescatter.site.catalogue import Catalogue

SHORTEST, LONGEST = 180e-9, 1e-3
"""Wavelengths that a site file takes. [m]"""
MOST_WAVELENGTHS = 30
DEFAULT_WAVELENGTH = "532 nm"


def list_kinds(rules: Path | None, as_json: bool) -> None:
    """Print every kind of the catalogue."""
    from rich.console import Console

    from lasescatter.report.kind_json import kind_summary
    from lasescatter.report.kind_text import print_list
    from lasescatter.site.catalogue import read_catalogue

    kinds = list(read_catalogue(rules).kinds.values())
    if as_json:
        typer.echo(json.dumps([kind_summary(kind) for kind in kinds], indent=1, ensure_ascii=False, allow_nan=False))
    else:
        print_list(kinds, Console(highlight=False, markup=False))


def show_kind(
    name: str, wavelengths: Sequence[str], loads: Sequence[str], humidity: str | None, plot: Path | None,
    rules: Path | None, as_json: bool,
) -> None:  # fmt: skip
    """Print the optics of one kind at wavelengths, and draw its curve."""
    from rich.console import Console

    from lasescatter.assessment.kind_optics import kind_optics
    from lasescatter.commands.stated_load import load_reading
    from lasescatter.commands.steps import Steps
    from lasescatter.report.kind_json import kind_in_full
    from lasescatter.report.kind_text import print_kind
    from lasescatter.scene import Air
    from lasescatter.site.catalogue import read_catalogue

    _check_plot(plot)
    waves = _wavelengths(wavelengths or [DEFAULT_WAVELENGTH])
    kind = _named(read_catalogue(rules), name)
    grows = any((mode.material or kind.material).growth is not None for mode in kind.modes)
    readings = tuple(load_reading(text, waves[0] if len(waves) == 1 else None, grows) for text in loads)
    air = Air(relative_humidity=_humidity(humidity))
    try:
        with Steps(Console(stderr=True, highlight=False)) as steps:
            found = kind_optics(kind, waves, readings, air, steps.begin)
    except SiteError as fault:
        raise _renamed(fault, "air.relative_humidity", "--humidity") from fault
    # The file first: where it cannot be written nothing is printed either.
    told = [] if plot is None else _drawn(found, plot)
    if as_json:
        typer.echo(json.dumps(kind_in_full(found), indent=1, ensure_ascii=False, allow_nan=False))
    else:
        print_kind(found, Console(highlight=False, markup=False))
    if not wavelengths:
        told.insert(0, f"no --wavelength was given: {DEFAULT_WAVELENGTH} is shown")
    for line in told:
        typer.echo(line, err=True)


def _named(catalogue: Catalogue, name: str) -> Kind:
    kind = catalogue.named(name)
    if kind is None:
        near = " or ".join(f'"{other}"' for other in catalogue.near(name))
        mend = f"Perhaps {near} was meant; " if near else ""
        shown = plain(name[:60])
        raise _refused("KIND", f'there is no kind "{shown}"', f"{mend}lasescatter particles list names them all")
    return kind


def _wavelengths(texts: Sequence[str]) -> tuple[float, ...]:
    from lasescatter.units import QuantityError, parse_quantity

    if len(texts) > MOST_WAVELENGTHS:
        raise _refused("--wavelength", f"there are {len(texts)} wavelengths", f"Give at most {MOST_WAVELENGTHS}")
    found = []
    for text in texts:
        try:
            value = parse_quantity(text, "wavelength")
        except QuantityError as fault:
            raise _refused("--wavelength", f'"{plain(text[:60])}" {fault.wrong}', fault.mend) from None
        if not SHORTEST <= value <= LONGEST:
            raise _refused("--wavelength", f'"{plain(text)}" is outside what is accepted for a wavelength',
                           "Give a value from 180 nm to 1 mm; check the unit")  # fmt: skip
        found.append(value)
    return tuple(dict.fromkeys(found))


def _humidity(text: str | None) -> float:
    from lasescatter.units import QuantityError, parse_quantity

    if text is None:
        return 0.0
    try:
        value = parse_quantity(text, "fraction")
    except QuantityError as fault:
        raise _refused("--humidity", f'"{plain(text[:60])}" {fault.wrong}', fault.mend) from None
    if not 0 <= value <= 1:
        raise _refused("--humidity", f'"{plain(text)}" is no relative humidity', "Give a value from 0 % to 100 %")
    return value


def _check_plot(plot: Path | None) -> None:
    """Refuse a name that cannot be drawn to, before anything is computed."""
    from lasescatter.report.kind_curves import FORMATS

    if plot is not None and plot.suffix.lower() not in FORMATS:
        raise _refused("--plot", f"{plain(str(plot))} has no ending that can be drawn",
                       f"Give a name that ends in {', '.join(FORMATS[:-1])} or {FORMATS[-1]}")  # fmt: skip


def _drawn(found: KindOptics, plot: Path) -> list[str]:
    """Draw the curves. Returns what there is to tell of the file."""
    from lasescatter.commands.delivery import delivery_to
    from lasescatter.report.kind_curves import write_curves

    if all(entry.usual is None for entry in found.wavelengths):
        return [f"{plain(str(plot))}: no curve is known at these wavelengths; nothing was drawn"]
    try:
        with delivery_to(plot.parent) as delivery:
            delivery.refuse_taken([plot.name])
            delivery.make(plot.name, lambda path: write_curves(found, path))
            written, replaced = delivery.put_in_place([plot.name])
    except SiteError as fault:
        raise _renamed(fault, "--out", "--plot") from fault
    return [f"wrote {plain(str(path))}{' (replaced)' if path in replaced else ''}" for path in written]


def _renamed(fault: SiteError, key: str, option: str) -> SiteError:
    """The same faults, told of this command's own option."""
    problems = [replace(problem, key=option if problem.key == key else problem.key) for problem in fault.problems]
    return SiteError(problems, "command line")


def _refused(key: str, wrong: str, mend: str) -> SiteError:
    return SiteError([Problem(key, wrong, mend)], "command line")
