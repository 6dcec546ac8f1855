"""The command line: reads arguments, makes one call each, writes what comes back."""

from __future__ import annotations

import sys
from collections.abc import Callable
from pathlib import Path
from typing import Annotated

import typer

import lasescatter
from lasescatter.problems import Problem, SiteError

app = typer.Typer(
    add_completion=False,
    no_args_is_help=True,
    pretty_exceptions_enable=False,
    context_settings={"help_option_names": ["-h", "--help"]},
    help="Scattered laser light beside a beam, judged against the exposure limits entered in a site file.",
    epilog="Verdicts hold only for the site as described. The laser safety officer decides.",
)


def _path_of(name: str, mend: str) -> Callable[[str], Path]:
    """A reader of paths: an empty one is refused, where the path library would take it as this folder."""

    def read(text: str | Path) -> Path:
        if not str(text):
            raise SiteError([Problem(name, "the name is empty", mend)], "command line")
        return Path(text)

    return read


_file = _path_of("FILE", "Give the path of a site file")
_folder = _path_of("--out", "Give a folder, or leave the option out for this folder")
_rules = _path_of("--rules", "Give a folder, or leave the option out for the kinds that come with the program")
_plot = _path_of("--plot", "Give a file that ends in .svg, .png or .pdf, or leave the option out")

SiteFile = Annotated[
    Path, typer.Argument(metavar="FILE", parser=_file, help="Site file (TOML); - reads standard input.")
]
Quiet = Annotated[
    bool, typer.Option("--quiet", "-q", help="Print nothing but errors, and how many earlier files were replaced.")
]
Rules = Annotated[
    Path | None,
    typer.Option(
        "--rules", metavar="DIR", parser=_rules,
        help="Folder with particles/*.toml, indices/*.toml or both: kinds and indices that are added or replaced.",
    ),
]  # fmt: skip
AsJson = Annotated[bool, typer.Option("--json", help="Print JSON to standard output.")]


def _version(wanted: bool) -> None:
    if wanted:
        typer.echo(f"lasescatter {lasescatter.__version__}")
        raise typer.Exit


@app.callback()
def _common(
    version: Annotated[
        bool, typer.Option("--version", callback=_version, is_eager=True, help="Print the version and stop.")
    ] = False,
) -> None:
    pass


@app.command("assess")
def assess_command(
    file: SiteFile,
    out: Annotated[
        Path,
        typer.Option("--out", metavar="DIR", parser=_folder, help="Folder for the files; made if it is missing."),
    ] = Path("."),
    page_size: Annotated[str, typer.Option("--page-size", help="A4 or Letter.")] = "A4",
    verdict_exit: Annotated[
        bool,
        typer.Option("--verdict-exit", help="Exit 3 if something is above a limit, 4 if something is not established."),
    ] = False,
    rules: Rules = None,
    as_json: AsJson = False,
    quiet: Quiet = False,
) -> None:
    """Assess a site: PDF, record, table and figures."""
    from lasescatter.commands.assessing import assess_site

    raise typer.Exit(assess_site(file, out, page_size, verdict_exit, rules, as_json, quiet))


@app.command("check")
def check_command(file: SiteFile, rules: Rules = None, as_json: AsJson = False, quiet: Quiet = False) -> None:
    """Read and validate a site file; compute nothing."""
    from lasescatter.commands.checking import check_site

    check_site(file, rules, as_json, quiet)


@app.command("new")
def new_command(
    file: Annotated[
        Path, typer.Argument(metavar="FILE", parser=_file, help="Site file to write; it must not exist yet.")
    ],
    starter: Annotated[str, typer.Option("--starter", metavar="NAME", help="indoor, outdoor or pulsed.")] = "indoor",
    quiet: Quiet = False,
) -> None:
    """Write a commented starter site file that can be assessed as it stands."""
    from lasescatter.commands.starting import new_site

    new_site(file, starter, quiet)


particles_app = typer.Typer(no_args_is_help=True, help="Kinds of particles: what is known of them, and their optics.")
app.add_typer(particles_app, name="particles")


@particles_app.command("list")
def particles_list_command(rules: Rules = None, as_json: AsJson = False) -> None:
    """List the kinds: trust, wavelengths answered, whether the size must be stated."""
    from lasescatter.commands.particles import list_kinds

    list_kinds(rules, as_json)


@particles_app.command("show")
def particles_show_command(
    kind: Annotated[str, typer.Argument(metavar="KIND", help='Name of a kind, for example "glycol haze".')],
    wavelength: Annotated[
        list[str] | None,
        typer.Option(
            "--wavelength", "-w", metavar="W", help='"532 nm"; may be given several times; 532 nm if left out.'
        ),
    ] = None,
    load: Annotated[
        list[str] | None,
        typer.Option(
            "--load", metavar="READING",
            help='As in the site file: "mass=8 mg/m^3" or "transmittance=0.8, over=3 m, at=650 nm".',
        ),
    ] = None,
    humidity: Annotated[
        str | None, typer.Option("--humidity", metavar="PERCENT", help='Relative humidity, "60 %"; dry if left out.')
    ] = None,
    plot: Annotated[
        Path | None,
        typer.Option("--plot", metavar="FILE", parser=_plot, help="Draw the curves to an .svg, .png or .pdf file."),
    ] = None,
    rules: Rules = None,
    as_json: AsJson = False,
) -> None:  # fmt: skip
    """Show a kind's optics at wavelengths, over its sizes, and what instruments would read of a load."""
    from lasescatter.commands.particles import show_kind

    show_kind(kind, wavelength or [], load or [], humidity, plot, rules, as_json)


@app.command("schema")
def schema_command() -> None:
    """Print the JSON Schema of a site file, for editors."""
    import json

    from lasescatter.site.schema import site_schema

    typer.echo(json.dumps(site_schema(), indent=2, ensure_ascii=False))


def main() -> None:
    """Entry point: input errors end in one message and status 2, anything unexpected in status 1."""
    _utf8_streams()
    try:
        app(prog_name="lasescatter")
    except SiteError as fault:
        from lasescatter.report.typography import plain

        typer.echo(str(SiteError(fault.problems, plain(fault.file))), err=True)
        sys.exit(2)
    except BrokenPipeError:
        # Whoever read our output has gone; there is nobody to tell.
        sys.stderr.close()
        sys.exit(1)
    except OSError as fault:
        from lasescatter.report.typography import plain

        typer.echo(f"{plain(str(fault.filename or 'file'))}: {plain(fault.strerror or str(fault))}", err=True)
        sys.exit(1)


def _utf8_streams() -> None:
    """Names may hold any character: a terminal that cannot show one gets a replacement, never a crash."""
    for stream in (sys.stdout, sys.stderr):
        reconfigure = getattr(stream, "reconfigure", None)
        if reconfigure is not None:
            reconfigure(errors="replace")
