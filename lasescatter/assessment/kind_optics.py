"""Optics of one kind of the catalogue by itself: at wavelengths, over its sizes, and for stated loads. SI units."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field
from itertools import pairwise

import numpy as np

from lasescatter.assessment.components import SiteOptics
from lasescatter.assessment.size_movement import COARSE, scaled
from lasescatter.assessment.summaries import CURVE_ANGLES, readings_of
from lasescatter.matter import Index, IndexTable, Kind, Trust
from lasescatter.optics.growth import Floating
from lasescatter.optics.indices import IndexRangeError
from lasescatter.optics.sizes import ParticleOptics
from lasescatter.scene import Air, Beam, Everywhere, LengthUnit, Line, Load, LoadReading, Scene

ANGLES = (30.0, 90.0, 150.0)
"""At which F11 is told. [deg]"""


@dataclass(frozen=True)
class KindValues:
    """One size of the kind at one wavelength, as it floats."""

    index: complex
    """Of the first mode."""
    extinction: float
    """Mean cross section per particle. [m²]"""
    mass_extinction: float | None
    """Per mass, water included. [m² kg⁻¹]"""
    mass_extinction_dry: float | None
    """Per mass without the water taken up. [m² kg⁻¹]"""
    albedo: float
    asymmetry: float
    effective_radius: float | None
    """[m]"""
    phase: tuple[float, ...]
    """F11/(4π) at `ANGLES`. [sr⁻¹]"""
    polarization: float
    """−F12/F11 at 90°."""
    error_f11: float
    """Estimated relative error of F11 at its worst angle."""
    error_extinction: float
    nodes: int


@dataclass(frozen=True)
class SizeValues:
    """The kind at one of its sizes."""

    size: float
    """[m], of what `SizeSpan.what` says."""
    values: KindValues


@dataclass(frozen=True)
class KindAtWavelength:
    """The kind at one wavelength; values are None and curves empty outside its data."""

    wavelength: float
    gap: str
    """Why nothing is known there, or ""."""
    trust: Trust
    """As it counts there."""
    usual: KindValues | None
    sizes: tuple[SizeValues, ...]
    """At the least, usual and greatest size; empty where the size is not in doubt."""
    angles: tuple[float, ...] = field(repr=False)
    """[rad]"""
    phase: tuple[float, ...] = field(repr=False)
    """F11/(4π). [sr⁻¹]"""
    phase_12: tuple[float, ...] = field(repr=False)
    """F12/(4π). [sr⁻¹]"""


@dataclass(frozen=True)
class LoadOfKind:
    """One stated load of the kind."""

    reading: LoadReading
    gap: str
    """Why it cannot be carried to anything, or ""."""
    equivalents: tuple[LoadReading, ...]
    """What instruments would read of it."""


@dataclass(frozen=True)
class KindOptics:
    """What is known of a kind by itself."""

    kind: Kind
    air: Air
    growth_factor: float
    """Largest radius over dry radius of its modes."""
    wavelengths: tuple[KindAtWavelength, ...]
    loads: tuple[LoadOfKind, ...]


@dataclass(frozen=True)
class Reach:
    """Wavelengths at which a kind's data answer."""

    low: float
    """[m]"""
    high: float
    """[m]"""
    weak: tuple[tuple[float, float], ...]
    """Parts of it that rest on unconfirmed index data. [m]"""


def reach_of(kind: Kind) -> Reach | None:
    """The wavelengths that all index tables of a kind cover; None where an index is a plain number for all.

    A kind that takes up water needs the index of water there too.
    """
    indices: list[Index] = []
    for material in dict.fromkeys(mode.material or kind.material for mode in kind.modes):
        indices += [material.index, *([material.growth.water] if material.growth else [])]
    tables = [index for index in indices if isinstance(index, IndexTable)]
    if not tables:
        return None
    low, high = max(table.wavelengths[0] for table in tables), min(table.wavelengths[-1] for table in tables)
    spans = sorted(span for table in tables for span in _unconfirmed(table) if span[0] < high and span[1] > low)
    weak: list[tuple[float, float]] = []
    for start, end in ((max(start, low), min(end, high)) for start, end in spans):
        if weak and start <= weak[-1][1]:
            weak[-1] = (weak[-1][0], max(weak[-1][1], end))
        else:
            weak.append((start, end))
    return Reach(low, high, tuple(weak))


def _unconfirmed(table: IndexTable) -> list[tuple[float, float]]:
    """Stretches between neighbouring nodes of which either is unconfirmed."""
    nodes = list(zip(table.wavelengths, table.unconfirmed, strict=True))
    return [(w, v) for (w, first), (v, second) in pairwise(nodes) if first or second]


