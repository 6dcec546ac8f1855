"""How the scattered light moves over the sizes that a load's kind may have, and what that does to the bounds."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from lasescatter.assessment.components import SiteOptics
from lasescatter.assessment.field import LineField, first_order_light
from lasescatter.assessment.outcome import SizeMovement
from lasescatter.assumptions import Assumption
from lasescatter.matter import Lognormal, ModifiedGamma, SingleSize, SizeMode, SizeShape, SizeSpan, SizeTable
from lasescatter.medium.mixture import Mixture
from lasescatter.optics.sizes import Accuracy
from lasescatter.scene import Load, Scene

Floats = NDArray[np.float64]
Shape = TypeVar("Shape", bound=SizeShape)

USUAL_SIZE = Assumption(
    name="Particles of a kind whose size is uncertain are of its usual size",
    direction="either",
    size="by the movement printed for each such load: five sizes over its range; the upper bounds carry the largest",
    source="the catalogue's range of sizes",
)

SIZES = 5
# A factor is wanted, so the averages and integrals of the other sizes are coarser than those of the usual one.
COARSE = Accuracy(f11=1e-2, extinction=1e-3, tail=1e-4)
COARSE_TOLERANCE = 1e-3


@dataclass(frozen=True)
class _Light:
    """Light of one line with one load at another size. Axis 0: observers, per watt."""

    compared: Floats
    """Greatest over the load fraction. [m⁻²]"""
    within_reach: Floats
    """Of that load alone: bound for every place within reach, at any load fraction. [m⁻²]"""
    extinction: float
    """Of that load. [m⁻¹]"""


def size_movements(
    scene: Scene,
    optics: SiteOptics,
    fields: dict[str, LineField],
    powers: dict[str, Floats],
    progress: Callable[[str], None] = lambda step: None,
) -> tuple[tuple[SizeMovement, ...], dict[str, LineField]]:
    """Compute the scattered light again at the other sizes of each load whose size is uncertain.

    Parameters
    ----------
    powers : dict of ndarray (observers,)
        Mean power of each line for each observer, by key. [W]

    Returns
    -------
    movements : tuple of SizeMovement
    fields : dict of LineField
        The same fields, with the factors that the movements raise.
    """
    coarse = SiteOptics(scene, COARSE)
    found = []
    for load in scene.loads:
        if load.size_span is None or load.stand_in is not None:
            continue
        progress(f'"{load.name}" at the other sizes of its kind')
        movement, fields = _of_load(load, load.size_span, optics, coarse, fields, powers)
        found.append(movement)
    return tuple(found), fields


def sizes_over(span: SizeSpan) -> tuple[float, ...]:
    """Five sizes spread evenly in the logarithm over a span; the usual one takes the place of its nearest. [m]"""
    sizes = np.geomspace(span.low, span.high, SIZES)
    # The ends stay: an inner size gives way, unless the usual size is an end itself.
    if span.usual not in (span.low, span.high):
        sizes[1 + np.abs(np.log(sizes[1:-1] / span.usual)).argmin()] = span.usual
    sizes[[0, -1]] = span.low, span.high
    return tuple(sorted(sizes.tolist()))


def scaled(load: Load, factor: float) -> Load:
    """A load with every radius times a factor; its reading stays."""
    return replace(load, modes=tuple(replace(mode, shape=_scaled_shape(mode.shape, factor)) for mode in load.modes))


def _scaled_shape(shape: SizeShape, factor: float) -> SizeShape:
    if isinstance(shape, Lognormal):
        ends = (None if end is None else end * factor for end in (shape.smallest, shape.largest))
        return Lognormal(shape.median_radius * factor, shape.geometric_sd, *ends)
    if isinstance(shape, ModifiedGamma):
        return replace(shape, mode_radius=shape.mode_radius * factor)
    if isinstance(shape, SingleSize):
        return SingleSize(shape.radius * factor)
    return SizeTable(tuple(radius * factor for radius in shape.radii), shape.density)


def _of_load(
    load: Load,
    span: SizeSpan,
    optics: SiteOptics,
    coarse: SiteOptics,
    fields: dict[str, LineField],
    powers: dict[str, Floats],
) -> tuple[SizeMovement, dict[str, LineField]]:
    sizes = sizes_over(span)
    present = {
        key: 1 + optics.present(field.line.wavelength).index(load)
        for key, field in fields.items()
        if not optics.fault(load, field.line.wavelength)
    }
    columns = []
    others: dict[str, list[_Light]] = {key: [] for key in present}
    for size in sizes:
        column = np.zeros(len(next(iter(powers.values()))))
        for key, field in fields.items():
            compared = field.greatest.irradiance
            if size != span.usual and key in present:
                light = _at_size(scaled(load, size / span.usual), coarse, field, present[key])
                others[key].append(light)
                compared = light.compared
            column += powers[key] * compared
        columns.append(column)
    light_at = np.stack(columns, axis=1)
    usual = light_at[:, sizes.index(span.usual)]
    moved = np.max(light_at, axis=1) / np.where(usual > 0, usual, 1.0)
    raised = dict(fields)
    largest = np.ones(len(usual))
    for key, index in present.items():
        raised[key] = _raised(fields[key], index, others[key], moved)
        largest = np.maximum(largest, raised[key].factors[index])
    movement = SizeMovement(
        load=load.name,
        kind=load.kind,
        what=span.what,
        usual=span.usual,
        sizes=sizes,
        scattered=tuple(tuple(row) for row in light_at.tolist()),
        source=span.source,
        factor=tuple(largest.tolist()),
    )
    return movement, raised


def _at_size(load: Load, coarse: SiteOptics, field: LineField, index: int) -> _Light:
    component = coarse.component(load, field.line.wavelength)
    components = list(field.mixture.components)
    components[index] = component
    lights, greatest, _ = first_order_light(
        field.line, field.legs, field.swings, Mixture(tuple(components)), field.points, field.reaches, COARSE_TOLERANCE
    )
    return _Light(
        compared=greatest.irradiance,
        within_reach=np.sum([light.within_reach[index] for light in lights], axis=0),
        extinction=component.extinction,
    )


def _raised(field: LineField, index: int, others: list[_Light], moved: Floats) -> LineField:
    """A field whose factors of one component hold at the other sizes too.

    The factor multiplies the bound within reach, so it must also cover that bound's own movement: near a null of
    polarization and for forward light the two differ.
    """
    usual = field.within_reach[index]
    bound = np.max([light.within_reach for light in others], axis=0, initial=0.0)
    factors = field.factors.copy()
    factors[index] = np.maximum.reduce([factors[index], moved, bound / np.where(usual > 0, usual, np.inf)])
    extinction = max([light.extinction for light in others], default=0.0)
    extinction_factors = field.extinction_factors.copy()
    extinction_factors[index] = max(
        extinction_factors[index], extinction / field.mixture.components[index].extinction
    )
    return replace(field, factors=factors, extinction_factors=extinction_factors)
