"""How many lags a regression gets."""

from __future__ import annotations

from typing import Literal

import numpy as np
from scipy.linalg.lapack import dtrtrs

from preflight_magic.kernels.least_squares import FloatArray, leading_rank, residual_sums

_TINY = float(np.finfo(np.float64).tiny)  # stands for a perfect fit, whose logarithm does not exist

_SIGNIFICANT = 1.6448536269514722  # two-sided 10 % of the normal distribution: Ng and Perron (1995)

InformationCriterion = Literal["AIC", "BIC"]
Criterion = Literal["AIC", "BIC", "t-stat", "MAIC"]


def schwert(nobs: int) -> int:
    """Usual longest lag, ``12 (nobs / 100)**(1/4)`` rounded up.

    Parameters
    ----------
    nobs : int
        Observations in the series.

    Returns
    -------
    int

    References
    ----------
    Schwert (1989), Tests for unit roots: a Monte Carlo investigation, Journal of Business and Economic Statistics 7.
    """
    return int(np.ceil(12.0 * (nobs / 100.0) ** 0.25))


def smallest_criterion(rss: FloatArray, nobs: int, parameters: int, criterion: InformationCriterion) -> int:
    """Lag length with the smallest information criterion; the shorter one where two tie.

    Parameters
    ----------
    rss : ndarray, shape (lags + 1,)
        Residual sums of squares with 0, 1, ... lags, all on the same `nobs` observations.
    nobs : int
    parameters : int
        Coefficients of the regression without lags.
    criterion : {"AIC", "BIC"}
        Akaike (1974) or Schwarz (1978), with the Gaussian likelihood.

    Returns
    -------
    int
    """
    penalty = 2.0 if criterion == "AIC" else float(np.log(nobs))
    value = nobs * np.log(np.maximum(rss, _TINY)) + penalty * np.arange(parameters, parameters + rss.size)
    return int(value.argmin())


def searched_lags(factor: FloatArray, fixed: int, nobs: int, criterion: Criterion, levels: int = 1) -> int | None:
    """Lag length of a Dickey-Fuller or HEGY regression, all lengths read from one triangular factor.

    Parameters
    ----------
    factor : ndarray, shape (k + 1, k + 1)
        From `least_squares.triangle`: deterministic terms, the lagged levels, lagged differences from the shortest lag
        to the longest, and the response, all on the same `nobs` observations.
    fixed : int
        Columns before the lagged differences, the levels being the last of them.
    nobs : int
    criterion : {"AIC", "BIC", "t-stat", "MAIC"}
        ``t-stat`` takes the longest length whose last lag is significant at 10 % (Ng and Perron 1995, Journal of the
        American Statistical Association 90). ``MAIC`` is the modified AIC of Ng and Perron (2001), Econometrica 69:
        its penalty grows where few lags leave a moving average near -1 in the coefficients of the levels. Its
        sum of squared levels is taken after the deterministic terms.
    levels : int
        One for Dickey-Fuller, as many as the period for HEGY. With several the modified AIC takes the sum of squares
        that they explain together; del Barrio Castro, Osborn and Taylor (2016), Econometric Reviews 35, add it up
        frequency by frequency (from memory), which in a long series is the same.

    Returns
    -------
    int or None
        Lags that depend on others are not considered; None where the columns before the lags already do.

    Raises
    ------
    ValueError
        For an unknown criterion.
    """
    independent = leading_rank(factor)
    if independent < fixed:
        return None
    rss = residual_sums(factor)[fixed : independent + 1]
    if criterion == "AIC" or criterion == "BIC":
        return smallest_criterion(rss, nobs, fixed, criterion)
    rss = np.maximum(rss, _TINY)
    lost = factor[fixed - levels : independent, -1]  # what the response loses to the levels and to each lag
    if criterion == "t-stat":
        t_squared = lost[levels:] ** 2 / rss[1:] * (nobs - np.arange(fixed + 1, independent + 1))
        significant = np.flatnonzero(t_squared >= _SIGNIFICANT**2)
        return int(significant[-1]) + 1 if significant.size else 0
    if criterion != "MAIC":
        raise ValueError(f"there is no lag choice {criterion!r}; use 'AIC', 'BIC', 't-stat' or 'MAIC'")
    # The leading blocks of a triangular inverse are the inverses of the leading blocks, so that the coefficients of the
    # levels with 0, 1, ... lags are running sums along the first rows of the inverse.
    block = factor[fixed - levels : independent, fixed - levels : independent]
    first = np.eye(block.shape[0], levels)
    inverse_rows: FloatArray = dtrtrs(block, first, trans=1)[0]
    coefficients = (inverse_rows * lost[:, None]).cumsum(axis=0)[levels - 1 :]
    explained = coefficients @ block[:levels, :levels].T
    with np.errstate(over="ignore"):
        # infinite where nothing is left of the response: such a length is not chosen
        tau = (explained**2).sum(axis=1) / (rss / nobs)
    return int((nobs * np.log(rss) + 2.0 * (tau + np.arange(rss.size))).argmin())
