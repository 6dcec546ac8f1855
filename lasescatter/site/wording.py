"""From the model library's errors to problems that a laser safety officer can mend."""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping, Sequence
from functools import lru_cache
from typing import Any, get_args

from pydantic.fields import FieldInfo

from lasescatter.problems import Problem
from lasescatter.site.contract import TableName
from lasescatter.site.document import SiteTable
from lasescatter.site.faults import Fault, Place, place_in_file, quoted, spelled
from lasescatter.site.line_index import LineIndex
from lasescatter.site.spelling import Placeholder, header, unknown_key
from lasescatter.site.table import Table


@lru_cache(maxsize=1)
def known_fields() -> Mapping[TableName, Mapping[str, FieldInfo]]:
    """Every key that is read, by table and then by the name that the file uses."""
    found: dict[TableName, dict[str, FieldInfo]] = {}
    waiting: list[tuple[TableName, type[Table]]] = [((), SiteTable)]
    for name, table in waiting:
        found[name] = {field.alias or key: field for key, field in table.model_fields.items()}
        waiting += [((*name, key), inner) for key, field in found[name].items() if (inner := _table_of(field))]
    return found


def _table_of(field: FieldInfo) -> type[Table] | None:
    """The table that a key holds, alone or in a list."""
    waiting = [field.annotation]
    for annotation in waiting:
        if isinstance(annotation, type) and issubclass(annotation, Table):
            return annotation
        waiting += get_args(annotation)
    return None


def problems_of(
    errors: Sequence[Mapping[str, Any]], document: Mapping[str, Any], index: LineIndex
) -> Iterator[Problem]:
    """One problem per fault, with the key's path and its line."""
    for fault in _faults((), errors):
        yield problem_of(fault, document, index)


def problem_of(fault: Fault, document: Mapping[str, Any], index: LineIndex) -> Problem:
    """A fault whose place counts from the top of the file."""
    where = place_in_file(fault.place, document)
    return Problem(spelled(where, document, quoted), fault.wrong, fault.mend, index.line(where))


def _faults(base: Place, errors: Sequence[Mapping[str, Any]]) -> Iterator[Fault]:
    for error in errors:
        place = (*base, *error["loc"])
        met = error["input"]
        if isinstance(met, Placeholder):
            if met.wrong:
                yield Fault((*place[:-1], met.key), met.wrong, met.mend)
        elif error["type"] == "refused":
            yield Fault(place, error["ctx"]["wrong"], error["ctx"]["mend"])
        elif error["type"] == "several":
            # Rules run with a table's last field; their places count from the table.
            table = place[:-1]
            yield from (Fault((*table, *fault.place), fault.wrong, fault.mend) for fault in error["ctx"]["faults"])
            yield from _faults(place, error["ctx"]["own"])
        else:
            yield Fault(place, *_in_words(place, error))


def _in_words(place: Place, error: Mapping[str, Any]) -> tuple[str, str]:
    """What is wrong and what would be right, for the errors that the library itself finds."""
    *_, last = place
    names = tuple(step for step in place if isinstance(step, str))
    table, name = names[:-1], names[-1]
    known = known_fields()
    if error["type"] == "extra_forbidden":
        return unknown_key(table, str(last), known, error["input"])
    field = known.get(table, {}).get(name)
    example = f"{name} = {_toml(field.examples[0])}" if field and field.examples else name
    if error["type"] == "missing":
        return "the key is missing", f"Add it, for example {example}"
    if field is not None and _table_of(field) is not None:
        if error["type"] == "tuple_type":
            return (f"{quoted(error['input'])} stands where a list of tables is due",
                    f"Write {header(names)} with double brackets, once for each")  # fmt: skip
        return (f"{quoted(error['input'])} stands where one table is due",
                f"Write {header(names)}, with its keys on the lines below")  # fmt: skip
    if error["type"] == "tuple_type":
        return f"{quoted(error['input'])} is not a list", f"Write a list in brackets, for example {example}"
    return f"{quoted(error['input'])} cannot be used here", f"Write for example {example}"


def _toml(value: Any) -> str:
    """An example as it is written in the file."""
    if isinstance(value, Mapping):
        return "{ " + ", ".join(f"{name} = {_toml(entry)}" for name, entry in value.items()) + " }"
    return json.dumps(value, ensure_ascii=False)
