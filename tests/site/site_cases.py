"""The good site files of this folder, and the bad ones that `bad_sites.toml` makes of them."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from pathlib import Path

HERE = Path(__file__).parent
MARK = "¤"

GOOD = {
    name: (HERE / f"{name}.toml").read_text(encoding="utf-8")
    for name in ("good_continuous", "good_pulsed", "good_counted")
}


@dataclass(frozen=True)
class BadSite:
    """One bad file and what must be said about it."""

    what: str
    text: str
    line: int | None
    """None where the fault is that something is nowhere in the file."""
    key: str
    wrong: tuple[str, ...]
    mend: tuple[str, ...]


def changed(text: str, changes: list[list[str]]) -> str:
    """A good text with each replacement made; what is replaced must occur exactly once."""
    for old, new in changes:
        assert text.count(old) == 1, f"{old!r} occurs {text.count(old)} times"
        text = text.replace(old, new)
    return text


def _bad_site(case: dict) -> BadSite:
    marked = changed(GOOD[case["base"]], case["change"])
    before, mark, after = marked.partition(MARK)
    assert MARK not in after, case["what"]
    line = before.count("\n") + 1 if mark else None
    return BadSite(case["what"], before + after, line, case["key"], tuple(case["wrong"]), tuple(case["mend"]))


BAD_SITES = tuple(
    _bad_site(case) for case in tomllib.loads((HERE / "bad_sites.toml").read_text(encoding="utf-8"))["case"]
)
