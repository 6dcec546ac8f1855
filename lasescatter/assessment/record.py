"""The record: a whole assessment as JSON, with a digest of everything but the time it was made."""

from __future__ import annotations

import hashlib
import json
import math
from dataclasses import asdict
from typing import Any

from lasescatter.assessment.outcome import (
    Assessment,
    ComponentSummary,
    HandCheck,
    InTheBeam,
    LineExposure,
    ObserverOutcome,
    SizeMovement,
    StopCheck,
)
from lasescatter.limits.compare import Comparison, HazardJudgement
from lasescatter.scene import QUANTITY_UNITS, LoadReading, Scene

FORMAT = "lasescatter record 1"


def record(assessment: Assessment) -> dict[str, Any]:
    """The record of an assessment, plain JSON types; every number is finite, or null with a reason beside it."""
    provenance = assessment.provenance
    body: dict[str, Any] = {
        "format": FORMAT,
        "program": {"version": provenance.version, "numpy": provenance.numpy, "scipy": provenance.scipy},
        "made_at": provenance.made_at,
        "site": assessment.scene.source,
        "files": assessment.scene.files,
        "rules": assessment.scene.rules,
        "verdict": assessment.verdict,
        "particles": [_component(component, assessment.scene) for component in assessment.components],
        "in_the_beam": [_in_the_beam(entry) for entry in assessment.in_the_beam],
        "observers": [_observer(observer) for observer in assessment.observers],
        "size_movements": [_size_movement(entry, assessment.observers) for entry in assessment.size_movements],
        "gaps": list(assessment.gaps),
        "maps": [],
        "assumptions": [asdict(entry) for entry in assessment.assumptions],
        "cautions": list(assessment.cautions),
    }
    body["digest"] = digest_of(body)
    return body


def digest_of(body: dict[str, Any]) -> str:
    """sha256 of a record's canonical form: sorted keys, no spaces, without `made_at` and `digest`."""
    kept = {key: value for key, value in body.items() if key not in ("made_at", "digest")}
    text = json.dumps(kept, sort_keys=True, separators=(",", ":"), ensure_ascii=False, allow_nan=False)
    return hashlib.sha256(text.encode("utf-8", "surrogatepass")).hexdigest()


def record_text(body: dict[str, Any]) -> str:
    """A record as the text of its file."""
    return json.dumps(body, indent=1, ensure_ascii=False, allow_nan=False) + "\n"


def _component(component: ComponentSummary, scene: Scene) -> dict[str, Any]:
    index = component.index
    body: dict[str, Any] = {
        "name": component.name,
        "beam": [line.name for beam in scene.beams for line in beam.lines if line.wavelength == component.wavelength],
        "wavelength_m": component.wavelength,
        "kind": component.kind,
        "extinction_per_m": component.extinction,
        "scattering_per_m": component.scattering,
        "albedo": component.albedo,
        "asymmetry": component.asymmetry,
        "index": None if index is None else {"real": index.real, "imaginary": index.imag},
        "growth_factor": component.growth_factor,
        "trust": {"mark": component.trust.mark, "factor": component.trust.factor, "reason": component.trust.reason},
        "equivalents": {
            "number_per_m3": component.number,
            "mass_kg_m3": component.mass,
            "dry_mass_kg_m3": component.dry_mass,
            "mass_extinction_m2_kg": component.mass_extinction,
            "readings": [_reading(reading) for reading in component.equivalents],
        },
        "effective_radius_m": component.effective_radius,
        "size_nodes": component.size_nodes,
        "error_f11": component.error_f11,
        "error_extinction": component.error_extinction,
    }
    reason = _without(component, scene)
    if reason:
        body["reason"] = reason
    return body


def _without(component: ComponentSummary, scene: Scene) -> str:
    """Why some of a component's values are null; "" where none is."""
    load = next((load for load in scene.loads if load.name == component.name), None)
    if load is None or component.size_nodes is None:
        return "molecules: closed form, no sizes; number, mass and index of particles are not used"
    if load.stand_in is not None:
        return "a stand-in for the scattering matrix has neither sizes nor index, so there is no number and no mass"
    return "no density is stated, so there is no mass" if component.mass is None else ""


