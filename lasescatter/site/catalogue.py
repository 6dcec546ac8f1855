"""The catalogue of particle kinds: the shipped rules, and a user's folder that adds to them or replaces some."""

from __future__ import annotations

import difflib
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace
from functools import lru_cache
from pathlib import Path
from typing import TypeVar

from lasescatter.matter import IndexTable, Kind, Material, SizeMode
from lasescatter.problems import Problem, SiteError
from lasescatter.rules import shipped_rules
from lasescatter.site.data_file import DataFile, read_data_file
from lasescatter.site.faults import Place, quoted
from lasescatter.site.index_file import IndexFileTable
from lasescatter.site.kind_file import KindFileTable, source_lines
from lasescatter.site.sizes import modes_of

KINDS, INDICES = "particles", "indices"
"""Folders of the two sorts of files inside a rules folder."""
MOST_FILES = 500

Read = TypeVar("Read", KindFileTable, IndexFileTable)


def plain_name(name: str) -> str:
    """A name as it is compared: case, spaces, hyphens, underscores and commas do not count."""
    return re.sub(r"[\s\-_,()]+", "", name).casefold()


@dataclass(frozen=True)
class Catalogue:
    """Kinds of particles by name, and refractive indices by name."""

    kinds: Mapping[str, Kind]
    indices: Mapping[str, IndexTable]
    _names: Mapping[str, str] = field(repr=False, default_factory=dict)
    """Compared name to name, other names included."""

    def named(self, name: str) -> Kind | None:
        """The kind of this name or other name."""
        found = self._names.get(plain_name(name))
        return None if found is None else self.kinds[found]

    def near(self, name: str) -> tuple[str, ...]:
        """Up to three kinds that may be meant, for messages."""
        plain = plain_name(name)[:100]
        inside = [known for known in self._names if len(plain) >= 3 and (plain in known or known in plain)]
        inside.sort(key=lambda known: (known != plain_name(self._names[known]), len(known), known))
        close = difflib.get_close_matches(plain, self._names, n=6, cutoff=0.75)
        return tuple(dict.fromkeys(self._names[known] for known in [*close, *inside]))[:3]


def read_catalogue(own: Path | None = None) -> Catalogue:
    """The shipped kinds, with those of a user's folder added or in place of those of the same name.

    Parameters
    ----------
    own : Path, optional
        Folder with particles/*.toml, indices/*.toml or both.

    Raises
    ------
    SiteError
        With every fault of all files: file, line, key, what is wrong, what would be right.
    """
    return _shipped() if own is None else _joined(own)


@lru_cache(maxsize=1)
def _shipped() -> Catalogue:
    return _catalogue(*_shipped_files())


@lru_cache(maxsize=1)
def _shipped_files() -> tuple[dict[str, DataFile[KindFileTable]], dict[str, DataFile[IndexFileTable]]]:
    kinds, indices, problems = _files(shipped_rules(), "rules")
    if problems:
        raise SiteError(problems, "rules")
    return kinds, indices


def _joined(own: Path) -> Catalogue:
    """The shipped files with the user's in front."""
    shown = "".join(sign if sign.isprintable() else "�" for sign in str(own))
    if not own.is_dir():
        what = "this is a file" if own.exists() else "there is no such folder"
        raise SiteError([Problem("", what, f"Give a folder that holds {KINDS}/ or {INDICES}/")], shown)
    if not any((own / name).is_dir() for name in (KINDS, INDICES)):
        raise SiteError([Problem("", f"the folder holds neither {KINDS}/ nor {INDICES}/",
                                 f"Put files of kinds into {KINDS}/ and of refractive indices into {INDICES}/")],
                        shown)  # fmt: skip
    kinds, indices, problems = _files(own, shown)
    if not kinds and not indices and not problems:
        raise SiteError([Problem("", f"neither {KINDS}/ nor {INDICES}/ holds a file *.toml",
                                 "Name each file of a kind or an index so that it ends in .toml")], shown)  # fmt: skip
    shipped_kinds, shipped_indices = _shipped_files()
    try:
        made = _catalogue(_in_front(kinds, shipped_kinds), _in_front(indices, shipped_indices), problems)
    except SiteError as error:
        raise SiteError(error.problems, shown) from None
    taken = {plain_name(name) for name in shipped_kinds}
    marked = {
        name: replace(made.kinds[name], origin="replacing" if plain_name(name) in taken else "added") for name in kinds
    }
    return replace(made, kinds={**made.kinds, **marked})


