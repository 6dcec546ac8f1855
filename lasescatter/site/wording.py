"""From the model library's errors to problems that a laser safety officer can mend."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from lasescatter.problems import Problem
from lasescatter.site.document import SiteTable
from lasescatter.site.faults import Fault, Place, place_in_file, quoted, spelled
from lasescatter.site.line_index import LineIndex
from lasescatter.site.model_errors import Keys, as_toml, faults_of, keys_of, table_of
from lasescatter.site.spelling import header, unknown_key


def known_fields() -> Keys:
    """Every key of the site file that is read."""
    return keys_of(SiteTable)


def problems_of(
    errors: Sequence[Mapping[str, Any]], document: Mapping[str, Any], index: LineIndex
) -> Iterator[Problem]:
    """One problem per fault, with the key's path and its line."""
    for fault in faults_of((), errors, _in_words):
        yield problem_of(fault, document, index)


def problem_of(fault: Fault, document: Mapping[str, Any], index: LineIndex) -> Problem:
    """A fault whose place counts from the top of the file."""
    where = place_in_file(fault.place, document)
    return Problem(spelled(where, document, quoted), fault.wrong, fault.mend, index.line(where))


def _in_words(place: Place, error: Mapping[str, Any]) -> tuple[str, str]:
    """What is wrong and what would be right, for the errors that the library itself finds."""
    *_, last = place
    names = tuple(step for step in place if isinstance(step, str))
    table, name = names[:-1], names[-1]
    known = known_fields()
    if error["type"] == "extra_forbidden":
        return unknown_key(table, str(last), known, error["input"])
    field = known.get(table, {}).get(name)
    example = f"{name} = {as_toml(field.examples[0])}" if field and field.examples else name
    if error["type"] == "missing":
        return "the key is missing", f"Add it, for example {example}"
    if field is not None and table_of(field) is not None:
        if error["type"] == "tuple_type":
            return (f"{quoted(error['input'])} stands where a list of tables is due",
                    f"Write {header(names)} with double brackets, once for each")  # fmt: skip
        return (f"{quoted(error['input'])} stands where one table is due",
                f"Write {header(names)}, with its keys on the lines below")  # fmt: skip
    if error["type"] == "tuple_type":
        return f"{quoted(error['input'])} is not a list", f"Write a list in brackets, for example {example}"
    return f"{quoted(error['input'])} cannot be used here", f"Write for example {example}"
