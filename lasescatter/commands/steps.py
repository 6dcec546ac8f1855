"""The steps of a long job on a terminal, each with the time it takes."""

from __future__ import annotations

from types import TracebackType
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from rich.console import Console
    from rich.progress import Progress, TaskID


class Steps:
    """Shows each step while it runs and leaves its name and time; silent where nobody watches."""

    def __init__(self, console: Console, quiet: bool = False) -> None:
        self._console = console
        self._shown = console.is_terminal and not quiet
        self._progress: Progress | None = None
        self._running: TaskID | None = None

    def __enter__(self) -> Steps:
        if self._shown:
            from rich.progress import Progress, SpinnerColumn, TextColumn

            self._progress = Progress(
                SpinnerColumn(finished_text=" "),
                TextColumn("{task.elapsed:6.1f} s"),
                TextColumn("{task.description}", markup=False),
                console=self._console,
            )
            self._progress.start()
        return self

    def begin(self, step: str) -> None:
        """The step before it is over, and this one begins."""
        if self._progress is not None:
            from lasescatter.report.typography import abridged, plain

            self._end()
            self._running = self._progress.add_task(abridged(plain(step), 60), total=1)

    def _end(self) -> None:
        if self._progress is not None and self._running is not None:
            self._progress.update(self._running, completed=1)
            self._progress.stop_task(self._running)
            self._running = None

    def __exit__(
        self, kind: type[BaseException] | None, fault: BaseException | None, trace: TracebackType | None
    ) -> None:
        if self._progress is not None:
            if kind is None:
                self._end()
            self._progress.stop()
