"""How well a change of level is dated, and one change of slope: date and size.

A series that cannot carry the answer gives None.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from math import exp, floor, pi, sqrt
from typing import Literal

import numpy as np
from scipy.optimize import brentq
from scipy.special import erfcx, ndtr

from preflight_magic.kernels.least_squares import FloatArray
from preflight_magic.kernels.long_run_variance import long_run_variance

_ROUNDING = 1e-20  # relative sum of squares that is rounding
_FARTHEST = 400.0  # the law of the date has no mass beyond in double precision


@dataclass(frozen=True)
class ShiftInterval:
    """Confidence interval of the date of a level shift.

    Attributes
    ----------
    first, last : int
        Bounds of the first position of the new level, both included; within the series.
    coverage : float
    size : float
        Change of level, in the unit of the series.
    size_error : float
        Its standard error, given the date.
    variance : float
        Variance of the errors, long-run unless they were taken as uncorrelated.
    """

    first: int
    last: int
    coverage: float
    size: float
    size_error: float
    variance: float


@dataclass(frozen=True)
class BrokenTrend:
    """One change of slope in a line that stays joined.

    Attributes
    ----------
    position : int
        Last position of the old slope: the corner.
    before, after : float
        Slopes a step, in the unit of the series.
    statistic : float
        F statistic of the change at this date, errors taken as uncorrelated: it dates and does not decide.
    t_levels : float
        t-ratio of the change with a long-run variance, right where the series varies about the line.
    t_differences : float
        t-ratio of the change in the mean of the first differences at this date, right where it is a random walk.
    """

    position: int
    before: float
    after: float
    statistic: float
    t_levels: float
    t_differences: float

    @property
    def change(self) -> float:
        """Change of slope, in units a step."""
        return self.after - self.before


def shift_date_distribution(x: float) -> float:
    """Distribution function of the scaled error of an estimated break date.

    The law of the place where a two-sided Brownian motion less half the distance from zero is largest.

    Parameters
    ----------
    x : float
        Steps times squared size over error variance.

    Returns
    -------
    float

    References
    ----------
    Yao (1987), Annals of Statistics 15, 1321-1328; Bai (1997), Review of Economics and Statistics 79, 551-563.
    """
    if x < 0.0:
        return 1.0 - shift_date_distribution(-x)
    last = 0.75 * exp(-x / 8.0) * float(erfcx(1.5 * sqrt(x / 2.0)))  # 3/2 exp(x) Phi(-3/2 sqrt(x)) without overflow
    return 1.0 + sqrt(x / (2.0 * pi)) * exp(-x / 8.0) - (x + 5.0) / 2.0 * float(ndtr(-sqrt(x) / 2.0)) + last


@cache
def shift_date_quantile(probability: float) -> float:
    """Value that the scaled error of a break date stays below with a probability above one half."""
    found: float = brentq(lambda x: shift_date_distribution(x) - probability, 0.0, _FARTHEST, xtol=1e-12)
    return found


def shift_interval(
    values: FloatArray,
    regressors: FloatArray,
    position: int,
    coverage: float = 0.95,
    errors: Literal["uncorrelated", "long-run"] = "long-run",
) -> ShiftInterval | None:
    """Confidence interval of the date of a level shift.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    regressors : ndarray, shape (n, k)
        What else the level contains, a constant among it; the same as when the shift was dated.
    position : int
        First position of the new level, where the sum of squares is least (`breaks.date_shift`).
    coverage : float
        In (0, 1).
    errors : {"uncorrelated", "long-run"}
        Whether their variance allows for dependence: quadratic spectral kernel, prewhitened, bandwidth of Andrews.

    Returns
    -------
    ShiftInterval or None
        None where too few values are observed, the shift cannot be told from the regressors, or nothing is left.

    Raises
    ------
    ValueError
        For a position outside the series or a coverage outside (0, 1).

    References
    ----------
    Bai (1997), Estimation of a change point in multiple regression models, Review of Economics and Statistics 79,
    551-563.
    """
    n = len(values)
    if not 0 < position < n or not 0.0 < coverage < 1.0:
        raise ValueError(f"no interval of coverage {coverage:g} for a shift at {position} in {n} values")
    step = (np.arange(n) >= position).astype(np.float64)
    fitted = _effect(values, regressors, step)
    if fitted is None:
        return None
    size, left, weight, _ = fitted
    variance = float(left @ left) / left.size if errors == "uncorrelated" else _long_run(left)
    if not variance > 0.0:
        return None
    reach = floor(shift_date_quantile(0.5 + coverage / 2.0) * variance / size**2) + 1 if size else n
    first, last = max(position - reach, 1), min(position + reach, n - 1)
    return ShiftInterval(first, last, coverage, size, sqrt(variance / weight), variance)


def broken_trend(values: FloatArray, others: FloatArray | None = None, trim: float = 0.15) -> BrokenTrend | None:
    """Date one change of slope by least squares, the line staying joined.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    others : ndarray, shape (n, k), optional
        What the series contains besides constant and line.
    trim : float
        Share left out at each end, at least four values.

    Returns
    -------
    BrokenTrend or None
        None where the series is too short to leave a date or is fitted without error.

    References
    ----------
    Perron and Zhu (2005), Structural breaks with deterministic and stochastic trends, Journal of Econometrics 129,
    65-119: the joined line and its date.
    """
    n = len(values)
    edge = max(int(trim * n), 4)
    at = np.arange(edge, n - edge)
    seen = np.isfinite(values)
    time = np.arange(n, dtype=np.float64)
    regressors = np.column_stack([np.ones(n), time / n, *([] if others is None else [others])])
    if not at.size or int(seen.sum()) < regressors.shape[1] + 5:
        return None
    basis = np.linalg.qr(regressors[seen])[0]
    full = np.zeros((n, basis.shape[1] + 1))  # zeros where nothing is seen
    full[seen, :-1] = basis
    full[seen, -1] = values[seen] - basis @ (basis.T @ values[seen])
    # Products with the column max(t - corner, 0) are sums of sums from the end.
    later = _after(np.column_stack([full, seen]))
    distances = later + _after(later)  # each row times its steps from the corner
    twice, length = distances[:, :-1], distances[:, -1]
    squared = 2.0 * _after(distances[:, -1:])[:, 0] + length
    size = squared[at] - (twice[at, :-1] ** 2).sum(axis=1)
    usable = size > 1e-8 * squared[at]
    fall = np.where(usable, twice[at, -1] ** 2 / np.where(usable, size, 1.0), 0.0)
    corner = int(at[int(np.argmax(fall))])
    fitted = _effect(values, regressors, np.maximum(time - corner, 0.0))
    if fitted is None:
        return None
    change, left, weight, degrees = fitted
    slope = _slope(values, regressors, np.maximum(time - corner, 0.0))
    total = float(left @ left) / degrees
    variance = _long_run(left)
    return BrokenTrend(
        position=corner,
        before=slope,
        after=slope + change,
        statistic=float(fall.max()) / total,
        t_levels=change / sqrt(variance / weight) if variance > 0.0 else float("nan"),
        t_differences=_change_of_mean(values, corner),
    )


def _after(columns: FloatArray) -> FloatArray:
    """Sum of all later rows."""
    sums: FloatArray = np.zeros_like(columns)
    sums[:-1] = columns[:0:-1].cumsum(axis=0)[::-1]
    return sums


def _effect(
    values: FloatArray, regressors: FloatArray, column: FloatArray
) -> tuple[float, FloatArray, float, int] | None:
    """Effect of one more column, residuals of the observed values, its sum of squares given the others, freedom."""
    seen = np.isfinite(values)
    degrees = int(seen.sum()) - regressors.shape[1] - 1
    if degrees < 3:
        return None
    y, x = values[seen] - values[seen].mean(), column[seen]
    basis = np.linalg.qr(regressors[seen])[0]
    partial = x - basis @ (basis.T @ x)
    weight = float(partial @ partial)
    if weight <= 1e-10 * float(x @ x):
        return None
    left = y - basis @ (basis.T @ y)
    effect = float(partial @ left) / weight
    left = left - effect * partial
    if float(left @ left) <= _ROUNDING * float(values[seen] @ values[seen]):
        return None
    return effect, left, weight, degrees


def _slope(values: FloatArray, regressors: FloatArray, column: FloatArray) -> float:
    """Slope a step before the corner; the line is the second regressor, over n."""
    seen = np.isfinite(values)
    design = np.column_stack([regressors, column])[seen]
    effects = np.linalg.lstsq(design, values[seen] - values[seen].mean(), rcond=None)[0]
    return float(effects[1]) / len(values)


def _long_run(left: FloatArray) -> float:
    found = long_run_variance(left, kernel="quadratic spectral", bandwidth="andrews", prewhiten=True)
    return 0.0 if found is None else found.value


def _change_of_mean(values: FloatArray, corner: int) -> float:
    """t-ratio of the change in the mean difference after the corner, with a long-run variance."""
    changes = np.diff(values)
    later = (np.arange(len(changes)) >= corner)[np.isfinite(changes)]
    changes = changes[np.isfinite(changes)]
    if later.sum() < 2 or (~later).sum() < 2:
        return float("nan")
    means = np.array([changes[~later].mean(), changes[later].mean()])
    variance = _long_run(changes - means[later.astype(int)])
    if not variance > 0.0:
        return float("nan")
    return float(means[1] - means[0]) / sqrt(variance * (1.0 / later.sum() + 1.0 / (~later).sum()))
