"""Cosine series in the scattering angle: the exact form of a Mie matrix summed over spheres.

The amplitudes of a sphere are polynomials of degree N in cos(theta), so every matrix element of a sum of
spheres is one of degree 2N: sum of c_k cos(k theta). Arrays hold c_0, c_1, … along the last axis.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray


def transform(values: NDArray[np.float64]) -> NDArray[np.float64]:
    """Cosine transform of the first kind along the last axis: y_0 + (−1)^k y_J + 2 sum y_j cos(pi j k/J).

    It is its own inverse but for the factor 2J.
    """
    return np.fft.rfft(np.concatenate((values, values[..., -2:0:-1]), axis=-1)).real


def from_samples(values: NDArray[np.float64]) -> NDArray[np.float64]:
    """Coefficients c_0…c_K from values at theta_j = pi j/K, j = 0…K, along the last axis."""
    series = transform(values) / (values.shape[-1] - 1)
    series[..., 0] /= 2
    series[..., -1] /= 2
    return series


def to_samples(series: NDArray[np.float64], intervals: int) -> NDArray[np.float64]:
    """Values at theta_j = pi j/intervals, j = 0…intervals; `intervals` is at least the degree."""
    degree = series.shape[-1] - 1
    if intervals < degree:
        raise ValueError(f"{intervals} intervals cannot carry a series of degree {degree}")
    padded = np.zeros((*series.shape[:-1], intervals + 1))
    padded[..., : degree + 1] = series
    padded[..., 1:-1] /= 2
    return transform(padded)


def sphere_mean(series: NDArray[np.float64]) -> float:
    """Mean over the sphere of directions: half the integral of the series times sin(theta)."""
    k = np.arange(0, series.size, 2)
    return float((series[::2] / (1.0 - k * k)).sum())


def sphere_mean_cosine(series: NDArray[np.float64]) -> float:
    """Mean over the sphere of the series times cos(theta)."""
    k = np.arange(1, series.size, 2)
    return float((series[1::2] / (4.0 - k * k)).sum())


def running(series: NDArray[np.float64], theta: NDArray[np.float64]) -> NDArray[np.float64]:
    """Integral of a series from 0 to theta, in closed form. Shape of `theta`; one dimension."""
    k = np.arange(1, series.size)
    return series[0] * theta + np.sin(np.multiply.outer(theta, k)) @ (series[1:] / k)
