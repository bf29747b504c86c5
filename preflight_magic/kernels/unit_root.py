"""Tests of a unit root and of its absence.

A series that cannot carry a test (too short, constant, fitted without error, regressors that depend on each other)
gives None; input that no series should bring here (missing or infinite values, unknown terms) raises ValueError.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

import numpy as np

from preflight_magic.kernels.dickey_fuller import ROUNDING, finite_range, level_regression, longest_lag
from preflight_magic.kernels.distributions import (
    Bound,
    Terms,
    dickey_fuller_critical_values,
    dickey_fuller_p_value,
    kpss_p_value,
)
from preflight_magic.kernels.lag_length import Criterion, schwert
from preflight_magic.kernels.least_squares import FloatArray, detrend
from preflight_magic.kernels.long_run_variance import newey_west_bandwidth, weighted_sum
from preflight_magic.kernels.scaling import within_rounding

_DEGREE: Mapping[Terms, int] = {"n": -1, "c": 0, "ct": 1, "ctt": 2}
_EPSILON = float(np.finfo(np.float64).eps)


@dataclass(frozen=True)
class AdfResult:
    """Augmented Dickey-Fuller test; the null hypothesis is a unit root.

    Attributes
    ----------
    statistic : float
        t-ratio of the lagged level.
    p_value : float
        Read it with `p_bound`.
    p_bound : {"exact", "at most", "at least"}
    lags : int
        Lagged differences in the regression.
    nobs : int
        Observations in the regression.
    terms : {"n", "c", "ct", "ctt"}
    critical_values : Mapping[str, float]
        By level, for `nobs` observations.
    """

    statistic: float
    p_value: float
    p_bound: Bound
    lags: int
    nobs: int
    terms: Terms
    critical_values: Mapping[str, float] = field(default_factory=dict)


@dataclass(frozen=True)
class KpssResult:
    """KPSS test; the null hypothesis is stationarity about a constant or a straight line.

    Attributes
    ----------
    statistic : float
    p_value : float
        In the limiting distribution.
    bandwidth : int
        Last autocovariance in the Bartlett estimate of the long-run variance.
    nobs : int
    terms : {"c", "ct"}
    """

    statistic: float
    p_value: float
    bandwidth: int
    nobs: int
    terms: Literal["c", "ct"]


def adf(
    y: FloatArray,
    terms: Terms = "c",
    lags: int | None = None,
    max_lags: int | None = None,
    criterion: Criterion | None = "AIC",
) -> AdfResult | None:
    """Augmented Dickey-Fuller test.

    The lag length is searched on one common sample, all lengths read from one triangular factor; then the few
    observations that the chosen length frees are added to that factor.

    Parameters
    ----------
    y : ndarray, shape (n,)
        No missing values. Null hypothesis: a unit root.
    terms : {"n", "c", "ct", "ctt"}
        None, constant, linear trend, quadratic trend.
    lags : int, optional
        Lagged differences, where they are not to be searched.
    max_lags : int, optional
        Longest length in the search, by default that of Schwert (1989), shortened for a short series.
    criterion : {"AIC", "BIC", "t-stat", "MAIC"} or None
        How the length is searched, see `lag_length.searched_lags`; None takes `max_lags` itself.

    Returns
    -------
    AdfResult or None
        None where the series is too short for the lags, does not vary, or is fitted without error.

    Raises
    ------
    ValueError
        For missing or infinite values, unknown terms, an unknown criterion or negative lags.

    References
    ----------
    Said and Dickey (1984), Biometrika 71. P-values: MacKinnon (1994); critical values: MacKinnon (2010).
    """
    degree = _degree(terms)
    low, high = finite_range(y)
    longest = longest_lag(y.size, degree, lags if lags is not None else max_lags)
    if longest is None or within_rounding(low, high):
        return None
    noise = ROUNDING * max(abs(low), abs(high))
    found = level_regression(y, degree, longest, None if lags is not None else criterion, noise)
    if found is None:
        return None
    p_value, bound = dickey_fuller_p_value(found.statistic, terms)
    critical = dickey_fuller_critical_values(terms, found.nobs)
    return AdfResult(found.statistic, p_value, bound, found.lags, found.nobs, terms, critical)


def kpss(
    y: FloatArray,
    terms: Literal["c", "ct"] = "c",
    bandwidth: int | Literal["auto", "legacy"] | None = None,
) -> KpssResult | None:
    """KPSS test.

    Parameters
    ----------
    y : ndarray, shape (n,)
        No missing values. Null hypothesis: stationary about a constant (``c``) or a straight line (``ct``).
    terms : {"c", "ct"}
    bandwidth : int, {"auto", "legacy"} or None
        Last lag of the Bartlett kernel. ``auto``, the same as None, is the rule of Hobijn, Franses and Ooms (2004),
        ``legacy`` that of Schwert (1989), which the authors of the test used.

    Returns
    -------
    KpssResult or None
        None where the series has fewer than 4 values, does not vary, or is a straight line under ``ct``.

    Raises
    ------
    ValueError
        For missing or infinite values, unknown terms, or a bandwidth below 0 or not below n.

    References
    ----------
    Kwiatkowski, Phillips, Schmidt and Shin (1992), Journal of Econometrics 54.
    Hobijn, Franses and Ooms (2004), Statistica Neerlandica 58.
    """
    if terms not in ("c", "ct"):
        raise ValueError(f"the KPSS test has no terms {terms!r}; use 'c' or 'ct'")
    n = y.size
    low, high = finite_range(y)
    if n < 4 or within_rounding(low, high):
        return None
    residual = detrend(y, _DEGREE[terms])
    if float(np.abs(residual).max()) <= n * _EPSILON * max(abs(low), abs(high)):
        return None
    if bandwidth is None or bandwidth == "auto":
        lags = int(newey_west_bandwidth(residual, "bartlett", pilot=int(n ** (2.0 / 9.0))))
    elif bandwidth == "legacy":
        lags = min(schwert(n), n - 1)
    elif 0 <= bandwidth < n:
        lags = bandwidth
    else:
        raise ValueError(f"the bandwidth is {bandwidth}; it must be from 0 to {n - 1}")
    partial_sums = residual.cumsum()
    statistic = float(partial_sums @ partial_sums) / n**2 / weighted_sum(residual, "bartlett", lags)
    return KpssResult(statistic, kpss_p_value(statistic, terms), lags, n, terms)


def _degree(terms: Terms) -> int:
    if terms not in _DEGREE:
        raise ValueError(f"there are no deterministic terms {terms!r}; use one of {', '.join(_DEGREE)}")
    return _DEGREE[terms]
