"""Reading the report back: nothing here knows the assessment, only the page's text."""

from __future__ import annotations

import re
from collections.abc import Iterator

from pypdf import PdfReader

HEAD = re.compile(r"^\s*Hand check (\d+): (.*)$")
STOP_HEAD = re.compile(r"^\s*Stop check (\d+): (.*)$")
ITEM = re.compile(r"(\w+) = (\S+)(?: (W/m²|W|m|deg|1/m)(?=\s|$))?")


def hand_check_blocks(pages: list[str]) -> dict[int, dict[str, str]]:
    """The items of every hand-check block, as printed, by its number; its heading under "head"."""
    return _blocks(pages, HEAD, STOP_HEAD, "E_program")


def stop_check_blocks(pages: list[str]) -> dict[int, dict[str, str]]:
    """The same of the stop checks."""
    return _blocks(pages, STOP_HEAD, HEAD, "E_compared")


def _blocks(pages: list[str], wanted: re.Pattern[str], other: re.Pattern[str], last: str) -> dict[int, dict[str, str]]:
    found: dict[int, dict[str, str]] = {}
    current: dict[str, str] | None = None
    for line in "\n".join(pages).splitlines():
        head = wanted.match(line)
        if other.match(line):
            current = None
        elif head:
            current = found.setdefault(int(head[1]), {"head": head[2]})
        elif current is not None and line.strip().startswith("remark:"):
            current["remark"] = line.strip()
        elif current is not None and " = " in line:
            for label, value, _unit in ITEM.findall(line):
                current.setdefault(label, value)
            if last in current and last in line:
                continue
        elif current is not None and last in current and "remark" not in current:
            current = None
    return found


def entries(resources: dict, kind: str) -> dict:
    """Fonts or forms of a resource dictionary; empty where it has none."""
    found = resources.get(kind)
    return {} if found is None else found.get_object()


def resources(reader: PdfReader) -> Iterator[dict]:
    """Every resource dictionary of the document, those of forms inside forms included."""
    waiting = [page["/Resources"].get_object() for page in reader.pages]
    seen: set[int] = set()
    while waiting:
        found = waiting.pop()
        if id(found) in seen:
            continue
        seen.add(id(found))
        yield found
        for form in entries(found, "/XObject").values():
            inner = form.get_object().get("/Resources")
            if inner is not None:
                waiting.append(inner.get_object())
