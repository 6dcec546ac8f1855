"""From bytes to a parsed TOML document, and what to say when that fails."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping
from typing import Any

from lasescatter.problems import Problem, SiteError
from lasescatter.site.faults import quoted
from lasescatter.site.line_index import DEEPEST, MOST_VALUES, LineIndex, index_lines

LARGEST_FILE = 5_000_000
"""[bytes]"""

_AS_UTF8 = "Save the file as UTF-8 (in the editor: save as, encoding UTF-8)"


def decoded(content: bytes, file: str) -> str:
    """The text of a file, a byte-order mark in front dropped.

    Raises
    ------
    SiteError
        For anything but UTF-8.
    """
    if content.startswith((b"\xff\xfe", b"\xfe\xff")) or b"\x00" in content[:4]:
        raise SiteError([Problem("", "the file is saved as UTF-16 or UTF-32", _AS_UTF8, 1)], file)
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = content[: error.start].count(b"\n") + 1
        byte = content[error.start]
        wrong = f"the byte 0x{byte:02x} does not belong in a UTF-8 text; the file was saved in another encoding"
        raise SiteError([Problem("", wrong, _AS_UTF8, line)], file) from None


def parsed(text: str, file: str) -> tuple[dict[str, Any], LineIndex]:
    """The document and the index of its lines.

    Raises
    ------
    SiteError
        With the line, where the text is not TOML or goes beyond what a site needs.
    """
    if len(text) > LARGEST_FILE:
        raise SiteError([Problem("", f"the text has {len(text)} characters",
                                 f"A site file has at most {LARGEST_FILE / 1e6:g} MB")], file)  # fmt: skip
    text = text.removeprefix("\ufeff").replace("\r\n", "\n")
    index = index_lines(text)
    problem = _beyond_bounds(index)
    if problem is None:
        try:
            document = tomllib.loads(text)
            if document:
                return document, index
            wrong = "the file holds nothing but remarks" if text.strip() else "the file is empty"
            problem = Problem("", wrong, "Fill it in; lasescatter new makes a commented file to start from")
        except tomllib.TOMLDecodeError as error:
            problem = _syntax_problem(error, text, index)
        except (ValueError, RecursionError):
            problem = Problem("", "the file holds a number that is far too long to be read",
                              "Look for a number of thousands of digits", index.stopped)  # fmt: skip
    raise SiteError([problem], file)


def _beyond_bounds(index: LineIndex) -> Problem | None:
    if index.broken_inline is not None:
        return Problem("", "a table in braces { } is broken over lines, which TOML does not allow",
                       "Keep it on one line, or write it as a table of its own: a line with its name in brackets, "
                       "such as [beam.beam_stop], and the keys below", index.broken_inline)  # fmt: skip
    if index.too_deep is not None:
        return Problem("", f"tables or lists are nested more than {DEEPEST} deep",
                       "Look for a bracket that is never closed", index.too_deep)  # fmt: skip
    if index.too_many is not None:
        return Problem("", f"the file holds more than {MOST_VALUES} values", "Leave out what the site does not need",
                       index.too_many)  # fmt: skip
    return None


_LONGEST_LINE = 300
"""Characters of a line that is looked at more closely."""

_PLACE = re.compile(r"\(at (?:line (\d+), column (\d+)|end of document)\)\s*$")
_BARE_VALUE = re.compile(
    r"""^\s*(?P<key>[^=#"'\[]+?)\s*=\s*(?P<value>[+-]?[0-9.]+(?:[eE][+-]?[0-9]+)?\s*[A-Za-zµμ%°/][^"'#]*?)\s*(?:#.*)?$"""
)
_BARE_WORD = re.compile(r"""^\s*(?P<key>[^=#"'\[]+?)\s*=\s*(?P<value>[A-Za-z][^"'#=\[{]*?)\s*(?:#.*)?$""")

_KEEP_ONE = "Keep one of the two and delete the other"

# What the parser says, by how it begins: what is wrong, what would be right.
_PARSER_SAYS: Mapping[str, tuple[str, str]] = {
    "Cannot overwrite a value": ("a key on this line is given twice", _KEEP_ONE),
    "Duplicate inline table key": ("a key on this line is given twice", _KEEP_ONE),
    "Cannot declare": ("this table is given twice",
                       "Join the two; a table that may occur several times has double brackets, such as [[beam]]"),
    "Cannot redefine namespace": ("this table is given twice",
                                  "Join the two; a table that may occur several times has double brackets"),
    "Cannot mutate immutable": ("a key is added to a table that was closed before",
                                "Write the table in one place, with all its keys"),
    "Expected '=' after a key": ("there is no = after the key",
                                 'Write key = value, or begin the line with # to make it a remark'),
    "Expected ']' at the end of a table": ("the table's name is not closed", "Close the bracket: [air]"),
    "Expected ']]' at the end of an array": ("the table's name is not closed", "Close both brackets: [[beam]]"),
    "Unclosed array": ("a list is not closed, or a comma is missing in it", "Close it with ], commas between entries"),
    "Unclosed inline table": ("a table in braces is not closed, or a comma is missing in it",
                              "Close it with } on the same line, commas between entries"),
    "Unterminated string": ("a text is not closed", "Close it with the quote it began with"),
    "Unescaped '\\'": ("a backslash stands in a text in double quotes",
                       "Write two backslashes, or put the text in single quotes"),
    "Illegal character '\\n'": ("a text is not closed at the end of the line", 'Close it with a second quote: "2 W"'),
    "Illegal character": ("there is a control character on this line", "Delete it; type the line anew"),
    "Found invalid character": ("there is a character on this line that cannot stand there", "Type the line anew"),
    "Invalid initial character for a key": ("this line does not begin with a key",
                                            'Write key = value; a key with spaces or accents goes in quotes'),
    "Invalid statement": ("this line is neither a table's name nor key = value",
                          'Write key = value, or begin the line with # to make it a remark'),
    "Expected newline or end of document": ("something follows the value on this line",
                                            "Write one key and its value per line; text goes in quotes"),
    "Invalid date": ("this date or time does not exist", "Write a date as 2026-12-01"),
    "Invalid value": ("the value on this line cannot be read",
                      'Put text, and numbers with a unit, in double quotes: "2 W"'),
}  # fmt: skip


def _syntax_problem(error: tomllib.TOMLDecodeError, text: str, index: LineIndex) -> Problem:
    said = str(error)
    found = _PLACE.search(said)
    last = text.count("\n") + (0 if text.endswith("\n") else 1)
    # What is never closed is noticed far below: name the line on which it begins.
    unclosed = said.startswith(("Unclosed", "Unterminated")) and index.stopped is not None
    line = int(found[1]) if found and found[1] and not unclosed else index.stopped or max(last, 1)
    lines = text.split("\n")
    here = lines[line - 1] if line <= len(lines) else ""
    unread = said.startswith(("Invalid value", "Expected newline", "Invalid date"))
    unread = unread and len(here) <= _LONGEST_LINE
    bare = _BARE_VALUE.match(here) if unread else None
    if bare:
        return Problem("", f"the value of {bare['key']} has a unit but no quotes",
                       f'Write {bare["key"]} = "{bare["value"]}"', line)  # fmt: skip
    word = _BARE_WORD.match(here) if unread else None
    if word:
        return Problem("", f"the value of {word['key']} is text but has no quotes",
                       f'Write {word["key"]} = "{word["value"]}"', line)  # fmt: skip
    if said.startswith(("Cannot overwrite", "Duplicate inline")) and index.repeated is not None:
        key, again, first = index.repeated
        where = f"first on line {first}" if first != again else "both times on this line"
        return Problem("", f"{quoted(key)} is given twice in one table, {where}", _KEEP_ONE, again)
    for begins, (wrong, mend) in _PARSER_SAYS.items():
        if said.startswith(begins):
            return Problem("", wrong, mend, line)
    return Problem("", "this line is not TOML", 'Write key = value, for example power = "2 W"', line)
