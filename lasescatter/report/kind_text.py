"""Kinds of the catalogue on a terminal: the list, and one kind in full."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING

from lasescatter.assessment.kind_optics import (
    ANGLES,
    KindAtWavelength,
    KindOptics,
    KindValues,
    LoadOfKind,
    Reach,
    reach_of,
)
from lasescatter.assessment.modes import mode_names, mode_rows
from lasescatter.matter import Kind
from lasescatter.report.loads import air_words
from lasescatter.report.own_kinds import ORIGIN_WORDS
from lasescatter.report.quantities import digits, trimmed, wavelength
from lasescatter.report.readings import reading_rows, reading_words
from lasescatter.report.text_page import TextPage
from lasescatter.report.trust_words import trust_effect, trust_word
from lasescatter.report.typography import plain

if TYPE_CHECKING:
    from rich.console import Console

_LABEL, _CELL = 30, 10
_COLUMNS, _LOAD_COLUMNS = 4, 3
"""Wavelengths side by side."""

Row = tuple[str, Callable[[KindValues], str]]


def print_list(kinds: Sequence[Kind], console: Console) -> None:
    """All kinds as a table: how far each is trusted, where its data answer, whether its size must be stated."""
    page = TextPage(console)
    rows = [[_called(kind), kind.trust.mark, *_answers(reach_of(kind)), _asked(kind)] for kind in kinds]
    head = ("Kind", "Trust", "Answers [nm]", "of these weak [nm]", "Size to state: median diameter [µm]")
    page.table(head, rows, (22, 11, 9, 15, 15))
    page.gap()
    factors: dict[str, set[float]] = {}
    for kind in kinds:
        factors.setdefault(kind.trust.mark, set()).add(kind.trust.factor)
    listed = "; ".join(
        f"{mark} {' or '.join(trimmed(factor) for factor in sorted(found))}" for mark, found in sorted(factors.items())
    )
    page.say(
        f"Trust: the upper bound of a ratio takes the scattered light so many times: {listed}. Answers: where the "
        "index is known; elsewhere not established. Weak there: the index has not been seen in its source, and the "
        "factor is 3 at least. Size to state: where it is uncertain, the site file had better state it; the report "
        "prints how the answer moves over it."
    )
    page.say("One kind in full: lasescatter particles show KIND --wavelength W")


def _answers(reach: Reach | None) -> tuple[str, str]:
    if reach is None:
        return "any", ""
    if reach.low >= reach.high:
        return "none", ""
    weak = ", ".join(_span(*span, "-") for span in reach.weak)
    return _span(reach.low, reach.high, "-"), "all" if reach.weak == ((reach.low, reach.high),) else weak


def _asked(kind: Kind) -> str:
    if kind.size_span is None:
        return ""
    return f"{_sizes(kind, '-')} {plain(kind.size_span.what).removeprefix('median diameter').strip()}".strip()


def _called(kind: Kind) -> str:
    origin = ORIGIN_WORDS[kind.origin]
    return plain(kind.name) + (f" ({origin})" if origin else "")


def reach_words(reach: Reach | None) -> str:
    """For example "300 to 1100 nm; weak 300 to 400 nm"."""
    if reach is None:
        return "any: one index for all"
    if reach.low >= reach.high:
        return "none: its index tables share no wavelength"
    told = f"{_span(reach.low, reach.high)} nm"
    if reach.weak == ((reach.low, reach.high),):
        return f"{told}, all weak"
    return f"{told}; weak {', '.join(_span(*span) for span in reach.weak)} nm" if reach.weak else told


def _span(low: float, high: float, dash: str = " to ") -> str:
    return f"{_short(low * 1e9, 6)}{dash}{_short(high * 1e9, 6)}"


def _sizes(kind: Kind, dash: str = " to ") -> str:
    assert kind.size_span is not None
    return f"{_short(kind.size_span.low * 1e6)}{dash}{_short(kind.size_span.high * 1e6)}"


def _short(value: float, count: int = 3) -> str:
    return trimmed(float(f"{value:.{count}g}"))


def print_kind(found: KindOptics, console: Console) -> None:
    """One kind: what it is, its optics at each wavelength, over its sizes, and for stated loads."""
    page = TextPage(console)
    _about(found, page)
    known = [entry for entry in found.wavelengths if entry.usual is not None]
    for first in range(0, len(known), _COLUMNS):
        page.gap()
        _values(known[first : first + _COLUMNS], found, page)
        _modes(known[first : first + _COLUMNS], found, page)
    _gaps(found, page)
    for entry in known:
        if entry.sizes:
            page.gap()
            _over_sizes(entry, found, page)
    for load in found.loads:
        page.gap()
        _load(load, found, page)
    page.gap()
    page.say("Sources:", style="bold")
    for source in found.kind.sources:
        page.item(plain(source))


def _about(found: KindOptics, page: TextPage) -> None:
    kind = found.kind
    page.say(plain(kind.name), style="bold")
    page.say(plain(kind.what))
    if kind.origin != "shipped":
        page.say(f"From: {plain(kind.origin_words)}", indent=2)
    if kind.also_called:
        page.say(f"Also called: {plain(', '.join(kind.also_called))}", indent=2)
    page.say(f"Wavelengths: {reach_words(reach_of(kind))}", indent=2)
    trusts = {entry.trust for entry in found.wavelengths if entry.usual is not None} or {kind.trust}
    for trust in [kind.trust, *sorted(trusts - {kind.trust}, key=lambda trust: trust.factor)]:
        at = [wavelength(entry.wavelength) for entry in found.wavelengths if entry.usual and entry.trust == trust]
        where = "" if trust == kind.trust else f" at {', '.join(at)}"
        page.say(f"Trust{where}: {trust_word(trust)}: {plain(trust.reason)}", indent=2)
    if kind.trust_with_own_sizes != kind.trust:
        own = kind.trust_with_own_sizes
        page.say(f"Trust where you state the sizes: {trust_word(own)}: {plain(own.reason)}", indent=2)
    page.say(trust_effect(max([kind.trust, *trusts], key=lambda trust: trust.factor)), indent=2)
    if kind.size_span is not None:
        usual = _short(kind.size_span.usual * 1e6)
        page.say(
            f"Size: {plain(kind.size_span.what)} {usual} µm, and may be {_sizes(kind)} µm: state it in the site file "
            f"({plain(kind.size_span.source)})", indent=2,
        )  # fmt: skip
    for load in kind.typical:
        # A limit for breathing stands beside the loads that are met; it is none of them.
        label = "For comparison" if "limit" in load.what.lower() else "Typical"
        page.say(f"{label}: {plain(load.what)}: {load.reading} = {plain(load.written)}", indent=2)
    grown = (
        f"radii up to {digits(found.growth_factor, 4)} times the dry ones"
        if found.growth_factor > 1
        else "no water taken up"
    )
    page.say(f"Air: {air_words(found.air)}; {grown}", indent=2)


def _main_rows(grown: bool, dry: bool) -> list[Row]:
    rows: list[Row] = []
    if dry:
        name = "mass extinction, dry" if grown else "mass extinction"
        rows.append((f"{name} [m²/g]", lambda v: _per_gram(v.mass_extinction_dry)))
    if grown:
        rows.append(("mass extinction, wet [m²/g]", lambda v: _per_gram(v.mass_extinction)))
    rows += [
        ("extinction per particle [m²]", lambda v: digits(v.extinction)),
        ("albedo", lambda v: digits(v.albedo, 4)),
        ("asymmetry", lambda v: digits(v.asymmetry, 4)),
        ("effective radius [µm]", lambda v: "–" if v.effective_radius is None else digits(v.effective_radius * 1e6)),
    ]
    rows += [
        (f"F11/(4π) at {angle:g}° [1/sr]", lambda v, place=place: digits(v.phase[place]))  # type: ignore[misc]
        for place, angle in enumerate(ANGLES)
    ]
    return [*rows, ("linear polarization at 90°", lambda v: digits(v.polarization))]


def _per_gram(value: float | None) -> str:
    return digits(None if value is None else value * 1e-3)


def _values(entries: Sequence[KindAtWavelength], found: KindOptics, page: TextPage) -> None:
    values = [entry.usual for entry in entries if entry.usual is not None]
    several = len(found.kind.modes) > 1
    index_rows: list[Row] = [
        ("index n", lambda v: digits(v.index.real, 5)),
        ("index k", lambda v: digits(v.index.imag)),
    ]
    rows: list[Row] = [
        *([] if several else index_rows),
        *_main_rows(found.growth_factor > 1, any(v.mass_extinction_dry is not None for v in values)),
        ("error of F11 at worst angle", lambda v: digits(v.error_f11, 2)),
        ("error of extinction", lambda v: digits(v.error_extinction, 2)),
    ]
    body = [[name, *(told(v) for v in values)] for name, told in rows]
    body.append(["trust, factor", *(trimmed(entry.trust.factor) for entry in entries)])
    page.table(
        ("", *(wavelength(entry.wavelength) for entry in entries)), body, (_LABEL, *[_CELL] * len(values)), numeric=1
    )


def _modes(entries: Sequence[KindAtWavelength], found: KindOptics, page: TextPage) -> None:
    """Share, growth and index of each mode, where there are several."""
    kind, waves = found.kind, [entry.wavelength for entry in entries]
    if len(kind.modes) == 1:
        return
    names = mode_names(len(kind.modes), kind.data)
    rows = mode_rows(kind.modes, kind.material, found.air, waves, names)
    body = []
    page.gap()
    page.say("Modes as they float:", style="bold")
    for row in rows:
        grown = f", radii {digits(row.growth, 4)} times the dry ones" if row.growth > 1 else ""
        page.item(f"{plain(row.name)}: {digits(100 * row.share)} % by number{grown}")
        indices = [index for index in row.indices if index is not None]
        body.append([f"{plain(row.name)}, n", *(digits(index.real, 5) for index in indices)])
        body.append(["  k", *(digits(index.imag) for index in indices)])
    page.table(("Index", *(wavelength(at) for at in waves)), body, (_LABEL, *[_CELL] * len(waves)), numeric=1)


def _gaps(found: KindOptics, page: TextPage) -> None:
    for entry in found.wavelengths:
        if entry.usual is None:
            page.gap()
            page.say(f"{wavelength(entry.wavelength)}: not established: {plain(entry.gap)}", indent=2)


def _over_sizes(entry: KindAtWavelength, found: KindOptics, page: TextPage) -> None:
    span = found.kind.size_span
    assert span is not None
    rows = _main_rows(found.growth_factor > 1, entry.sizes[0].values.mass_extinction_dry is not None)
    page.say(f"At {wavelength(entry.wavelength)} over {plain(span.what)}:", style="bold")
    heads = [f"{_short(size.size * 1e6)} µm" for size in entry.sizes]
    body = [[name, *(told(size.values) for size in entry.sizes)] for name, told in rows]
    page.table(("", *heads), body, (_LABEL, *[_CELL] * len(heads)), numeric=1)


def _load(load: LoadOfKind, found: KindOptics, page: TextPage) -> None:
    grows = any((mode.material or found.kind.material).growth is not None for mode in found.kind.modes)
    page.say(f"Load: {reading_words(load.reading, grows)}", style="bold")
    if load.gap:
        page.say(f"not established: {plain(load.gap)}", indent=2)
        return
    span = found.kind.size_span
    if span is not None:
        page.say(
            f"At the usual size, {_short(span.usual * 1e6)} µm; at another size the same reading stands for other "
            "values: extinction per mass and per particle over the sizes are in the tables above.", indent=2,
        )  # fmt: skip
    rows = reading_rows(load.equivalents)
    waves = list(dict.fromkeys(wave for row in rows for wave in row.cells if wave is not None))
    for first in range(0, max(1, len(waves)), _LOAD_COLUMNS):
        columns: list[float | None] = [*([None] if first == 0 else []), *waves[first : first + _LOAD_COLUMNS]]
        body = [
            [f"{row.name} [{row.unit}]" if row.unit else row.name, *(row.cells.get(wave, "") for wave in columns)]
            for row in rows
            if any(wave in row.cells for wave in columns)
        ]
        heads = ["any wavelength" if wave is None else wavelength(wave) for wave in columns]
        page.table(("Instruments would read", *heads), body, (_LABEL, *[_CELL] * len(heads)), numeric=1)
