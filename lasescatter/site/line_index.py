"""Where each key of a TOML text stands: an index from key path to line and to the value as written.

The TOML parser of the standard library tells no places. This scanner follows tables, arrays of tables,
dotted keys, strings over several lines, arrays and inline tables just far enough for that. It judges
a few things that the parser does not, or not in words a user can follow: nesting deeper than any site
needs, an inline table that is broken over lines, and where a value that never ends began.
"""

from __future__ import annotations

import re
import tomllib
from bisect import bisect_right
from dataclasses import dataclass, field

from lasescatter.site.faults import Place

DEEPEST = 20
MOST_VALUES = 200_000

_SPACE = re.compile(r"[ \t]*")
_BLANK = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_BARE = re.compile(r"[A-Za-z0-9_-]+")
_BASIC = re.compile(r'"[^"\\\n]*(?:\\.[^"\\\n]*)*"')
_LITERAL = re.compile(r"'[^'\n]*'")
_LONG_BASIC = re.compile(r'"""[^\\]*?(?:\\.[^\\]*?)*?"""(?:"{1,2})?', re.DOTALL)
_LONG_LITERAL = re.compile(r"'''.*?'''(?:'{1,2})?", re.DOTALL)
_SCALAR = re.compile(r"[^,\]}#\r\n]+")


@dataclass(frozen=True)
class Spot:
    """Line of a key (counted from 1) and the part of the text that holds its value."""

    line: int
    start: int
    end: int


@dataclass
class LineIndex:
    """Spots by key path, in the order of the file, and where the scan had to stop."""

    text: str
    spots: dict[Place, Spot] = field(default_factory=dict)
    stopped: int | None = None
    """Line of the statement that could not be followed; None: the whole text was."""
    broken_inline: int | None = None
    """Line on which an inline table breaks off."""
    too_deep: int | None = None
    """Line on which nesting goes deeper than `DEEPEST`."""
    repeated: tuple[str, int, int] | None = None
    """The first key that is given twice, the line on which it is given again, and its first line."""
    too_many: int | None = None
    """Line on which the count of values goes beyond `MOST_VALUES`."""

    def line(self, place: Place) -> int | None:
        """Line of a key, or of the nearest table that would hold it."""
        for length in range(len(place), 0, -1):
            spot = self.spots.get(place[:length])
            if spot is not None:
                return spot.line
        return None

    def written(self, place: Place) -> str | None:
        """The value as the user wrote it, where it stands on one line without a comment."""
        spot = self.spots.get(place)
        text = self.text[spot.start : spot.end].strip() if spot else ""
        return text if text and "\n" not in text else None


def index_lines(text: str) -> LineIndex:
    """Index a TOML text; of a text that is not TOML, the part before the first fault."""
    scan = _Scan(text)
    try:
        scan.document()
    except _Stop:
        scan.index.stopped = scan.line_of(scan.statement)
    return scan.index


class _Stop(Exception):
    """The text cannot be followed any further."""


