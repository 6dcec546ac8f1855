"""The main job: a scene in, one `Assessment` out."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from datetime import UTC, datetime

import numpy as np
from numpy.typing import NDArray

import lasescatter
from lasescatter.assessment.components import (
    DOUBTED_THICKNESS,
    DRY_AIR,
    SIZE_AVERAGE,
    UNIFORM_AIR,
    SiteOptics,
    is_vouched,
)
from lasescatter.assessment.detector import received
from lasescatter.assessment.field import LineField, distance_to, line_field
from lasescatter.assessment.handcheck import hand_checks, stop_checks
from lasescatter.assessment.in_the_beam import in_the_beam, nearest_element
from lasescatter.assessment.outcome import (
    Assessment,
    ComponentSummary,
    HandCheck,
    LineExposure,
    ObserverOutcome,
    Provenance,
    SizeMovement,
    StopCheck,
)
from lasescatter.assessment.size_movement import USUAL_SIZE, size_movements
from lasescatter.assessment.summaries import summaries
from lasescatter.assumptions import Assumption, merged
from lasescatter.cautions import cautions
from lasescatter.exposure import direct as direct_light
from lasescatter.exposure import legs as paths
from lasescatter.exposure import line as bright
from lasescatter.exposure import scattered as first_order
from lasescatter.exposure import surfaces
from lasescatter.exposure.direct import clearance
from lasescatter.exposure.fraction import WORST_FRACTION
from lasescatter.exposure.thickness import FIGURES_UP_TO, NOTHING_BELOW_ABOVE
from lasescatter.limits.compare import Received
from lasescatter.limits.hazards import full_field, hazard_of
from lasescatter.limits.judge import Gate, Judgement, judge
from lasescatter.limits.verdict import worst
from lasescatter.matter import MeasuredMatrix
from lasescatter.medium import load as loads
from lasescatter.medium.atmosphere import STANDARD_AIR
from lasescatter.optics import growth, measured
from lasescatter.problems import Problem, SiteError
from lasescatter.scene import Limit, Line, Observer, Scene

Floats = NDArray[np.float64]

# Beam radii (1/e² or edge) within which an observer counts as reached by direct light.
REACHED_WITHIN_RADII = 3.0
# Half of this is added where no limit states an aperture: the dilated pupil. [m]
PUPIL = 7e-3
# Above this full angle a beam is no pencil for this program. [rad]
WIDEST_DIVERGENCE = 10e-3
# How far a head moves where the site file is silent; less is listed as an assumption. [m]
USUAL_REACH = 0.25
# Sums over legs, lines and scatterers for all observers together.
MOST_ROWS = 200_000

PULSES_UNSTRETCHED = Assumption(
    name="Scattered pulses keep the beam's pulse duration",
    direction="high",
    size="by the spread of path lengths over the speed of light: nanoseconds are stretched several times in a room",
    source="geometry",
)


def assess(
    scene: Scene, made_at: datetime | None = None, progress: Callable[[str], None] = lambda step: None
) -> Assessment:
    """Assess a scene.

    Parameters
    ----------
    made_at : datetime with zone, optional
        Time stamp of the record; now if left out.
    progress : callable
        Told the name of each step as it begins.

    Raises
    ------
    SiteError
        If a value of the scene is outside the data or the range that the physics is made for.
    """
    _check_size(scene)
    points = np.array([observer.position for observer in scene.observers], dtype=float)
    reaches = np.array([observer.reach for observer in scene.observers], dtype=float)
    optics = SiteOptics(scene)
    fields: dict[str, LineField] = {}
    components: dict[float, tuple[ComponentSummary, ...]] = {}
    for beam in scene.beams:
        for line in beam.lines:
            progress(f"particles at {line.wavelength * 1e9:g} nm")
            mixture = optics.mixture(line.wavelength)
            if line.wavelength not in components:
                components[line.wavelength] = summaries(optics, line.wavelength, mixture)
            progress(f'light of "{line.name}"')
            fields[line.key] = line_field(beam, line, mixture, points, reaches)
    powers = {key: _powers(scene.observers, field.line) for key, field in fields.items()}
    movements, fields = size_movements(scene, optics, fields, powers, progress)
    progress("judgement")
    checks = {key: hand_checks(field, powers[key]) for key, field in fields.items()}
    gaps = tuple(gap for wavelength in components for gap in optics.gaps(wavelength))
    of_optics = _gates_of_optics(optics, fields)
    stops = {key: stop_checks(field, powers[key]) for key, field in fields.items()}
    walls = np.concatenate([points, *[np.array(beam.points) for beam in scene.beams]])
    observers = tuple(
        _observer(scene, i, fields, powers, checks, stops, walls, of_optics) for i in range(len(scene.observers))
    )
    return Assessment(
        scene=scene,
        verdict=worst([observer.verdict for observer in observers]),
        components=tuple(summary for group in components.values() for summary in group),
        in_the_beam=in_the_beam(scene),
        observers=observers,
        size_movements=movements,
        assumptions=_assumptions(scene, optics, tuple(fields.values()), movements),
        cautions=cautions(),
        provenance=_provenance(made_at),
        gaps=tuple(dict.fromkeys(gap.reason for gap in gaps)),
        gap_entries=gaps,
    )


def _check_size(scene: Scene) -> None:
    """Refuse a site that would fill the memory, before any is taken.

    Raises
    ------
    SiteError
    """
    components = 1 + len(scene.loads)
    parts = sum(len(beam.lines) * (len(beam.points) - 1) for beam in scene.beams)
    rows = len(scene.observers) * parts * components
    if rows > MOST_ROWS:
        wrong = f"{len(scene.observers)} observers × {parts} legs and lines × {components} scatterers make {rows} sums"
        raise SiteError([Problem("", wrong, f"At most {MOST_ROWS} are computed at once; split the site into several")])


def _observer(
    scene: Scene,
    index: int,
    fields: dict[str, LineField],
    powers: dict[str, Floats],
    checks: dict[str, list[list[HandCheck]]],
    stops: dict[str, list[list[StopCheck]]],
    walls: Floats,
    of_optics: list[Gate],
) -> ObserverOutcome:
    observer = scene.observers[index]
    point = np.asarray(observer.position, dtype=float)
    reached = _direct_within_reach(scene, fields, index)
    judgement = _judged(scene, observer, index, fields, walls, [*reached.values(), *_gates(fields, index), *of_optics])
    nearest, beam_name = min(
        (float(np.linalg.norm(point - leg.origin - along * leg.direction)), beam.name)
        for beam in scene.beams
        for leg, along in [nearest_element(paths.legs_of(beam), point)]
    )
    return ObserverOutcome(
        name=observer.name,
        key=observer.key,
        position=observer.position,
        verdict=judgement.verdict,
        reasons=judgement.reasons,
        ratio=judgement.ratio,
        governing=judgement.governing,
        nearest=nearest,
        nearest_beam=beam_name,
        optical_thickness=max(float(field.thickness.total[index]) for field in fields.values()),
        thickness_within_reach=max(float(field.thickness_within_reach.total[index]) for field in fields.values()),
        thickness_doubted=max(float(field.thickness_doubted[index]) for field in fields.values()),
        direct_reach=next(iter(reached), ""),
        lines=tuple(_line_exposure(field, index, float(powers[key][index])) for key, field in fields.items()),
        hand_checks=tuple(row for rows in checks.values() for row in rows[index]),
        stop_checks=tuple(row for rows in stops.values() for row in rows[index]),
        comparisons=judgement.comparisons,
        hazards=judgement.hazards,
    )


def _judged(
    scene: Scene,
    observer: Observer,
    index: int,
    fields: dict[str, LineField],
    walls: Floats,
    gates: list[Gate],
) -> Judgement:
    def received_by(line: Line, limit: Limit) -> Received | str:
        return received(fields[line.key], index, limit, walls)

    return judge(observer, scene.beams, scene.limits, received_by, scene.not_judged, _joined(gates))


def _joined(gates: list[Gate]) -> tuple[Gate, ...]:
    """Each reason once, with all the lines that it holds for."""
    lines: dict[str, set[str]] = {}
    for gate in gates:
        lines.setdefault(gate.reason, set()).update(gate.lines or ())
    return tuple(Gate(reason, frozenset(held)) for reason, held in lines.items())


def _gates_of_optics(optics: SiteOptics, fields: dict[str, LineField]) -> list[Gate]:
    """What is not known of air and loads at the wavelengths of the lines."""
    return [
        Gate(reason, frozenset({key}))
        for key, field in fields.items()
        for reason in (
            *(gap.reason for gap in optics.gaps(field.line.wavelength)),
            *optics.dry_by_default(field.line.wavelength),
        )
    ]


def _direct_within_reach(scene: Scene, fields: dict[str, LineField], index: int) -> dict[str, Gate]:
    """Beams whose direct light a head can get into: the reach, three beam radii and half an aperture added."""
    observer = scene.observers[index]
    aperture = max([limit.aperture for limit in scene.limits], default=PUPIL)
    passes: dict[str, dict[int, float]] = {}
    lines: dict[str, set[str]] = {}
    for key, field in fields.items():
        for leg in field.legs:
            point = field.points[index : index + 1]
            distance = float(distance_to(leg, point)[0])
            cone = float(clearance(leg, field.line, point, REACHED_WITHIN_RADII, aperture)[0])
            if cone < observer.reach:
                passes.setdefault(field.beam.name, {})[leg.number] = distance
                lines.setdefault(field.beam.name, set()).add(key)
    return {beam: Gate(_reached(beam, legs), frozenset(lines[beam])) for beam, legs in passes.items()}


def _reached(beam: str, legs: dict[int, float]) -> str:
    listed = ", ".join(f"leg {number} at {distance:.3g} m" for number, distance in legs.items())
    return f'direct light of "{beam}" is within reach: the axis of {listed}'


def _gates(fields: dict[str, LineField], index: int) -> list[Gate]:
    """Reasons outside the limits for which nothing may be called below."""
    return [Gate(reason, frozenset({key})) for key, field in fields.items() for reason in _open_questions(field, index)]


def _open_questions(field: LineField, index: int) -> list[str]:
    """What keeps one line's light at an observer from being below."""
    found = _too_thick(field, index)
    if field.line.divergence > WIDEST_DIVERGENCE:
        found.append(
            f'"{field.line.name}" diverges by {field.line.divergence * 1e3:.3g} mrad: above 10 mrad the average '
            "over its rays is not computed"
        )
    if field.beam.leaves_site and field.legs[-1].direction[2] < 0:
        found.append(f'"{field.beam.name}" leaves the site downwards: light from the ground there is not computed')
    if field.sees_stop(index) and field.stop_gap(index) < surfaces.LEAST_SPOT_DISTANCES * field.spot_radius:
        found.append(f'the spot on the stop of "{field.beam.name}" is within reach nearer than ten of its radii')
    return found


