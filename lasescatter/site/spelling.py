"""Keys that no table reads: refused by name, or with the nearest key that is read.

A misspelt key must not set off a second message that the right one is missing. So before the tables are
read, such a key is taken out of the document and a placeholder put where the right one would stand: it
carries the message, and rules see that something was stated there.
"""

from __future__ import annotations

import difflib
from collections.abc import Collection, Mapping
from dataclasses import dataclass
from typing import Any

from lasescatter.site.contract import NOT_BUILT, NotBuilt, TableName

MOST_GUESSES = 100
"""Unknown keys of one table whose meaning is guessed."""

_LISTS = {("beam",), ("beam", "line"), ("particles",), ("observer",), ("limit",)}

# Other names and spellings, to the key that may be meant.
OTHER_NAMES: Mapping[str, str] = {
    "polarisation": "polarization", "polarisation_ratio": "polarization_ratio", "pol": "polarization",
    "extinction_ratio": "polarization_ratio", "e_field": "electric_field", "field": "electric_field",
    "color": "wavelength", "colour": "wavelength", "lambda": "wavelength", "wave_length": "wavelength",
    "waist": "diameter", "spot_size": "diameter", "beam_diameter": "diameter", "criterion": "diameter_criterion",
    "full_angle": "divergence", "beam_divergence": "divergence", "mirror": "mirrors", "points": "path",
    "reflectivity": "reflectance", "albedo": "reflectance", "rho": "reflectance", "normal": "facing",
    "mirror_reflectivity": "mirror_reflectance", "surface": "finish", "dump": "beam_stop", "stop": "beam_stop",
    "beam_dump": "beam_stop", "endless": "leaves_site", "wavelength_line": "line", "repetition_rate": "rate",
    "prf": "rate", "frequency": "rate", "pulse_energy": "energy", "pulse_duration": "duration",
    "pulse_width": "duration", "pulse_length": "duration", "center": "centre", "laser": "beam", "lasers": "beam",
    "haze": "particles", "aerosol": "particles", "smoke": "particles", "person": "observer", "people": "observer",
    "receptor": "observer", "gsd": "geometric_sd", "sigma": "geometric_sd", "median": "median_radius",
    "refractive_index": "index", "mode": "mode_radius", "concentration": "mass", "wavelength": "at",
    "location": "position", "exposure_time": "duration", "time": "duration", "exposure_duration": "duration",
    "head_movement": "reach", "humidity": "relative_humidity", "rh": "relative_humidity", "temp": "temperature",
    "author": "prepared_by", "prepared": "prepared_by", "units": "lengths_in", "unit": "lengths_in",
    "length_unit": "lengths_in", "lengths": "lengths_in", "name": "title", "ref": "reference", "mpe": "value",
    "elv": "value", "el": "value", "exposure_limit": "value", "wavelength_range": "wavelengths",
    "duration_range": "durations", "times": "durations", "organ": "tissue", "exponent": "time_exponent",
    "acceptance_angle": "acceptance", "entered": "entered_by", "pupil": "aperture", "excluded": "not_judged",
    "mor": "meteorological_optical_range", "optical_range": "meteorological_optical_range", "od": "optical_density",
    "transmission": "transmittance", "opacity": "obscuration", "smoke_density": "optical_density",
    "attenuation_coefficient": "attenuation", "path_length": "over", "distance": "over", "basis": "as",
    "asymmetry": "henyey_greenstein", "g": "henyey_greenstein", "phase_function": "matrix_file",
    "matrix": "matrix_file", "single_scattering_albedo": "albedo", "ssa": "albedo", "species": "kind", "sort": "kind",
    "csv": "file", "mass_concentration": "mass", "number_concentration": "number",
}  # fmt: skip


@dataclass(frozen=True)
class Placeholder:
    """Stands in the document where a key would be, had the user not written another one."""

    key: str
    """The key as the user wrote it."""
    wrong: str
    """"" where another placeholder tells it."""
    mend: str


def header(table: TableName) -> str:
    """A table as its header is written: [[beam]], [particles.load]."""
    name = ".".join(table)
    return f"[[{name}]]" if table in _LISTS else f"[{name}]"


def not_built(table: TableName, key: str) -> NotBuilt | None:
    """The entry for a key of this table."""
    return next((entry for entry in NOT_BUILT if entry.table == table and entry.key == key), None)


def unknown_key(
    table: TableName, key: str, known: Mapping[TableName, Collection[str]], value: Any = None
) -> tuple[str, str]:
    """What is wrong with a key that no field reads, and what would be right.

    `known` holds the keys that are read, by table; `value` is what the key has in the file.
    """
    entry = not_built(table, key)
    if entry:
        return entry.message, entry.advice(value)
    wrong = f"this key is not known in {header(table)}" if table else "this key is not known"
    read, later = list(known.get(table, ())), [entry.key for entry in NOT_BUILT if entry.table == table]
    near = nearest(key, [*read, *later])
    if near:
        return wrong, f'Perhaps "{near}" was meant' + (" (not built yet)" if near in later else "")
    elsewhere = [other for other, keys in known.items() if key in keys and other != table]
    if elsewhere:
        return wrong, f"It belongs in {header(elsewhere[0])}" if elsewhere[0] else "It belongs at the top of the file"
    entry = next((entry for entry in NOT_BUILT if entry.key == key), None)
    if entry:
        home = header(entry.table) if entry.table else "the top of the file"
        return f"{entry.message}; it would belong in {home}", entry.advice(value)
    return wrong, f"Known here are {', '.join(read)}"


def nearest(key: str, candidates: Collection[str]) -> str | None:
    """The candidate that a key may be a misspelling or another name of."""
    plain = key.strip().lower().replace("-", "_").replace(" ", "_")
    for guess in (plain, plain.removesuffix("s"), plain + "s", OTHER_NAMES.get(plain, "")):
        if guess in candidates:
            return guess
    close = difflib.get_close_matches(plain, candidates, n=1, cutoff=0.7) if len(plain) <= 60 else []
    return close[0] if close else None


def with_placeholders(
    document: Mapping[str, Any], known: Mapping[TableName, Collection[str]], table: TableName = ()
) -> dict[str, Any]:
    """A copy of a table of the document in which keys that stand for another one are replaced by placeholders."""
    keys = known[table]
    result: dict[str, Any] = {}
    for key, value in document.items():
        inner = (*table, key)
        if inner not in known or key not in keys:
            result[key] = value
        elif isinstance(value, Mapping):
            result[key] = with_placeholders(value, known, inner)
        elif isinstance(value, list):
            result[key] = [
                with_placeholders(entry, known, inner) if isinstance(entry, Mapping) else entry for entry in value
            ]
        else:
            result[key] = value
    for key in [key for key in document if key not in keys][:MOST_GUESSES]:
        entry = not_built(table, key)
        near = nearest(key, list(keys)) if entry is None else None
        stood_for = [name for name in (entry.instead_of if entry else (near,)) if name and name not in result]
        if stood_for:
            del result[key]
            wrong, mend = unknown_key(table, key, known, document[key])
            result[stood_for[0]] = Placeholder(key, wrong, mend)
            result.update({name: Placeholder(key, "", "") for name in stood_for[1:]})
    return result
