"""Bad site files: what is told of each, and on which line."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from site_cases import BAD_SITES, GOOD, TABLES, read_text

from lasescatter.problems import SiteError
from lasescatter.scene import Scene
from lasescatter.site.wording import known_fields

# Words of the libraries behind the reader that must not reach the user.
JARGON = re.compile(
    r"pydantic|validat|NoneType|\bdict\b|\btuple\b|\bstr\b|\bfloat\b|\bint\b|\bloc\b|Input should|traceback|Error\b|"
    r"column \d|_type\b",
    re.IGNORECASE,
)


def problems_of(text: str, folder: Path = TABLES):
    with pytest.raises(SiteError) as caught:
        read_text(text, "site.toml", folder)
    return caught.value.problems


@pytest.mark.parametrize("name", list(GOOD))
def test_the_good_files_read(name):
    assert isinstance(read_text(GOOD[name]), Scene)


@pytest.mark.parametrize("case", BAD_SITES, ids=[case.what for case in BAD_SITES])
def test_the_fault_is_told(case):
    found = [problem for problem in problems_of(case.text, case.folder) if problem.key == case.key]
    assert found, [problem.key for problem in problems_of(case.text, case.folder)]
    said = [
        problem
        for problem in found
        if all(words in problem.wrong for words in case.wrong) and all(words in problem.mend for words in case.mend)
    ]
    assert said, [(problem.wrong, problem.mend) for problem in found]


def test_the_line_is_right_in_nearly_all_bad_files():
    """At least 95 % by count, over all bad files; and there are at least forty of them."""
    assert len(BAD_SITES) >= 40
    lines = {
        case.what: {p.line for p in problems_of(case.text, case.folder) if p.key == case.key} for case in BAD_SITES
    }
    right = [case for case in BAD_SITES if case.line in lines[case.what]]
    assert len(right) >= 0.95 * len(BAD_SITES), sorted(
        {case.what for case in BAD_SITES} - {case.what for case in right}
    )


def test_one_fault_gives_few_messages():
    """A fault must not drown in its consequences."""
    for case in BAD_SITES:
        assert len(problems_of(case.text, case.folder)) <= 2, case.what


def test_every_key_that_is_read_is_broken_by_some_file():
    keys = {re.sub(r'\["[^"]*"\]|\[\d+\]', "", case.key) for case in BAD_SITES}
    due = {".".join((*table, key)) for table, fields in known_fields().items() for key in fields}
    # The whole of a table is broken by its keys; hazards are alike.
    due -= {"not_judged", "air", "beam.line", "beam.line.pulses", "particles", "particles.load", "limit"}
    due = {key for key in due if not key.startswith(("not_judged", "beam.pulses."))} | {"not_judged.skin"}
    assert due <= keys, sorted(due - keys)


def test_messages_are_plain_sentences():
    for case in BAD_SITES:
        for problem in problems_of(case.text, case.folder):
            told = f"{problem.wrong}. {problem.mend}."
            without_values = re.sub(r'"[^"]*"', "", told)
            assert not JARGON.search(without_values), (case.what, told)
            assert "\n" not in told and not problem.wrong.endswith(".") and not problem.mend.endswith("."), case.what
            assert problem.wrong and problem.mend


def test_all_faults_of_a_file_are_told_at_once():
    text = GOOD["good_continuous"]
    for old, new in (
        ('title = "Invented bay"', 'title = ""'),
        ('"45 %"', "45"),
        ('power = "2 W"', 'power = "2 J"'),
        ("mirror_reflectance = [0.99]", "mirror_reflectance = [0.99, 0.9]"),
        ("facing = [0, -1, 0]", "facing = [0, 1, 0]"),
        ('"1.43 + 1e-6i"', '"1.43 - 1e-6i"'),
        ("to = [8, 2, 3]", "to = [8, 2, 0]"),
        ('reach = "0.25 m"', 'reech = "0.25 m"'),
        ('duration = "10 s"', 'duration = "0.1 s"'),
        ('aperture = "7 mm"', 'aperture = "7 kg"'),
        ('["400 nm", "700 nm"]', '["700 nm", "400 nm"]'),
    ):
        assert text.count(old) == 1
        text = text.replace(old, new)
    told = [(problem.line, problem.key) for problem in problems_of(text)]
    assert told == [
        (3, "title"),
        (14, "air.relative_humidity"),
        (19, 'beam["main beam"].power'),
        (29, 'beam["main beam"].mirror_reflectance'),
        (32, 'beam["main beam"].beam_stop.facing'),
        (37, 'particles["test haze"].index'),
        (50, 'particles["test haze"].region.to'),
        (55, 'observer["console operator"].reech'),
        (56, 'observer["console operator"].duration'),
        (67, 'limit["eye, green, ten seconds"].wavelengths'),
        (69, 'limit["eye, green, ten seconds"].aperture'),
    ]


def test_the_whole_message_reads_well():
    text = GOOD["good_continuous"].replace('power = "2 W"', "power = 2")
    with pytest.raises(SiteError) as caught:
        read_text(text, "bay.toml")
    assert str(caught.value) == (
        'bay.toml, line 19: beam["main beam"].power: 2 has no unit, and a power is due. '
        'Write number and unit in quotes, for example "2 W"; what fits: W, mW, uW, nW, kW or MW.'
    )


def test_long_names_and_keys_are_cut_short_in_messages():
    name, key = "x" * 10_000, "k" * 10_000
    text = GOOD["good_continuous"].replace('name = "main beam"', f'name = "{name}"\n{key} = 1')
    (problem,) = problems_of(text)
    assert problem.key.startswith('beam["xxx') and len(str(problem.key)) < 150
