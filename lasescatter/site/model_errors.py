"""What a table's model knows of its keys, and the faults behind the model library's errors."""

from __future__ import annotations

import json
from collections.abc import Callable, Iterator, Mapping, Sequence
from functools import lru_cache
from typing import Any, get_args

from pydantic.fields import FieldInfo

from lasescatter.site.faults import HERE, Fault, Place
from lasescatter.site.spelling import Placeholder
from lasescatter.site.table import Table

TableName = tuple[str, ...]
Keys = Mapping[TableName, Mapping[str, FieldInfo]]
InWords = Callable[[Place, Mapping[str, Any]], tuple[str, str]]
"""What is wrong and what would be right, for an error that the library itself finds."""


@lru_cache(maxsize=8)
def keys_of(model: type[Table]) -> Keys:
    """Every key that is read, by table and then by the name that the file uses."""
    found: dict[TableName, dict[str, FieldInfo]] = {}
    waiting: list[tuple[TableName, type[Table]]] = [((), model)]
    for name, table in waiting:
        found[name] = {field.alias or key: field for key, field in table.model_fields.items()}
        waiting += [((*name, key), inner) for key, field in found[name].items() if (inner := table_of(field))]
    return found


def table_of(field: FieldInfo) -> type[Table] | None:
    """The table that a key holds, alone or in a list."""
    waiting = [field.annotation]
    for annotation in waiting:
        if isinstance(annotation, type) and issubclass(annotation, Table):
            return annotation
        waiting += get_args(annotation)
    return None


def faults_of(base: Place, errors: Sequence[Mapping[str, Any]], in_words: InWords) -> Iterator[Fault]:
    """One fault for each error; places count from the top of the file."""
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
            for fault in error["ctx"]["faults"]:
                yield Fault(place if fault.place == HERE else (*table, *fault.place), fault.wrong, fault.mend)
            yield from faults_of(place, error["ctx"]["own"], in_words)
        else:
            yield Fault(place, *in_words(place, error))


def as_toml(value: Any) -> str:
    """An example as it is written in the file."""
    if isinstance(value, Mapping):
        return "{ " + ", ".join(f"{name} = {as_toml(entry)}" for name, entry in value.items()) + " }"
    return json.dumps(value, ensure_ascii=False)
