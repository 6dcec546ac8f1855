"""What an assessment holds: every number that a report prints or a reviewer would ask for. SI units.

Irradiances are means over time; a pulsed line also has its exposure per pulse. "Compared" values are
those that meet the limits (greatest over the load fraction, no credit for the load's extinction on
direct and stop light); "stated" values belong to the load exactly as the site file gives it.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from lasescatter.assumptions import Assumption
from lasescatter.limits.compare import Comparison, HazardJudgement
from lasescatter.limits.verdict import Verdict
from lasescatter.matter import ENTERED, Trust
from lasescatter.scene import LoadReading, Scene, Vector


@dataclass(frozen=True)
class ComponentSummary:
    """Optics of air or of one load at one wavelength."""

    name: str
    """Name of the load, or "air"."""
    wavelength: float
    extinction: float
    """Where the load is. [m⁻¹]"""
    scattering: float
    """[m⁻¹]"""
    albedo: float
    asymmetry: float
    number: float | None
    """Number concentration. [m⁻³]; None for air and for a stand-in."""
    mass: float | None
    """Mass concentration, water included. [kg m⁻³]; None where no density is stated."""
    mass_extinction: float | None
    """Per mass, water included. [m² kg⁻¹]"""
    effective_radius: float | None
    """As they float, water included. [m]"""
    size_nodes: int | None
    """Radii that the average over sizes took."""
    error_f11: float | None
    """Estimated relative error of F11 at its worst angle."""
    error_extinction: float | None
    angles: tuple[float, ...] = field(repr=False)
    """Scattering angles of the printed curve. [rad]"""
    phase: tuple[float, ...] = field(repr=False)
    """F11/(4π) there. [sr⁻¹]"""
    phase_12: tuple[float, ...] = field(repr=False)
    """F12/(4π) there. [sr⁻¹]"""
    running: tuple[float, ...] = field(repr=False)
    """Integral of F11/(4π) over the angle from 0 to there. [rad sr⁻¹]"""
    running_12: tuple[float, ...] = field(repr=False)
    """Integral of F12/(4π) likewise (of |F12| where the axis is unknown, `running_12_abs`)."""
    running_12_abs: tuple[float, ...] = field(repr=False)
    kind: str = ""
    """Name of the kind in the catalogue, or ""."""
    index: complex | None = None
    """As they float, of the first mode; None for air and for a stand-in."""
    growth_factor: float = 1.0
    """Largest radius over dry radius of its modes; 1 where no water is taken up."""
    dry_mass: float | None = None
    """Mass concentration without the water taken up. [kg m⁻³]"""
    trust: Trust = ENTERED
    """As it counts at this wavelength."""
    equivalents: tuple[LoadReading, ...] = ()
    """What instruments would read of this load."""


@dataclass(frozen=True)
class SizeMovement:
    """How the light of one load moves over the sizes that its kind may have, air and the other loads aside.

    For each observer that of one line: the line where the load's light goes farthest from what it is at the usual
    size, up or down.
    """

    load: str
    kind: str
    what: str
    """The size that moves: "mass median diameter"."""
    usual: float
    """[m]"""
    sizes: tuple[float, ...]
    """Ascending, the usual one among them. [m]"""
    scattered: tuple[tuple[float, ...], ...]
    """Per observer, per size: the load's own share of the scattered light as compared, of the line in `line`.
    [W m⁻²]"""
    source: str
    factor: tuple[float, ...] = ()
    """Per observer: times which the upper bounds take the scattered light of the load, the largest over the lines.
    At least the factor of trust. It multiplies a bound for the worst angle and axis within reach, and so may be less
    than the movement of the light itself, as at right angles to a polarized beam."""
    line: tuple[str, ...] = ()
    """Per observer: name of the line whose light `scattered` holds."""


@dataclass(frozen=True)
class HandCheck:
    """One leg and one scattering component for one observer, so that E3 can be redone by hand."""

    beam: str
    line: str
    leg: int
    """Counted from 1."""
    component: str
    power: float
    """In the beam at the start of the leg: mirrors taken off, extinction not. [W]"""
    b: float
    """Distance from the leg's line that the integral took: never less than the beam's radius alongside it. [m]"""
    s0: float
    length: float
    """Of the leg; infinite for a leg that leaves the site. [m]"""
    theta1: float
    theta2: float
    """Angles that bound the part of the leg inside the component's region. [rad]"""
    scattering: float
    """beta_sca of the component at the element at theta_mid. [m⁻¹]"""
    polarization: str
    """"unpolarized", "known axis" or "worst axis"."""
    q: float
    """Stokes Q/I along the axis: 0 for unpolarized light."""
    phi: float | None
    """Angle from the electric-field axis to the scattering plane, where the axis is known. [rad]"""
    integral_11: float
    """B11(theta2) − B11(theta1) with B11 = ∫ F11/(4π). [rad sr⁻¹]"""
    integral_12: float
    """The same of F12 (of |F12| for the worst axis). [rad sr⁻¹]"""
    integral: float
    """integral_11 + q cos(2 phi) integral_12, or integral_11 + integral_12 for the worst axis."""
    theta_mid: float
    """Angle at which half of `integral` is reached."""
    s_mid: float
    r_mid: float
    tau_beam: float
    """Optical thickness from the beam's start to the element at theta_mid."""
    tau_sight: float
    """Optical thickness from that element to the observer."""
    hand: float
    """E3 with exp(−tau_beam − tau_sight). [W m⁻²]"""
    program: float
    """What the full integral gives at the stated load. [W m⁻²]"""
    remark: str
    """Which factor makes hand and program differ by more than 5 %, else ""."""


