"""Test of a fixed seasonal pattern against one that wanders, at each seasonal frequency and jointly.

A series that cannot carry the test gives None; input that no series should bring here raises ValueError.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from math import isfinite
from typing import Literal

import numpy as np
from scipy.linalg.lapack import dpotrf, dtrtrs

from preflight_magic.kernels.canova_hansen_law import canova_hansen_p_value
from preflight_magic.kernels.least_squares import FloatArray, polynomial
from preflight_magic.kernels.long_run_variance import andrews_bandwidth
from preflight_magic.kernels.scaling import to_unit_size, within_rounding

_EPSILON = float(np.finfo(np.float64).eps)
_DEPENDENT = 1e-7  # relative to its own length, what the columns before leave of a regressor that repeats them
_FEWEST_DEGREES = 4  # of freedom; fewer make the residuals meaningless (common practice)
_LONGEST_SHARE = 0.2  # of n, the longest automatic bandwidth: a longer one leaves the statistic without variation


@dataclass(frozen=True)
class FrequencyStability:
    """Statistic at one seasonal frequency.

    Attributes
    ----------
    cycle : float
        Length of the cycle in steps, from the period down to 2.
    statistic : float
    p_value : float
        Of the upper tail; see `canova_hansen`.
    degrees : int
        2 for a pair of waves, 1 at frequency pi.
    """

    cycle: float
    statistic: float
    p_value: float
    degrees: int


@dataclass(frozen=True)
class CanovaHansenResult:
    """Canova-Hansen test; the null hypothesis is a fixed seasonal pattern about a stationary series.

    Attributes
    ----------
    statistic : float
        Joint statistic of all seasonal frequencies.
    p_value : float
        Of the joint statistic, with ``period - 1`` degrees of freedom; see `canova_hansen`.
    frequencies : tuple of FrequencyStability
        From the longest cycle to the shortest.
    period : int
    bandwidth : int
        Last autocovariance in the Bartlett estimate of the long-run variance.
    nobs : int
    terms : {"c", "ct"}
    lagged : bool
        Whether the regression contains the series one step before.
    """

    statistic: float
    p_value: float
    frequencies: tuple[FrequencyStability, ...]
    period: int
    bandwidth: int
    nobs: int
    terms: Literal["c", "ct"]
    lagged: bool


def canova_hansen(
    y: FloatArray,
    period: int,
    terms: Literal["c", "ct"] = "c",
    *,
    lagged: bool = False,
    bandwidth: int | Literal["auto", "legacy"] = "auto",
) -> CanovaHansenResult | None:
    """Canova-Hansen test with trigonometric regressors.

    Parameters
    ----------
    y : ndarray, shape (n,)
        No missing values, and no unit root at frequency zero (difference it before).
    period : int
        Seasonal period s, at least 2.
    terms : {"c", "ct"}
        Constant, constant and straight line.
    lagged : bool
        Add the series one step before as a regressor, which takes up dependence, as the authors do.
    bandwidth : int or {"auto", "legacy"}
        Last lag of the Bartlett kernel. ``auto`` is the rule of Andrews (1991) for the products of residuals and
        waves, at most n / 5; ``legacy`` is ``s (n / 100)**(1/4)`` rounded.

    Returns
    -------
    CanovaHansenResult or None
        None where the series is too short, does not vary, or is fitted without error.

    Raises
    ------
    ValueError
        For missing or infinite values, unknown terms, a period below 2, or a bandwidth below 0 or not below n.

    Notes
    -----
    p-values are those of the limiting distribution, moved and stretched to the mean and spread that the statistic has
    in white noise of this length (`canova_hansen_law`): where cycles are few, the limit alone rejects far too seldom.

    References
    ----------
    Canova and Hansen (1995), Are seasonal patterns constant over time? A test for seasonal stability, Journal of
    Business and Economic Statistics 13, 237-252.
    """
    if terms not in ("c", "ct"):
        raise ValueError(f"the Canova-Hansen test has no terms {terms!r}; use 'c' or 'ct'")
    if period < 2:
        raise ValueError(f"the seasonal period is {period}; it must be at least 2")
    low, high = (float(y.min()), float(y.max())) if y.size else (0.0, 0.0)
    if not isfinite(high - low):
        raise ValueError("the Canova-Hansen test needs finite values; it got missing or infinite ones")
    n = y.size - lagged
    others = (1 if terms == "c" else 2) + lagged
    if n - period + 1 - others < _FEWEST_DEGREES or within_rounding(low, high):
        return None
    centred, scale = to_unit_size(y - y.sum() / y.size)
    left = _residuals(centred, period, 1 if terms == "ct" else 0, lagged)
    if left is None or float(np.abs(left).max()) <= n * _EPSILON * max(abs(low), abs(high)) / scale:
        return None
    products = waves(n, period) * left[:, None]  # no statistic depends on where a wave begins
    if isinstance(bandwidth, str):
        width = _legacy(n, period) if bandwidth == "legacy" else _automatic(products)
    elif 0 <= bandwidth < n:
        width = bandwidth
    else:
        raise ValueError(f"the bandwidth is {bandwidth}; it must be from 0 to {n - 1}")
    return _result(products, width, period, terms, lagged)


@lru_cache(maxsize=32)
def waves(n: int, period: int) -> FloatArray:
    """Cosine and sine of each seasonal frequency, then the alternation of signs for an even period.

    Parameters
    ----------
    n, period : int

    Returns
    -------
    ndarray, shape (n, period - 1)
        Not to be written to.
    """
    angle = 2.0 * np.pi * (np.arange(n) % period)[:, None] * np.arange(1, (period + 1) // 2) / period
    columns = np.empty((n, period - 1))
    pairs = period - 1 - (period % 2 == 0)
    columns[:, 0:pairs:2], columns[:, 1:pairs:2] = np.cos(angle), np.sin(angle)
    if period % 2 == 0:
        columns[:, -1] = 1.0 - 2.0 * (np.arange(n) % 2)
    columns.setflags(write=False)
    return columns


@lru_cache(maxsize=32)
def _basis(n: int, period: int, degree: int) -> FloatArray:
    """Orthonormal columns that span waves and polynomial."""
    basis: FloatArray = np.linalg.qr(np.column_stack([polynomial(n, degree), waves(n, period)]))[0]
    basis.setflags(write=False)
    return basis


def _residuals(y: FloatArray, period: int, degree: int, lagged: bool) -> FloatArray | None:
    response = y[1:] if lagged else y
    basis = _basis(response.size, period, degree)  # waves that begin a step later span the same
    left: FloatArray = response - basis @ (basis.T @ response)
    if lagged:
        before = y[:-1] - basis @ (basis.T @ y[:-1])
        size = float(before @ before)
        if size <= _DEPENDENT**2 * float(y[:-1] @ y[:-1]):
            return None
        left = left - before * (float(before @ left) / size)
    return left


def _legacy(n: int, period: int) -> int:
    return int(min(round(period * (n / 100.0) ** 0.25), n - 1))


def _automatic(products: FloatArray) -> int:
    """Mean of the bandwidths of the columns by Andrews' rule, at most a share of n."""
    n = products.shape[0]
    widths = [andrews_bandwidth(np.ascontiguousarray(column)) for column in products.T]
    return int(min(float(np.mean(widths)), _LONGEST_SHARE * n))