class _Scan:
    def __init__(self, text: str) -> None:
        self.text, self.at, self.statement = text, 0, 0
        self.index = LineIndex(text)
        self.newlines = [match.start() for match in re.finditer("\n", text)]
        self.entries: dict[Place, int] = {}

    def line_of(self, position: int) -> int:
        return bisect_right(self.newlines, position - 1) + 1 if position else 1

    def document(self) -> None:
        table: Place = ()
        while True:
            self.skip(_BLANK)
            self.statement = self.at
            if self.at >= len(self.text):
                return
            if self.text[self.at] == "[":
                table = self.header()
            else:
                self.pair(table)
            self.skip(_SPACE)
            if self.at < len(self.text) and self.text[self.at] not in "#\r\n":
                raise _Stop

    def header(self) -> Place:
        start = self.at
        double = self.text.startswith("[[", self.at)
        self.at += 2 if double else 1
        keys = self.key()
        self.expect("]]" if double else "]")
        table: Place = ()
        for key in keys[:-1]:
            table = self.inside((*table, key), start)
        table = (*table, keys[-1])
        if not double:
            return self.inside(table, start)
        self.note(table, start, start)
        number = self.entries.get(table, 0)
        self.entries[table] = number + 1
        self.note((*table, number), start, start)
        return (*table, number)

    def inside(self, table: Place, start: int) -> Place:
        """The table that a header's key leads to: of an array of tables, its latest entry."""
        if table in self.entries:
            return (*table, self.entries[table] - 1)
        self.note(table, start, start)
        return table

    def pair(self, table: Place) -> None:
        start = self.at
        keys = self.key()
        self.expect("=")
        self.skip(_SPACE)
        place = table
        for key in keys[:-1]:
            place = (*place, key)
            self.note(place, start, start)
        place = (*place, keys[-1])
        self.check_depth(len(place))
        began = self.at
        first = self.index.spots.get(place)
        if first is not None and self.index.repeated is None:
            self.index.repeated = (keys[-1], self.line_of(start), first.line)
        self.value(place, len(place))
        self.note(place, began, self.at, self.line_of(start))

    def value(self, place: Place, depth: int) -> None:
        self.check_depth(depth)
        text, at = self.text, self.at
        if at >= len(text):
            raise _Stop
        if text.startswith('"""', at):
            self.match(_LONG_BASIC)
        elif text.startswith("'''", at):
            self.match(_LONG_LITERAL)
        elif text[at] == '"':
            self.match(_BASIC)
        elif text[at] == "'":
            self.match(_LITERAL)
        elif text[at] == "[":
            self.array(place, depth)
        elif text[at] == "{":
            self.inline_table(place, depth)
        else:
            self.match(_SCALAR)

    def array(self, place: Place, depth: int) -> None:
        self.at += 1
        number = 0
        while True:
            self.skip(_BLANK)
            if self.text.startswith("]", self.at):
                self.at += 1
                return
            began = self.at
            self.value((*place, number), depth + 1)
            self.note((*place, number), began, self.at)
            number += 1
            self.skip(_BLANK)
            if self.text.startswith(",", self.at):
                self.at += 1
            elif not self.text.startswith("]", self.at):
                raise _Stop

    def inline_table(self, place: Place, depth: int) -> None:
        self.at += 1
        self.within_line()
        if self.text.startswith("}", self.at):
            self.at += 1
            return
        while True:
            self.within_line()
            self.pair(place)
            self.within_line()
            if self.text.startswith("}", self.at):
                self.at += 1
                return
            if not self.text.startswith(",", self.at):
                raise _Stop
            self.at += 1

    def within_line(self) -> None:
        self.skip(_SPACE)
        if self.at < len(self.text) and self.text[self.at] in "#\r\n":
            self.index.broken_inline = self.line_of(self.at)
            raise _Stop

    def key(self) -> list[str]:
        keys = []
        while True:
            self.skip(_SPACE)
            first = self.text[self.at : self.at + 1]
            token = self.match(_BASIC if first == '"' else _LITERAL if first == "'" else _BARE)
            keys.append(_unquoted(token) if first in ('"', "'") else token)
            self.check_depth(len(keys))
            self.skip(_SPACE)
            if not self.text.startswith(".", self.at):
                return keys
            self.at += 1

    def check_depth(self, depth: int) -> None:
        if depth > DEEPEST:
            self.index.too_deep = self.line_of(self.at)
            raise _Stop

    def skip(self, pattern: re.Pattern[str]) -> None:
        found = pattern.match(self.text, self.at)
        self.at = found.end() if found else self.at

    def match(self, pattern: re.Pattern[str]) -> str:
        found = pattern.match(self.text, self.at)
        if found is None:
            raise _Stop
        self.at = found.end()
        return found.group()

    def expect(self, signs: str) -> None:
        self.skip(_SPACE)
        if not self.text.startswith(signs, self.at):
            raise _Stop
        self.at += len(signs)

    def note(self, place: Place, start: int, end: int, line: int | None = None) -> None:
        if place not in self.index.spots:
            if len(self.index.spots) >= MOST_VALUES:
                self.index.too_many = self.line_of(start)
                raise _Stop
            self.index.spots[place] = Spot(line or self.line_of(start), start, end)


def _unquoted(token: str) -> str:
    try:
        value = tomllib.loads(f"key = {token}")["key"]
    except tomllib.TOMLDecodeError:
        raise _Stop from None
    return str(value)
