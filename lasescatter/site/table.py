"""What all tables of the site file share: unknown keys are refused, and rules between keys.

A rule that joins several keys must not hide behind a fault in one of them: all faults of a file are
told at once. So a table's rules run with its last field, on whatever keys read well.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from pydantic import (
    BaseModel,
    ConfigDict,
    Field,
    ValidationError,
    ValidationInfo,
    ValidatorFunctionWrapHandler,
    field_validator,
)

from lasescatter.site.faults import Fault, refusals


class Seen:
    """The keys of one table as far as they read well, by field name."""

    def __init__(self, values: Mapping[str, Any]) -> None:
        self._values = values

    def get(self, name: str) -> Any:
        """The value; None where the key is left out or reads badly."""
        return self._values.get(name)

    def stated(self, name: str) -> bool:
        """Whether the file has the key, be it right or wrong."""
        return name not in self._values or self._values[name] not in (None, ())

    def good(self, *names: str) -> bool:
        """Whether all these keys are stated and read well."""
        return all(self._values.get(name) is not None for name in names)


class Table(BaseModel):
    """One table of the site file. Its last field must have a default: the rules run there."""

    model_config = ConfigDict(frozen=True, extra="forbid", validate_default=True)

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        """Faults between keys; places count from this table."""
        yield from ()

    @field_validator("*", mode="wrap")
    @classmethod
    def _end_with_rules(cls, value: Any, read: ValidatorFunctionWrapHandler, info: ValidationInfo) -> Any:
        if info.field_name != next(reversed(cls.model_fields)):
            return read(value)
        seen, own, result = dict(info.data), [], None
        try:
            result = seen[info.field_name] = read(value)
        except ValidationError as error:
            own = error.errors()
        faults = list(cls.rules(Seen(seen)))
        if own or faults:
            raise refusals(faults, own)
        return result


def key(description: str, example: Any, *, alias: str | None = None, default: Any = ...) -> Any:
    """A key of a table: what it means and an example, for the schema and for messages."""
    return Field(default, alias=alias, description=description, examples=[example])


def choice(one: str, other: str, seen: Seen, example: str, why: str = "") -> Iterator[Fault]:
    """Exactly one of two keys must be stated; `why` follows the advice."""
    if seen.stated(one) and seen.stated(other):
        yield Fault((other,), f"both {one} and {other} are given, and only one of them can hold",
                    f"Keep one and leave the other out{why}")  # fmt: skip
    elif not seen.stated(one) and not seen.stated(other):
        yield Fault((one,), f"neither {one} nor {other} is given", f"Add one of them, for example {example}{why}")
