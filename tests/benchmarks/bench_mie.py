"""Time of averages over sizes, and the ratio to miepython doing the same sum in the same run.

    python tests/benchmarks/bench_mie.py

miepython is used as imported; the heading says whether its compiled kernels are on. It is timed on every k-th radius
only and scaled by its series length, since all of them take minutes. Both sides give S11 and S12 at the same
angles, the extinction and the scattering.
"""

from __future__ import annotations

import os
import platform
import time
from collections.abc import Callable

import miepython
import numpy as np

from lasescatter.matter import Lognormal, ModifiedGamma, SizeMode, SizeShape
from lasescatter.optics.angular import AngularTables
from lasescatter.optics.distributions import density, log_radius_limits
from lasescatter.optics.mie import averaged, sphere
from lasescatter.optics.recurrences import series_length
from lasescatter.optics.sizes import particle_optics

WAVELENGTH = 532e-9
DISTRIBUTIONS: list[tuple[str, Lognormal | ModifiedGamma, complex, int]] = [
    ("haze, median 0.25 um", Lognormal(0.25e-6, 1.6), 1.43 + 1e-6j, 400),
    ("haze, median 0.5 um", Lognormal(0.5e-6, 1.6), 1.43 + 1e-6j, 400),
    ("fine smoke, median 0.1 um", Lognormal(0.1e-6, 1.6), 1.55 + 0.02j, 200),
    ("cloud, median 1 um (task A)", Lognormal(1e-6, 1.6), 1.33 + 1e-8j, 400),
    ("large fog, median 4 um (task C)", Lognormal(4e-6, 1.5), 1.33 + 1e-8j, 1000),
]


def seconds(job: Callable[[], object], repeats: int = 5) -> float:
    best = np.inf
    for _ in range(repeats):
        start = time.perf_counter()
        job()
        best = min(best, time.perf_counter() - start)
    return best


def miepython_seconds(index: complex, x: np.ndarray, cosine: np.ndarray) -> float:
    """Time of all spheres, from about twenty of them."""
    some = x[:: max(1, x.size // 20)]

    def job() -> None:
        for size in some:
            miepython.efficiencies_mx(index.conjugate(), size)
            miepython.S1_S2(index.conjugate(), size, cosine, norm="wiscombe")

    return seconds(job, 2) * series_length(x).sum() / series_length(some).sum()


def same_sum(shape: Lognormal | ModifiedGamma, index: complex, count: int) -> tuple[float, float]:
    """Ours with tables kept from call to call, and miepython's, for `count` equal steps of ln r."""
    wavenumber = 2 * np.pi / WAVELENGTH
    u = np.linspace(*log_radius_limits(shape, wavenumber, abs(index - 1), 1e-5), count)
    x, weight = wavenumber * np.exp(u), density(shape, u) * (u[1] - u[0])
    tables = AngularTables()
    ours = seconds(lambda: averaged(index, x, weight, tables))
    return ours, miepython_seconds(index, x, np.cos(np.linspace(0, np.pi, 721)))


def to_accuracy(shape: SizeShape, index: complex) -> tuple[float, int, float]:
    modes = (SizeMode(shape),)
    optics = particle_optics(modes, index, WAVELENGTH)
    return seconds(lambda: particle_optics(modes, index, WAVELENGTH), 3), optics.nodes, optics.error_f11


def main() -> None:
    kernels = "compiled" if miepython.USE_JIT else "not compiled"
    threads = os.environ.get("OPENBLAS_NUM_THREADS", "default")
    print(f"Python {platform.python_version()}, numpy {np.__version__}, BLAS threads: {threads}")
    print(f"miepython {miepython.__version__}, kernels {kernels}, one thread")
    print(f"{'':34}{'same radii, 721 angles':^36}{'particle_optics to its accuracy':^40}")
    print(f"{'':34}{'radii':>6}{'ours ms':>9}{'miepython ms':>13}{'ratio':>8}{'radii':>10}{'estimate':>10}{'ms':>10}")
    for name, shape, index, count in DISTRIBUTIONS:
        ours, theirs = same_sum(shape, index, count)
        time_, nodes, error = to_accuracy(shape, index)
        row = f"{name:34}{count:6d}{1e3 * ours:9.2f}{1e3 * theirs:13.0f}{theirs / ours:8.0f}"
        print(f"{row}{nodes:10d}{error:10.1e}{1e3 * time_:10.1f}")
    for x in (5.2, 100.0, 1000.0, 10_000.0):
        cosine = np.cos(np.linspace(0, np.pi, 721))
        ours = seconds(lambda x=x: sphere(1.55, x).amplitudes(np.linspace(0, np.pi, 721)), 3)
        theirs = miepython_seconds(1.55 + 0j, np.array([x]), cosine)
        print(f"{f'one sphere, x = {x:g}':34}{1:6d}{1e3 * ours:9.2f}{1e3 * theirs:13.1f}{theirs / ours:8.1f}")


if __name__ == "__main__":
    main()
