"""Time of averages over sizes, as ratios to compiled peers doing the same work in the same run.

    python tests/benchmarks/bench_mie.py [--guard]

Tasks A, B and C: the sums of S11, S12, S33, S34 at all angles, extinction and scattering over the same radii with the
same weights. Peers: scatrs as called for a list of spheres, which takes one thread, and miepython with its compiled
kernels, on every k-th radius only and scaled by series length, since all of them take minutes. Each is timed turn by
turn by the clock and by processor time of all threads; the latter depends less on what else the machine does. With
--guard the exit status is 1 where a ratio of processor times to scatrs is below half of its target or S11 is farther
off than 1e-9.
"""

from __future__ import annotations

import os
import sys

os.environ.setdefault("MIEPYTHON_USE_JIT", "1")
# The matrix library's own threads go on turning for a while after each product: here they would spoil the times.
os.environ["OPENBLAS_NUM_THREADS"] = "1"

import platform
import time
from collections.abc import Callable
from dataclasses import dataclass

import miepython
import numpy as np
import scatrs
from scatrs import mie as peer

from lasescatter.matter import Lognormal, SizeMode
from lasescatter.optics import cosines
from lasescatter.optics.mie import MieSpace, averaged, sphere
from lasescatter.optics.recurrences import series_length
from lasescatter.optics.sizes import particle_optics

WAVELENGTH = 0.532
"""[um]"""


@dataclass(frozen=True)
class Task:
    """Spheres of one index with lognormal weights at Gauss–Legendre nodes of ln r."""

    name: str
    index: complex
    median: float
    sd: float
    count: int
    low: float
    high: float
    angles: int
    target: float
    """Ratio to scatrs that is aimed at."""

    def spheres(self) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        """Size parameters, weights and angles."""
        t, w = np.polynomial.legendre.leggauss(self.count)
        span = np.log(self.high / self.low)
        r = self.low * np.exp((t + 1) / 2 * span)
        w = w * span / 2 * np.exp(-0.5 * (np.log(r / self.median) / np.log(self.sd)) ** 2)
        return 2 * np.pi * r / WAVELENGTH, w, np.linspace(0, np.pi, self.angles)


TASKS = (
    Task("A cloud", 1.33 + 1e-8j, 1.0, 1.6, 400, 0.05, 15, 721, 5.0),
    Task("B fine smoke", 1.55 + 0.02j, 0.1, 1.6, 200, 0.005, 1.5, 361, 2.5),
    Task("C large fog", 1.33 + 1e-8j, 4.0, 1.5, 1000, 0.5, 40, 1801, 10.0),
)
TO_ACCURACY = {
    "haze, median 0.25 um": (Lognormal(0.25e-6, 1.6), 1.43 + 1e-6j),
    "haze, median 0.5 um": (Lognormal(0.5e-6, 1.6), 1.43 + 1e-6j),
    "fine smoke, median 0.1 um": (Lognormal(0.1e-6, 1.6), 1.55 + 0.02j),
    "cloud, median 1 um (task A)": (Lognormal(1e-6, 1.6), 1.33 + 1e-8j),
    "large fog, median 4 um (task C)": (Lognormal(4e-6, 1.5), 1.33 + 1e-8j),
}


Seconds = tuple[float, float]
"""By the clock and of the processor."""


def fastest(*jobs: Callable[[], object], repeats: int = 15) -> list[Seconds]:
    """Least times of each job, taken in turn. [s]"""
    best = [(np.inf, np.inf)] * len(jobs)
    for _ in range(repeats):
        for i, job in enumerate(jobs):
            clock, processor = time.perf_counter(), time.process_time()
            job()
            taken = time.perf_counter() - clock, time.process_time() - processor
            best[i] = min(best[i][0], taken[0]), min(best[i][1], taken[1])
    return best


