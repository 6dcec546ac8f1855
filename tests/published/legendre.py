"""Legendre moments of matrix elements given on a uniform angle grid."""

from __future__ import annotations

import numpy as np
from scipy.fft import dct


def moments(values: np.ndarray, highest: int, kept: int) -> np.ndarray:
    """c_l of sum c_l P_l(cos theta), l = 0…highest, of values at theta_j = pi j/J.

    By the cosine series of the values, cut after `kept` terms, and Gauss quadrature exact for it.
    """
    series = dct(values, type=1) / (values.size - 1)
    series[0] /= 2
    series = series[:kept]
    mu, weight = np.polynomial.legendre.leggauss((kept + highest) // 2 + 2)
    sampled = np.polynomial.chebyshev.chebval(mu, series)
    degree = np.arange(highest + 1)
    return (2 * degree + 1) / 2 * ((sampled * weight) @ np.polynomial.legendre.legvander(mu, highest))