def _in_front(own: dict[str, DataFile[Read]], shipped: dict[str, DataFile[Read]]) -> dict[str, DataFile[Read]]:
    """A user's entry takes the place of the shipped one of the same name."""
    replaced = {plain_name(name) for name in own}
    return {**{name: file for name, file in shipped.items() if plain_name(name) not in replaced}, **own}


def _files(
    folder: Path, shown: str
) -> tuple[dict[str, DataFile[KindFileTable]], dict[str, DataFile[IndexFileTable]], list[Problem]]:
    """All files of a rules folder that read well, by name, and the faults of the others."""
    problems: list[Problem] = []
    return (
        _tables(folder, shown, KINDS, KindFileTable, problems),
        _tables(folder, shown, INDICES, IndexFileTable, problems),
        problems,
    )


def _tables(
    folder: Path, shown: str, sort: str, model: type[Read], problems: list[Problem]
) -> dict[str, DataFile[Read]]:
    paths = sorted((folder / sort).glob("*.toml"))
    if len(paths) > MOST_FILES:
        wrong = f"the folder {sort} holds {len(paths)} files"
        problems.append(Problem("", wrong, f"Keep it to {MOST_FILES}", file=shown))
        return {}
    found: dict[str, DataFile[Read]] = {}
    seen: dict[str, str] = {}
    for path in paths:
        try:
            file = read_data_file(path, f"{shown}/{sort}/{path.name}", model)
        except SiteError as error:
            problems += error.problems
            continue
        name = file.table.name
        first = seen.setdefault(plain_name(name), file.file)
        if first != file.file:
            problems.append(file.problem(("name",), f"{quoted(name)} is also the name in {first}",
                                         "Give each file a name of its own"))  # fmt: skip
        found[name] = file
    return found


def _catalogue(
    kinds: Mapping[str, DataFile[KindFileTable]],
    indices: Mapping[str, DataFile[IndexFileTable]],
    problems: Iterable[Problem] = (),
) -> Catalogue:
    """Put together what the files say of one another; the user's come after the shipped ones.

    Raises
    ------
    SiteError
        With `problems` and those that show between files.
    """
    maker = _Maker(indices, list(problems))
    made: dict[str, Kind] = {}
    simple = {name: file for name, file in kinds.items() if not file.table.part}
    for name, file in simple.items():
        kind = maker.simple(file)
        if kind is not None:
            made[name] = kind
    for name, file in kinds.items():
        if file.table.part:
            kind = maker.mixture(file, kinds, made)
            if kind is not None:
                made[name] = kind
    maker.check_other_names(kinds)
    if maker.problems:
        raise SiteError(maker.problems, "rules")
    ordered = {name: made[name] for name in sorted(made)}
    # Names come before other names.
    names = {plain_name(other): name for name in kinds if name in made for other in made[name].also_called}
    names |= {plain_name(name): name for name in made}
    return Catalogue(ordered, {name: file.table.to_index() for name, file in indices.items()}, names)


