"""The command line as a user meets it: files, streams, exit codes, bad calls."""

from __future__ import annotations

import json
import subprocess
import sys

import pytest
from commands.calls import ROOT, SAMPLE, run


@pytest.fixture(scope="module")
def assessed(tmp_path_factory):
    """The sample assessed twice into different folders."""
    folder = tmp_path_factory.mktemp("assessed")
    return folder, [run("assess", SAMPLE, "--out", folder / name) for name in ("one", "two")]


def test_assess_writes_every_file_and_says_which(assessed):
    folder, (first, _) = assessed
    assert first.returncode == 0, first.stderr
    assert first.stderr == ""
    names = {path.name for path in (folder / "one").iterdir()}
    assert {"hazed_test_bay.pdf", "hazed_test_bay.json", "hazed_test_bay.csv"} <= names
    assert any(name.endswith(".svg") for name in names) and any(name.endswith(".png") for name in names)
    assert not [name for name in names if name.startswith(".")]
    for name in names:
        assert name in first.stdout.replace("\n", "")


def test_all_three_verdicts_occur_in_the_sample(assessed):
    folder, _ = assessed
    record = json.loads((folder / "one" / "hazed_test_bay.json").read_text(encoding="utf-8"))
    assert {observer["verdict"] for observer in record["observers"]} == {
        "below limit", "above limit", "not established",
    }  # fmt: skip
    assert record["verdict"] == "above limit"


def test_same_file_same_bytes(assessed):
    """With a fixed time stamp every file comes out the same to the byte."""
    folder, _ = assessed
    for path in sorted((folder / "one").iterdir()):
        assert path.read_bytes() == (folder / "two" / path.name).read_bytes(), path.name


def test_terminal_stays_within_80_columns_and_has_the_cautions(assessed):
    _, (first, _) = assessed
    report = first.stdout.split("\nwrote ")[0]
    assert max(map(len, report.splitlines())) <= 80
    assert "laser safety officer" in report and "SAFETY.md" in report
    assert "\x1b" not in report


def test_second_run_mentions_what_it_replaced(tmp_path):
    assert run("assess", SAMPLE, "--out", tmp_path).returncode == 0
    again = run("assess", SAMPLE, "--out", tmp_path)
    assert "(replaced)" in again.stdout
    quiet = run("assess", SAMPLE, "--out", tmp_path, "--quiet")
    written = list(tmp_path.iterdir())
    assert quiet.stdout == "" and quiet.stderr == f"replaced {len(written)} files of an earlier run in {tmp_path}\n"
    for path in written[1:]:
        path.unlink()
    as_json = run("assess", SAMPLE, "--out", tmp_path, "--json")
    assert json.loads(as_json.stdout) and as_json.stderr == f"replaced 1 file of an earlier run in {tmp_path}\n"


def test_verdict_exit(tmp_path):
    assert run("assess", SAMPLE, "--out", tmp_path, "--verdict-exit", "--quiet").returncode == 3
    text = SAMPLE.read_text(encoding="utf-8")
    only_open = text.replace("position = [9.1, 2.86, 1.2]", "position = [2, 2, 1.2]")
    assert only_open != text
    site = tmp_path / "open.toml"
    site.write_text(only_open, encoding="utf-8")
    assert run("assess", site, "--out", tmp_path, "--verdict-exit", "--quiet").returncode == 4


def test_standard_input_and_json(tmp_path):
    done = run("assess", "-", "--out", tmp_path, "--json", stdin=SAMPLE.read_text(encoding="utf-8"))
    assert done.returncode == 0, done.stderr
    assert json.loads(done.stdout)["format"] == "lasescatter record 1"
    assert (tmp_path / "site.pdf").stat().st_size > 10_000


def test_letter_size(tmp_path):
    done = run("assess", SAMPLE, "--out", tmp_path, "--page-size", "Letter", "--quiet")
    assert done.returncode == 0
    from pypdf import PdfReader

    box = PdfReader(tmp_path / "hazed_test_bay.pdf").pages[0].mediabox
    assert (float(box.width), float(box.height)) == (612.0, 792.0)


