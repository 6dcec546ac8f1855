"""E3 for one leg and one component, with every factor kept: what a reviewer redoes with a pocket calculator."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from lasescatter.assessment.field import LineField
from lasescatter.assessment.outcome import HandCheck, StopCheck
from lasescatter.exposure.scattered import LegLight, azimuths
from lasescatter.medium.mixture import Component

Floats = NDArray[np.float64]

AGREES_WITHIN = 0.05
_BISECTIONS = 50


def hand_checks(field: LineField, powers: Floats) -> list[list[HandCheck]]:
    """Hand-check rows of one line, per observer.

    Parameters
    ----------
    powers : ndarray (observers,)
        Mean power of the line for each observer. [W]
    """
    rows: list[list[HandCheck]] = [[] for _ in powers]
    for light in field.lights:
        for index, component in enumerate(field.mixture.components):
            span = component.profile.span(light.leg.origin, light.leg.direction, light.leg.length)
            if span is None or component.scattering == 0:
                continue
            for own, row in zip(rows, _rows(field, light, index, component, span, powers), strict=True):
                own.append(row)
    return rows


def stop_checks(field: LineField, powers: Floats) -> list[list[StopCheck]]:
    """Lambert's law for the line's stop, per observer; empty lists for a beam without one."""
    if field.beam.stop is None or field.spot is None:
        return [[] for _ in powers]
    towards = field.points - field.spot
    r = np.linalg.norm(towards, axis=-1)
    cosine = np.clip(towards @ np.asarray(field.beam.stop.facing) / np.maximum(r, 1e-6), 0.0, 1.0)
    return [
        [
            StopCheck(
                beam=field.beam.name,
                line=field.line.name,
                power=float(powers[i]) * field.legs[-1].reflected,
                reflectance=field.beam.stop.reflectance,
                r=float(r[i]),
                cosine=float(cosine[i]),
                tau=float(field.stop_tau[i]),
                compared=float(powers[i] * field.stop_compared[i]),
                stated=float(powers[i] * field.stop_stated[i]),
            )
        ]
        for i in range(len(powers))
    ]


def _rows(
    field: LineField, light: LegLight, index: int, component: Component, span: tuple[float, float], powers: Floats
) -> list[HandCheck]:
    leg, sight, swing = light.leg, light.sight, light.swing
    theta1 = sight.angle_at(span[0])
    theta2 = sight.angle_at(span[1]) if np.isfinite(span[1]) else np.full_like(theta1, np.pi)
    phi = azimuths(swing, sight)
    turn = np.ones_like(theta1) if phi is None else np.cos(2 * phi)

    def running(theta: Floats) -> tuple[Floats, Floats, Floats]:
        plain, signed, unsigned = component.matrix.running(theta)
        other = unsigned if swing.worst else signed
        return plain, other, plain + swing.q * turn * other

    plain1, other1, start = running(theta1)
    plain2, other2, end = running(theta2)
    low, high = theta1.copy(), theta2.copy()
    for _ in range(_BISECTIONS):
        middle = (low + high) / 2
        short = running(middle)[2] - start < (end - start) / 2
        low, high = np.where(short, middle, low), np.where(short, high, middle)
    theta_mid = (low + high) / 2
    s_mid = np.clip(sight.s0 - sight.b / np.tan(theta_mid), span[0], span[1])
    places = leg.origin + s_mid[:, None] * leg.direction
    tau_beam = light.tau_before.sum() + field.mixture.thicknesses(leg.origin, places).sum(axis=0)
    tau_sight = field.mixture.thicknesses(places, field.points).sum(axis=0)
    power = powers * leg.reflected
    value = component.profile.value(places)
    # A place on a face of a region may be just outside it by rounding.
    density = component.scattering * np.where(value > 0, value, 1.0)
    bare = power * density / sight.b * (end - start)
    hand = bare * np.exp(-tau_beam - tau_sight)
    program = powers * light.by_component[index]
    rows = []
    for i in range(len(powers)):
        rows.append(
            HandCheck(
                beam=field.beam.name,
                line=field.line.name,
                leg=leg.number,
                component=component.name,
                power=float(power[i]),
                b=float(sight.b[i]),
                s0=float(sight.s0[i]),
                length=leg.length,
                theta1=float(theta1[i]),
                theta2=float(theta2[i]),
                scattering=float(density[i]),
                polarization=swing.words,
                q=swing.q,
                phi=None if phi is None else float(phi[i]),
                integral_11=float(plain2[i] - plain1[i]),
                integral_12=float(other2[i] - other1[i]),
                integral=float(end[i] - start[i]),
                theta_mid=float(theta_mid[i]),
                s_mid=float(s_mid[i]),
                r_mid=float(sight.b[i] / math.sin(theta_mid[i])),
                tau_beam=float(tau_beam[i]),
                tau_sight=float(tau_sight[i]),
                hand=float(hand[i]),
                program=float(program[i]),
                remark=_remark(
                    float(hand[i]),
                    float(program[i]),
                    float(bare[i]),
                    float(tau_beam[i] + tau_sight[i]),
                    component.profile.steepness() > 0,
                ),
            )
        )
    return rows


def _remark(hand: float, program: float, bare: float, tau: float, thins: bool) -> str:
    if program <= 0 or bare <= 0 or abs(hand / program - 1) <= AGREES_WITHIN:
        return ""
    if thins:
        return (
            f"density changes along the leg: its elements send {program / bare:.4g} of what they would at the middle "
            f"element's density without extinction; the transmittance there is {math.exp(-tau):.4g}"
        )
    return (
        f"extinction changes along the leg: its mean transmittance is {program / bare:.4g}, "
        f"at the middle element {math.exp(-tau):.4g}"
    )