def _reading(reading: LoadReading) -> dict[str, Any]:
    """A reading in SI units, with the conditions that belong to its kind."""
    conditions = {"at_m": reading.at, "over_m": reading.over, "as": reading.basis}
    return {"kind": reading.kind, "value": reading.value} | {k: v for k, v in conditions.items() if v is not None}


def _size_movement(movement: SizeMovement, observers: tuple[ObserverOutcome, ...]) -> dict[str, Any]:
    return {
        "load": movement.load,
        "kind": movement.kind,
        "what": movement.what,
        "usual_m": movement.usual,
        "sizes_m": list(movement.sizes),
        "observers": [
            {"name": observer.name, "line": line, "own_scattered_w_m2": list(light), "factor": factor}
            for observer, line, light, factor in zip(
                observers, movement.line, movement.scattered, movement.factor, strict=True
            )
        ],
        "source": movement.source,
    }


def _in_the_beam(entry: InTheBeam) -> dict[str, Any]:
    endless = entry.hazard_distance is not None and math.isinf(entry.hazard_distance)
    return {
        "beam": entry.beam,
        "line": entry.line,
        "wavelength_m": entry.wavelength,
        "limit": entry.limit,
        "unit": entry.unit,
        "time_s": entry.duration,
        "limit_value": entry.limit_value,
        "hazard_limit": entry.hazard_limit,
        "hazard_distance_m": None if endless else entry.hazard_distance,
        "reason": "the beam never widens: no distance is enough" if endless else entry.reason,
        "spots": [
            {
                "place": spot.place,
                "position_m": list(spot.position),
                "path_length_m": spot.path_length,
                "diameter_m": spot.diameter,
                "direct": spot.direct,
                "multiple": spot.multiple,
                "limit": spot.limit,
                "white_card_distance_m": spot.diffuse_distance,
                "white_card_multiple": spot.diffuse_multiple,
            }
            for spot in entry.spots
        ],
    }


def _observer(observer: ObserverOutcome) -> dict[str, Any]:
    body: dict[str, Any] = {
        "name": observer.name,
        "verdict": observer.verdict,
        "reasons": list(observer.reasons),
        "ratio": observer.ratio,
        "governing": observer.governing,
        "position_m": list(observer.position),
        "nearest_m": observer.nearest,
        "nearest_beam": observer.nearest_beam,
        "scattered_w_m2": observer.total("scattered"),
        "scattered_error_w_m2": observer.total("scattered_error"),
        "scattered_compared_w_m2": observer.total("scattered_compared"),
        "higher_orders_w_m2": None,
        "higher_orders_reason": "orders two and up are not computed; see optical_thickness",
        "diffuse_w_m2": observer.total("diffuse"),
        "direct_w_m2": observer.total("direct"),
        "optical_thickness": observer.optical_thickness,
        "optical_thickness_within_reach": observer.thickness_within_reach,
        "optical_thickness_doubted": observer.thickness_doubted,
        "direct_within_reach": observer.direct_reach,
        "lines": [_line(line) for line in observer.lines],
        "legs": [_leg(row) for row in observer.hand_checks],
        "stops": [_stop(check) for check in observer.stop_checks],
        "comparisons": [_comparison(comparison) for comparison in observer.comparisons],
        "hazards": [_hazard(hazard) for hazard in observer.hazards],
        "beam_visibility": None,
        "beam_visibility_reason": "not computed",
    }
    if any(line.pulse_scattered is not None for line in observer.lines):
        for name in ("scattered", "compared", "diffuse", "direct"):
            body[f"{name}_j_m2"] = sum(getattr(line, f"pulse_{name}") or 0.0 for line in observer.lines)
    return body


