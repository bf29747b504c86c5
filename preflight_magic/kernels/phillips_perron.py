"""Phillips-Perron test; the null hypothesis is a unit root."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from math import copysign, sqrt
from typing import Literal

import numpy as np
from scipy.linalg.lapack import dgeqrf, dorgqr

from preflight_magic.kernels.dickey_fuller import ROUNDING, finite_range
from preflight_magic.kernels.distributions import Bound, Terms
from preflight_magic.kernels.lag_length import schwert
from preflight_magic.kernels.least_squares import FloatArray, polynomial
from preflight_magic.kernels.long_run_variance import newey_west_bandwidth, weighted_sum
from preflight_magic.kernels.response_surfaces import critical_values, lower_tail
from preflight_magic.kernels.scaling import within_rounding

_TABLE = "phillips_perron"
_DEGREE: Mapping[Terms, int] = {"n": -1, "c": 0, "ct": 1, "ctt": 2}


@dataclass(frozen=True)
class PhillipsPerronResult:
    """Phillips-Perron t-test; the null hypothesis is a unit root.

    Attributes
    ----------
    statistic : float
        The corrected t-ratio of the lagged level, often called Z-tau.
    p_value : float
        In a sample of this length; read it with `p_bound`.
    p_bound : {"exact", "at most", "at least"}
    bandwidth : int
        Last autocovariance in the Bartlett estimate of the long-run variance.
    nobs : int
        Observations in the regression.
    terms : {"n", "c", "ct", "ctt"}
    critical_values : Mapping[str, float]
        By level, for this length, from the same surfaces as `p_value`.
    """

    statistic: float
    p_value: float
    p_bound: Bound
    bandwidth: int
    nobs: int
    terms: Terms
    critical_values: Mapping[str, float] = field(default_factory=dict)


def phillips_perron(
    y: FloatArray,
    terms: Terms = "ct",
    bandwidth: int | Literal["newey-west", "schwert"] = "newey-west",
) -> PhillipsPerronResult | None:
    """Dickey-Fuller t-test without lags, corrected for dependent errors by their long-run variance.

    Parameters
    ----------
    y : ndarray, shape (n,)
        No missing values. Null hypothesis: a unit root.
    terms : {"n", "c", "ct", "ctt"}
        None, constant, linear trend, quadratic trend.
    bandwidth : int, {"newey-west", "schwert"}
        Last lag of the Bartlett kernel. ``newey-west`` is the automatic rule of Newey and West (1994) on the residuals,
        ``schwert`` the length of Schwert (1989) for n values.

    Returns
    -------
    PhillipsPerronResult or None
        None where the series has fewer than two more values than coefficients, does not vary, or is fitted without
        error.

    Raises
    ------
    ValueError
        For missing or infinite values, unknown terms, or a bandwidth below 0 or not below n - 1.

    References
    ----------
    Phillips and Perron (1988), Biometrika 75. p-values and critical values: our own simulation, tests/simulation, for
    a bandwidth that is given and for one that is searched; without a bandwidth they are those of Dickey and Fuller.
    """
    if terms not in _DEGREE:
        raise ValueError(f"there are no deterministic terms {terms!r}; use one of {', '.join(_DEGREE)}")
    level = _DEGREE[terms] + 1
    nobs = y.size - 1
    low, high = finite_range(y)
    if nobs < level + 3 or within_rounding(low, high):
        return None
    columns = np.empty((nobs, level + 2), order="F")
    columns[:, :level] = polynomial(nobs, level - 1)
    columns[:, level] = y[:-1] - y.sum() / y.size if level else y[:-1]
    columns[:, -1] = y[1:] - y[:-1]
    size = float(np.abs(columns[:, level]).max()) * sqrt(nobs)
    packed, tau, _, _ = dgeqrf(columns, lwork=32 * columns.shape[1])
    beside, diagonal = float(packed[level, -1]), float(packed[level, level])
    error = float(packed[level + 1, -1])
    noise = ROUNDING * max(abs(low), abs(high)) * sqrt(nobs)
    if abs(error) <= noise or abs(diagonal) <= 100.0 * np.finfo(np.float64).eps * size:
        return None
    residual: FloatArray = dorgqr(packed, tau)[0][:, -1] * error
    width = _bandwidth(residual, bandwidth, y.size)
    short = error**2 / nobs
    long = weighted_sum(residual, "bartlett", width)
    if long <= 0.0:
        return None
    t_ratio = copysign(beside, beside * diagonal) / (abs(error) / sqrt(nobs - level - 1))
    statistic = sqrt(short / long) * t_ratio - 0.5 * (long - short) / sqrt(long) * nobs / abs(diagonal)
    case, lags = (f"{terms} automatic", 0) if bandwidth == "newey-west" else (terms, table_lags(width, y.size))
    p_value, bound = lower_tail(statistic, _TABLE, case, y.size, lags)
    critical = critical_values(_TABLE, case, y.size, lags)
    return PhillipsPerronResult(statistic, p_value, bound, width, nobs, terms, critical)


def table_lags(bandwidth: int, n: int) -> int:
    """Where the table of quantiles has a bandwidth: half the root of the bandwidth times the length.

    Parameters
    ----------
    bandwidth, n : int

    Returns
    -------
    int
        The first autocovariances change the law more than those that follow, so the surfaces are even in this number.
    """
    return round(0.5 * sqrt(bandwidth * n))


def _bandwidth(residual: FloatArray, wanted: int | str, n: int) -> int:
    longest = residual.size - 1
    if wanted == "newey-west":
        return int(newey_west_bandwidth(residual, "bartlett"))
    if wanted == "schwert":
        return min(schwert(n), longest)
    if isinstance(wanted, str):
        raise ValueError(f"there is no bandwidth {wanted!r}; use 'newey-west', 'schwert' or a number")
    if not 0 <= wanted <= longest:
        raise ValueError(f"the bandwidth is {wanted}; it must be from 0 to {longest}")
    return wanted
