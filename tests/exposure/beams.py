"""Beams and lines for the tests of exposure."""

from __future__ import annotations

from lasescatter.scene import Beam, Line, Pulses, Stop


def line(**changes) -> Line:
    values = {
        "name": "beam",
        "wavelength": 532e-9,
        "power": 1.0,
        "pulses": None,
        "diameter": 3e-3,
        "divergence": 1e-3,
        "polarization": "unpolarized",
        "electric_field": None,
        "polarization_ratio": 100.0,
        "key": 'beam["beam"]',
    }
    return Line(**{**values, **changes})


def beam(*points, lines=None, **changes) -> Beam:
    values = {
        "name": "beam",
        "lines": lines or (line(),),
        "profile": "gaussian",
        "points": points or ((0.0, 0.0, 0.0), (5.0, 0.0, 0.0)),
        "mirror_reflectance": (1.0,) * (max(len(points), 2) - 2),
        "mirrors": "real",
        "leaves_site": True,
        "stop": None,
        "key": 'beam["beam"]',
    }
    return Beam(**{**values, **changes})


def train(energy=10e-3, duration=8e-9, rate=20.0) -> Pulses:
    return Pulses(energy, duration, rate, None)


__all__ = ["Stop", "beam", "line", "train"]
