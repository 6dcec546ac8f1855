"""The scattered irradiance summed literally: short elements of beam in Cartesian coordinates, inverse squares.

No angle substitution, no adaptive rule, no closed columns: slow, and there only to judge the fast integral.
"""

from __future__ import annotations

import numpy as np


def literal_sum(start, end, observer, scatterers, elements=200_000, axis=None, purity=0.0, before=0.0):
    """Irradiance at one observer of a one-watt beam [m⁻²].

    `scatterers` is a list of (scattering, extinction, f11(angle), f12(angle), inside(points)).
    """
    start, end, observer = (np.asarray(v, dtype=float) for v in (start, end, observer))
    length = np.linalg.norm(end - start)
    u = (end - start) / length
    s = (np.arange(elements) + 0.5) * length / elements
    x = start + s[:, None] * u
    towards = observer - x
    r = np.linalg.norm(towards, axis=1)
    cosine = np.clip(towards @ u / r, -1, 1)
    angle = np.arccos(cosine)
    double = np.zeros(elements)
    if axis is not None:
        across = towards - (towards @ u)[:, None] * u
        across /= np.linalg.norm(across, axis=1)[:, None]
        double = 2 * (across @ np.asarray(axis, dtype=float)) ** 2 - 1
    # Extinction: counted along beam and sight line by sampling where the load is.
    tau = np.full(elements, before)
    sample = (np.arange(400) + 0.5) / 400
    emitted = np.zeros(elements)
    for scattering, extinction, f11, f12, inside in scatterers:
        here = inside(x).astype(float)
        if extinction:
            tau += extinction * (np.cumsum(here) - here / 2) * length / elements
            path = np.zeros(elements)
            for t in sample:
                path += inside(x + t * towards)
            tau += extinction * r * path / len(sample)
        emitted += scattering * here / (4 * np.pi) * (f11(angle) + purity * double * f12(angle))
    return float(np.sum(emitted * np.exp(-tau) / r**2) * length / elements)
