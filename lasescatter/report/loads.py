"""Each load in full: what it is, its sizes and index, how far it is trusted, and what instruments would read of it."""

from __future__ import annotations

from typing import Any

from lasescatter.assessment.modes import mode_names, mode_rows
from lasescatter.assessment.outcome import Assessment, ComponentSummary
from lasescatter.matter import (
    HenyeyGreenstein,
    Index,
    IndexTable,
    Lognormal,
    Material,
    MeasuredMatrix,
    ModifiedGamma,
    SingleSize,
    SizeMode,
    SizeShape,
)
from lasescatter.report.front import NAME
from lasescatter.report.left_out import wavelengths
from lasescatter.report.quantities import digits, small_length, trimmed, wavelength
from lasescatter.report.readings import ReadingRow, reading_rows, reading_words
from lasescatter.report.size_movement import movement_section
from lasescatter.report.styles import heads, paragraph, ruled, words
from lasescatter.report.trust_words import trust_effect, trust_word
from lasescatter.report.typography import markup
from lasescatter.scene import Air, Load

KELVIN = 273.15
MOST_MODES = 12
COLUMNS = 4
"""Wavelengths side by side in the table of readings."""


def air_words(air: Air) -> str:
    """The state of the air, by its model."""
    state = (
        f"{trimmed(round(air.temperature - KELVIN, 3))} °C, {trimmed(air.pressure / 100)} hPa, "
        f"relative humidity {trimmed(100 * air.relative_humidity)} %"
    )
    if air.model == "uniform":
        return f"the same everywhere, {state}"
    return (
        f"1976 standard atmosphere with z = 0 at {trimmed(air.ground_altitude)} m above sea level: there {state}; its "
        "density changes with height along every way through it"
    )


def load_sections(assessment: Assessment) -> list[Any]:
    """Every load of the site."""
    story: list[Any] = []
    for load in assessment.scene.loads:
        entries = [entry for entry in assessment.components if entry.name == load.name]
        story.append(paragraph(f"Load: {markup(load.name, NAME)}", "subsection"))
        story.append(_facts(assessment, load, entries))
        for movement in assessment.size_movements:
            if movement.load == load.name:
                story += movement_section(movement, assessment)
        story += _readings(load, entries)
    return story


def _facts(assessment: Assessment, load: Load, entries: list[ComponentSummary]) -> Any:
    facts = [("Kind", _kind(assessment, load))]
    if load.stand_in is None:
        names = _names(assessment, load)
        facts.append(("Sizes, dry", _sizes(load.modes, names)))
        facts.append(("As they float", _floating(assessment.scene.air, entries)))
        facts += [("Material, dry", _material(load, names))]
        facts += [("Index as they float", _indices(assessment, load, entries, names))]
    else:
        facts.append(("Scattering matrix", _stand_in(load)))
    named = _own_tables(assessment, load)
    if named:
        facts.append(("Own tables", f"{named}: printed at the end of the section on inputs"))
    facts.append(("Trust", _trust(load, entries)))
    rows = [[paragraph(name, "cell bold"), paragraph(told, "cell")] for name, told in facts]
    return ruled(rows, [30, 144], head_rows=0)


def _kind(assessment: Assessment, load: Load) -> str:
    if not load.kind:
        if load.stand_in is not None:
            return "described by the user: a stand-in for the scattering matrix, without sizes or mass"
        return "described by the user: sizes and index"
    found = assessment.scene.rules.get("particles", {}).get(load.kind, {})
    what = found.get("what", "") if isinstance(found, dict) else ""
    origin = markup(load.kind_from, NAME) if load.kind_from else "the catalogue that comes with the program"
    told = f"<b>{markup(load.kind, NAME)}</b>, from {origin}"
    return f"{told}: {markup(str(what), 600)}" if what else told


def _names(assessment: Assessment, load: Load) -> tuple[str, ...]:
    """Names of the modes; "" for the one mode of a load that has no more."""
    if len(load.modes) == 1:
        return ("",)
    own = assessment.scene.rules.get("particles", {}).get(load.kind)
    # Sizes that the user states take the place of the kind's.
    return mode_names(len(load.modes), own if isinstance(own, dict) else None)


def _own_tables(assessment: Assessment, load: Load) -> str:
    """Files of the user's own that a load names."""
    entered = next((entry for entry in assessment.scene.source.get("particles", [])
                    if isinstance(entry, dict) and entry.get("name") == load.name), {})  # fmt: skip
    files = [name for name in assessment.scene.files if name in _texts(entered)]
    return ", ".join(markup(name, 120) for name in files)


