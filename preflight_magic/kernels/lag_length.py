"""How many lags a regression gets."""

from __future__ import annotations

from typing import Literal

import numpy as np

from preflight_magic.kernels.least_squares import FloatArray

_TINY = float(np.finfo(np.float64).tiny)  # stands for a perfect fit, whose logarithm does not exist

Criterion = Literal["AIC", "BIC"]


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


def smallest_criterion(rss: FloatArray, nobs: int, parameters: int, criterion: Criterion) -> int:
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
