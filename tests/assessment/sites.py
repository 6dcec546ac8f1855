"""Invented sites as scenes, for the tests of whole assessments."""

from __future__ import annotations

from dataclasses import replace

from exposure.beams import beam, line
from limits.entries import blue, limit, observer, skin

from lasescatter.matter import Lognormal, Material, SizeMode
from lasescatter.scene import Air, Box, Everywhere, LengthUnit, Load, LoadReading, Scene, Stop


def haze(**changes) -> Load:
    values = {
        "name": "test haze",
        "modes": (SizeMode(Lognormal(0.35e-6, 1.5)),),
        "material": Material(1.42 + 1e-6j, 1060.0),
        "reading": LoadReading("extinction", 0.01, 532e-9),
        "region": Box((1.0, -2.0, 0.0), (8.0, 2.0, 3.0)),
        "steady_by": None,
        "key": 'particles["test haze"]',
    }
    return Load(**{**values, **changes})


def bay(**changes) -> Scene:
    """A 2 W green beam across a hazed bay onto a matt stop, one person beside it."""
    green = line(
        name="alignment beam", power=2.0, polarization="linear", electric_field=(0.0, 0.0, 1.0),
        key='beam["alignment beam"]',
    )  # fmt: skip
    path = beam(
        (0.0, 0.0, 1.2), (9.0, 0.0, 1.2), lines=(green,), name="alignment beam", leaves_site=False,
        stop=Stop(0.3, (-1.0, 0.0, 0.0)), key='beam["alignment beam"]',
    )  # fmt: skip
    values = {
        "title": "Invented bay",
        "reference": "IB-1",
        "prepared_by": "duty laser safety officer",
        "length_unit": LengthUnit("m", 1.0),
        "not_judged": (),
        "air": Air(),
        "beams": (path,),
        "loads": (haze(),),
        "observers": (observer(position=(4.0, 1.5, 1.6)),),
        "limits": (limit(), blue(), skin()),
    }
    return Scene(**{**values, **changes})


__all__ = ["Everywhere", "LoadReading", "bay", "beam", "blue", "haze", "limit", "line", "observer", "replace", "skin"]
