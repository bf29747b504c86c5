"""Is correlation left in the innovations of a model with columns beside it? Autocorrelations with exact moments."""

from __future__ import annotations

import numpy as np
from scipy.special import chdtrc

from preflight_magic.kernels.arma import ArmaFit
from preflight_magic.kernels.arma_likelihood import prepare, whitened_columns
from preflight_magic.kernels.plan_columns import LikelihoodColumns
from preflight_magic.kernels.residual_tests import ChiSquare
from preflight_magic.kernels.restricted_likelihood import Array


def whitened(fit: ArmaFit, values: Array, columns: LikelihoodColumns) -> tuple[Array, Array] | None:
    """Residuals of a fit, and what was estimated beside it.

    Parameters
    ----------
    fit : ArmaFit
    values : ndarray, shape (n,)
        As they were fitted.
    columns : LikelihoodColumns

    Returns
    -------
    residuals : ndarray, shape (n,)
        One-step errors less what the columns explain: white noise projected off `basis`.
    basis : ndarray, shape (n, k)
        Orthonormal; mean, missing values and what was removed, whitened as the series.
    """
    sample = prepare(values, mean=columns.mean, nuisance=columns.nuisance, fixed=columns.fixed)
    if sample is None:
        return None
    stacked, _ = whitened_columns(sample, fit.order, fit.coefficients)
    basis = np.linalg.qr(stacked[:, :-1])[0]
    series = stacked[:, -1]
    return np.asarray(series - basis @ (basis.T @ series)), np.asarray(basis)


def portmanteau(residuals: Array, basis: Array, lags: int, fitted: int) -> ChiSquare | None:
    """Test that no correlation is left in residuals of a regression.

    Parameters
    ----------
    residuals : ndarray, shape (n,)
        Orthogonal to `basis`.
    basis : ndarray, shape (n, k)
        Orthonormal columns of the regression.
    lags : int
    fitted : int
        ARMA coefficients estimated on the series.

    Returns
    -------
    ChiSquare or None
        None with too few values or degrees of freedom, or where nothing varies.

    Notes
    -----
    A pattern taken out of five years leaves residuals whose correlation at one year is about -1/4, with nothing wrong:
    the usual test counts that as correlation. Here each autocorrelation is taken less its mean and over its standard
    deviation in white noise behind the same regression, which are exact for normal noise: with M the projection and
    A the matrix of the lag, ``tr(MA) / m`` and ``2 (m tr(MAMA) - tr(MA)**2) / (m**2 (m + 2))``, m the rank of M.
    Durbin and Watson (1950), Testing for serial correlation in least squares regression, Biometrika 37, 409-428; Dufour
    and Roy (1985), Some robust exact results on sample autocorrelations and tests of randomness, Journal of
    Econometrics 29, 257-273.
    """
    n, k = basis.shape
    m, degrees = n - k, lags - fitted
    total = float(residuals @ residuals)
    if degrees < 1 or lags >= m - 1 or not total > 0.0:
        return None
    statistic = 0.0
    for lag in range(1, lags + 1):
        moved = np.zeros((n, k))
        moved[lag:] += 0.5 * basis[:-lag]
        moved[:-lag] += 0.5 * basis[lag:]
        inner = basis.T @ moved
        trace = -float(inner.trace())
        square = 0.5 * (n - lag) - 2.0 * float((moved**2).sum()) + float((inner**2).sum())
        variance = 2.0 * (m * square - trace**2) / (m**2 * (m + 2.0))
        if not variance > 0.0:
            return None
        correlation = float(residuals[lag:] @ residuals[:-lag]) / total
        statistic += (correlation - trace / m) ** 2 / variance
    return ChiSquare(statistic, float(chdtrc(degrees, statistic)), degrees, m, lags)