def _texts(value: Any) -> list[str]:
    """Every text in nested tables."""
    if isinstance(value, str):
        return [value]
    inner = value.values() if isinstance(value, dict) else value if isinstance(value, list) else []
    return [text for part in inner for text in _texts(part)]


def _shape(shape: SizeShape) -> str:
    if isinstance(shape, Lognormal):
        told = (
            f"lognormal, median radius {_radius(shape.median_radius)}, geometric standard deviation "
            f"{trimmed(shape.geometric_sd)}"
        )
        cuts = [
            f"{word} {_radius(radius)}"
            for word, radius in (("below", shape.smallest), ("above", shape.largest))
            if radius is not None
        ]
        return f"{told}, none {' and none '.join(cuts)}" if cuts else told
    if isinstance(shape, ModifiedGamma):
        return (
            f"modified gamma, mode radius {_radius(shape.mode_radius)}, alpha {trimmed(shape.alpha)}, "
            f"gamma {trimmed(shape.gamma)}"
        )
    if isinstance(shape, SingleSize):
        return f"one radius, {_radius(shape.radius)}"
    return f"table of {len(shape.radii)} radii, {_radius(shape.radii[0])} to {_radius(shape.radii[-1])}"


def _radius(value: float) -> str:
    """As short as it can be said to four digits."""
    return small_length(float(f"{value:.4g}"), None)


def _sizes(modes: tuple[SizeMode, ...], names: tuple[str, ...]) -> str:
    if len(modes) == 1:
        return f"{_shape(modes[0].shape)} (by number)"
    told = [
        f"{markup(name, NAME)}: {digits(100 * mode.weight)} % by number: {_shape(mode.shape)}"
        for name, mode in zip(names[:MOST_MODES], modes, strict=False)
    ]
    if len(modes) > MOST_MODES:
        told.append(f"{len(modes) - MOST_MODES} more modes, in the inputs or the catalogue")
    return "<br/>".join(told)


def _floating(air: Air, entries: list[ComponentSummary]) -> str:
    factor = max((entry.growth_factor for entry in entries), default=1.0)
    humidity = f"at {trimmed(100 * air.relative_humidity)} % relative humidity"
    grown = f"radii up to {digits(factor, 4)} times the dry ones {humidity}" if factor > 1 else f"as dry {humidity}"
    radius = next((entry.effective_radius for entry in entries if entry.effective_radius is not None), None)
    return grown if radius is None else f"{grown}; effective radius {small_length(radius)}"


def _grows(load: Load) -> bool:
    """Whether a load takes up water in moist air."""
    materials = [load.material, *(mode.material for mode in load.modes)]
    return any(material is not None and material.growth is not None for material in materials)


def _material(load: Load, names: tuple[str, ...]) -> str:
    found: dict[Material, list[str]] = {}
    for name, mode in zip(names, load.modes, strict=True):
        material = mode.material or load.material
        if material is not None:
            found.setdefault(material, []).append(name)
    told = [_one_material(material) for material in found]
    if len(found) > 1:
        named = [markup(", ".join(these), 200) for these in found.values()]
        told = [f"<b>{these}</b>: {text}" for these, text in zip(named, told, strict=True)]
    return "<br/>".join(told[:MOST_MODES]) or "not stated"


def _one_material(material: Material) -> str:
    density = "density not stated" if material.density is None else f"density {trimmed(material.density)} kg/m³"
    growth = material.growth
    if growth is None:
        water = "takes up no water"
    elif growth.kappa is None:
        water = f"takes up water by a table of {len(growth.factors)} growth factors ({markup(growth.source, 200)})"
    else:
        water = f"takes up water, kappa {trimmed(growth.kappa)} ({markup(growth.source, 200)})"
    return f"{density}; index {_index_source(material.index)}; {water}"


def _index_source(index: Index) -> str:
    if not isinstance(index, IndexTable):
        return f"{index_words(index)} at every wavelength"
    ends = f"{wavelength(index.wavelengths[0])} to {wavelength(index.wavelengths[-1])}"
    return f"from the table “{markup(index.name, NAME)}”, {ends} ({markup(index.source, 300)})"


def index_words(index: complex) -> str:
    """n + ki as it is entered: "1.43 + 1e-6i"."""
    return f"{trimmed(index.real)} + {trimmed(index.imag)}i" if index.imag else trimmed(index.real)


def _indices(assessment: Assessment, load: Load, entries: list[ComponentSummary], names: tuple[str, ...]) -> str:
    if len(load.modes) > 1:
        return _indices_of_modes(assessment, load, entries, names)
    known = {entry.wavelength: entry for entry in entries}
    waves = wavelengths(assessment.scene)
    told = []
    for wave in waves:
        entry = known.get(wave)
        if entry is None:
            told.append(f"{wavelength(wave)}: not established, this load is left out there")
        elif entry.index is not None:
            told.append(f"{wavelength(wave)}: {_rounded(entry.index)}")
    return "; ".join(told) if told else "not computed"


