"""`assess`: the main job, and its files put in place all together."""

from __future__ import annotations

import os
from datetime import UTC, datetime
from pathlib import Path

import typer

from lasescatter.assessment.outcome import Assessment
from lasescatter.commands.delivery import Delivery, delivery_to
from lasescatter.commands.sources import STANDARD_INPUT, site_from
from lasescatter.commands.steps import Steps
from lasescatter.limits.verdict import ABOVE, NOT_ESTABLISHED
from lasescatter.problems import Problem, SiteError
from lasescatter.report.own_kinds import own_kinds
from lasescatter.report.size_movement import size_warnings
from lasescatter.report.text_page import TextPage
from lasescatter.report.typography import plain

PAGE_SIZES = ("A4", "Letter")
EXIT_ABOVE, EXIT_NOT_ESTABLISHED = 3, 4


def assess_site(
    file: Path, out: Path, page_size: str, verdict_exit: bool, rules: Path | None, as_json: bool, quiet: bool
) -> int:
    """Assess a site file and write its PDF, record, table and figures. Returns the exit status."""
    from rich.console import Console

    from lasescatter.assessment.assess import assess, with_digest
    from lasescatter.assessment.record import record, record_text

    if page_size not in PAGE_SIZES:
        problem = Problem("--page-size", f'"{page_size}" is no page size', f"Use one of: {', '.join(PAGE_SIZES)}")
        raise SiteError([problem], "command line")
    scene = site_from(file, rules)
    made_at = _time_stamp()
    from_input = file == STANDARD_INPUT
    stem = "site" if from_input else file.stem
    # The folder is opened first: nobody should wait for a result that then has nowhere to go.
    with delivery_to(out) as delivery, Steps(Console(stderr=True, highlight=False), quiet) as steps:
        delivery.refuse_taken(_names(stem), None if from_input else file)
        assessment = assess(scene, made_at, steps.begin)
        body = record(assessment)
        assessment = with_digest(assessment, body["digest"])
        text = record_text(body)
        names = _make_all(assessment, text, delivery, stem, page_size, made_at, steps)
        written, replaced = delivery.put_in_place(names)
    if as_json:
        typer.echo(text, nl=False)
    elif not quiet:
        from lasescatter.report.terminal import print_summary

        print_summary(assessment, Console(highlight=False, markup=False))
        typer.echo("")
        for path in written:
            typer.echo(f"wrote {plain(str(path))}{' (replaced)' if path in replaced else ''}")
    if not quiet:
        hints = TextPage(Console(stderr=True, highlight=False, markup=False))
        for line in (*own_kinds(scene.loads), *size_warnings(assessment)):
            hints.say(line, indent=2)
    if replaced and (as_json or quiet):
        files = "1 file" if len(replaced) == 1 else f"{len(replaced)} files"
        typer.echo(f"replaced {files} of an earlier run in {plain(str(out))}", err=True)
    return _status(assessment) if verdict_exit else 0


def _status(assessment: Assessment) -> int:
    if assessment.verdict == ABOVE:
        return EXIT_ABOVE
    return EXIT_NOT_ESTABLISHED if assessment.verdict == NOT_ESTABLISHED else 0


def _names(stem: str) -> list[str]:
    return [f"{stem}.pdf", f"{stem}.json", f"{stem}.csv"]


def _make_all(
    assessment: Assessment, record_text: str, delivery: Delivery, stem: str, page_size: str, made_at: datetime,
    steps: Steps,
) -> list[str]:  # fmt: skip
    """Make every file. Returns their names."""
    from lasescatter.report.csv_table import write_csv
    from lasescatter.report.document import write_pdf
    from lasescatter.report.figures import write_figures

    pdf, record, table = _names(stem)
    steps.begin("report")
    delivery.make(pdf, lambda path: write_pdf(assessment, path, page_size, made_at))
    steps.begin("record, table and figures")
    delivery.make(record, lambda path: path.write_text(record_text, encoding="utf-8", errors="surrogatepass"))
    delivery.make(table, lambda path: write_csv(assessment, path))
    figures: list[Path] = []
    delivery.make_in_folder(
        delivery.out / f"{stem}_*", lambda folder: figures.extend(write_figures(assessment, folder, stem))
    )
    return [pdf, record, table, *(figure.name for figure in figures)]


def _time_stamp() -> datetime:
    """Now, or the time that SOURCE_DATE_EPOCH fixes so that a run repeats to the byte."""
    fixed = os.environ.get("SOURCE_DATE_EPOCH")
    if fixed is None:
        return datetime.now(UTC)
    try:
        return datetime.fromtimestamp(int(fixed), UTC)
    except (ValueError, OverflowError, OSError) as fault:
        problem = Problem("SOURCE_DATE_EPOCH", f'"{fixed}" is no time in seconds since 1970', "Give a whole number")
        raise SiteError([problem], "environment") from fault
