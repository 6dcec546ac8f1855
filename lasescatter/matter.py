"""What particles are made of and how large they are, as numbers in SI units.

Shapes of size distributions, materials, stand-ins for the scattering matrix, how far a value is trusted, and the
kinds of the catalogue that are put together from them. Lengths in metres, densities in kg m⁻³, wavelengths in
metres (in vacuum), humidities from 0 to 1, angles in radians. Indices are n + ik with k ≥ 0 (time factor exp(−iωt)).
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal


@dataclass(frozen=True)
class Lognormal:
    """Lognormal number distribution, normalised over all radii also where it is cut."""

    median_radius: float
    """Number (count) median. [m]"""
    geometric_sd: float
    smallest: float | None = None
    """No particles below this radius. [m]"""
    largest: float | None = None
    """No particles above this radius. [m]"""


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


@dataclass(frozen=True)
class SizeTable:
    """Tabulated number distribution: linear in ln r between the radii, nothing beyond them."""

    radii: tuple[float, ...]
    """Ascending. [m]"""
    density: tuple[float, ...]
    """Particles per unit of ln r; the integral over ln r is 1."""


SizeShape = Lognormal | ModifiedGamma | SingleSize | SizeTable


@dataclass(frozen=True)
class IndexTable:
    """Refractive index at wavelengths; between them interpolated, beyond them not known."""

    wavelengths: tuple[float, ...]
    """Ascending, at least two. [m]"""
    real: tuple[float, ...]
    imaginary: tuple[float, ...]
    unconfirmed: tuple[bool, ...]
    """Of each node: whether its value has not been seen in its source."""
    name: str
    source: str


Index = complex | IndexTable


@dataclass(frozen=True)
class Growth:
    """Water taken up in moist air: by kappa, or by a table of growth factors where one is published."""

    kappa: float | None
    factors: tuple[tuple[float, float], ...]
    """(relative humidity, radius over dry radius), ascending from (0, 1); empty where kappa is given."""
    water: IndexTable
    source: str


@dataclass(frozen=True)
class Material:
    """What particles are made of, dry."""

    index: Index
    density: float | None
    """[kg m⁻³]; None: not stated."""
    growth: Growth | None = None
    """None: takes up no water."""


@dataclass(frozen=True)
class SizeMode:
    """One mode of a size distribution; weights are fractions by number and sum to 1."""

    shape: SizeShape
    weight: float = 1.0
    material: Material | None = None
    """None: that of the load."""


@dataclass(frozen=True)
class MeasuredMatrix:
    """Elements of a scattering matrix at angles, as a file gave them, F11 brought to a mean of 1 over the sphere."""

    angles: tuple[float, ...]
    """0 to pi, ascending. [rad]"""
    f11: tuple[float, ...]
    f12: tuple[float, ...] | None
    f33: tuple[float, ...] | None
    f34: tuple[float, ...] | None
    normalised_by: float
    """What the file's F11 was divided by."""
    file: str


@dataclass(frozen=True)
class HenyeyGreenstein:
    """A stand-in for a scattering matrix, without polarization."""

    asymmetry: float


@dataclass(frozen=True)
class Trust:
    """How far the light computed for a load may be off, as a factor, where no uncertainty is stated."""

    mark: Literal["entered", "checked", "weak", "non-spheres", "stand-in"]
    factor: float
    """At least 1; `below limit` needs factor × ratio up to 1 for the scattered part."""
    reason: str


ENTERED = Trust("entered", 1.0, "sizes and index are the user's own")


@dataclass(frozen=True)
class SizeSpan:
    """Sizes that a kind may have; every radius moves in proportion."""

    what: str
    """For example "mass median diameter"."""
    usual: float
    """[m]"""
    low: float
    """[m]"""
    high: float
    """[m]"""
    source: str
    factor: float = 1.0
    """Factor of trust that remains where the size is stated."""


@dataclass(frozen=True)
class TypicalLoad:
    """A load met in practice, for orientation."""

    what: str
    written: str
    """As the catalogue writes it: "0.5 mg/m^3"."""
    reading: str
    """Key of the site file that it belongs to: "mass"."""
    source: str
    mark: str


@dataclass(frozen=True)
class Kind:
    """A kind of particles of the catalogue."""

    name: str
    also_called: tuple[str, ...]
    what: str
    """One sentence."""
    modes: tuple[SizeMode, ...]
    material: Material
    trust: Trust
    trust_with_own_sizes: Trust
    """Where the user states the sizes."""
    size_span: SizeSpan | None
    typical: tuple[TypicalLoad, ...]
    sources: tuple[str, ...]
    """What every number is from, with its evidence mark."""
    file: str
    """Where it was read from."""
    origin: Literal["shipped", "added", "replacing"] = "shipped"
    """Whether it comes with the program, or from the user's folder, beside the shipped kinds or in place of one."""
    data: dict = field(repr=False, compare=False, default_factory=dict)
    """The file as read, for the record."""
    indices: dict = field(repr=False, compare=False, default_factory=dict)
    """The index files it uses, as read, by name."""

    @property
    def origin_words(self) -> str:
        """Where a kind of the user's own is from; "" for a shipped one."""
        if self.origin == "shipped":
            return ""
        beside = (
            "in place of the shipped kind of that name" if self.origin == "replacing" else "beside the shipped kinds"
        )
        return f"{'/'.join(self.file.split('/')[-2:])} of the user's own rules folder, {beside}"
