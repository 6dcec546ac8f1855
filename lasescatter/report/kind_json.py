"""Kinds of the catalogue as plain JSON types: SI units, the unit in each name, null for what is not known."""

from __future__ import annotations

from typing import Any

from lasescatter.assessment.kind_optics import ANGLES, KindAtWavelength, KindOptics, KindValues, reach_of
from lasescatter.matter import Kind, Trust
from lasescatter.scene import LoadReading

_UNITS = {
    "extinction": "1/m", "mass": "kg/m^3", "number": "1/m^3", "meteorological_optical_range": "m",
    "visual_range": "m", "obscuration": "", "optical_density": "1/m", "attenuation": "dB/m", "transmittance": "",
}  # fmt: skip


def kind_summary(kind: Kind) -> dict[str, Any]:
    """What the list says of a kind."""
    reach, span = reach_of(kind), kind.size_span
    return {
        "name": kind.name,
        "also_called": list(kind.also_called),
        "what": kind.what,
        "trust": _trust(kind.trust),
        "trust_with_own_sizes": _trust(kind.trust_with_own_sizes),
        "answers_m": None if reach is None else [reach.low, reach.high],
        "weak_m": [] if reach is None else [list(span) for span in reach.weak],
        "size": None
        if span is None
        else {"what": span.what, "usual_m": span.usual, "low_m": span.low, "high_m": span.high, "source": span.source},
        "file": kind.file,
        "origin": kind.origin,
    }


def kind_in_full(found: KindOptics) -> dict[str, Any]:
    """Everything of one kind, its curves included."""
    return {
        **kind_summary(found.kind),
        "sources": list(found.kind.sources),
        "relative_humidity": found.air.relative_humidity,
        "temperature_k": found.air.temperature,
        "growth_factor": found.growth_factor,
        "wavelengths": [_at(entry) for entry in found.wavelengths],
        "loads": [
            {"reading": _reading(load.reading), "not_established": load.gap or None,
             "equivalents": [_reading(reading) for reading in load.equivalents]}
            for load in found.loads
        ],
    }  # fmt: skip


def _trust(trust: Trust) -> dict[str, Any]:
    return {"mark": trust.mark, "factor": trust.factor, "reason": trust.reason}


def _at(entry: KindAtWavelength) -> dict[str, Any]:
    if entry.usual is None:
        return {"wavelength_m": entry.wavelength, "not_established": entry.gap}
    return {
        "wavelength_m": entry.wavelength,
        "not_established": None,
        "trust": _trust(entry.trust),
        **_values(entry.usual),
        "sizes": [{"size_m": size.size, **_values(size.values)} for size in entry.sizes],
        "angles_rad": list(entry.angles),
        "f11_per_4pi_sr": list(entry.phase),
        "f12_per_4pi_sr": list(entry.phase_12),
    }


def _values(values: KindValues) -> dict[str, Any]:
    return {
        "index": [values.index.real, values.index.imag],
        "extinction_m2": values.extinction,
        "mass_extinction_m2_per_kg": values.mass_extinction,
        "mass_extinction_dry_m2_per_kg": values.mass_extinction_dry,
        "albedo": values.albedo,
        "asymmetry": values.asymmetry,
        "effective_radius_m": values.effective_radius,
        **{f"f11_per_4pi_sr_{angle:g}_deg": value for angle, value in zip(ANGLES, values.phase, strict=True)},
        "linear_polarization_90_deg": values.polarization,
        "error_f11": values.error_f11,
        "error_extinction": values.error_extinction,
        "size_nodes": values.nodes,
    }


def _reading(reading: LoadReading) -> dict[str, Any]:
    return {
        "reading": reading.kind, "value": reading.value, "unit": _UNITS[reading.kind], "at_m": reading.at,
        "over_m": reading.over, "as": reading.basis,
    }  # fmt: skip