@dataclass(frozen=True)
class StopCheck:
    """Lambert's law for one lit stop and one observer, E = rho P cos(theta)/(pi r²)."""

    beam: str
    line: str
    power: float
    """On the stop: mirrors taken off, extinction not. [W]"""
    reflectance: float
    r: float
    """From the spot to the observer. [m]"""
    cosine: float
    """Between the stop's normal and the direction to the observer; 0 behind the stop."""
    tau: float
    """Optical thickness from the beam's start to the stop to the observer, load as stated."""
    compared: float
    """Without extinction: what meets the limits. [W m⁻²]"""
    stated: float
    """With exp(−tau). [W m⁻²]"""


@dataclass(frozen=True)
class LineExposure:
    """What one line of one beam sends to one observer."""

    beam: str
    line: str
    wavelength: float
    scattered: float
    """Stated load, first order, full field, facing each element (E2). [W m⁻²]"""
    scattered_error: float
    """Quadrature error of `scattered`. [W m⁻²]"""
    scattered_unpolarised: float
    """The same with F12 left out. [W m⁻²]"""
    scattered_compared: float
    """Greatest over the load fraction. [W m⁻²]"""
    load_fraction: float
    """The fraction at which it is greatest."""
    diffuse: float
    """From the stop, at the stated load. [W m⁻²]"""
    diffuse_compared: float
    """From the stop, the load's extinction not credited. [W m⁻²]"""
    direct: float
    """Direct beam at the observer's point, not averaged, the load's extinction not credited. [W m⁻²]"""
    pulse_rate: float | None
    """To turn means into exposures per pulse: divide by it. [Hz]; None for continuous light."""
    pulse_scattered: float | None
    """Per pulse, stated load. [J m⁻²]"""
    pulse_compared: float | None
    """Scattered and stop light per pulse as compared. [J m⁻²]"""
    pulse_direct: float | None
    """[J m⁻²]"""
    pulse_diffuse: float | None = None
    """From the stop, per pulse, at the stated load. [J m⁻²]"""
    optical_thickness: float = 0.0
    """The tau of physics section 8, at the observer's place."""
    thickness_within_reach: float = 0.0
    """That no place within reach exceeds: it makes the upper bound, times 1 + 1.5 of it above 0.1."""
    thickness_doubted: float = 0.0
    """The same with every load's extinction as much larger as it is in doubt: Σ over components of factor × tau."""


