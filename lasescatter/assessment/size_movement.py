"""How the scattered light moves over the sizes that a load's kind may have, and what that does to the bounds."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from lasescatter.assessment.components import SiteOptics
from lasescatter.assessment.field import LineField, beam_radii, groups
from lasescatter.assessment.outcome import SizeMovement
from lasescatter.assumptions import Assumption
from lasescatter.exposure.exchange import exchange
from lasescatter.exposure.scattered import scattered
from lasescatter.matter import Lognormal, ModifiedGamma, SingleSize, SizeShape, SizeSpan, SizeTable
from lasescatter.medium.mixture import Component, Mixture
from lasescatter.optics.sizes import Accuracy
from lasescatter.scene import Load, Scene

Floats = NDArray[np.float64]

USUAL_SIZE = Assumption(
    name="Particles of a kind whose size is uncertain are of its usual size",
    direction="either",
    size="by the movement printed for each such load: five sizes over its range. The upper bounds carry the largest, "
    "between sizes by a parabola; for ranges of a factor 12 that is low by up to 7 % at a geometric standard "
    "deviation of 1.6, by up to 22 % at 1.3",
    source="the catalogue's range of sizes; comparison with 33 sizes at 450 and 1064 nm, by mass and by extinction",
)

SIZES = 5
# A factor is wanted, so the averages and integrals of the other sizes are coarser than those of the usual one.
COARSE = Accuracy(f11=1e-2, extinction=1e-3, tail=1e-4)
COARSE_TOLERANCE = 1e-3


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


def peak_over(sizes: tuple[float, ...], values: Floats) -> Floats:
    """Largest value over a range of sizes, (observers,): between sizes by a parabola through the largest of them and
    its neighbours, in logarithms; never less than the largest itself.

    Parameters
    ----------
    values : ndarray (sizes, observers)
    """
    log_size = np.log(sizes)
    log_value = np.log(np.maximum(values, np.finfo(float).tiny))
    top = log_value.argmax(axis=0)
    middle = np.clip(top, 1, len(sizes) - 2)
    observer = np.arange(values.shape[1])
    (x0, y0), (x1, y1), (x2, y2) = (
        (log_size[middle + step], log_value[middle + step, observer]) for step in (-1, 0, 1)
    )
    left, right = (y1 - y0) / (x1 - x0), (y2 - y1) / (x2 - x1)
    curvature = (right - left) / (x2 - x0)
    # Slope of the parabola at its middle point; where that is no peak the largest value stands.
    slope = left + curvature * (x1 - x0)
    peaked = (top == middle) & (curvature < 0)
    gain = np.where(peaked, -np.square(slope) / (4 * np.where(peaked, curvature, -1.0)), 0.0)
    return np.asarray(values.max(axis=0) * np.exp(gain))


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


@dataclass(frozen=True)
class _AtSizes:
    """One line's light at every size of a load, per watt, each (sizes, observers). [m⁻²]"""

    sizes: tuple[float, ...]
    """[m]"""
    compared: Floats
    """Of all components."""
    own: Floats
    """Share of the load in it."""
    bound: Floats
    """Of the load alone, within reach."""
    brightest: Floats
    """Most that the brightness of any element of the beam is, relative to the usual size."""

    def factors(self, usual: int) -> Floats:
        """Times which the light of the load may be that at the usual size, for its upper bound, (observers,)."""
        compared, bound = (_peak_over_usual(self.sizes, values, usual) for values in (self.compared, self.bound))
        return np.maximum(compared, bound)

    def peak_factors(self, usual: int) -> Floats:
        """The same for the greatest radiance, which moves more than the light of the whole beam."""
        return np.maximum(self.factors(usual), _peak_over_usual(self.sizes, self.brightest, usual))


