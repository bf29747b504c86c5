"""Dickey-Fuller test after efficient detrending; the null hypothesis is a unit root."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

import numpy as np

from preflight_magic.kernels.dickey_fuller import ROUNDING, finite_range, level_regression, longest_lag, searched_length
from preflight_magic.kernels.distributions import Bound
from preflight_magic.kernels.lag_length import Criterion
from preflight_magic.kernels.least_squares import FloatArray, detrend
from preflight_magic.kernels.response_surfaces import critical_values, lower_tail
from preflight_magic.kernels.scaling import within_rounding

Search = Literal["OLS", "GLS"]

_TABLE = "df_gls"
# The local alternative at which the power envelope is one half: Elliott, Rothenberg and Stock (1996), section 2.
_LOCAL = {"c": -7.0, "ct": -13.5}
_DEGREE = {"c": 0, "ct": 1}


@dataclass(frozen=True)
class DfGlsResult:
    """DF-GLS test; the null hypothesis is a unit root.

    Attributes
    ----------
    statistic : float
        t-ratio of the lagged level of the detrended series.
    p_value : float
        In a sample of this length with this number of lags; read it with `p_bound`.
    p_bound : {"exact", "at most", "at least"}
    lags : int
        Lagged differences in the regression.
    nobs : int
        Observations in the regression.
    terms : {"c", "ct"}
    critical_values : Mapping[str, float]
        By level, for this length and number of lags.
    search : {"OLS", "GLS"}
        How the series was detrended for the search of the lag length.
    """

    statistic: float
    p_value: float
    p_bound: Bound
    lags: int
    nobs: int
    terms: Literal["c", "ct"]
    critical_values: Mapping[str, float] = field(default_factory=dict)
    search: Search = "OLS"


def df_gls(
    y: FloatArray,
    terms: Literal["c", "ct"] = "ct",
    lags: int | None = None,
    max_lags: int | None = None,
    criterion: Criterion | None = "MAIC",
    search: Search = "OLS",
) -> DfGlsResult | None:
    """Dickey-Fuller t-test of the series detrended under a local alternative.

    Parameters
    ----------
    y : ndarray, shape (n,)
        No missing values. Null hypothesis: a unit root.
    terms : {"c", "ct"}
        Constant, or constant and linear trend.
    lags : int, optional
        Lagged differences, where they are not to be searched.
    max_lags : int, optional
        Longest length in the search, by default that of Schwert (1989), shortened for a short series.
    criterion : {"MAIC", "AIC", "BIC", "t-stat"} or None
        How the length is searched, see `lag_length.searched_lags`; None takes `max_lags` itself.
    search : {"OLS", "GLS"}
        Detrending for the search alone. ``GLS`` is that of Ng and Perron (2001), ``OLS`` that of Perron and Qu (2007),
        which keeps the power where the root is far from one.

    Returns
    -------
    DfGlsResult or None
        None where the series is too short for the lags, does not vary, or is fitted without error.

    Raises
    ------
    ValueError
        For missing or infinite values, unknown terms, criterion or search, or negative lags.

    References
    ----------
    Elliott, Rothenberg and Stock (1996), Econometrica 64. Ng and Perron (2001), Econometrica 69. Perron and Qu (2007),
    Economics Letters 94. p-values and critical values: our own simulation, tests/simulation.
    """
    if terms not in _LOCAL:
        raise ValueError(f"the DF-GLS test has no terms {terms!r}; use 'c' or 'ct'")
    if search not in ("OLS", "GLS"):
        raise ValueError(f"there is no detrending {search!r} for the search; use 'OLS' or 'GLS'")
    n, degree = y.size, _DEGREE[terms]
    low, high = finite_range(y)
    longest = longest_lag(n, degree, lags if lags is not None else max_lags)
    if longest is None or within_rounding(low, high):
        return None
    noise = ROUNDING * max(abs(low), abs(high))
    detrended = quasi_difference_detrend(y, terms)
    chosen: int | None = longest
    if lags is None and criterion is not None:
        searched = detrended if search == "GLS" else detrend(y, degree)
        chosen = searched_length(searched, -1, longest, criterion)
    found = None if chosen is None else level_regression(detrended, -1, chosen, None, noise)
    if found is None:
        return None
    p_value, bound = lower_tail(found.statistic, _TABLE, terms, n, found.lags)
    critical = critical_values(_TABLE, terms, n, found.lags)
    return DfGlsResult(found.statistic, p_value, bound, found.lags, found.nobs, terms, critical, search)


def quasi_difference_detrend(y: FloatArray, terms: Literal["c", "ct"]) -> FloatArray:
    """Residuals of the series from terms fitted to its quasi-differences.

    Parameters
    ----------
    y : ndarray, shape (n,)
    terms : {"c", "ct"}

    Returns
    -------
    ndarray, shape (n,)
    """
    n = y.size
    root = 1.0 + _LOCAL[terms] / n
    # The fit follows an added constant exactly; taking the first value off keeps digits far from zero.
    start: FloatArray = y - y[0]
    columns = np.ones((n, 3 if terms == "ct" else 2))
    columns[:, 0] = start
    if terms == "ct":
        columns[:, 2] = np.linspace(-1.0, 1.0, n)
    quasi = columns.copy()
    quasi[1:] -= root * columns[:-1]
    products = quasi[:, 1:].T @ quasi
    if terms == "c":
        around: FloatArray = start - products[0, 0] / products[0, 1]
        return around
    (ay, aa, ab), (by, _, bb) = products.tolist()
    determinant = aa * bb - ab * ab
    level, slope = (bb * ay - ab * by) / determinant, (aa * by - ab * ay) / determinant
    detrended: FloatArray = start - level - slope * columns[:, 2]
    return detrended
