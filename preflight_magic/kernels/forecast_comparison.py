"""Errors of forecasts, scaled, and the test of two forecasts against each other."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from preflight_magic.kernels.arma_parameters import Array
from preflight_magic.kernels.student import student_cdf


@dataclass(frozen=True)
class Compared:
    """Diebold-Mariano test: two-sided p-value of equal expected losses.

    Attributes
    ----------
    statistic : float
        Negative where the first forecast loses less; with the small sample correction.
    p_value : float
    degrees : int
    """

    statistic: float
    p_value: float
    degrees: int


def naive_scale(values: Array, lag: int) -> tuple[float, float]:
    """Mean absolute and mean squared change at one lag, within a training part.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    lag : int
        Seasonal period; 1 where the part holds no whole season.

    Returns
    -------
    absolute, squared : float
        NaN where nothing changes or nothing is observed at that lag.

    Notes
    -----
    Scales of the mean absolute scaled error (Hyndman and Koehler 2006, Another look at measures of forecast accuracy,
    International Journal of Forecasting 22, 679-688) and of its squared sister, RMSSE.
    """
    lag = lag if len(values) > lag else 1
    changes = values[lag:] - values[:-lag]
    changes = changes[np.isfinite(changes)]
    if not changes.size or not np.abs(changes).max() > 0.0:
        return float("nan"), float("nan")
    return float(np.abs(changes).mean()), float((changes**2).mean())


def diebold_mariano(first: Array, second: Array, overlap: int) -> Compared | None:
    """Test whether two forecasts lose alike.

    Parameters
    ----------
    first, second : ndarray, shape (n,)
        Losses at the same origins, in time order.
    overlap : int
        The h of the test: losses this many origins apart have no values in common.

    Returns
    -------
    Compared or None
        None with fewer than two values, where the losses do not differ, or where their long-run variance comes out
        as zero or less.

    Notes
    -----
    Diebold and Mariano (1995), Comparing predictive accuracy, Journal of Business & Economic Statistics 13, 253-263,
    with rectangular weights up to lag h - 1; corrected by ``sqrt((n + 1 - 2 h + h (h - 1) / n) / n)`` and compared with
    Student's t of n - 1 degrees of freedom (Harvey, Leybourne and Newbold 1997, Testing the equality of prediction mean
    squared errors, International Journal of Forecasting 13, 281-291, equations 8 and 9).
    """
    apart = np.asarray(first, dtype=float) - np.asarray(second, dtype=float)
    n, h = len(apart), overlap
    if n < 2:
        return None
    centred = apart - apart.mean()
    covariances = [float(centred[k:] @ centred[: n - k]) / n for k in range(min(h, n))]
    long_run = covariances[0] + 2.0 * sum(covariances[1:])
    shrink = (n + 1 - 2 * h + h * (h - 1) / n) / n
    if not long_run > 1e-12 * float(apart @ apart) / n or not shrink > 0.0:
        return None
    statistic = float(apart.mean() / np.sqrt(long_run / n) * np.sqrt(shrink))
    tail = float(student_cdf(np.array([-abs(statistic)]), n - 1)[0])
    return Compared(statistic, 2.0 * tail, n - 1)