def _indices_of_modes(
    assessment: Assessment, load: Load, entries: list[ComponentSummary], names: tuple[str, ...]
) -> str:
    waves = [entry.wavelength for entry in entries]
    told = []
    for row in mode_rows(load.modes, load.material, assessment.scene.air, waves, names)[:MOST_MODES]:
        grown = f", radii {digits(row.growth, 4)} times the dry ones" if row.growth > 1 else ""
        known = [
            f"{wavelength(wave)}: {_rounded(index)}"
            for wave, index in zip(waves, row.indices, strict=True)
            if index is not None
        ]
        told.append(f"<b>{markup(row.name, NAME)}</b>{grown}; {'; '.join(known)}" if known or grown else "")
    out = [wavelength(wave) for wave in wavelengths(assessment.scene) if wave not in waves]
    if out:
        told.append(f"{', '.join(out)}: not established, this load is left out there")
    return "<br/>".join(text for text in told if text) or "not computed"


def _rounded(index: complex) -> str:
    return f"{digits(index.real, 5)} + {digits(index.imag)}i" if index.imag else digits(index.real, 5)


def _stand_in(load: Load) -> str:
    albedo = "" if load.albedo is None else f"; albedo {trimmed(load.albedo)}"
    if isinstance(load.stand_in, HenyeyGreenstein):
        return (
            f"Henyey–Greenstein with asymmetry {trimmed(load.stand_in.asymmetry)}, named by the user; it has no "
            f"polarization, and true particles differ from it most to the side and back{albedo}"
        )
    assert isinstance(load.stand_in, MeasuredMatrix)
    found = load.stand_in
    held = ["F11", *(name for name in ("f12", "f33", "f34") if getattr(found, name) is not None)]
    return (
        f"measured, file {markup(found.file, 120)}: {', '.join(held).upper()} at {len(found.angles)} angles; F11 was "
        f"divided by {digits(found.normalised_by, 5)} to bring its mean over the sphere to 1{albedo}"
    )


def _trust(load: Load, entries: list[ComponentSummary]) -> str:
    """As it counts at each wavelength."""
    trusts = dict.fromkeys(entry.trust for entry in entries) or {load.trust: None}
    told = []
    for trust in trusts:
        waves = dict.fromkeys(wavelength(entry.wavelength) for entry in entries if entry.trust == trust)
        at = f"{', '.join(waves)}: " if len(trusts) > 1 else ""
        told.append(f"{at}<b>{trust_word(trust)}</b>: {markup(trust.reason, 400)}. {trust_effect(trust)}")
    return "<br/>".join(told).replace("..", ".")


def _readings(load: Load, entries: list[ComponentSummary]) -> list[Any]:
    stated = f"Read on site: <b>{markup(reading_words(load.reading, _grows(load)))}</b>."
    rows = reading_rows(reading for entry in entries for reading in entry.equivalents)
    if not rows:
        return [paragraph(stated)]
    waves = list(dict.fromkeys(wave for row in rows for wave in row.cells if wave is not None))
    from reportlab.platypus import KeepTogether

    carried = (
        "carried to the wavelength over each column through the load's own spectrum"
        if load.stand_in is None
        else "at the wavelength it was read at: without sizes it cannot be carried to another"
    )
    told = paragraph(
        f"<b>What instruments would read of this load.</b> {stated} The same load in other readings, for whatever "
        f"instrument is at hand: this load alone, air's share not included, {carried}."
    )
    first, *others = [
        _reading_table(rows, waves[start : start + COLUMNS], start == 0)
        for start in range(0, max(1, len(waves)), COLUMNS)
    ]
    return [KeepTogether([told, first]), *others]


def _reading_table(rows: list[ReadingRow], waves: list[float], with_untied: bool) -> Any:
    untied = with_untied and any(None in row.cells for row in rows)
    columns: list[float | None] = [*([None] if untied else []), *waves]
    table: list[list[Any]] = [
        heads(
            "Reading",
            "Unit",
            *("any wavelength" if wave is None else wavelength(wave) for wave in columns),
            numeric_from=2,
        )
    ]
    table += [
        [words(row.name), row.unit, *(row.cells.get(wave, "") for wave in columns)]
        for row in rows
        if any(wave in row.cells for wave in columns)
    ]
    return ruled(table, [62, 14, *[18.0] * len(columns)], numeric=tuple(range(2, 2 + len(columns))))
