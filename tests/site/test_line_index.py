"""The index from key path to line, against documents whose lines are known."""

from __future__ import annotations

import tomllib

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from site_cases import GOOD

from lasescatter.site.line_index import DEEPEST, MOST_VALUES, index_lines

DOCUMENT = '''\
# remark with [brackets] and = signs
title = "one"
nested.key . deep = 1
"quoted \\u00e9.key" = """
three
lines \\""" still
"""
'literal' = \'\'\'
two [x]
lines\'\'\'
list = [
  [1, 2],   # remark ] here
  [
    3, "]" ],
]
inline = { x = 1, y = { z = [1,
  2] } }

[table]  # remark
key = 2026-12-01 07:32:00

[[beam]]
name = "first"
[beam.stop]
face = [1, 2]
[[beam.line]]
n = 1
[[beam.line]]
n = 2
[[beam]]
name = "second"
  [[beam.line]]
  n = 3
'''

EXPECTED = {
    ("title",): 2,
    ("nested", "key", "deep"): 3,
    ("quoted é.key",): 4,
    ("literal",): 8,
    ("list",): 11,
    ("list", 0): 12,
    ("list", 0, 1): 12,
    ("list", 1): 13,
    ("list", 1, 1): 14,
    ("inline", "x"): 16,
    ("inline", "y", "z", 1): 17,
    ("table",): 19,
    ("table", "key"): 20,
    ("beam",): 22,
    ("beam", 0): 22,
    ("beam", 0, "name"): 23,
    ("beam", 0, "stop"): 24,
    ("beam", 0, "stop", "face", 1): 25,
    ("beam", 0, "line", 0, "n"): 27,
    ("beam", 0, "line", 1): 28,
    ("beam", 0, "line", 1, "n"): 29,
    ("beam", 1): 30,
    ("beam", 1, "line", 0): 32,
    ("beam", 1, "line", 0, "n"): 33,
}


def paths_of(value, path=()):
    """Every path of a parsed document."""
    entries = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    for step, entry in entries:
        yield (*path, step)
        yield from paths_of(entry, (*path, step))


def test_lines_of_a_document_read_by_hand():
    tomllib.loads(DOCUMENT)
    index = index_lines(DOCUMENT)
    assert index.stopped is None
    assert {path: index.spots[path].line for path in EXPECTED} == EXPECTED


def test_a_missing_key_has_the_line_of_its_table():
    index = index_lines(DOCUMENT)
    assert index.line(("beam", 1, "power")) == 30
    assert index.line(("beam", 0, "stop", "finish")) == 24
    assert index.line(("power",)) is None


def test_values_as_written():
    index = index_lines(DOCUMENT)
    assert index.written(("title",)) == '"one"'
    assert index.written(("beam", 0, "stop", "face")) == "[1, 2]"
    assert index.written(("list",)) is None


@pytest.mark.parametrize("name", list(GOOD))
def test_every_path_of_the_good_files_is_known(name):
    index = index_lines(GOOD[name])
    lines = GOOD[name].split("\n")
    for path in paths_of(tomllib.loads(GOOD[name])):
        spot = index.spots[path]
        last_key = [step for step in path if isinstance(step, str)][-1]
        assert last_key in lines[spot.line - 1]


@pytest.mark.parametrize(
    ("text", "line"),
    [
        ("a = 1\nb = { x = 1,\n y = 2 }\n", 2),
        ("b = {\n x = 1 }\n", 1),
        ("b = { x = 1 # remark\n}\n", 1),
        ("a = 1\nc = [1,\n { x = 1,\n y = 1 }]\n", 3),
    ],
)
def test_an_inline_table_broken_over_lines_is_found(text, line):
    assert index_lines(text).broken_inline == line


def test_a_list_inside_an_inline_table_may_break():
    text = "b = { x = [1,\n 2], y = '''two\nlines''' }\n"
    tomllib.loads(text)
    assert index_lines(text).broken_inline is None and index_lines(text).stopped is None


@pytest.mark.parametrize(
    "text",
    [
        f"a = {'[' * (DEEPEST + 5)}{']' * (DEEPEST + 5)}",
        ".".join("a" * (DEEPEST + 5)) + " = 1",
        f"[{'.'.join('a' * (DEEPEST + 5))}]\n",
        f"a = {'[' * 100_000}",
        f"a = {'{a = ' * 10_000}",
    ],
)
def test_depth_is_bounded_without_recursion_error(text):
    assert index_lines(text).too_deep == 1


