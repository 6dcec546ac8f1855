"""The meeting point: what a site file says, as numbers in SI units.

`lasescatter.site` fills these dataclasses; every later room reads them. Lengths in metres, times in
seconds, powers in watts, energies in joules, angles in radians, wavelengths in metres (in vacuum).
Points and directions are tuples (x, y, z); x and y are horizontal, z is up.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

Vector = tuple[float, float, float]

Polarization = Literal["linear", "circular", "unpolarized", "unknown"]
Profile = Literal["gaussian", "top-hat"]
Tissue = Literal["retina", "cornea and lens", "skin"]
Mechanism = Literal["thermal", "photochemical"]
Quantity = Literal["irradiance", "radiant exposure", "radiance", "radiance dose"]
Hazard = Literal["retina thermal", "retina photochemical", "cornea and lens", "skin"]

# Printed SI unit of each limit quantity.
QUANTITY_UNITS: dict[Quantity, str] = {
    "irradiance": "W/m²",
    "radiant exposure": "J/m²",
    "radiance": "W/(m²·sr)",
    "radiance dose": "J/(m²·sr)",
}


@dataclass(frozen=True)
class Air:
    """Uniform air. Humidity is carried for the record; molecules are taken as dry air."""

    temperature: float = 293.15
    """[K]"""
    pressure: float = 101_325.0
    """[Pa]"""
    relative_humidity: float = 0.0
    """0 to 1"""


@dataclass(frozen=True)
class Pulses:
    """A pulse train: `rate` and no `count`, or `count` pulses and no `rate`."""

    energy: float
    """Energy of one pulse. [J]"""
    duration: float
    """Pulse duration. [s]"""
    rate: float | None
    """Repetition rate. [Hz]"""
    count: int | None
    """Number of pulses where there is no rate."""
    hot_spot: float = 1.0
    """Peak over ideal profile, at least 1; multiplies direct exposure."""


@dataclass(frozen=True)
class Line:
    """One wavelength on a beam's path."""

    name: str
    """Name of the line; the beam's own name where the beam has a single line."""
    wavelength: float
    """In vacuum. [m]"""
    power: float
    """Mean power; energy times rate for a train, and 0 for counted pulses. [W]"""
    pulses: Pulses | None
    diameter: float
    """At the start of the path: 1/e² diameter of a gaussian, edge diameter of a top-hat. [m]"""
    divergence: float
    """Full angle by the same criterion. [rad]"""
    polarization: Polarization
    electric_field: Vector | None
    """Unit vector square to the first leg; None: not stated (the worst axis is used)."""
    polarization_ratio: float
    """Purity r of r:1 for linear light."""
    key: str
    """Place in the site file, for example `beam["alignment beam"]` or `beam["x"].line["y"]`."""


@dataclass(frozen=True)
class Stop:
    """What ends a beam: a matt surface."""

    reflectance: float
    facing: Vector
    """Unit normal of the lit side."""


@dataclass(frozen=True)
class Beam:
    """One folded path that carries one or more lines."""

    name: str
    lines: tuple[Line, ...]
    profile: Profile
    points: tuple[Vector, ...]
    """Start, mirrors, end: at least two."""
    mirror_reflectance: tuple[float, ...]
    """One per inner point."""
    mirrors: Literal["real", "ideal"]
    leaves_site: bool
    """True: the last leg goes on without end past the last point."""
    stop: Stop | None
    key: str


@dataclass(frozen=True)
class Lognormal:
    """Lognormal number distribution."""

    median_radius: float
    """Number (count) median. [m]"""
    geometric_sd: float


@dataclass(frozen=True)
class ModifiedGamma:
    """n(r) ∝ r^alpha exp(−(alpha/gamma) (r/mode_radius)^gamma)."""

    mode_radius: float
    """[m]"""
    alpha: float
    gamma: float


@dataclass(frozen=True)
class SingleSize:
    """All particles of one radius."""

    radius: float
    """[m]"""


SizeShape = Lognormal | ModifiedGamma | SingleSize


@dataclass(frozen=True)
class SizeMode:
    """One mode of a size distribution; weights are fractions by number and sum to 1."""

    shape: SizeShape
    weight: float = 1.0


@dataclass(frozen=True)
class LoadReading:
    """What was measured of a load."""

    kind: Literal["extinction", "mass", "number"]
    value: float
    """Extinction coefficient [m⁻¹], mass concentration [kg m⁻³] or number concentration [m⁻³]."""
    at: float | None = None
    """Wavelength of an extinction reading. [m]"""


@dataclass(frozen=True)
class Everywhere:
    """The whole of space."""


@dataclass(frozen=True)
class Box:
    """An upright box between two corners."""

    low: Vector
    high: Vector


Region = Everywhere | Box


@dataclass(frozen=True)
class Load:
    """One `[[particles]]` entry."""

    name: str
    sizes: tuple[SizeMode, ...]
    index: complex
    """n + ik with k ≥ 0 (time factor exp(−iωt))."""
    density: float | None
    """[kg m⁻³]; needed for a load given by mass."""
    reading: LoadReading
    region: Region
    steady_by: str | None
    """Role that vouches that the load neither thins nor clears."""
    key: str


@dataclass(frozen=True)
class Observer:
    """A place where somebody's eye or skin is."""

    name: str
    position: Vector
    reach: float
    """How far the head moves from there. [m]"""
    durations: tuple[float, ...]
    """Longest single exposures to judge. [s]"""
    daily: float | None
    """Sum over a day. [s]; None: not stated"""
    viewing: Literal["deliberate", "unintended"]
    key: str


@dataclass(frozen=True)
class Limit:
    """An exposure limit entered by hand."""

    name: str
    tissue: Tissue
    mechanism: Mechanism
    quantity: Quantity
    value: float
    """SI unit of the quantity; times (t / 1 s)^time_exponent."""
    time_exponent: float
    wavelengths: tuple[float, float]
    """[m]"""
    durations: tuple[float, float]
    """Times it covers: of the pulse for per = "pulse", else of the exposure. [s]"""
    aperture: float
    """Diameter of the averaging aperture. [m]"""
    per: Literal["exposure", "pulse"]
    train: Literal["none", "N^-1/4"] | None
    acceptance: float | None
    """Full angle of the averaging field. [rad]"""
    source: str
    entered_by: str
    key: str


@dataclass(frozen=True)
class InputLine:
    """One value of the site file, as written and as read."""

    key: str
    """Path in the contract's spelling."""
    written: str
    """As the user wrote it."""
    read: str
    """In SI, with its unit, or the value taken where the key was left out."""
    stated: bool = True
    """False: the file was silent and this is the default."""


@dataclass(frozen=True)
class LengthUnit:
    """Unit of the site's bare lengths; drawings and tables use it."""

    name: str
    metres: float


@dataclass(frozen=True)
class Scene:
    """Everything a site file says."""

    title: str
    reference: str
    prepared_by: str
    length_unit: LengthUnit
    not_judged: tuple[tuple[Hazard, str], ...]
    """Hazards left out on purpose, with the reason."""
    air: Air
    beams: tuple[Beam, ...]
    loads: tuple[Load, ...]
    observers: tuple[Observer, ...]
    limits: tuple[Limit, ...]
    inputs: tuple[InputLine, ...] = field(repr=False, default=())
    source: dict = field(repr=False, default_factory=dict)
    """The site file as read (plain JSON types), for the record."""
