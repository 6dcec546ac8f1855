"""Scattered irradiance of a box of haze for many observers: ratio to scipy's adaptive quad on the same integrand.

Run it by itself: `python tests/benchmarks/bench_scattered.py`. Both sides in one run, same work and tolerance.
"""

from __future__ import annotations

import sys
import time
from pathlib import Path

import numpy as np
from scipy.integrate import quad

sys.path.insert(0, str(Path(__file__).parents[1]))

from exposure.media import PLAIN, air_matrix, component, leg, mixture

from lasescatter.exposure.scattered import TOLERANCE, elements, scattered
from lasescatter.exposure.sightline import sightlines
from lasescatter.medium.profiles import UprightBox


def best_of(times: int, work) -> float:
    spent = []
    for _ in range(times):
        start = time.perf_counter()
        work()
        spent.append(time.perf_counter() - start)
    return min(spent)


def main() -> None:
    box = UprightBox(np.array([0.5, -1.0, -1.0]), np.array([5.0, 1.2, 0.8]))
    air = air_matrix()
    medium = mixture(component(air, 1.3e-5, 1.3e-5, name="air", steady=True), component(air, 0.02, 0.02, box))
    path = leg([0, 0, 0], [9, 0, 0])
    points = np.random.default_rng(3).uniform([-1, 0.5, -1], [10, 4, 1], (500, 3))
    ours = best_of(5, lambda: scattered((path,), (PLAIN,), medium, points, np.zeros((1, 500)))) / 500

    def by_quad() -> None:
        for point in points[:20]:
            sight = sightlines(path, point[None])
            zero, before = np.zeros(1, dtype=int), np.zeros(2)

            def integrand(theta, sight=sight, point=point, zero=zero, before=before):
                emitted, _, tau, _ = elements(
                    path, PLAIN, medium, sight, point[None], before, zero, np.atleast_1d(theta)
                )
                return float((emitted.sum(axis=0) * np.exp(-tau.sum(axis=0)))[0])

            quad(integrand, sight.theta1[0], sight.theta2[0], epsrel=TOLERANCE, epsabs=0, limit=400)

    theirs = best_of(2, by_quad) / 20
    print(
        f"box of haze, 500 observers: {ours * 1e6:.0f} µs an observer; quad on the same integrand {theirs * 1e6:.0f} µs"
    )
    print(f"ratio {theirs / ours:.0f}")


if __name__ == "__main__":
    main()
