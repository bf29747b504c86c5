"""Tests of standardised innovations beside Ljung-Box: changing variance and normality."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.special import chdtrc

from preflight_magic.kernels.least_squares import FloatArray
from preflight_magic.kernels.scaling import does_not_vary


@dataclass(frozen=True)
class ChiSquare:
    """A statistic with its p-value from chi-square; `lags` is None where the test has none."""

    statistic: float
    p_value: float
    degrees: int
    nobs: int
    lags: int | None = None


def arch_lm(innovations: FloatArray, lags: int) -> ChiSquare | None:
    """Lagrange multiplier test for conditional heteroskedasticity.

    Parameters
    ----------
    innovations : ndarray, shape (n,)
        NaN where one is missing: rows that need it are left out.
    lags : int

    Returns
    -------
    ChiSquare or None
        ``nobs`` times R squared of the squares on a constant and `lags` lags of themselves. None where fewer than
        ``2 lags + 2`` rows are complete or the squares do not vary.

    References
    ----------
    Engle (1982), Econometrica 50, 987-1007.
    """
    squares = np.asarray(innovations, dtype=np.float64) ** 2
    if lags < 1 or squares.size < 3 * lags + 2:
        return None
    stacked = np.column_stack([squares[lags - k : squares.size - k] for k in range(lags + 1)])
    stacked = stacked[np.isfinite(stacked).all(axis=1)]
    n = len(stacked)
    if n < 2 * lags + 2 or does_not_vary(stacked[:, 0]):
        return None
    centred = stacked - stacked.mean(axis=0)
    effects = np.linalg.lstsq(centred[:, 1:], centred[:, 0], rcond=None)[0]
    residuals = centred[:, 0] - centred[:, 1:] @ effects
    statistic = max(n * (1.0 - float(residuals @ residuals) / float(centred[:, 0] @ centred[:, 0])), 0.0)
    return ChiSquare(statistic, float(chdtrc(lags, statistic)), lags, n, lags)


def jarque_bera(innovations: FloatArray) -> ChiSquare | None:
    """Test of normality by skewness and kurtosis.

    Parameters
    ----------
    innovations : ndarray, shape (n,)
        NaN where one is missing.

    Returns
    -------
    ChiSquare or None
        None with fewer than 8 values or where nothing varies.

    References
    ----------
    Jarque and Bera (1987), International Statistical Review 55, 163-172.
    """
    values = np.asarray(innovations, dtype=np.float64)
    values = values[np.isfinite(values)]
    n = values.size
    if n < 8 or does_not_vary(values):
        return None
    scaled = (values - values.mean()) / values.std()
    skewness, kurtosis = float((scaled**3).mean()), float((scaled**4).mean())
    statistic = n / 6.0 * (skewness**2 + (kurtosis - 3.0) ** 2 / 4.0)
    return ChiSquare(statistic, float(chdtrc(2, statistic)), 2, n)
