"""What a limit's detector takes in of one line at one observer: its field, its quantity, and the bounds of both."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from lasescatter.assessment.field import LineField
from lasescatter.exposure.line import TABULATION_ERROR
from lasescatter.exposure.surfaces import tight_room_area, wall_return
from lasescatter.exposure.thickness import allowance
from lasescatter.limits.compare import TRUST, Received
from lasescatter.limits.hazards import full_field, hazard_of
from lasescatter.scene import Limit

Floats = NDArray[np.float64]

HIGHER_ORDERS = "allowance for higher orders"


@dataclass(frozen=True)
class _Taken:
    """Per watt, in the kind of the limit: irradiance [m⁻²] or radiance [m⁻² sr⁻¹]."""

    light: float
    """Scattered, first order, at the worst load fraction."""
    error: float
    """Numerical error of `light`, the average over sizes aside."""
    light_reach: float
    """Bound of the scattered light within reach."""
    factors: Floats
    """By which each component's light may be off, (components,)."""
    by_component: Floats
    """The same bound for each component alone, (components,); they sum to `light_reach` or more."""
    stop: float
    stop_reach: float
    direct: float
    window: tuple[tuple[str, float], ...] | None = None


def received(field: LineField, observer: int, limit: Limit, wall_points: Floats) -> Received | str:
    """What one limit takes in of one line at one observer, per watt; a sentence where that cannot be told.

    Parameters
    ----------
    wall_points : ndarray (n, 3)
        Beam and observers, about which the tight room of the upper bound is drawn. [m]
    """
    radiance = limit.quantity in ("radiance", "radiance dose")
    if limit.acceptance is not None:
        taken: _Taken | str = _in_field(field, observer, limit.aperture, limit.acceptance, radiance)
    elif radiance:
        taken = _peak(field, observer, limit.aperture)
    else:
        taken = _full(field, observer, limit.aperture)
    if isinstance(taken, str):
        return taken
    raised = float(allowance(field.thickness.total[observer]))
    raised_within_reach = float(allowance(field.thickness_within_reach.total[observer]))
    # Near a polarization null the light without polarization is the measure of relative errors.
    error = taken.error + field.mixture.error * max(taken.light, _plain(field, observer, taken.light))
    orders = taken.light * (raised - 1)
    by_origin = [("scattered", taken.light)]
    if orders:
        by_origin.append((HIGHER_ORDERS, orders))
    by_origin += [("stop", taken.stop), ("direct", taken.direct)]
    allowed = [
        ("numerical error", error * raised_within_reach),
        ("reach, scattered", taken.light_reach * raised_within_reach - taken.light * raised),
        ("reach, stop", taken.stop_reach - taken.stop),
    ]
    doubts = _doubts(field, observer, taken, error)
    doubters = field.doubters(observer)
    named = " and ".join(f'"{name}" (×{factor:.3g})' for name, factor in doubters)
    whose = f"{TRUST}the optical thickness of {named}"
    if doubters:
        # More extinction than stated: also more of the orders that are not computed.
        further = float(allowance(field.thickness_doubted[observer])) - raised_within_reach
        bound = taken.light_reach + error + sum(extra for _, extra in doubts)
        allowed.append((f"{whose} for higher orders", bound * further))
    allowed += [(cause, extra * raised_within_reach) for cause, extra in doubts]
    if full_field(hazard_of(limit)) and not radiance:
        area = tight_room_area(wall_points)
        returned, most = field.set_free(), field.set_free(field.extinction_factors)
        allowed.append((f"walls of a room of {area:.0f} m²", wall_return(area, returned)))
        allowed.append((f"{whose} for walls", wall_return(area, most - returned)))
    low = max(0.0, taken.light - error) + taken.stop + taken.direct
    return Received(tuple(by_origin), low, tuple(part for part in allowed if part[1] > 0), taken.window)


