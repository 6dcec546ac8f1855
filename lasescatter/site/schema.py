"""JSON Schema of the site file, for editors that check and complete while one writes."""

from __future__ import annotations

from typing import Any

from lasescatter.site.document import FORMAT, SiteTable

_DIALECT = "https://json-schema.org/draft/2020-12/schema"


def site_schema() -> dict[str, Any]:
    """The schema: every key that is read, with what it means and an example.

    It knows keys, words and shapes. Units, ranges of values with units and rules between keys are
    judged when the file is read.
    """
    schema = _without_null(SiteTable.model_json_schema(by_alias=True))
    sizes = schema["$defs"]["ParticlesTable"]["properties"]["sizes"]
    modes = {name: sizes.pop(name) for name in ("type", "items")}
    sizes["anyOf"] = [modes["items"], modes]
    for name in ("beam", "observer"):
        schema["properties"][name]["minItems"] = 1
        schema["required"].append(name)
    return {"$schema": _DIALECT, **schema, "title": FORMAT}


def _without_null(node: Any) -> Any:
    """The schema without the null that stands for a key left out: the file's format has no null."""
    if isinstance(node, list):
        return [_without_null(entry) for entry in node]
    if not isinstance(node, dict):
        return node
    plain = {name: _without_null(entry) for name, entry in node.items() if name != "default" or isinstance(entry, dict)}
    choices = plain.get("anyOf")
    if isinstance(choices, list) and {"type": "null"} in choices:
        rest = [choice for choice in choices if choice != {"type": "null"}]
        del plain["anyOf"]
        plain = {**plain, **rest[0]} if len(rest) == 1 else {**plain, "anyOf": rest}
    return plain
