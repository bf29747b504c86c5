"""Weights that the kernels of a long-run variance give to autocovariances, as functions of lag over bandwidth."""

from __future__ import annotations

import numpy as np

from preflight_magic.kernels.least_squares import FloatArray


def bartlett(x: FloatArray) -> FloatArray:
    """``1 - x`` up to 1.

    Parameters
    ----------
    x : ndarray of any shape
        Lag over bandwidth, not negative.

    Returns
    -------
    ndarray of the same shape
    """
    weight: FloatArray = np.maximum(1.0 - x, 0.0)
    return weight


def parzen(x: FloatArray) -> FloatArray:
    """``1 - 6 x**2 + 6 x**3`` up to 1/2, then ``2 (1 - x)**3`` up to 1.

    Parameters
    ----------
    x : ndarray of any shape
        Lag over bandwidth, not negative.

    Returns
    -------
    ndarray of the same shape
    """
    weight: FloatArray = np.where(x <= 0.5, 1.0 - 6.0 * x**2 * (1.0 - x), 2.0 * np.maximum(1.0 - x, 0.0) ** 3)
    return weight


def quadratic_spectral(x: FloatArray) -> FloatArray:
    """``3 / z**2 (sin(z) / z - cos(z))`` with ``z = 6 pi x / 5``; no lag has weight exactly zero.

    Parameters
    ----------
    x : ndarray of any shape
        Lag over bandwidth, not negative.

    Returns
    -------
    ndarray of the same shape
    """
    z = 1.2 * np.pi * np.maximum(x, 1e-3)
    # Below x = 0.001 rounding would spoil the quotient; the series 1 - z**2 / 10 is exact there.
    near_zero = 1.0 - (1.2 * np.pi * x) ** 2 / 10.0
    weight: FloatArray = np.where(x < 1e-3, near_zero, 3.0 / z**2 * (np.sin(z) / z - np.cos(z)))
    return weight
