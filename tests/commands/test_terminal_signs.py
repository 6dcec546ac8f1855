"""What reaches a terminal: characters that steer it are shown, not obeyed; steps with their times."""

from __future__ import annotations

import re
import subprocess
import sys
from io import StringIO

from commands.calls import SAMPLE, run
from rich.console import Console

from lasescatter.commands.steps import Steps

TITLE = 'title = "Hazed test bay, alignment at reduced power"'


def test_check_shows_what_would_steer_the_terminal(tmp_path):
    text = SAMPLE.read_text(encoding="utf-8")
    assert text.count(TITLE) == 1
    site = tmp_path / "bay.toml"
    site.write_text(text.replace(TITLE, r'title = "bay \u202Eyab\u001B[31m \u2066x\u0007"'), encoding="utf-8")
    done = run("check", site)
    assert done.returncode == 0
    assert done.stdout.startswith("bay [U+202E]yab[U+001B][31m [U+2066]x[U+0007]: the file can be read")
    long = run("check", "-", stdin=text.replace(TITLE, f'title = "{"t" * 5000}"'))
    assert "(5000 characters): the file" in long.stdout and len(long.stdout) < 400


def test_names_of_files_do_not_steer_the_terminal(tmp_path):
    name = "a\x1b[31m\u202eb.toml"
    (tmp_path / name).write_text("", encoding="utf-8")
    for done in (run("check", name, cwd=tmp_path), run("new", name, cwd=tmp_path)):
        assert done.returncode == 2 and "a[U+001B][31m[U+202E]b.toml" in done.stderr
        assert "\x1b" not in done.stderr and "\u202e" not in done.stderr


def test_check_loads_neither_the_report_nor_the_computation():
    code = (
        "import sys; sys.argv=['lasescatter','check',sys.argv[1]]\n"
        "from lasescatter.commands.app import main\n"
        "try:\n    main()\nexcept SystemExit:\n    pass\n"
        "print(sorted(m for m in sys.modules if m in {'matplotlib','reportlab','pypdf'}"
        " or m.startswith(('lasescatter.assessment','lasescatter.optics'))))"
    )
    done = subprocess.run(
        [sys.executable, "-c", code, str(SAMPLE)], capture_output=True, encoding="utf-8", timeout=60, check=True,
        cwd=SAMPLE.parents[1],
    )  # fmt: skip
    assert done.stdout.strip().splitlines()[-1] == "[]"


def watched(terminal: bool, quiet: bool = False) -> str:
    shown = StringIO()
    with Steps(Console(file=shown, force_terminal=terminal, no_color=True, width=80), quiet) as steps:
        for name in ("particles at 532 nm", 'light of "[bold]\x1b[31m"', "report"):
            steps.begin(name)
    return shown.getvalue()


def test_steps_are_named_with_their_times_on_a_terminal():
    last = watched(terminal=True).rpartition("particles at 532 nm")
    lines = re.sub(r"\x1b\[[0-9;?]*[A-Za-z]", "", last[0].splitlines()[-1] + last[1] + last[2]).splitlines()
    shown = [line.strip() for line in lines if line.strip()]
    for line, name in zip(shown, ("particles at 532 nm", 'light of "[bold][U+001B][31m"', "report"), strict=True):
        assert re.fullmatch(r"\d+\.\d s " + re.escape(name), line), line


def test_steps_are_silent_elsewhere():
    assert watched(terminal=False) == "" and watched(terminal=True, quiet=True) == ""
