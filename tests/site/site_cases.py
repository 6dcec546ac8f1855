"""The good site files of this folder, and the bad ones that `bad_sites.toml` makes of them."""

from __future__ import annotations

import shutil
import tempfile
import tomllib
from dataclasses import dataclass
from pathlib import Path

from lasescatter.matter import Growth, IndexTable, Kind, Lognormal, Material, SizeMode, SizeSpan, Trust
from lasescatter.scene import Scene
from lasescatter.site.catalogue import Catalogue, plain_name
from lasescatter.site.reading import read_site_text

HERE = Path(__file__).parent
TABLES = HERE / "tables"
MARK = "¤"

GOOD = {
    name: (HERE / f"{name}.toml").read_text(encoding="utf-8")
    for name in ("good_continuous", "good_pulsed", "good_counted", "good_catalogue")
}

WATER = IndexTable((200e-9, 2e-6), (1.4, 1.3), (0.0, 1e-4), (False, False), "test water", "invented")
FOG = Kind(
    name="test fog",
    also_called=("fog for tests",),
    what="Invented drops.",
    modes=(SizeMode(Lognormal(0.4e-6, 1.5)),),
    material=Material(1.43 + 1e-6j, 1060.0, Growth(0.2, (), WATER, "invented")),
    trust=Trust("weak", 3.0, "invented"),
    trust_with_own_sizes=Trust("checked", 1.5, "invented"),
    size_span=SizeSpan("mass median diameter", 1e-6, 0.5e-6, 2e-6, "invented"),
    typical=(),
    sources=("invented [M]",),
    file="test_fog.toml",
    data={"name": "test fog"},
    indices={"test water": {"name": "test water"}},
)
DUST = Kind(
    "test dust", (), "Invented grains.", (SizeMode(Lognormal(0.3e-6, 2.0, 1e-8, 2e-5)),), Material(WATER, None),
    Trust("non-spheres", 3.0, "grains"), Trust("non-spheres", 3.0, "grains"), None, (), (), "test_dust.toml",
)  # fmt: skip
AIR = Kind(
    "test air", (), "Invented mixture.",
    (SizeMode(Lognormal(0.02e-6, 2.2), 0.9, Material(1.53, 1800.0)), SizeMode(Lognormal(0.01e-6, 2.0), 0.1)),
    Material(1.75 + 0.44j, 1000.0), Trust("checked", 1.5, "invented"), Trust("checked", 1.5, "invented"), None, (),
    (), "test_air.toml", {"name": "test air"}, {"test soot": {"name": "test soot"}},
)  # fmt: skip
CATALOGUE = Catalogue(
    {kind.name: kind for kind in (FOG, DUST, AIR)},
    {},
    {plain_name(name): kind.name for kind in (FOG, DUST, AIR) for name in (kind.name, *kind.also_called)},
)


def read_text(text: str, file: str = "standard input", folder: Path = TABLES) -> Scene:
    """A site file's text with the invented kinds above and the tables of this folder."""
    return read_site_text(text, file, CATALOGUE, folder)


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
    folder: Path
    """Where its tables are."""


def changed(text: str, changes: list[list[str]]) -> str:
    """A good text with each replacement made; what is replaced must occur exactly once."""
    for old, new in changes:
        assert text.count(old) == 1, f"{old!r} occurs {text.count(old)} times"
        text = text.replace(old, new)
    return text


_BAD_TABLES = tempfile.TemporaryDirectory(prefix="bad_tables_")


def _tables_of(case: dict) -> Path:
    """The folder of a case: the good tables, with the case's own in their place."""
    if "file" not in case:
        return TABLES
    folder = Path(tempfile.mkdtemp(dir=_BAD_TABLES.name))
    for table in TABLES.iterdir():
        shutil.copy(table, folder)
    name, content = case["file"]
    (folder / name).write_text(content, encoding="utf-8")
    return folder


def _bad_site(case: dict) -> BadSite:
    marked = changed(GOOD[case["base"]], case["change"])
    before, mark, after = marked.partition(MARK)
    assert MARK not in after, case["what"]
    line = before.count("\n") + 1 if mark else None
    wrong, mend = tuple(case["wrong"]), tuple(case["mend"])
    return BadSite(case["what"], before + after, line, case["key"], wrong, mend, _tables_of(case))


BAD_SITES = tuple(
    _bad_site(case) for case in tomllib.loads((HERE / "bad_sites.toml").read_text(encoding="utf-8"))["case"]
)