def kind_optics(
    kind: Kind,
    wavelengths: tuple[float, ...],
    readings: tuple[LoadReading, ...] = (),
    air: Air | None = None,
    progress: Callable[[str], None] = lambda step: None,
) -> KindOptics:
    """A kind at vacuum wavelengths [m]; the same optics as in an assessment of a site with that air.

    Its other sizes are averaged more coarsely: within 1e-2 of F11 at every angle.

    Raises
    ------
    SiteError
        Where the kind takes up water and the air is too moist, or its sizes are outside what Mie sums are made for.
    """
    one = _load(kind, LoadReading("number", 1.0))
    loads = tuple(_load(kind, reading) for reading in readings)
    scene = _scene(wavelengths, loads, air or Air())
    optics, coarse = SiteOptics(scene), SiteOptics(scene, COARSE)
    floating = optics.floating(one)
    assert floating is not None  # a kind has sizes
    found = []
    for wavelength in wavelengths:
        progress(f"{kind.name} at {wavelength * 1e9:g} nm")
        found.append(_at(optics, coarse, one, floating, wavelength))
    progress("loads")
    return KindOptics(
        kind=kind,
        air=scene.air,
        growth_factor=max(floating.factors, default=1.0),
        wavelengths=tuple(found),
        loads=tuple(_stated(optics, load) for load in loads),
    )


def _load(kind: Kind, reading: LoadReading) -> Load:
    key = f'kind "{kind.name}"'
    return Load(
        kind.name, kind.modes, kind.material, reading, Everywhere(), None, key, kind.name, kind.trust, kind.size_span
    )


def _scene(wavelengths: tuple[float, ...], loads: tuple[Load, ...], air: Air) -> Scene:
    """A site of nothing but the air and the loads, with a beam of no power at each wavelength."""
    lines = tuple(
        Line(f"{wavelength!r} m", wavelength, 0.0, None, 1e-3, 0.0, "unpolarized", None, 1.0, "")
        for wavelength in wavelengths
    )
    beam = Beam("light", lines, "top-hat", ((0.0, 0.0, 0.0), (1.0, 0.0, 0.0)), (), "ideal", True, None, "")
    return Scene("", "", "", LengthUnit("m", 1.0), (), air, (beam,), loads, (), ())


def _at(optics: SiteOptics, coarse: SiteOptics, load: Load, floating: Floating, wavelength: float) -> KindAtWavelength:
    try:
        usual = optics.of(load, wavelength)
    except IndexRangeError as fault:
        return KindAtWavelength(wavelength, str(fault), load.trust, None, (), (), (), ())
    f11, f12 = usual.matrix.at(CURVE_ANGLES)
    return KindAtWavelength(
        wavelength=wavelength,
        gap="",
        trust=optics.trust(load, wavelength),
        usual=_values(floating, usual),
        sizes=_over_sizes(coarse, load, wavelength, usual),
        angles=tuple(CURVE_ANGLES.tolist()),
        phase=tuple((f11 / (4 * math.pi)).tolist()),
        phase_12=tuple((f12 / (4 * math.pi)).tolist()),
    )


def _over_sizes(coarse: SiteOptics, load: Load, wavelength: float, usual: ParticleOptics) -> tuple[SizeValues, ...]:
    span = load.size_span
    if span is None:
        return ()
    found = []
    for size in dict.fromkeys((span.low, span.usual, span.high)):
        moved = load if size == span.usual else scaled(load, size / span.usual)
        floating = coarse.floating(moved)
        assert floating is not None  # it has sizes
        optics = usual if moved is load else coarse.of(moved, wavelength)
        found.append(SizeValues(size, _values(floating, optics)))
    return tuple(found)


def _values(floating: Floating, optics: ParticleOptics) -> KindValues:
    f11, f12 = optics.matrix.at(np.radians((*ANGLES, 90.0)))
    dry, wet = floating.dry_mass, floating.mass
    return KindValues(
        index=floating.indices(optics.wavelength)[0],
        extinction=optics.extinction,
        mass_extinction=optics.extinction / wet if wet else None,
        mass_extinction_dry=optics.extinction / dry if dry else None,
        albedo=optics.albedo,
        asymmetry=optics.asymmetry,
        effective_radius=optics.effective_radius,
        phase=tuple((f11[:-1] / (4 * math.pi)).tolist()),
        polarization=float(-f12[-1] / f11[-1]),
        error_f11=optics.error_f11,
        error_extinction=optics.error_extinction,
        nodes=optics.nodes,
    )


def _stated(optics: SiteOptics, load: Load) -> LoadOfKind:
    try:
        return LoadOfKind(load.reading, "", readings_of(optics, load))
    except IndexRangeError as fault:
        return LoadOfKind(load.reading, str(fault), ())
