"""`assess`: the main job, and its files put in place all together."""

from __future__ import annotations

import os
import shutil
import tempfile
from datetime import UTC, datetime
from pathlib import Path

import typer

from lasescatter.assessment.outcome import Assessment
from lasescatter.commands.sources import STANDARD_INPUT, site_from
from lasescatter.limits.verdict import ABOVE, NOT_ESTABLISHED
from lasescatter.problems import Problem, SiteError

PAGE_SIZES = ("A4", "Letter")
EXIT_ABOVE, EXIT_NOT_ESTABLISHED = 3, 4


def assess_site(file: Path, out: Path, page_size: str, verdict_exit: bool, as_json: bool, quiet: bool) -> int:
    """Assess a site file and write its PDF, record, table and figures. Returns the exit status."""
    from rich.console import Console

    from lasescatter.assessment.assess import assess, with_digest
    from lasescatter.assessment.record import record, record_text

    if page_size not in PAGE_SIZES:
        problem = Problem("--page-size", f'"{page_size}" is no page size', f"Use one of: {', '.join(PAGE_SIZES)}")
        raise SiteError([problem], "command line")
    scene = site_from(file)
    made_at = _time_stamp()
    errors = Console(stderr=True, highlight=False)
    if quiet or not errors.is_terminal:
        assessment = assess(scene, made_at)
    else:
        with errors.status("reading") as status:
            assessment = assess(scene, made_at, lambda step: status.update(step))
    body = record(assessment)
    assessment = with_digest(assessment, body["digest"])
    stem = "site" if file == STANDARD_INPUT else file.stem
    text = record_text(body)
    written, replaced = _write_all(assessment, text, out, stem, page_size, made_at)
    if as_json:
        typer.echo(text, nl=False)
    elif not quiet:
        from lasescatter.report.terminal import print_summary

        print_summary(assessment, Console(highlight=False, markup=False))
        typer.echo("")
        for path in written:
            typer.echo(f"wrote {path}{' (replaced)' if path in replaced else ''}")
    elif replaced:
        typer.echo(f"replaced {len(replaced)} files of an earlier run in {out}", err=True)
    return _status(assessment) if verdict_exit else 0


def _status(assessment: Assessment) -> int:
    if assessment.verdict == ABOVE:
        return EXIT_ABOVE
    return EXIT_NOT_ESTABLISHED if assessment.verdict == NOT_ESTABLISHED else 0


def _write_all(
    assessment: Assessment, record_text: str, out: Path, stem: str, page_size: str, made_at: datetime
) -> tuple[list[Path], set[Path]]:
    """Make every file in a folder of its own beside the target, then move them into place."""
    from lasescatter.report.csv_table import write_csv
    from lasescatter.report.document import write_pdf
    from lasescatter.report.figures import write_figures

    _make_folder(out)
    workshop = Path(tempfile.mkdtemp(prefix=".lasescatter-", dir=out))
    try:
        write_pdf(assessment, workshop / f"{stem}.pdf", page_size, made_at)
        (workshop / f"{stem}.json").write_text(record_text, encoding="utf-8", errors="surrogatepass")
        write_csv(assessment, workshop / f"{stem}.csv")
        figures = write_figures(assessment, workshop, stem)
        names = [f"{stem}.pdf", f"{stem}.json", f"{stem}.csv", *(figure.name for figure in figures)]
        written = [out / name for name in names]
        replaced = {path for path in written if path.exists()}
        for name, path in zip(names, written, strict=True):
            os.replace(workshop / name, path)
    finally:
        shutil.rmtree(workshop, ignore_errors=True)
    return written, replaced


def _make_folder(out: Path) -> None:
    try:
        out.mkdir(parents=True, exist_ok=True)
    except (FileExistsError, NotADirectoryError) as fault:
        raise SiteError([Problem("--out", f"{out} is a file", "Give a folder")], "command line") from fault


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