class _Maker:
    """Makes kinds of files and collects what does not fit together."""

    def __init__(self, indices: Mapping[str, DataFile[IndexFileTable]], problems: list[Problem]) -> None:
        self._files = {plain_name(name): file for name, file in indices.items()}
        self._tables = {name: file.table.to_index() for name, file in self._files.items()}
        self.problems = problems

    def simple(self, file: DataFile[KindFileTable]) -> Kind | None:
        """A kind with sizes of its own; None where an index is missing."""
        table = file.table
        used: dict[str, dict] = {}
        index = self._index(file, ("index",), str(table.index), used)
        growth = None
        if table.growth is not None:
            water = self._index(file, ("growth", "water"), table.growth.water, used)
            lines = [f"{entry.from_} [{entry.mark}]" for entry in table.source
                     if any(text.split(".")[0] == "growth" for text in entry.of)]  # fmt: skip
            growth = None if water is None else table.growth.to_growth(water, "; ".join(lines))
        if index is None or (table.growth is not None and growth is None):
            return None
        density = None if table.density is None else float(table.density)
        return self._kind(file, modes_of(table.sizes), Material(index, density, growth), used, dict(file.document))

    def mixture(
        self, file: DataFile[KindFileTable], kinds: Mapping[str, DataFile[KindFileTable]], made: Mapping[str, Kind]
    ) -> Kind | None:
        """A kind made of others, each mode with the material of its part; None where a part is missing."""
        known = {plain_name(name): name for name in kinds}
        parts = []
        for position, part in enumerate(file.table.part):
            place: Place = ("part", position, "kind")
            name = known.get(plain_name(part.kind))
            if name is None:
                near = difflib.get_close_matches(plain_name(part.kind), known, n=1)
                mend = f"Perhaps {quoted(known[near[0]])} was meant" if near else "Name another kind of the catalogue"
                self.problems.append(file.problem(place, f"there is no kind {quoted(part.kind)}", mend))
            elif kinds[name].table.part:
                self.problems.append(file.problem(place, f"{quoted(name)} is itself made of parts",
                                                  "Name the parts of that kind one by one"))  # fmt: skip
            elif name in made:
                parts.append((made[name], float(part.number)))
        if len(parts) < len(file.table.part):
            return None
        total = sum(number for _, number in parts)
        modes = tuple(
            SizeMode(mode.shape, mode.weight * number / total, kind.material)
            for kind, number in parts for mode in kind.modes
        )  # fmt: skip
        used: dict[str, dict] = {}
        for kind, _ in parts:
            used |= kind.indices
        data = {**file.document, "parts as read": {kind.name: kind.data for kind, _ in parts}}
        first = parts[0][0].material
        # Every mode has a material; this one only says that a single density is not known.
        made_kind = self._kind(file, modes, Material(first.index, None), used, data)
        inherited = (f"{kind.name}: {line}" for kind, _ in parts for line in kind.sources)
        return replace(made_kind, sources=(*made_kind.sources, *inherited))

    def _index(
        self, file: DataFile[KindFileTable], place: Place, name: str, used: dict[str, dict]
    ) -> IndexTable | None:
        found = self._files.get(plain_name(name))
        if found is None:
            near = difflib.get_close_matches(plain_name(name), self._files, n=1)
            mend = (f"Perhaps {quoted(self._files[near[0]].table.name)} was meant" if near
                    else f"Add it as a file of its own in {INDICES}/")  # fmt: skip
            self.problems.append(file.problem(place, f"there is no refractive index {quoted(name)}", mend))
            return None
        used[found.table.name] = dict(found.document)
        return self._tables[plain_name(name)]

    def check_other_names(self, kinds: Mapping[str, DataFile[KindFileTable]]) -> None:
        """Another name may stand for one kind only."""
        taken = {plain_name(name): name for name in kinds}
        for name, file in kinds.items():
            for other in file.table.also_called:
                whose = taken.setdefault(plain_name(other), name)
                if whose != name:
                    wrong = f"{quoted(other)} stands for {quoted(whose)}"
                    mend = "Leave it out, or replace that kind by its own name"
                    self.problems.append(file.problem(("also_called",), wrong, mend))

    @staticmethod
    def _kind(
        file: DataFile[KindFileTable],
        modes: tuple[SizeMode, ...],
        material: Material,
        used: dict[str, dict],
        data: dict,
    ) -> Kind:
        table = file.table
        trust, with_own_sizes = table.trust.to_trust()
        spans = [f"{entry.from_} [{entry.mark}]" for entry in table.source
                 if any(text.split(".")[0] == "size_span" for text in entry.of)]  # fmt: skip
        written = file.document.get("load", [])
        return Kind(
            name=table.name, also_called=table.also_called, what=table.what, modes=modes, material=material,
            trust=trust, trust_with_own_sizes=with_own_sizes,
            size_span=None if table.size_span is None else table.size_span.to_span(
                "; ".join(spans), with_own_sizes.factor),
            typical=tuple(load.to_typical(entry) for load, entry in zip(table.load, written, strict=True)),
            sources=source_lines(table), file=file.file, data=data, indices=used,
        )  # fmt: skip