def _too_thick(field: LineField, index: int) -> list[str]:
    """The load as stated is too thick, or it may be by the doubt in its extinction."""
    tau, doubted = float(field.thickness_within_reach.total[index]), float(field.thickness_doubted[index])
    at = f"{field.line.wavelength * 1e9:g} nm"
    if tau > NOTHING_BELOW_ABOVE:
        return [
            f"the load is too thick for single scattering at {at}: optical thickness {tau:.2g}, above "
            f"{NOTHING_BELOW_ABOVE:g}; a load or a path {tau / NOTHING_BELOW_ABOVE:.2g} times smaller would do"
        ]
    if doubted > FIGURES_UP_TO:
        whose = ", ".join(f'"{name}" (×{factor:.3g})' for name, factor in field.doubters(index))
        return [
            f"the load may be too thick for single scattering at {at}: optical thickness {tau:.2g}, which by the doubt "
            f"in the extinction of {whose} may be {doubted:.2g}; above {FIGURES_UP_TO:g} there are no figures for the "
            f"orders that are not computed; an optical reading at {at} would settle it"
        ]
    return []


def _powers(observers: tuple[Observer, ...], line: Line) -> Floats:
    """Mean power for each observer: counted pulses are averaged over the longest single exposure. [W]"""
    if line.pulses is None or line.pulses.rate is not None:
        return np.full(len(observers), line.power)
    energy = line.pulses.energy * (line.pulses.count or 1)
    return np.array([energy / max(observer.durations) for observer in observers])