def test_the_count_of_values_is_bounded():
    index = index_lines("a = [" + "1," * (MOST_VALUES + 10) + "]")
    assert index.too_many == 1 and len(index.spots) <= MOST_VALUES


@pytest.mark.parametrize(
    "text", ["a", "a =", "a = 'x", 'a = """x', "[a", "[[a]", "a = [1", "= 1", "a..b = 1", '"\\q" = 1']
)
def test_what_is_not_toml_stops_at_its_statement(text):
    index = index_lines(f"ok = 1\n{text}")
    assert index.stopped == 2 and index.spots[("ok",)].line == 1


BARE = st.text(alphabet="abcxyz019_-", min_size=1, max_size=4)
KEYS = st.one_of(BARE, st.text(alphabet="ab .\"'é#[]=\\", min_size=1, max_size=4))
SCALARS = st.one_of(
    st.integers(-999, 999),
    st.booleans(),
    st.floats(allow_nan=False, allow_infinity=False, width=16),
    st.text(alphabet="ab #\"'[]{}=,\\é", max_size=6),
)
VALUES = st.recursive(SCALARS, lambda inner: st.lists(inner, max_size=3), max_leaves=6)
TABLES = st.dictionaries(KEYS, VALUES, max_size=4)


class Writer:
    """Writes TOML line by line and remembers on which line each path begins."""

    def __init__(self, draw):
        self.draw, self.lines, self.known = draw, [], {}

    def key(self, text):
        bare = text and all(sign in "abcdefghijklmnopqrstuvwxyz0123456789_-" for sign in text)
        if bare and self.draw(st.booleans()):
            return text
        if "'" not in text and self.draw(st.booleans()):
            return f"'{text}'"
        return '"' + text.replace("\\", "\\\\").replace('"', '\\"') + '"'

    def here(self, path):
        self.known.setdefault(path, len(self.lines) + 1)

    def noise(self):
        self.lines.extend(self.draw(st.lists(st.sampled_from(["", "  ", "# [x] = 'y'"]), max_size=2)))

    def value(self, path, value, before):
        """Text that still belongs to the current line; earlier lines are written out."""
        self.here(path)
        if isinstance(value, list):
            before += "["
            for number, entry in enumerate(value):
                if self.draw(st.booleans()):
                    self.lines.append(before + " # ]")
                    before = "  "
                before = self.value((*path, number), entry, before) + ","
            return before + "]"
        if isinstance(value, bool):
            return before + str(value).lower()
        if isinstance(value, str):
            return before + '"' + value.replace("\\", "\\\\").replace('"', '\\"') + '"'
        return before + repr(value)

    def pairs(self, path, table):
        for key, value in table.items():
            self.noise()
            line = self.value((*path, key), value, f"{self.key(key)} = ")
            self.lines.append(line + self.draw(st.sampled_from(["", "  # '''"])))


@st.composite
def documents(draw):
    writer = Writer(draw)
    writer.pairs((), {f"top{key}": value for key, value in draw(TABLES).items()})
    for number, entry in enumerate(draw(st.lists(st.tuples(TABLES, TABLES), max_size=3))):
        writer.noise()
        writer.here(("list",))
        writer.here(("list", number))
        writer.lines.append("[[list]]")
        writer.pairs(("list", number), entry[0])
        writer.here(("list", number, "in ner"))
        writer.lines.append('[ list . "in ner" ]')
        writer.pairs(("list", number, "in ner"), entry[1])
    return "\n".join(writer.lines), writer.known


@settings(max_examples=200, deadline=None)
@given(documents())
def test_lines_of_any_document(written):
    text, known = written
    try:
        parsed = tomllib.loads(text)
    except tomllib.TOMLDecodeError:
        # "in ner" can be a key of the entry too; then the text is not TOML and there is nothing to compare.
        return
    index = index_lines(text)
    assert index.stopped is None
    assert set(paths_of(parsed)) == set(index.spots)
    assert {path: spot.line for path, spot in index.spots.items()} == known


@settings(deadline=None)
@given(st.text(alphabet="ab=[]{}\"'\\#,.\n 1", max_size=80))
def test_any_text_is_scanned_without_an_error(text):
    index = index_lines(text)
    assert all(spot.line >= 1 for spot in index.spots.values())