def _result(
    products: FloatArray, width: int, period: int, terms: Literal["c", "ct"], lagged: bool
) -> CanovaHansenResult | None:
    n, count = products.shape
    sums = products.cumsum(axis=0)
    moments = sums.T @ sums / n**2
    # Sums over windows of the bandwidth, zeros beyond both ends: their moments are the Bartlett estimate exactly.
    padded = np.concatenate([np.zeros((width + 1, count)), sums, np.broadcast_to(sums[-1], (width, count))])
    windows = padded[width + 1 :] - padded[: -width - 1]
    variance = windows.T @ windows / (n * (width + 1))
    joint = _trace(variance, moments)
    if joint is None:
        return None
    columns = period + (terms == "ct") + lagged
    found = []
    for k in range(1, period // 2 + 1):
        degrees = 1 if 2 * k == period else 2
        part = slice(2 * k - 2, 2 * k - 2 + degrees)
        a, b = variance[part, part], moments[part, part]
        if degrees == 1:
            value = float(b[0, 0] / a[0, 0])
        else:
            value = float(a[1, 1] * b[0, 0] - 2.0 * a[0, 1] * b[0, 1] + a[0, 0] * b[1, 1])
            value /= float(a[0, 0] * a[1, 1] - a[0, 1] ** 2)
        p_value = canova_hansen_p_value(value, "pi" if degrees == 1 else "pair", degrees, n, columns, width)
        found.append(FrequencyStability(period / k, value, p_value, degrees))
    p_value = canova_hansen_p_value(joint, "joint", count, n, columns, width)
    return CanovaHansenResult(joint, p_value, tuple(found), period, width, n, terms, lagged)


def _trace(variance: FloatArray, moments: FloatArray) -> float | None:
    """Trace of the inverse variance times the moments; None where the variance is singular to working precision."""
    factor, info = dpotrf(variance, lower=1)
    if info != 0 or factor.diagonal().min() <= _DEPENDENT * factor.diagonal().max():
        return None
    half = dtrtrs(factor, moments, lower=1)[0]
    return float(np.trace(dtrtrs(factor, half.T, lower=1)[0]))
