"""Is there a linear trend? A test that holds with and without a unit root.

A series that cannot carry the test gives None; missing or infinite values raise ValueError.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import erfc, exp, isfinite, sqrt

import numpy as np

from preflight_magic.kernels.df_gls import quasi_difference_detrend
from preflight_magic.kernels.dickey_fuller import level_regression, longest_lag, searched_length
from preflight_magic.kernels.least_squares import FloatArray, detrend
from preflight_magic.kernels.long_run_variance import long_run_variance
from preflight_magic.kernels.scaling import to_unit_size, within_rounding

# Of the weight exp(-_RATE (U / S)**2): chosen by the authors by simulation (from memory).
_RATE = 0.00025
_FEWEST = 12  # observations; fewer leave the long-run variances without meaning (common practice)
_EPSILON = float(np.finfo(np.float64).eps)


@dataclass(frozen=True)
class TrendTest:
    """Harvey-Leybourne-Taylor test; the null hypothesis is no linear trend.

    Attributes
    ----------
    statistic : float
        Weighted mean of the two t-ratios, standard normal under the null.
    p_value : float
        Two-sided.
    t_levels : float
        t-ratio of the line fitted to the levels, right for a series that is stationary about it.
    t_differences : float
        t-ratio of the mean difference, right for a series with a unit root.
    weight : float
        Weight of `t_differences`, near one for a series that looks like a random walk.
    slope : float
        Of the line in the levels, a step, in the unit of the series.
    drift : float
        Mean difference.
    nobs : int
    """

    statistic: float
    p_value: float
    t_levels: float
    t_differences: float
    weight: float
    slope: float
    drift: float
    nobs: int


def trend_test(y: FloatArray) -> TrendTest | None:
    """Test of a linear trend that holds for stationary and for integrated errors.

    Parameters
    ----------
    y : ndarray, shape (n,)
        No missing values, at least 12.

    Returns
    -------
    TrendTest or None
        None where the series is too short, does not vary, or is a straight line.

    Raises
    ------
    ValueError
        For missing or infinite values.

    Notes
    -----
    The normal law is a limit. Random walks of 60, 150 and 300 values without a trend are rejected at 5 % in 20, 15 and
    12 of a hundred cases, stationary series in about 7 (own simulation).

    References
    ----------
    Harvey, Leybourne and Taylor (2007), A simple, robust and powerful test of the trend hypothesis, Journal of
    Econometrics 141, 1302-1330. Long-run variances: quadratic spectral kernel with the bandwidth of Newey and West
    (1994); the weight compares DF-GLS (Elliott, Rothenberg and Stock 1996) with KPSS (1992), both with a line.
    """
    n = y.size
    low, high = (float(y.min()), float(y.max())) if n else (0.0, 0.0)
    if not isfinite(high - low):
        raise ValueError("a trend test needs finite values; it got missing or infinite ones")
    if n < _FEWEST or within_rounding(low, high):
        return None
    y, scale = to_unit_size(y - y[0])
    rounding = n * _EPSILON * max(abs(low), abs(high)) / scale
    left, changes = detrend(y, 1), np.diff(y)
    if float(np.abs(left).max()) <= rounding:
        return None
    time = np.arange(n) - (n - 1) / 2.0
    slope, drift = float(time @ y) / float(time @ time), float(y[-1] - y[0]) / (n - 1)
    levels, differences = _variance(left), _variance(changes)
    root = _unit_root_statistic(y, rounding)
    if levels is None or differences is None or root is None:
        return None
    sums = left.cumsum()
    stationarity = float(sums @ sums) / n**2 / levels
    t_levels = slope / sqrt(levels / float(time @ time))
    t_differences = drift / sqrt(differences / (n - 1))
    weight = exp(-_RATE * (root / stationarity) ** 2)
    statistic = (1.0 - weight) * t_levels + weight * t_differences
    return TrendTest(
        statistic=statistic,
        p_value=erfc(abs(statistic) / sqrt(2.0)),
        t_levels=t_levels,
        t_differences=t_differences,
        weight=weight,
        slope=slope * scale,
        drift=drift * scale,
        nobs=n,
    )


def _unit_root_statistic(y: FloatArray, noise: float) -> float | None:
    """DF-GLS t-ratio with a line; lags by the modified AIC of the series after its line (Perron and Qu 2007)."""
    longest = longest_lag(y.size, 1, None)
    lags = None if longest is None else searched_length(detrend(y, 1), -1, longest, "MAIC")
    if lags is None:
        return None
    found = level_regression(quasi_difference_detrend(y, "ct"), -1, lags, None, noise)
    return None if found is None else found.statistic


def _variance(u: FloatArray) -> float | None:
    found = long_run_variance(u, kernel="quadratic spectral", bandwidth="newey-west")
    return None if found is None or not found.value > 0.0 else found.value