def _doubts(field: LineField, observer: int, taken: _Taken, error: float) -> list[tuple[str, float]]:
    """What the factors of trust add to the bound of the first order, by load.

    Each factor multiplies the whole bound of its component: what the reach adds to it, and its share of the error.
    """
    whole = float(taken.by_component.sum())
    found = []
    for component, factor, bound in zip(
        field.mixture.components, taken.factors.tolist(), taken.by_component.tolist(), strict=True
    ):
        if factor > 1 and bound > 0:
            why = component.mark if factor <= component.trust else "sizes it may have"
            extra = (factor - 1) * bound * (1 + error / whole)
            found.append((f'{TRUST}"{component.name}" ({why}, ×{factor:.3g})', extra))
    return found


def _full(field: LineField, observer: int, aperture: float) -> _Taken:
    """Irradiance from all round."""
    stop = float(field.stop_compared[observer])
    by_component = field.within_reach[:, observer]
    return _Taken(
        light=float(field.greatest.irradiance[observer]),
        error=float(field.greatest.error[observer]),
        light_reach=float(by_component.sum()),
        factors=field.factors[:, observer],
        by_component=by_component,
        stop=stop,
        stop_reach=_stop_within_reach(field, observer, stop),
        direct=float(field.direct_mean(aperture)[observer]),
    )


def _in_field(field: LineField, observer: int, aperture: float, acceptance: float, radiance: bool) -> _Taken:
    """Irradiance within an acceptance field, or that over the field's solid angle.

    The bound within reach is that of the light from all round: it holds for any field.
    """
    total, shown = 0.0, []
    for i, leg in enumerate(field.legs):
        found = field.window(i, acceptance)
        total += float(found.irradiance[observer])
        shown += [(f"leg {leg.number} from", float(found.low[observer]))]
        shown += [(f"leg {leg.number} to", float(found.high[observer]))]
    stop = float(field.stop_compared[observer])
    stop_reach = _stop_within_reach(field, observer, stop)
    solid = 2 * math.pi * (1 - math.cos(acceptance / 2)) if radiance else 1.0
    if radiance:
        stop = min(stop / solid, field.stop_radiance) if stop > 0 else 0.0
        stop_reach = min(stop_reach / solid, field.stop_radiance)
    by_component = field.within_reach[:, observer]
    return _Taken(
        light=total / solid,
        error=(float(field.greatest.error[observer]) + TABULATION_ERROR * total) / solid,
        light_reach=max(total, float(by_component.sum())) / solid,
        factors=field.factors[:, observer],
        by_component=by_component / solid,
        stop=stop,
        stop_reach=stop_reach,
        direct=float(field.direct_mean(aperture)[observer]) / solid,
        window=tuple(shown),
    )


def _peak(field: LineField, observer: int, aperture: float) -> _Taken | str:
    """Peak radiance across and along the beam, and of the lit spot."""
    if field.direct_mean(aperture)[observer] > 0:
        return "direct light has no radiance without an acceptance field"
    peaks = [field.peak(i) for i in range(len(field.legs))]
    if any(peak.void[observer] for peak in peaks):
        return (
            f'a leg of "{field.beam.name}" is seen, from within reach, so nearly end-on that its radiance is not '
            "defined by E4"
        )
    light = field.hot_spot * float(sum(peak.radiance[observer] for peak in peaks))
    return _Taken(
        light=light,
        error=TABULATION_ERROR * light,
        light_reach=max(light, field.hot_spot * float(sum(peak.within_reach[observer] for peak in peaks))),
        factors=field.peak_factors[:, observer],
        by_component=field.hot_spot * np.sum([peak.by_component[:, observer] for peak in peaks], axis=0),
        stop=field.stop_radiance if field.stop_compared[observer] > 0 else 0.0,
        stop_reach=field.stop_radiance if field.sees_stop(observer) else 0.0,
        direct=0.0,
    )


def _stop_within_reach(field: LineField, observer: int, stop: float) -> float:
    """Stop light that no place within reach exceeds: seen square from as near as the head comes. [m⁻²]"""
    if field.beam.stop is None or not field.sees_stop(observer) or field.reaches[observer] == 0:
        return stop
    return field.legs[-1].reflected * field.beam.stop.reflectance / (math.pi * field.stop_gap(observer) ** 2)


def _plain(field: LineField, observer: int, light: float) -> float:
    """Light as it would be without polarization."""
    polarized = float(field.scattered[observer])
    return light * float(field.unpolarised[observer]) / polarized if polarized > 0 else light
