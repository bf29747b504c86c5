"""Autocorrelation, partial autocorrelation and the Ljung-Box test, with missing values skipped pair by pair."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.special import chdtrc

from preflight_magic.kernels.least_squares import FloatArray
from preflight_magic.kernels.long_run_variance import autocovariances
from preflight_magic.kernels.scaling import does_not_vary


@dataclass(frozen=True)
class LjungBox:
    """Test of the null hypothesis that the first `lags` autocorrelations are zero.

    Attributes
    ----------
    statistic : float
    p_value : float
        From chi-square with `degrees` degrees of freedom.
    lags : int
    degrees : int
        `lags` less the coefficients that were estimated.
    nobs : int
        Observed values.
    """

    statistic: float
    p_value: float
    lags: int
    degrees: int
    nobs: int


def autocorrelation(y: FloatArray, nlags: int) -> FloatArray | None:
    """Sample autocorrelations.

    Without missing values the usual ones, with divisor n at every lag. With missing values the products are averaged
    over the pairs that are there and then scaled by ``(n - k) / n`` like the usual ones (Parzen 1963 divides so).

    Parameters
    ----------
    y : ndarray, shape (n,)
        NaN where a value is missing.
    nlags : int
        Cut to n - 1.

    Returns
    -------
    ndarray, shape (nlags + 1,), or None
        Entry 0 is 1; NaN at lags without a single pair. None where nothing varies.

    References
    ----------
    Parzen (1963), On spectral analysis with missing observations and amplitude modulation, Sankhya A 25.
    """
    found = _pair_correlation(y, min(nlags, y.size - 1))
    if found is None:
        return None
    mean_product, _ = found
    return mean_product * (1.0 - np.arange(mean_product.size) / y.size)


def partial_autocorrelation(y: FloatArray, nlags: int) -> FloatArray | None:
    """Partial autocorrelations by the Durbin-Levinson recursion on `autocorrelation`.

    Parameters
    ----------
    y : ndarray, shape (n,)
        NaN where a value is missing.
    nlags : int
        Cut to n - 1.

    Returns
    -------
    ndarray, shape (nlags + 1,), or None
        Entry 0 is 1. NaN from the lag at which the recursion breaks off, which needs missing values: without them
        the autocorrelations are positive definite. None where nothing varies.

    References
    ----------
    Durbin (1960), Revue de l'Institut International de Statistique 28.
    """
    r = autocorrelation(y, nlags)
    if r is None:
        return None
    partial = np.full(r.size, np.nan)
    partial[0] = 1.0
    phi, variance = np.empty(0), 1.0
    for k in range(1, r.size):
        last = (r[k] - phi @ r[k - 1 : 0 : -1]) / variance
        if not abs(last) < 1.0:
            break
        partial[k] = last
        phi = np.append(phi - last * phi[::-1], last)
        variance *= 1.0 - last**2
    return partial


def ljung_box(y: FloatArray, lags: int, model_df: int = 0) -> LjungBox | None:
    """Ljung-Box test for autocorrelation up to a lag.

    Each squared autocorrelation is weighted by the pairs behind it; without missing values that is the usual
    statistic, ``n (n + 2) sum(r[k]**2 / (n - k))``.

    Parameters
    ----------
    y : ndarray, shape (n,)
        Residuals, NaN where one is missing. Null hypothesis: white noise. The mean is subtracted.
    lags : int
    model_df : int
        ARMA coefficients estimated on the series.

    Returns
    -------
    LjungBox or None
        None where nothing varies, where `lags` does not exceed `model_df`, or where n is not above `lags`.

    References
    ----------
    Ljung and Box (1978), Biometrika 65; with missing values in the manner of Stoffer and Toloi (1992), Statistics and
    Probability Letters 13.
    """
    degrees = lags - model_df
    if degrees < 1 or lags >= y.size:
        return None
    found = _pair_correlation(y, lags)
    if found is None:
        return None
    mean_product, pairs = found
    nobs = int(pairs[0])
    terms = np.where(pairs[1:] > 0, pairs[1:] * mean_product[1:] ** 2, 0.0)
    statistic = (nobs + 2.0) / nobs * float(terms.sum())
    return LjungBox(statistic, float(chdtrc(degrees, statistic)), lags, degrees, nobs)


def _pair_correlation(y: FloatArray, lags: int) -> tuple[FloatArray, FloatArray] | None:
    """Mean product of the pairs at each lag over the variance, and the number of pairs; None where nothing varies."""
    n = y.size
    there = np.isfinite(y)
    nobs = int(there.sum())
    if nobs < 2 or does_not_vary(y[there]):
        return None
    if nobs == n:
        centred = y - y.mean()
        pairs: FloatArray = n - np.arange(lags + 1, dtype=np.float64)
    else:
        centred = np.where(there, y - y[there].mean(), 0.0)
        pairs = np.rint(autocovariances(there.astype(np.float64), lags) * n)
    products = autocovariances(centred, lags) * n
    variance = products[0] / nobs
    mean_product = np.divide(products, pairs * variance, out=np.full(lags + 1, np.nan), where=pairs > 0)
    mean_product[0] = 1.0
    return mean_product, pairs
