"""What is wrong with an input: one `Problem` per fault, all of a file's faults in one `SiteError`."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Problem:
    """One fault of the input, with the place, the rule and the mend."""

    key: str
    """Path in the contract's spelling, for example `beam["alignment beam"].power`; "" for the whole file."""
    wrong: str
    """What is wrong, naming the value."""
    mend: str
    """What would be right."""
    line: int | None = None
    """Line of the file, where it can be told."""
    file: str | None = None
    """The file, where it is another than the one that the error names."""


class SiteError(Exception):
    """The input cannot be used. Carries every fault that was found."""

    def __init__(self, problems: tuple[Problem, ...] | list[Problem], file: str = "site file") -> None:
        self.problems = tuple(sorted(problems, key=lambda p: (p.file or "", p.line is None, p.line or 0, p.key)))
        self.file = file
        super().__init__(str(self))

    def __str__(self) -> str:
        lines = []
        for problem in self.problems:
            file = problem.file or self.file
            place = file if problem.line is None else f"{file}, line {problem.line}"
            key = f" {problem.key}:" if problem.key else ""
            lines.append(f"{place}:{key} " + f"{problem.wrong.rstrip('.')}. {problem.mend.rstrip('.')}.")
        return "\n".join(lines)
