"""Kinds of particles that are the user's own: where they are from, in words."""

from __future__ import annotations

from collections.abc import Iterable

from lasescatter.report.typography import abridged, plain
from lasescatter.scene import Load

_NAME = 60
_ORIGIN = 200
ORIGIN_WORDS = {"shipped": "", "added": "own", "replacing": "own, in place of a shipped one"}
"""By `Kind.origin`, for a list."""


def own_kinds(loads: Iterable[Load]) -> list[str]:
    """One line for each kind in use that is from the user's own folder."""
    found = dict.fromkeys((load.kind, load.kind_from) for load in loads if load.kind_from)
    return [f'"{abridged(plain(kind), _NAME)}" is from {abridged(plain(origin), _ORIGIN)}' for kind, origin in found]