@dataclass(frozen=True)
class ObserverOutcome:
    """One observer: exposures, comparisons, verdict and its reasons."""

    name: str
    key: str
    position: Vector
    verdict: Verdict
    reasons: tuple[str, ...]
    """Why the verdict is not established, or what puts it above."""
    ratio: float | None
    """Largest summed ratio over the hazards; None where nothing could be compared."""
    governing: str
    """Hazard and limit behind `ratio`, in words; "" for none."""
    nearest: float
    """Distance to the nearest beam axis. [m]"""
    nearest_beam: str
    optical_thickness: float
    """The tau of physics section 8."""
    direct_reach: str
    """Beam whose direct light is within reach, or ""."""
    lines: tuple[LineExposure, ...]
    hand_checks: tuple[HandCheck, ...]
    stop_checks: tuple[StopCheck, ...]
    comparisons: tuple[Comparison, ...]
    hazards: tuple[HazardJudgement, ...]
    thickness_within_reach: float = 0.0
    """Largest of the lines' `thickness_within_reach`."""
    thickness_doubted: float = 0.0
    """Largest of the lines' `thickness_doubted`."""

    def total(self, field_name: str) -> float:
        """Sum of one field of `lines`."""
        return sum(getattr(line, field_name) for line in self.lines)


@dataclass(frozen=True)
class BeamSpot:
    """One place in the beam: what an eye or a white card would get there."""

    place: str
    """For example "start", "mirror 1", "stop", "nearest to console operator"."""
    position: Vector
    path_length: float
    """Along the path from its start. [m]"""
    diameter: float
    """Beam diameter there, by the profile's criterion (1/e² or edge). [m]"""
    direct: float | None
    """Exposure to the limit of `InTheBeam.limit`, averaged over its aperture, in its unit; None without a limit."""
    multiple: float | None
    """Largest multiple of any limit there."""
    diffuse_distance: float | None
    """From a white card (reflectance 1, seen square) held there, where its light falls to the last limit. [m]"""
    diffuse_multiple: float | None
    """Largest multiple of any limit at 0.1 m from that card."""
    limit: str | None = None
    """Name of the limit behind `multiple`."""


@dataclass(frozen=True)
class InTheBeam:
    """Exposure of somebody in the beam itself, whether or not anybody stands there."""

    beam: str
    line: str
    wavelength: float
    limit: str | None
    """Name of the limit that gives the largest multiple; None where none covers the line."""
    unit: str
    duration: float | None
    """Exposure (or pulse) duration judged. [s]"""
    limit_value: float | None
    hazard_distance: float | None
    """Along the axis from the start of the path, no extinction credited, the longest over the eye limits (over all
    where there is none for the eye): nominal ocular hazard distance. 0: below the limit everywhere. [m]"""
    reason: str
    """Why something above is None, else ""."""
    spots: tuple[BeamSpot, ...]
    hazard_limit: str | None = None
    """Name of the limit behind `hazard_distance`."""


@dataclass(frozen=True)
class Provenance:
    """Which program made the numbers."""

    version: str
    numpy: str
    scipy: str
    made_at: str
    """ISO 8601 with zone."""
    digest: str
    """sha256 of the canonical record without `made_at`; "" until the record is made."""


@dataclass(frozen=True)
class Gap:
    """One scatterer that is not computed at a wavelength, or not from data at that wavelength."""

    component: str
    """Name of the load, or "air"."""
    wavelength: float
    """[m]"""
    reason: str
    left_out: bool
    """True: its light is missing from every sum at that wavelength; False: a reading is used unchanged there."""


@dataclass(frozen=True)
class Assessment:
    """The whole result."""

    scene: Scene
    verdict: Verdict
    components: tuple[ComponentSummary, ...]
    in_the_beam: tuple[InTheBeam, ...]
    observers: tuple[ObserverOutcome, ...]
    size_movements: tuple[SizeMovement, ...]
    """One for each load whose kind has an uncertain size that the user has not stated."""
    assumptions: tuple[Assumption, ...]
    cautions: tuple[str, ...]
    """All of rules/cautions.toml, those that matter most first."""
    provenance: Provenance
    gaps: tuple[str, ...] = ()
    """What is left out of the sums because no data reach it; with any, nothing is below its limit."""
    gap_entries: tuple[Gap, ...] = ()
    """The same by component and wavelength, each pair once."""
