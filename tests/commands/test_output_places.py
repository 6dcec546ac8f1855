"""Places that cannot be written to, disks that fill up, files in the way: what is told and what is left."""

from __future__ import annotations

import errno
import os
import subprocess
import sys

import pytest
from commands.calls import ROOT, SAMPLE, run

from lasescatter.commands.delivery import delivery_to
from lasescatter.problems import SiteError

STEM = "hazed_test_bay"
LONG = "n" * 300


def tree(folder):
    """Every path below a folder, with the bytes of files."""
    return {path.relative_to(folder): path.read_bytes() if path.is_file() else None for path in folder.rglob("*")}


def told_once(done, status):
    assert done.returncode == status, done.stderr
    assert done.stdout == "" and done.stderr.count("\n") == 1, done.stderr
    assert ".lasescatter-" not in done.stderr and "Traceback" not in done.stderr
    return done.stderr


@pytest.mark.parametrize(
    ("out", "words"),
    [
        ("file", "file is a file"),
        ("file/deeper", "the folder file/deeper cannot be made: not a directory"),
        ("/proc", "the folder /proc cannot be written to"),
        ("/proc/x", "the folder /proc/x cannot be made"),
        (LONG, f"the folder {LONG} cannot be made"),
        (f"new/{LONG}", f"the folder new/{LONG} cannot be made"),
        ("taken", f"taken/{STEM}.csv is a folder"),
        ("taken_later", f"taken_later/{STEM}_plan.svg is a folder"),
    ],
)
def test_a_place_that_cannot_be_written_to(out, words, tmp_path):
    """Status 2, one message that names the place, and the disk as it was."""
    (tmp_path / "file").write_text("kept", encoding="utf-8")
    (tmp_path / "taken" / f"{STEM}.csv").mkdir(parents=True)
    (tmp_path / "taken_later" / f"{STEM}_plan.svg").mkdir(parents=True)
    (tmp_path / "taken_later" / f"{STEM}.pdf").write_text("kept too", encoding="utf-8")
    before = tree(tmp_path)
    told = told_once(run("assess", SAMPLE, "--out", out, cwd=tmp_path), 2)
    assert told.startswith(f"command line: --out: {words}") and "ive " in told.rpartition(". ")[2]
    assert tree(tmp_path) == before


@pytest.mark.parametrize(
    ("file", "words"),
    [
        ("file", "file exists already"),
        ("file/x.toml", "cannot be written in the folder file: not a directory"),
        ("absent/x.toml", "cannot be written in the folder absent: no such file"),
        ("/proc/x.toml", "cannot be written in the folder /proc"),
        (LONG, "cannot be written in the folder ."),
    ],
)
def test_a_starter_that_cannot_be_written(file, words, tmp_path):
    (tmp_path / "file").write_text("kept", encoding="utf-8")
    before = tree(tmp_path)
    told = told_once(run("new", file, cwd=tmp_path), 2)
    assert words in told and "Give a" in told
    assert tree(tmp_path) == before


def test_the_site_file_itself_is_not_replaced(tmp_path):
    site = tmp_path / "bay.json"
    site.write_bytes(SAMPLE.read_bytes())
    assert "is the site file itself" in told_once(run("assess", site, "--out", tmp_path), 2)
    assert site.read_bytes() == SAMPLE.read_bytes() and len(list(tmp_path.iterdir())) == 1


# The operating system refuses to let any file grow beyond this: as on a full disk, writing fails half-way.
CONFINED = """
import resource, sys
resource.setrlimit(resource.RLIMIT_FSIZE, ({size}, {size}))
sys.argv = ["lasescatter", *{arguments!r}]
from lasescatter.commands.app import main
main()
"""


def run_confined(size, *arguments, cwd):
    code = CONFINED.format(size=size, arguments=[str(argument) for argument in arguments])
    # Without this the interpreter would try to write its own caches under the same bound.
    environment = {**os.environ, "PYTHONPATH": str(ROOT), "PYTHONDONTWRITEBYTECODE": "1", "NO_COLOR": "1"}
    return subprocess.run(
        [sys.executable, "-c", code], capture_output=True, cwd=cwd, env=environment, timeout=120, encoding="utf-8",
        check=False,
    )  # fmt: skip


def test_a_disk_that_fills_up_leaves_the_earlier_files_whole(tmp_path):
    assert run("assess", SAMPLE, "--out", "out", "--quiet", cwd=tmp_path).returncode == 0
    before = tree(tmp_path)
    told = told_once(run_confined(10_000, "assess", SAMPLE, "--out", "out", cwd=tmp_path), 1)
    assert told.startswith(f"out/{STEM}.pdf: ") and "files of an earlier run are as they were" in told
    assert tree(tmp_path) == before


def test_a_disk_that_fills_up_leaves_no_new_folder(tmp_path):
    told = told_once(run_confined(10_000, "assess", SAMPLE, "--out", "deep/out", cwd=tmp_path), 1)
    assert told.startswith(f"deep/out/{STEM}.pdf: ")
    assert tree(tmp_path) == {}


def test_a_starter_is_written_whole_or_not_at_all(tmp_path):
    told = told_once(run_confined(1000, "new", "site.toml", cwd=tmp_path), 1)
    assert told.startswith("site.toml: ") and "nothing was written" in told
    assert tree(tmp_path) == {}


def test_files_moved_before_a_failure_are_taken_back(tmp_path, monkeypatch):
    """A file that is open elsewhere cannot be replaced on some systems: no mixture of two runs is left."""
    (tmp_path / "first").write_text("old", encoding="utf-8")
    (tmp_path / "third").write_text("old", encoding="utf-8")
    before = tree(tmp_path)
    really_replace = os.replace

    def replace(source, target):
        if os.fspath(target) == str(tmp_path / "third"):
            raise PermissionError(errno.EACCES, "Permission denied", str(source))
        really_replace(source, target)

    monkeypatch.setattr(os, "replace", replace)
    names = ["first", "second", "third"]
    with pytest.raises(SiteError, match="third cannot be written: permission denied"), delivery_to(tmp_path) as made:
        for name in names:
            made.make(name, lambda path: path.write_text("new", encoding="utf-8"))
        made.put_in_place(names)
    assert tree(tmp_path) == before
    monkeypatch.undo()
    with delivery_to(tmp_path) as made:
        for name in names:
            made.make(name, lambda path: path.write_text("new", encoding="utf-8"))
        written, replaced = made.put_in_place(names)
    assert written == [tmp_path / name for name in names]
    assert replaced == {tmp_path / "first", tmp_path / "third"}
    assert set(tree(tmp_path).values()) == {b"new"}