def ours(task: Task, x: np.ndarray, w: np.ndarray, space: MieSpace) -> np.ndarray:
    """S11, S12, S33, S34 at the task's equal steps of angle; extinction and scattering come with the sum."""
    found = averaged(task.index, x, w, space)
    intervals = task.angles - 1
    multiple = -(-(found.matrix.shape[1] - 1) // intervals)
    return cosines.to_samples(found.matrix, multiple * intervals)[:, ::multiple]


def theirs(task: Task, x: np.ndarray, w: np.ndarray, cosine: np.ndarray) -> np.ndarray:
    """The same by scatrs, whose elements come with a mean of 1 for each sphere."""
    matrix, efficiencies = peer.phase_matrix(x, task.index, cosine), peer.efficiencies(x, task.index)
    scale = w * efficiencies.q_sca * x**2 / 4
    return np.stack([scale @ element for element in (matrix.f11, matrix.f12, matrix.f33, matrix.f34)])


def miepython_seconds(task: Task, x: np.ndarray, cosine: np.ndarray) -> float:
    """Time of all spheres, from about twenty of them."""
    some = x[:: max(1, x.size // 20)]

    def job() -> None:
        for size in some:
            miepython.efficiencies_mx(task.index.conjugate(), size)
            miepython.S1_S2(task.index.conjugate(), size, cosine, norm="wiscombe")

    return fastest(job, repeats=3)[0][1] * series_length(x).sum() / series_length(some).sum()


def same_work() -> bool:
    """Print tasks A, B, C; whether all are within the guard."""
    good = True
    print(f"{'':14}{'':>6}{'by the clock, ms':^23}{'of the processor, ms':^31}{'miepython':^17}")
    print(
        f"{'':14}{'radii':>6}{'ours':>7}{'scatrs':>8}{'ratio':>8}{'ours':>8}{'scatrs':>8}{'ratio':>7}{'target':>8}",
        end="",
    )
    print(f"{'ms':>9}{'ratio':>7}{'S11 off':>10}")
    for task in TASKS:
        x, w, theta = task.spheres()
        cosine, space = np.cos(theta), MieSpace()
        here, there = fastest(lambda: ours(task, x, w, space), lambda: theirs(task, x, w, cosine))  # noqa: B023
        slow = miepython_seconds(task, x, cosine)
        first, second = ours(task, x, w, space), theirs(task, x, w, cosine)
        off = float(np.abs(first[0] / second[0] - 1).max())
        ratios = [b / a for a, b in zip(here, there, strict=True)]
        print(f"{task.name:14}{x.size:6d}{1e3 * here[0]:7.2f}{1e3 * there[0]:8.1f}{ratios[0]:8.1f}", end="")
        print(f"{1e3 * here[1]:8.2f}{1e3 * there[1]:8.1f}{ratios[1]:7.1f}{task.target:8.1f}", end="")
        print(f"{1e3 * slow:9.0f}{slow / here[1]:7.0f}{off:10.1e}")
        good &= ratios[1] >= task.target / 2 and off <= 1e-9
    return good


def to_accuracy() -> None:
    """Print the time that averages take to an estimated 1e-3 in F11, node count found by the program."""
    print(f"\n{'to 1e-3 in F11':34}{'radii':>8}{'estimate':>10}{'first call ms':>15}{'later ms':>10}")
    for name, (shape, index) in TO_ACCURACY.items():
        modes, space = (SizeMode(shape),), MieSpace()
        found = particle_optics(modes, index, WAVELENGTH * 1e-6)
        fresh, later = fastest(
            lambda: particle_optics(modes, index, WAVELENGTH * 1e-6),  # noqa: B023
            lambda: particle_optics(modes, index, WAVELENGTH * 1e-6, space=space),  # noqa: B023
            repeats=5,
        )
        print(f"{name:34}{found.nodes:8d}{found.error_f11:10.1e}{1e3 * fresh[0]:15.1f}{1e3 * later[0]:10.1f}")


def one_sphere() -> None:
    """Print single spheres at 721 angles, where calls of the interpreter weigh most."""
    print(f"\n{'one sphere, 721 angles':34}{'ours ms':>9}{'scatrs ms':>11}{'ratio':>7}")
    theta = np.linspace(0, np.pi, 721)
    for x in (5.213, 100.0, 1000.0, 10_000.0):
        size = np.array([x])
        here, there = fastest(
            lambda: sphere(1.55, x).amplitudes(theta),  # noqa: B023
            lambda: (peer.phase_matrix(size, 1.55 + 0j, np.cos(theta)), peer.efficiencies(size, 1.55 + 0j)),  # noqa: B023
            repeats=5,
        )
        print(f"{f'x = {x:g}':34}{1e3 * here[0]:9.2f}{1e3 * there[0]:11.2f}{there[0] / here[0]:7.2f}")


def main() -> None:
    kernels = "compiled" if miepython.USE_JIT else "not compiled"
    print(f"Python {platform.python_version()}, numpy {np.__version__}, {os.cpu_count()} cores")
    print(f"scatrs {scatrs.__version__}; miepython {miepython.__version__}, kernels {kernels}\n")
    good = same_work()
    if "--guard" in sys.argv:
        sys.exit(0 if good else "a ratio is below half of its target, or S11 is off by more than 1e-9")
    to_accuracy()
    one_sphere()


if __name__ == "__main__":
    main()
