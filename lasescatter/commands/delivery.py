"""Output files, put in place all together or not at all."""

from __future__ import annotations

import errno
import os
import shutil
import tempfile
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager, suppress
from pathlib import Path

from lasescatter.problems import Problem, SiteError
from lasescatter.report.typography import plain

# The place is right and the system fails: no other call by the user would have been better.
_SYSTEM_FAILS = {errno.ENOSPC, errno.EDQUOT, errno.EFBIG, errno.EIO, errno.EMFILE, errno.ENFILE, errno.ENOMEM}
_UNCHANGED = "nothing was written, and files of an earlier run are as they were"


def reason(fault: OSError) -> str:
    """What the system says, in lower case: "permission denied"."""
    said = fault.strerror or str(fault)
    return said[:1].lower() + said[1:]


def is_the_callers(fault: OSError) -> bool:
    """Whether another place would do: a folder that may not be written to, not a full disk."""
    return fault.errno not in _SYSTEM_FAILS


class Delivery:
    """Files on their way into a folder: made in a workshop beside their place, moved when all are there."""

    def __init__(self, out: Path, workshop: Path) -> None:
        self.out, self._workshop = out, workshop
        self._made = workshop / "made"
        self._earlier = workshop / "earlier"
        self._made.mkdir()
        self._earlier.mkdir()

    def refuse_taken(self, names: Sequence[str], source: Path | None = None) -> None:
        """Refuse names at which a folder, or the site file `source` itself, stands.

        Raises
        ------
        SiteError
            Naming the first of them.
        """
        for name in names:
            path = self.out / name
            if path.is_dir() and not path.is_symlink():
                raise _unusable(f"{plain(str(path))} is a folder, and a file of that name is due",
                                "Move it away, or give another folder")  # fmt: skip
            if source is not None and path.exists() and path.samefile(source):
                raise _unusable(f"{plain(str(path))} is the site file itself, and would be replaced",
                                "Give another folder, or a site file whose name ends in .toml")  # fmt: skip

    def make(self, name: str, write: Callable[[Path], object]) -> None:
        """Make one file; `write` is given the path to write to."""
        self.make_in_folder(self.out / name, lambda folder: write(folder / name))

    def make_in_folder(self, named: Path, write: Callable[[Path], object]) -> None:
        """Make files; `write` is given the folder, and a failure is told of `named`."""
        try:
            write(self._made)
        except OSError as fault:
            raise OSError(fault.errno, f"{reason(fault)}; {_UNCHANGED}", str(named)) from fault

    def put_in_place(self, names: Sequence[str]) -> tuple[list[Path], set[Path]]:
        """Move the files to their places. Returns them in order, and those that replaced another one.

        Raises
        ------
        SiteError
            Where one cannot be moved; those moved before it are taken back.
        """
        self.refuse_taken(names)
        moved: list[str] = []
        replaced: set[Path] = set()
        try:
            for name in names:
                path = self.out / name
                if os.path.lexists(path):
                    _keep(path, self._earlier / name)
                    replaced.add(path)
                os.replace(self._made / name, path)
                moved.append(name)
        except OSError as fault:
            self._take_back(moved)
            path = self.out / name
            if not is_the_callers(fault):
                raise OSError(fault.errno, f"{reason(fault)}; {_UNCHANGED}", str(path)) from fault
            raise _unusable(f"{plain(str(path))} cannot be written: {reason(fault)}",
                            f"Close it where it is open, or give another folder; {_UNCHANGED}") from fault  # fmt: skip
        return [self.out / name for name in names], replaced

    def _take_back(self, moved: Sequence[str]) -> None:
        for name in moved:
            with suppress(OSError):
                if os.path.lexists(self._earlier / name):
                    os.replace(self._earlier / name, self.out / name)
                else:
                    (self.out / name).unlink()


@contextmanager
def delivery_to(out: Path) -> Iterator[Delivery]:
    """Open a folder for output; what was made on the way and is not needed is removed at the end.

    Raises
    ------
    SiteError
        Where the folder cannot be made or written to.
    """
    made_folders = _make_folder(out)
    delivered = False
    try:
        with _naming(out, "cannot be written to"):
            workshop = Path(tempfile.mkdtemp(prefix=".lasescatter-", dir=out))
        try:
            with _naming(out, "cannot be written to"):
                delivery = Delivery(out, workshop)
            yield delivery
            delivered = True
        finally:
            shutil.rmtree(workshop, ignore_errors=True)
    finally:
        if not delivered:
            _remove(made_folders)


def _make_folder(out: Path) -> list[Path]:
    """Make a folder and those it stands in. Returns the ones that were missing, the outermost first."""
    with _naming(out, "cannot be made"):
        if out.exists() and not out.is_dir():
            raise _unusable(f"{plain(str(out))} is a file", "Give a folder")
        missing = [folder for folder in (out, *out.parents) if not os.path.lexists(folder)][::-1]
        try:
            out.mkdir(parents=True, exist_ok=True)
        except OSError:
            _remove(missing)
            raise
    return missing


def _remove(folders: Sequence[Path]) -> None:
    """Remove folders that are empty, the innermost first."""
    for folder in reversed(folders):
        with suppress(OSError):
            folder.rmdir()


def _keep(path: Path, kept: Path) -> None:
    """A second name for a file that is about to be replaced; a copy where the file system has no links."""
    try:
        os.link(path, kept, follow_symlinks=False)
    except (OSError, NotImplementedError):
        shutil.copy2(path, kept, follow_symlinks=False)


@contextmanager
def _naming(out: Path, cannot: str) -> Iterator[None]:
    """Tell a failure of the folder that the user named, never of what is made inside it."""
    try:
        yield
    except OSError as fault:
        if not is_the_callers(fault):
            raise OSError(fault.errno, reason(fault), str(out)) from fault
        raise _unusable(f"the folder {plain(str(out))} {cannot}: {reason(fault)}",
                        "Give a folder that you may write to") from fault  # fmt: skip


def _unusable(wrong: str, mend: str) -> SiteError:
    return SiteError([Problem("--out", wrong, mend)], "command line")
