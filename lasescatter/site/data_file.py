"""Reading the data files of a rules folder: text to a table, or all that is wrong with it.

They are TOML with a schema like the site file; unknown keys are refused, and each fault is told with file, line
and key.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import partial
from pathlib import Path
from typing import Any, Generic, TypeVar

from pydantic import ValidationError

from lasescatter.problems import Problem, SiteError
from lasescatter.site.faults import Fault, Place, quoted, spelled
from lasescatter.site.line_index import LineIndex
from lasescatter.site.model_errors import Keys, TableName, as_toml, faults_of, keys_of, table_of
from lasescatter.site.spelling import Placeholder, nearest
from lasescatter.site.syntax import LARGEST_FILE, decoded, parsed
from lasescatter.site.table import Table

Read = TypeVar("Read", bound=Table)


@dataclass(frozen=True)
class DataFile(Generic[Read]):
    """One file that reads well."""

    file: str
    """As it is named in messages."""
    document: Mapping[str, Any]
    lines: LineIndex
    table: Read

    def problem(self, place: Place, wrong: str, mend: str) -> Problem:
        """A fault of this file that shows only beside other files."""
        return _problem(Fault(place, wrong, mend), self.document, self.lines, self.file)


def read_data_file(path: Path, file: str, model: type[Read]) -> DataFile[Read]:
    """Read one data file; `file` names it in messages.

    Raises
    ------
    SiteError
        With every fault of the file.
    """
    try:
        if path.stat().st_size > LARGEST_FILE:
            raise SiteError([Problem("", f"the file has more than {LARGEST_FILE / 1e6:g} MB",
                                     "A kind or an index needs a few kB", file=file)], file)  # fmt: skip
        content = path.read_bytes()
    except OSError as error:
        raise SiteError([Problem("", f"the file cannot be read ({error.strerror})", "Check path and permissions",
                                 file=file)], file) from None  # fmt: skip
    try:
        document, lines = parsed(decoded(content, file), file)
    except SiteError as error:
        raise SiteError([replace(problem, file=file) for problem in error.problems], file) from None
    known = keys_of(model)
    try:
        return DataFile(file, document, lines, model.model_validate(_with_placeholders(document, known)))
    except ValidationError as error:
        faults = faults_of((), error.errors(include_url=False), partial(_in_words, known))
        raise SiteError([_problem(fault, document, lines, file) for fault in faults], file) from None


def _problem(fault: Fault, document: Mapping[str, Any], lines: LineIndex, file: str) -> Problem:
    return Problem(spelled(fault.place, document, quoted), fault.wrong, fault.mend, lines.line(fault.place), file)


def _with_placeholders(document: Mapping[str, Any], known: Keys, table: TableName = ()) -> dict[str, Any]:
    """A copy in which a misspelt key stands where the right one would: it is then not reported missing as well."""
    result: dict[str, Any] = {}
    for key, value in document.items():
        inner = (*table, key)
        if inner in known and isinstance(value, Mapping):
            result[key] = _with_placeholders(value, known, inner)
        elif inner in known and isinstance(value, list):
            result[key] = [_with_placeholders(e, known, inner) if isinstance(e, Mapping) else e for e in value]
        elif key in known[table]:
            result[key] = value
        else:
            near = nearest(key, list(known[table]))
            name = near if near and near not in document and near not in result else key
            result[name] = Placeholder(key, *_unknown(table, key, near, known))
    return result


def _unknown(table: TableName, key: str, near: str | None, known: Keys) -> tuple[str, str]:
    wrong = f"this key is not known in [{'.'.join(table)}]" if table else "this key is not known"
    if near:
        return wrong, f'Perhaps "{near}" was meant'
    elsewhere = [name for name, keys in known.items() if key in keys]
    if elsewhere:
        return wrong, f"It belongs in [{'.'.join(elsewhere[0])}]" if elsewhere[0] else "It belongs at the top"
    return wrong, f"Known here are {', '.join(known[table])}"


def _in_words(known: Keys, place: Place, error: Mapping[str, Any]) -> tuple[str, str]:
    """What is wrong and what would be right, for the errors that the model library itself finds."""
    *table, name = (step for step in place if isinstance(step, str))
    field = known.get(tuple(table), {}).get(name)
    example = f"{name} = {as_toml(field.examples[0])}" if field and field.examples else name
    if error["type"] == "missing":
        return "the key is missing", f"Add it, for example {example}"
    if field is not None and table_of(field) is not None:
        header = f"[[{name}]]" if error["type"] == "tuple_type" else f"[{name}]"
        return (f"{quoted(error['input'])} stands where {'a list of tables' if header[1] == '[' else 'a table'} is due",
                f"Write {header}, with its keys on the lines below")  # fmt: skip
    due = "is not a list" if error["type"] == "tuple_type" else "cannot be used here"
    return f"{quoted(error['input'])} {due}", f"Write for example {example}"