def test_bad_input_is_one_message_status_2_and_nothing_written(tmp_path):
    site = tmp_path / "bad.toml"
    site.write_text(SAMPLE.read_text(encoding="utf-8").replace('power = "2 W"', 'power = "2 kg"'), encoding="utf-8")
    done = run("assess", site, "--out", tmp_path / "out")
    assert done.returncode == 2
    assert "Traceback" not in done.stderr
    assert 'beam["alignment beam"].power' in done.stderr and "bad.toml, line" in done.stderr
    assert not (tmp_path / "out").exists()


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["assess", "absent.toml"], "absent.toml"),
        (["assess"], "Missing argument"),
        (["assess", SAMPLE, "--page-size", "A5"], "Use one of: A4, Letter"),
        (["assess", SAMPLE, "--out", SAMPLE], "is a file"),
        (["new", "x.toml", "--starter", "space"], "indoor, outdoor, pulsed"),
        (["new", "absent/x.toml"], "folder that exists"),
        (["banana"], "No such command"),
        (["assess", SAMPLE, "--banana"], "No such option"),
        (["check", "."], "."),
        (["check", ""], "FILE: the name is empty"),
        (["assess", ""], "FILE: the name is empty"),
        (["assess", SAMPLE, "--out", ""], "--out: the name is empty"),
        (["new", ""], "FILE: the name is empty"),
        (["new", "."], ". is a folder"),
    ],
)
def test_bad_calls_say_what_is_right(arguments, words, tmp_path):
    done = run(*arguments, cwd=tmp_path)
    assert done.returncode == 2, done.stderr
    assert "Traceback" not in done.stderr
    assert words in done.stderr
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("starter", ["indoor", "outdoor", "pulsed"])
def test_every_starter_assesses_as_it_stands(starter, tmp_path):
    site = tmp_path / f"{starter}.toml"
    made = run("new", site, "--starter", starter)
    assert made.returncode == 0 and str(site) in made.stdout.replace("\n", "")
    done = run("assess", site, "--out", tmp_path)
    assert done.returncode == 0, done.stderr
    assert (tmp_path / f"{starter}.pdf").exists()
    again = run("new", site)
    assert again.returncode == 2 and "exists already" in again.stderr


def test_check_counts_and_never_computes(tmp_path):
    done = run("check", SAMPLE)
    assert done.returncode == 0
    assert "1 beam" in done.stdout and "3 observers" in done.stdout
    assert json.loads(run("check", SAMPLE, "--json").stdout)["valid"] is True


def test_schema_is_json():
    assert json.loads(run("schema").stdout)["$schema"].startswith("https://json-schema.org/")


def test_version_and_help():
    import lasescatter

    assert run("--version").stdout.strip() == f"lasescatter {lasescatter.__version__}"
    text = run("--help").stdout
    assert all(word in text for word in ("assess", "check", "new", "schema"))


def test_help_loads_no_heavy_library():
    """Heavy libraries load when used: the whole of help imports none of them."""
    code = (
        "import sys; sys.argv=['lasescatter','--help']\n"
        "from lasescatter.commands.app import main\n"
        "try:\n    main()\nexcept SystemExit:\n    pass\n"
        "print(sorted({m.split('.')[0] for m in sys.modules} & "
        "{'numpy','scipy','matplotlib','reportlab','pint','pydantic','pypdf'}))"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, encoding="utf-8", cwd=ROOT, timeout=60, check=True
    )
    assert done.stdout.strip().splitlines()[-1] == "[]"


@pytest.mark.parametrize("stamp", ["yesterday", "1e99", "-1e30"])
def test_a_broken_time_stamp_is_named(stamp, tmp_path):
    done = run("assess", SAMPLE, "--out", tmp_path, SOURCE_DATE_EPOCH=stamp)
    assert done.returncode == 2 and "SOURCE_DATE_EPOCH" in done.stderr