def _line_exposure(field: LineField, index: int, power: float) -> LineExposure:
    line = field.line
    scattered, diffuse = float(field.scattered[index]), float(field.stop_stated[index])
    compared, diffuse_compared = float(field.greatest.irradiance[index]), float(field.stop_compared[index])
    direct = float(field.direct[index])
    energy = None if line.pulses is None else line.pulses.energy
    return LineExposure(
        beam=field.beam.name,
        line=line.name,
        wavelength=line.wavelength,
        scattered=power * scattered,
        scattered_error=power * float(field.error[index]),
        scattered_unpolarised=power * float(field.unpolarised[index]),
        scattered_compared=power * compared,
        load_fraction=float(field.greatest.fraction[index]),
        diffuse=power * diffuse,
        diffuse_compared=power * diffuse_compared,
        direct=power * direct,
        pulse_rate=None if line.pulses is None else line.pulses.rate,
        pulse_scattered=None if energy is None else energy * scattered,
        pulse_compared=None if energy is None else energy * (compared + diffuse_compared),
        pulse_direct=None if energy is None else energy * direct,
        pulse_diffuse=None if energy is None else energy * diffuse,
        optical_thickness=float(field.thickness.total[index]),
        thickness_within_reach=float(field.thickness_within_reach.total[index]),
        thickness_doubted=float(field.thickness_doubted[index]),
    )