def _of_load(
    load: Load,
    span: SizeSpan,
    optics: SiteOptics,
    coarse: SiteOptics,
    fields: dict[str, LineField],
    powers: dict[str, Floats],
) -> tuple[SizeMovement, dict[str, LineField]]:
    sizes = sizes_over(span)
    usual = sizes.index(span.usual)
    raised = dict(fields)
    largest = np.ones(len(next(iter(powers.values()))))
    own: dict[str, Floats] = {}
    for key, field in fields.items():
        wavelength = field.line.wavelength
        own[key] = np.zeros((len(sizes), len(largest)))
        if optics.fault(load, wavelength):
            continue
        index = 1 + optics.present(wavelength).index(load)
        # The usual size is the load as it is, computed with full care.
        components = [
            field.mixture.components[index]
            if size == span.usual
            else coarse.component(scaled(load, size / span.usual), wavelength)
            for size in sizes
        ]
        found = _at_sizes(field, index, components, sizes, usual)
        own[key] = powers[key] * found.own
        extinction = np.array([[component.extinction] for component in components])
        # The size is in doubt, and with every size what remains in doubt where the size is stated.
        remaining = optics.trust(replace(load, trust=replace(load.trust, factor=span.factor)), wavelength).factor
        moved, peak_moved = (remaining * factors for factors in (found.factors(usual), found.peak_factors(usual)))
        raised[key] = _raised(field, index, moved, peak_moved, float(peak_over(sizes, extinction)[0]))
        largest = np.maximum(largest, raised[key].factors[index])
    scattered, lines = _farthest([(fields[key].line.name, light) for key, light in own.items()], usual)
    movement = SizeMovement(
        load=load.name,
        kind=load.kind,
        what=span.what,
        usual=span.usual,
        sizes=sizes,
        scattered=scattered,
        source=span.source,
        factor=tuple(largest.tolist()),
        line=lines,
    )
    return movement, raised


def _peak_over_usual(sizes: tuple[float, ...], values: Floats, usual: int) -> Floats:
    """Largest value over the sizes, relative to that at the usual one, (observers,)."""
    there = values[usual] > 0
    return np.where(there, peak_over(sizes, values) / np.where(there, values[usual], 1.0), 1.0)


def _farthest(own: list[tuple[str, Floats]], usual: int) -> tuple[tuple[tuple[float, ...], ...], tuple[str, ...]]:
    """Per observer the light of the line that goes farthest from its value at the usual size, and the line's name.

    Parameters
    ----------
    own : list of (name, ndarray (sizes, observers))
    """
    light = np.stack([values for _, values in own])
    log = np.log(np.maximum(light, np.finfo(float).tiny))
    line = np.abs(log - log[:, usual, None]).max(axis=1).argmax(axis=0)
    chosen = light[line, :, np.arange(light.shape[-1])]
    return tuple(tuple(row) for row in chosen.tolist()), tuple(own[i][0] for i in line)


def _at_sizes(field: LineField, index: int, others: list[Component], sizes: tuple[float, ...], usual: int) -> _AtSizes:
    """The light of one line with the component at every size."""
    components = list(field.mixture.components)
    # The largest particles have the matrix that changes fastest with angle: their nodes serve all sizes.
    components[index] = others[-1]
    mixture = Mixture(tuple(components))
    parts = []
    for some in groups(len(field.legs), len(field.points)):
        points, reaches = field.points[some], field.reaches[some]
        radii = beam_radii(field.line, field.legs, points)
        lights = scattered(field.legs, field.swings, mixture, points, radii, reaches, COARSE_TOLERANCE)
        exchanged = exchange(lights, mixture, index, points, reaches)
        found = [exchanged.light(other) for other in others]
        rows = [np.stack([getattr(light, name) for light in found]) for name in ("compared", "own", "within_reach")]
        parts.append([*rows, exchanged.brightest_over(others, usual)])
    return _AtSizes(sizes, *(np.concatenate([part[i] for part in parts], axis=1) for i in range(4)))


def _raised(field: LineField, index: int, moved: Floats, peak_moved: Floats, extinction: float) -> LineField:
    """A field whose light of one component may be as much more as it moves over the sizes, and whose optical
    thickness may be that of an extinction of the component [m⁻¹].

    The factor multiplies the bound within reach, so it also covers that bound's own movement: near a null of
    polarization and for forward light the two differ.
    """
    factors, extinction_factors = field.factors.copy(), field.extinction_factors.copy()
    peak_factors = field.peak_factors.copy()
    factors[index] = np.maximum(factors[index], moved)
    peak_factors[index] = np.maximum(peak_factors[index], peak_moved)
    extinction_factors[index] = max(extinction_factors[index], extinction / field.mixture.components[index].extinction)
    return replace(field, factors=factors, peak_factors=peak_factors, extinction_factors=extinction_factors)
