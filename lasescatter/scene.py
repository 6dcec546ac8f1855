"""The meeting point: what a site file says, as numbers in SI units.

`lasescatter.site` fills these dataclasses; every later room reads them. Lengths in metres, times in
seconds, powers in watts, energies in joules, angles in radians, wavelengths in metres (in vacuum).
Points and directions are tuples (x, y, z); x and y are horizontal, z is up.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

from lasescatter.matter import ENTERED, HenyeyGreenstein, Material, MeasuredMatrix, SizeMode, SizeSpan, Trust

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
    """The air: uniform, or the standard atmosphere over the site."""

    temperature: float = 293.15
    """At z = 0. [K]"""
    pressure: float = 101_325.0
    """At z = 0. [Pa]"""
    relative_humidity: float = 0.0
    """0 to 1"""
    model: Literal["uniform", "standard atmosphere"] = "uniform"
    ground_altitude: float = 0.0
    """Altitude of z = 0 above sea level, for the standard atmosphere. [m]"""


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


ReadingKind = Literal[
    "extinction",
    "mass",
    "number",
    "meteorological_optical_range",
    "visual_range",
    "obscuration",
    "optical_density",
    "attenuation",
    "transmittance",
]


@dataclass(frozen=True)
class LoadReading:
    """What was measured of a load."""

    kind: ReadingKind
    value: float
    """Extinction coefficient [m⁻¹], mass concentration [kg m⁻³], number concentration [m⁻³], range [m], share of
    light lost over `over`, optical density per length [m⁻¹], decibels per length [dB m⁻¹], share left over `over`."""
    at: float | None = None
    """Wavelength of an optical reading; 550 nm for the two ranges; None for mass and number. [m]"""
    over: float | None = None
    """Length of a reading of obscuration or transmittance. [m]"""
    basis: Literal["dry", "ambient"] | None = None
    """Mass without or with the water taken up; None for other readings."""


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
    """One `[[particles]]` entry.

    Either spheres (`modes` and `material`), or a stand-in (`stand_in` and `albedo`) that has neither size nor mass.
    """

    name: str
    modes: tuple[SizeMode, ...]
    """Dry sizes; empty for a stand-in."""
    material: Material | None
    """Of the modes that carry none of their own; None for a stand-in."""
    reading: LoadReading
    region: Region
    steady_by: str | None
    """Role that vouches that the load neither thins nor clears."""
    key: str
    kind: str = ""
    """Name of the kind in the catalogue, or ""."""
    trust: Trust = ENTERED
    size_span: SizeSpan | None = None
    """Set where a kind's size is uncertain and the user has not stated it."""
    stand_in: MeasuredMatrix | HenyeyGreenstein | None = None
    albedo: float | None = None
    """Scattered share of the extinction, with a stand-in."""
    kind_from: str = ""
    """File of the user's folder that the kind is from, in words; "" for a shipped one."""


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
    files: dict = field(repr=False, default_factory=dict)
    """Text of every file that the site file names, by its name."""
    rules: dict = field(repr=False, default_factory=dict)
    """Kinds and indices of the catalogue in use, as read: {"particles": {name: …}, "indices": {name: …}}."""