def _assumptions(
    scene: Scene, optics: SiteOptics, fields: tuple[LineField, ...], movements: tuple[SizeMovement, ...]
) -> tuple[Assumption, ...]:
    found = [direct_light.WAIST_AT_START, direct_light.SMOOTH_BEAM, direct_light.NAKED_EYE]
    if not all(is_vouched(load) for load in scene.loads):
        found.append(WORST_FRACTION)
    if any(is_vouched(load) for load in scene.loads):
        found.append(loads.STEADY)
    if any(observer.reach < USUAL_REACH for observer in scene.observers):
        found.append(first_order.SHORT_REACH)
    if scene.loads:
        found += [SIZE_AVERAGE, direct_light.NO_EXTINCTION]
    found.append(STANDARD_AIR if scene.air.model == "standard atmosphere" else UNIFORM_AIR)
    if any(optics.grows_by_kappa(load) for load in scene.loads):
        found.append(growth.ONE_FACTOR)
    if any(optics.humidity_missing(load) for load in scene.loads):
        found.append(DRY_AIR)
    if any(isinstance(load.stand_in, MeasuredMatrix) for load in scene.loads):
        found.append(measured.STRAIGHT_LINES)
    if any(component.extinction_trust > 1 for field in fields for component in field.mixture.components):
        found.append(DOUBTED_THICKNESS)
    if movements:
        found.append(USUAL_SIZE)
    if any(beam.stop for beam in scene.beams):
        found += [surfaces.MATT_STOP, surfaces.SMALL_SPOT]
    if any(line.pulses for beam in scene.beams for line in beam.lines):
        found.append(PULSES_UNSTRETCHED)
    if any(limit.acceptance is not None or limit.quantity.startswith("radiance") for limit in scene.limits):
        found.append(bright.LEGS_ADDED)
    if any(full_field(hazard_of(limit)) for limit in scene.limits):
        found.append(surfaces.WALLS)
    return merged(
        tuple(found),
        first_order.ASSUMPTIONS,
        paths.assumptions_of(scene.beams),
        loads.assumptions_of(scene.loads, {field.line.wavelength for field in fields}),
    )


def _provenance(made_at: datetime | None) -> Provenance:
    import scipy

    return Provenance(
        version=lasescatter.__version__,
        numpy=np.__version__,
        scipy=scipy.__version__,
        made_at=(made_at or datetime.now(UTC)).replace(microsecond=0).isoformat(),
        digest="",
    )


def with_digest(assessment: Assessment, digest: str) -> Assessment:
    """The same assessment carrying the digest of its record."""
    return replace(assessment, provenance=replace(assessment.provenance, digest=digest))
