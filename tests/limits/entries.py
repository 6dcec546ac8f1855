"""Limits and observers for the tests of judgement: entries of an invented site unless a test names a source."""

from __future__ import annotations

from lasescatter.scene import Limit, Observer


def limit(**changes) -> Limit:
    values = {
        "name": "eye",
        "tissue": "retina",
        "mechanism": "thermal",
        "quantity": "irradiance",
        "value": 10.0,
        "time_exponent": 0.0,
        "wavelengths": (400e-9, 700e-9),
        "durations": (10.0, 30_000.0),
        "aperture": 7e-3,
        "per": "exposure",
        "train": None,
        "acceptance": None,
        "source": "edition held on site, clause and table",
        "entered_by": "duty laser safety officer",
        "key": 'limit["eye"]',
    }
    return Limit(**{**values, **changes})


def skin(**changes) -> Limit:
    return limit(**{"name": "skin", "tissue": "skin", "value": 2000.0, "wavelengths": (400e-9, 1400e-9), **changes})


def blue(**changes) -> Limit:
    return limit(**{"name": "blue", "mechanism": "photochemical", "wavelengths": (400e-9, 600e-9), **changes})


def observer(**changes) -> Observer:
    values = {
        "name": "console operator",
        "position": (2.0, 1.5, 1.6),
        "reach": 0.25,
        "durations": (10.0,),
        "daily": None,
        "viewing": "deliberate",
        "key": 'observer["console operator"]',
    }
    return Observer(**{**values, **changes})
