"""An invented assessment to draw: numbers that hang together, made here and not by the program's physics.

The phase functions are Henyey–Greenstein and Rayleigh shapes, the beams pencils in a uniform medium, so the
hand checks obey E3 by construction. Everything about the site is invented.
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from lasescatter.assessment.outcome import (
    Assessment,
    BeamSpot,
    ComponentSummary,
    HandCheck,
    InTheBeam,
    LineExposure,
    ObserverOutcome,
    Provenance,
    SizeMovement,
    StopCheck,
)
from lasescatter.assumptions import Assumption
from lasescatter.cautions import cautions
from lasescatter.limits.compare import Comparison, HazardJudgement
from lasescatter.limits.verdict import ABOVE, BELOW, NOT_ESTABLISHED, Verdict, worst
from lasescatter.matter import (
    HenyeyGreenstein,
    IndexTable,
    Lognormal,
    Material,
    MeasuredMatrix,
    SingleSize,
    SizeMode,
    SizeSpan,
    SizeTable,
    Trust,
)
from lasescatter.scene import (
    Air,
    Beam,
    Box,
    Everywhere,
    InputLine,
    LengthUnit,
    Limit,
    Line,
    Load,
    LoadReading,
    Observer,
    Pulses,
    Scene,
    Stop,
    Vector,
)

HOSTILE = '<b>&amp;</b> <a href="https://example.invalid">漢字</a> 😀 $x_1$'
LONG = "bench at the far end of the bay where the second shift keeps its trolleys, " * 2 + "x" * 90
OFFICER = "duty laser safety officer"
METRE = LengthUnit("m", 1.0)
ANGLES = np.radians(np.arange(0.0, 180.25, 0.5))

GREEN = Line(
    "alignment beam", 532e-9, 2.0, None, 3e-3, 1e-3, "linear", (0.0, 0.0, 1.0), 100.0, 'beam["alignment beam"]'
)
TRAIN = Line(
    "infrared", 1064e-9, 0.2, Pulses(10e-3, 8e-9, 20.0, None, 1.5), 6e-3, 0.5e-3, "unknown", None, 1.0,
    'beam["ranging <i>& pulses"].line["infrared"]',
)  # fmt: skip
RED = Line(
    "pointer", 650e-9, 4e-3, None, 2e-3, 1.5e-3, "circular", None, 1.0, 'beam["ranging <i>& pulses"].line["pointer"]'
)

BEAMS = (
    Beam(
        "alignment beam", (GREEN,), "gaussian", ((0.0, 0.0, 1.2), (9.0, 0.0, 1.2), (9.0, 3.0, 1.8)), (0.98,), "real",
        False, Stop(0.3, (0.0, -1.0, 0.0)), 'beam["alignment beam"]',
    ),
    Beam(
        "ranging <i>& pulses", (TRAIN, RED), "top-hat", ((1.0, -2.5, 1.5), (6.0, -2.0, 2.2)), (), "real", True, None,
        'beam["ranging <i>& pulses"]',
    ),
)  # fmt: skip

WEAK = Trust("weak", 3.0, "sizes of one hazer in one room, <b>index</b> from a data sheet & invented")
SPAN = SizeSpan("mass median diameter", 1.0e-6, 0.5e-6, 1.5e-6, "invented for this test, table <3>")
INDEX = IndexTable(
    (400e-9, 600e-9, 1100e-9), (1.45, 1.43, 1.42), (1e-6, 1e-6, 2e-6), (True, False, False), "glycol <mix>",
    "invented for this test",
)  # fmt: skip

LOADS = (
    Load(
        "test haze", (SizeMode(Lognormal(0.3e-6, 1.6)),), Material(INDEX, 1060.0),
        LoadReading("extinction", 0.01, 550e-9), Box((1.0, -3.0, 0.0), (8.0, 2.5, 3.0)), None, 'particles["test haze"]',
        "glycol & <haze>", WEAK, SPAN,
    ),
    Load(
        "dust & <u>lint</u>", (SizeMode(Lognormal(2e-6, 1.8)),), Material(1.53 + 5e-3j, 2000.0),
        LoadReading("mass", 5e-8, basis="dry"), Everywhere(), "duty laser safety officer",
        'particles["dust & <u>lint</u>"]',
    ),
)  # fmt: skip

MORE_LOADS = (
    Load(
        "stand-in", (), None, LoadReading("transmittance", 0.8, 650e-9, 3.0), Everywhere(), None,
        'particles["stand-in"]', trust=Trust("stand-in", 5.0, "a stand-in"), stand_in=HenyeyGreenstein(0.8), albedo=0.9,
    ),
    Load(
        "measured", (), None, LoadReading("visual_range", 50.0, 550e-9), Everywhere(), None, 'particles["measured"]',
        trust=Trust("entered", 2.0, "no F12 was measured"), albedo=0.85,
        stand_in=MeasuredMatrix((0.0, 1.5, math.pi), (3.0, 0.8, 0.7), None, None, None, 1.25, "matrix <a>.csv"),
    ),
    Load(
        "mixture",
        (
            SizeMode(Lognormal(0.1e-6, 2.0, largest=5e-6), 0.7, Material(1.53 + 0.008j, 1800.0)),
            SizeMode(SizeTable((1e-7, 2e-7, 4e-7), (0.0, 1.5, 0.0)), 0.2),
            SizeMode(SingleSize(2e-6), 0.1),
        ),
        Material(INDEX, None), LoadReading("number", 1e9), Everywhere(), None, 'particles["mixture"]',
    ),
)  # fmt: skip
"""Loads of the other sorts, for tests that put them into a scene."""

LIMITS = (
    Limit(
        "eye, green, ten seconds", "retina", "thermal", "irradiance", 10.0, 0.0, (400e-9, 700e-9), (10.0, 30000.0),
        7e-3, "exposure", None, None, "edition held on site, clause 5, table 3", OFFICER, "limit[1]",
    ),
    Limit(
        "eye, infrared pulses", "retina", "thermal", "radiant exposure", 2e-2, 0.0, (1050e-9, 1400e-9), (1e-9, 1.3e-5),
        7e-3, "pulse", "N^-1/4", None, "edition held on site, <clause 6>", OFFICER, "limit[2]",
    ),
    Limit(
        "eye, infrared, long", "retina", "thermal", "irradiance", 50.0, 0.0, (1050e-9, 1400e-9), (10.0, 30000.0),
        7e-3, "exposure", None, 0.1, "edition held on site, clause 5, table 3", OFFICER, "limit[3]",
    ),
)  # fmt: skip

PLACES: tuple[tuple[str, Vector], ...] = (
    ("console operator", (4.0, 1.5, 1.6)),
    (HOSTILE, (7.5, -1.2, 1.7)),
    (LONG, (2.0, 2.2, 1.1)),
)


def scene(places: tuple[tuple[str, Vector], ...] = PLACES, unit: LengthUnit = METRE) -> Scene:
    """The invented site with the given observers."""
    observers = tuple(
        Observer(name, position, 0.25, (0.25, 10.0), 7200.0, "deliberate", f"observer[{place}]")
        for place, (name, position) in enumerate(places, start=1)
    )
    inputs = (
        InputLine("title", '"Hazed bay <b>&</b> two beams"', "Hazed bay <b>&</b> two beams"),
        InputLine('beam["alignment beam"].wavelength', '"532 nm"', "5.32e-07 m"),
        InputLine('beam["alignment beam"].power', '"2 W"', "2 W"),
        InputLine('beam["alignment beam"].polarization_ratio', "", "100", stated=False),
        InputLine('beam["ranging <i>& pulses"].line["infrared"].pulses.energy', '"10 mJ"', "0.01 J"),
        InputLine("air.temperature", "", "293.15 K", stated=False),
        *(InputLine(f"{observer.key}.name", f'"{observer.name}"', observer.name) for observer in observers),
    )
    return Scene(
        "Hazed bay <b>&</b> two beams, 2 W & 10 mJ", "TB-3 rev B & <i>", "duty laser safety officer", unit,
        (("skin", "covered by the clothing rule for this bay & <b>checked</b>"),), Air(), BEAMS, LOADS, observers,
        LIMITS, inputs,
    )  # fmt: skip


def phase(component: str, wavelength: float) -> tuple[np.ndarray, np.ndarray]:
    """F11/(4π) and F12/(4π) on ANGLES."""
    mu = np.cos(ANGLES)
    if component == "air":
        f11, f12 = 0.75 * (1 + mu**2), -0.75 * (1 - mu**2)
    else:
        g = {"test haze": 0.72, LOADS[1].name: 0.8}[component] - 1e5 * (wavelength - 532e-9)
        f11 = (1 - g * g) / (1 + g * g - 2 * g * mu) ** 1.5
        f12 = 0.2 * f11 * np.sin(2 * ANGLES) * np.sin(ANGLES)
    return f11 / (4 * np.pi), f12 / (4 * np.pi)


def running(values: np.ndarray) -> np.ndarray:
    """Integral over angle from 0, trapezoids."""
    steps = 0.5 * (values[1:] + values[:-1]) * np.diff(ANGLES)
    return np.concatenate([[0.0], np.cumsum(steps)])


def readings(extinction: float, wavelength: float, mass: float) -> tuple[LoadReading, ...]:
    """What instruments would read, by the laws of Lambert and Koschmieder."""
    loss = math.exp(-extinction)
    return (
        LoadReading("mass", mass / 1.3, basis="dry"),
        LoadReading("mass", mass, basis="ambient"),
        LoadReading("number", 5.4e9),
        LoadReading("meteorological_optical_range", 2.996 / 0.01, 550e-9),
        LoadReading("visual_range", 3.912 / 0.01, 550e-9),
        LoadReading("extinction", extinction, wavelength),
        LoadReading("obscuration", 1 - loss, wavelength, 1.0),
        LoadReading("obscuration", 1 - loss**0.3048, wavelength, 0.3048),
        LoadReading("optical_density", extinction / math.log(10), wavelength),
        LoadReading("attenuation", 10 * extinction / math.log(10), wavelength),
        LoadReading("transmittance", loss, wavelength, 1.0),
        LoadReading("transmittance", loss**10, wavelength, 10.0),
    )


def component(name: str, wavelength: float) -> ComponentSummary:
    f11, f12 = phase(name, wavelength)
    scattering = {"air": 1.3e-5, "test haze": 0.01, LOADS[1].name: 5e-5}[name] * (532e-9 / wavelength)
    curves = (
        tuple(ANGLES), tuple(f11), tuple(f12), tuple(running(f11)), tuple(running(f12)), tuple(running(np.abs(f12))),
    )  # fmt: skip
    if name == "air":
        return ComponentSummary(
            name, wavelength, scattering, scattering, 1.0, 0.0, None, None, None, None, None, None, None, *curves
        )
    mass = 6.1e-6 if name == "test haze" else None
    summary = ComponentSummary(
        name, wavelength, scattering * 1.0001, scattering, 0.9999, 0.72, 5.4e9, mass, 1650.0, 8.7e-7, 641, 4.2e-4, 3e-5,
        *curves,
    )  # fmt: skip
    if mass is None:
        return replace(summary, index=1.53 + 5e-3j)
    return replace(
        summary, kind=LOADS[0].kind, index=1.41 + 1e-6j, growth_factor=1.093, dry_mass=mass / 1.3, trust=WEAK,
        equivalents=readings(scattering * 1.0001, wavelength, mass),
    )  # fmt: skip


COMPONENTS = tuple(
    component(name, line.wavelength) for line in (GREEN, TRAIN, RED) for name in ("air", "test haze", LOADS[1].name)
)


def hand_checks(position: Vector) -> tuple[HandCheck, ...]:
    """E3 for every leg, line and component, the way the report prints it."""
    found = []
    for beam in BEAMS:
        legs = [list(pair) for pair in zip(beam.points, beam.points[1:], strict=False)]
        for number, (start, end) in enumerate(legs, start=1):
            along = np.subtract(end, start)
            ell = float(np.linalg.norm(along))
            u = along / ell
            endless = beam.leaves_site and number == len(legs)
            offset = np.subtract(position, start)
            s0 = float(offset @ u)
            b = float(np.linalg.norm(offset - s0 * u))
            theta1 = math.atan2(b, s0)
            theta2 = math.pi if endless else math.atan2(b, s0 - ell)
            for line in beam.lines:
                for name in ("air", "test haze", LOADS[1].name):
                    found.append(_one(beam, line, number, name, b, s0, math.inf if endless else ell, theta1, theta2))
    return tuple(found)


def _one(
    beam: Beam, line: Line, leg: int, name: str, b: float, s0: float, ell: float, theta1: float, theta2: float
) -> HandCheck:
    optics = next(c for c in COMPONENTS if c.name == name and c.wavelength == line.wavelength)
    worst_axis = line.polarization == "unknown"
    kind = {"linear": "known axis", "unknown": "worst axis"}.get(line.polarization, "unpolarized")
    q = {"known axis": 99 / 101, "worst axis": 1.0, "unpolarized": 0.0}[kind]
    phi = 1.1 if kind == "known axis" else None

    def between(values: tuple[float, ...]) -> float:
        return float(np.interp(theta2, ANGLES, values) - np.interp(theta1, ANGLES, values))

    i11, i12 = between(optics.running), between(optics.running_12_abs if worst_axis else optics.running_12)
    integral = i11 + (i12 if worst_axis else q * math.cos(2 * (phi or 0.0)) * i12)
    theta_mid = theta1 + 0.4 * (theta2 - theta1)
    s_mid, r_mid = s0 - b / math.tan(theta_mid), b / math.sin(theta_mid)
    tau_beam, tau_sight = 0.0101 * s_mid, 0.0101 * r_mid
    power = line.power * (0.98 if leg == 2 else 1.0)
    hand = power / b * optics.scattering * integral * math.exp(-tau_beam - tau_sight)
    odd = name == LOADS[1].name and leg == 2
    return HandCheck(
        beam.name, line.name, leg, name, power, b, s0, ell, theta1, theta2, optics.scattering, kind, q, phi, i11, i12,
        integral, theta_mid, s_mid, r_mid, tau_beam, tau_sight, hand, hand * (1.11 if odd else 0.995),
        "extinction along the beam: the single angle theta_mid does not stand for its spread" if odd else "",
    )  # fmt: skip


def exposures(checks: tuple[HandCheck, ...], direct: float) -> tuple[LineExposure, ...]:
    found = []
    for beam in BEAMS:
        for line in beam.lines:
            total = sum(c.program for c in checks if c.beam == beam.name and c.line == line.name)
            rate = line.pulses.rate if line.pulses else None
            stop = 2e-5 if beam.stop else 0.0
            on_axis = direct if beam.stop else 0.0
            found.append(
                LineExposure(
                    beam.name, line.name, line.wavelength, total, total * 2e-5, total * 0.9, total * 1.02, 0.87,
                    stop, stop * 1.05, on_axis, rate, total / rate if rate else None,
                    (total * 1.02 + stop) / rate if rate else None, on_axis / rate if rate else None,
                )
            )  # fmt: skip
    return tuple(found)


def stop_checks(lines: tuple[LineExposure, ...]) -> tuple[StopCheck, ...]:
    """One for each line that meets a stop."""
    return tuple(
        StopCheck(line.beam, line.line, 2.0, 0.3, 2.5, 0.8, 0.049, line.diffuse_compared, line.diffuse)
        for line in lines
        if line.diffuse
    )


def comparisons(lines: tuple[LineExposure, ...], direct: float) -> tuple[Comparison, ...]:
    found = []
    for line in lines:
        for limit in LIMITS:
            if not limit.wavelengths[0] <= line.wavelength <= limit.wavelengths[1]:
                continue
            pulse = limit.per == "pulse"
            scale = 1 / (line.pulse_rate or 1.0) if pulse else 1.0
            origin = tuple(
                (word, value * scale)
                for word, value in (
                    ("scattered", line.scattered_compared), ("stop", line.diffuse_compared), ("direct", line.direct)
                )
            )  # fmt: skip
            exposure = sum(value for _, value in origin)
            ratio = exposure / limit.value
            verdict: Verdict = BELOW if ratio <= 1 else ABOVE
            found.append(
                Comparison(
                    limit.name, line.beam, line.line, "retina thermal", "retina", "thermal", limit.quantity,
                    "J/m²" if pulse else "W/m²", 10.0, 10.0, 8e-9 if pulse else 10.0, exposure, limit.value, ratio,
                    ratio * 0.99, ratio * 1.04, max(0.0, math.log10(ratio)) if ratio > 0 else 0.0, origin,
                    (("numerical error", exposure * 0.04),),
                    (("from", 0.4), ("to", 0.5)) if limit.acceptance else None, 200 if pulse else None, verdict,
                    "per pulse, train factor N^-1/4 with N = 200" if pulse else "",
                )
            )  # fmt: skip
    return tuple(found)


LEFT_OUT = HazardJudgement(
    "skin", None, None, None, NOT_ESTABLISHED, (), (), "covered by the clothing rule for this bay"
)


def outcome(observer: Observer, place: int) -> ObserverOutcome:
    """Every third observer has direct light, every third none that can be judged."""
    kind = place % 3
    direct = 35.0 if kind == 1 else 0.0
    checks = hand_checks(observer.position)
    lines = exposures(checks, direct)
    found = comparisons(lines, direct) if kind != 2 else ()
    ratio = sum(max((c.ratio for c in found if c.line == x.line), default=0.0) for x in lines) if found else None
    verdict: Verdict = (BELOW, ABOVE, NOT_ESTABLISHED)[kind]
    reasons = {
        BELOW: (),
        ABOVE: ("direct light of alignment beam at the observer is 3.5 of the limit",),
        NOT_ESTABLISHED: (
            "cornea and lens: no limit covers infrared (1064 nm) for 10 s",
            "the direct beam of ranging <i>& pulses is within reach (0.25 m)",
        ),
    }[verdict]
    low, high = (None, None) if ratio is None else (ratio * 0.99, ratio * 1.04)
    parts = tuple((c.line, c.limit, c.ratio) for c in found)
    return ObserverOutcome(
        observer.name, observer.key, observer.position, verdict, reasons, ratio,
        "retina thermal, by eye, green, ten seconds" if found else "", 1.23 + 0.01 * place, "alignment beam", 0.083,
        "ranging <i>& pulses" if kind == 2 else "", lines, checks, stop_checks(lines), found,
        (HazardJudgement("retina thermal", ratio, low, high, verdict, reasons, parts, ""), LEFT_OUT),
    )  # fmt: skip


def spots(beam: Beam, places: tuple[str, ...], limit: float | None) -> tuple[BeamSpot, ...]:
    names = ["start", *(f"mirror {i}" for i in range(1, len(beam.points) - 1)), *(["stop"] if beam.stop else [])]
    names += [f"nearest to {name}" for name in places]
    return tuple(
        BeamSpot(
            name, (float(i), 0.0, 1.2), 1.5 * i, 3e-3 + 1e-3 * i, None if limit is None else 5.2e4 / (1 + i),
            None if limit is None else 5.2e3 / (1 + i), None if limit is None else 0.25,
            None if limit is None else 6.366 / (1 + i),
        )
        for i, name in enumerate(names)
    )  # fmt: skip


def in_the_beam(names: tuple[str, ...]) -> tuple[InTheBeam, ...]:
    green, train, red = (spots(BEAMS[0], names, 10.0), spots(BEAMS[1], names, 5e-3), spots(BEAMS[1], names, None))
    none = "no limit covers 650 nm for 10 s"
    other = BEAMS[1].name
    return (
        InTheBeam(BEAMS[0].name, GREEN.name, 532e-9, LIMITS[0].name, "W/m²", 10.0, 10.0, 504.6, "", green),
        InTheBeam(other, TRAIN.name, 1064e-9, LIMITS[1].name, "J/m²", 8e-9, 5.3e-3, 5034.0, "", train),
        InTheBeam(other, RED.name, 650e-9, None, "", None, None, None, none, red),
    )


SIZES = (0.5e-6, 0.7e-6, 1.0e-6, 1.22e-6, 1.5e-6)
SHIFTS = (0.42, 0.7, 1.0, 1.18, 1.31)


def movement(observers: tuple[ObserverOutcome, ...]) -> SizeMovement:
    """Light over the sizes of the haze, more for the later observers."""
    scattered = tuple(
        tuple(o.total("scattered_compared") * shift ** (1 + 0.01 * place) for shift in SHIFTS)
        for place, o in enumerate(observers)
    )
    factors = tuple(3.0 + 0.01 * place for place in range(len(observers)))
    load = LOADS[0]
    return SizeMovement(load.name, load.kind, SPAN.what, SPAN.usual, SIZES, scattered, SPAN.source, factors)


def assessment(places: tuple[tuple[str, Vector], ...] = PLACES, unit: LengthUnit = METRE) -> Assessment:
    """The invented result."""
    site = scene(places, unit)
    observers = tuple(outcome(observer, place) for place, observer in enumerate(site.observers))
    names = tuple(observer.name for observer in observers)
    return Assessment(
        site, worst(o.verdict for o in observers), COMPONENTS,
        in_the_beam(names), observers, (movement(observers),),
        (
            Assumption("particles puff above the mean load", "low", "up to several times", "physics, section 10"),
            Assumption("spheres for every particle", "low", "to the side, up to 3 times", "invented for this test"),
            Assumption("speckle averages out", "either", "not known", "common practice, no source"),
            Assumption("nothing stands between beam and observer", "high", "not known", "by construction"),
        ),
        cautions(),
        Provenance("0.1.0", "2.4.6", "1.17.1", "2026-12-01T10:20:30+00:00", "3f" * 32),
    )  # fmt: skip


def many(count: int) -> Assessment:
    """The same site with observers all over it."""
    places = tuple(
        (f"place {i + 1}", (0.4 + 0.83 * (i % 10), -2.2 + 0.47 * (i // 10), 1.2 + 0.05 * (i % 7))) for i in range(count)
    )
    return assessment(places)


def titled(title: str, reference: str = "TB-3") -> Assessment:
    """The invented result under another title."""
    made = assessment()
    return replace(made, scene=replace(made.scene, title=title, reference=reference))