def _line(line: LineExposure) -> dict[str, Any]:
    body: dict[str, Any] = {
        "beam": line.beam,
        "line": line.line,
        "wavelength_m": line.wavelength,
        "scattered_w_m2": line.scattered,
        "scattered_error_w_m2": line.scattered_error,
        "scattered_unpolarized_w_m2": line.scattered_unpolarised,
        "scattered_compared_w_m2": line.scattered_compared,
        "load_fraction": line.load_fraction,
        "diffuse_w_m2": line.diffuse,
        "diffuse_compared_w_m2": line.diffuse_compared,
        "direct_w_m2": line.direct,
        "optical_thickness": line.optical_thickness,
        "optical_thickness_within_reach": line.thickness_within_reach,
        "optical_thickness_doubted": line.thickness_doubted,
    }
    if line.pulse_scattered is not None:
        body |= {
            "scattered_j_m2": line.pulse_scattered,
            "compared_j_m2": line.pulse_compared,
            "diffuse_j_m2": line.pulse_diffuse,
            "direct_j_m2": line.pulse_direct,
        }
    return body


def _leg(row: HandCheck) -> dict[str, Any]:
    endless = math.isinf(row.length)
    body: dict[str, Any] = {
        "beam": row.beam,
        "line": row.line,
        "leg": row.leg,
        "component": row.component,
        "power_w": row.power,
        "b_m": row.b,
        "s0_m": row.s0,
        "length_m": None if endless else row.length,
        "theta_from_rad": row.theta1,
        "theta_to_rad": row.theta2,
        "scattering_per_m": row.scattering,
        "polarization": row.polarization,
        "q": row.q,
        "phi_rad": row.phi,
        "integral_11": row.integral_11,
        "integral_12": row.integral_12,
        "integral": row.integral,
        "theta_mid_rad": row.theta_mid,
        "s_mid_m": row.s_mid,
        "r_mid_m": row.r_mid,
        "tau_beam": row.tau_beam,
        "tau_sight": row.tau_sight,
        "hand_w_m2": row.hand,
        "scattered_w_m2": row.program,
        "remark": row.remark,
    }
    if endless:
        body["length_reason"] = "the leg leaves the site"
    if row.phi is None:
        body["phi_reason"] = row.polarization
    return body


def _stop(check: StopCheck) -> dict[str, Any]:
    return {
        "beam": check.beam,
        "line": check.line,
        "power_w": check.power,
        "reflectance": check.reflectance,
        "r_m": check.r,
        "cosine": check.cosine,
        "tau": check.tau,
        "compared_w_m2": check.compared,
        "diffuse_w_m2": check.stated,
    }


def _comparison(comparison: Comparison) -> dict[str, Any]:
    return {
        "limit": comparison.limit,
        "beam": comparison.beam,
        "line": comparison.line,
        "hazard": comparison.hazard,
        "tissue": comparison.tissue,
        "mechanism": comparison.mechanism,
        "quantity": comparison.quantity,
        "duration_s": comparison.duration,
        "counted_s": comparison.counted,
        "time_s": comparison.time,
        "exposure": comparison.exposure,
        "limit_value": comparison.limit_value,
        "unit": QUANTITY_UNITS[comparison.quantity],
        "ratio": comparison.ratio,
        "ratio_low": comparison.ratio_low,
        "ratio_high": comparison.ratio_high,
        "optical_density": comparison.optical_density,
        "verdict": comparison.verdict,
        "by_origin": dict(comparison.by_origin),
        "allowances": dict(comparison.allowances),
        "window": dict(comparison.window or ()),
        "pulses": comparison.pulses,
        "note": comparison.note,
    }


def _hazard(hazard: HazardJudgement) -> dict[str, Any]:
    return {
        "hazard": hazard.hazard,
        "ratio": hazard.ratio,
        "ratio_low": hazard.ratio_low,
        "ratio_high": hazard.ratio_high,
        "optical_density": hazard.optical_density,
        "verdict": "not judged" if hazard.not_judged else hazard.verdict,
        "reasons": [hazard.not_judged] if hazard.not_judged else list(hazard.reasons),
        "parts": [{"line": line, "limit": limit, "ratio": ratio} for line, limit, ratio in hazard.parts],
    }
