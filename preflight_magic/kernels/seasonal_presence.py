"""Is there a season at all, and one more beyond it? F tests of patterns in regressions with lags."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import fdtrc

from preflight_magic.kernels.power_transform import lagged_design, residual_sum
from preflight_magic.kernels.restricted_likelihood import Array, line_column


@dataclass(frozen=True)
class Presence:
    """F test of no pattern; NaN where the series is too short for it."""

    statistic: float
    p_value: float
    numerator: int
    denominator: int

    @property
    def nobs(self) -> int:
        """Rows of the regression: it has a constant, a line and lags besides the pattern."""
        return self.numerator + self.denominator + 5

    @property
    def standardised(self) -> float:
        """p-value standardised to 100 values, ``p sqrt(n / 100)``, at most a half.

        A p-value speaks the less for a season the longer the series is. Good (1992), The Bayes/non-Bayes compromise: a
        brief review, Journal of the American Statistical Association 87, 597-606.
        """
        return float(np.minimum(self.p_value * (self.nobs / 100.0) ** 0.5, 0.5))


def season_presence(values: Array, period: int) -> Presence:
    """F test of the seasonal contrasts in a regression on constant, line and three lags.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    period : int
        At least 2.

    Returns
    -------
    Presence
        The null is that no position of the cycle differs from another; the lags keep the level from passing for a
        season. Fisher's F test in a dynamic regression (common practice), exact only for large samples.
    """
    design, response, rank = lagged_design(values, period, (1, 2, 3))
    if rank < 0:
        return Presence(float("nan"), float("nan"), period - 1, 0)
    others = np.r_[0, 1, period + 1 : design.shape[1]]
    full, without = residual_sum(design, response), residual_sum(design[:, others], response)
    degrees = len(response) - rank
    if full <= 1e-20 * max(without, 1e-300):
        return Presence(float("inf") if without > 0 else 0.0, 0.0 if without > 0 else 1.0, period - 1, degrees)
    statistic = ((without - full) / (period - 1)) / (full / degrees)
    return Presence(statistic, float(fdtrc(period - 1, degrees, max(statistic, 0.0))), period - 1, degrees)


def longer_presence(values: Array, period: int, longer: int) -> Presence:
    """F test of a longer pattern beyond a shorter one, such as the hours of the week beyond those of the day.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    period : int
    longer : int
        A multiple of `period`.

    Returns
    -------
    Presence
        The null is that the cycles within the longer one are alike. Lags of one to three steps, of `period` and of one
        more are in the regression, so that a pattern that wanders from cycle to cycle does not pass for a longer one.
    """
    lags = (1, 2, 3, period, period + 1)
    design, response, _ = lagged_design(values, 1, lags)
    n, seen = len(values), np.isfinite(values)
    rows = np.flatnonzero(seen)
    rows = rows[rows >= max(lags)]
    numerator, denominator = longer - period, len(rows) - longer - design.shape[1] + 1
    if n < longer or denominator < longer or np.bincount(rows % longer, minlength=longer).min() < 2:
        return Presence(float("nan"), float("nan"), numerator, 0)
    table = np.column_stack([response, design[:, 1:]])
    full, without = (
        residual_sum(rest[:, 1:], rest[:, 0]) for rest in (_within(table, rows % length) for length in (longer, period))
    )
    if full <= 1e-20 * max(without, 1e-300):
        return Presence(float("inf") if without > 0 else 0.0, 0.0 if without > 0 else 1.0, numerator, denominator)
    statistic = ((without - full) / numerator) / (full / denominator)
    return Presence(statistic, float(fdtrc(numerator, denominator, max(statistic, 0.0))), numerator, denominator)


def cycle_presence(values: Array, period: int, length: float) -> Presence:
    """F test of a long smooth cycle, such as the year of daily values, beyond the pattern of a short one.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    period : int
        Of the short pattern; 1 for none.
    length : float
        Steps of the long cycle, not necessarily whole.

    Returns
    -------
    Presence
        The null is that the first two pairs of waves of the cycle are not needed. A unit root passes for a long cycle
        more often than the p-value says, as it does for a line in the regression of Dickey and Fuller.
    """
    lags = (1, 2, 3, period, period + 1) if period > 3 else (1, 2, 3)
    design, response, rank = lagged_design(values, period, lags)
    if rank < 0:
        return Presence(float("nan"), float("nan"), 4, 0)
    rows = np.flatnonzero(np.isfinite(values))
    angle = 2.0 * np.pi * rows[rows >= max(lags)] / length
    waves = np.column_stack([turn(k * angle) for k in (1, 2) for turn in (np.cos, np.sin)])
    degrees = len(response) - rank - 4
    full, without = residual_sum(np.column_stack([design, waves]), response), residual_sum(design, response)
    if degrees < 3 or full <= 1e-20 * max(without, 1e-300):
        return Presence(float("nan"), float("nan"), 4, 0)
    statistic = ((without - full) / 4) / (full / degrees)
    return Presence(statistic, float(fdtrc(4, degrees, max(statistic, 0.0))), 4, degrees)


def without_pattern(values: Array, period: int) -> Array:
    """A series less its mean pattern about a line, the level kept; shape (n,), NaN where missing."""
    seen = np.flatnonzero(np.isfinite(values))
    line = line_column(len(values))
    inner = _within(np.column_stack([values[seen], line[seen]]), seen % period)
    slope = float(inner[:, 1] @ inner[:, 0]) / max(float(inner[:, 1] @ inner[:, 1]), 1e-300)
    straight = values[seen] - slope * line[seen]
    place = seen % period
    pattern = np.bincount(place, straight, period) / np.maximum(np.bincount(place, minlength=period), 1)
    return np.asarray(values - (pattern - pattern.mean())[np.arange(len(values)) % period], dtype=float)


def _within(table: Array, place: NDArray[np.intp]) -> Array:
    """Columns less their means at each place."""
    counts = np.maximum(np.bincount(place), 1)
    means = np.column_stack([np.bincount(place, column) / counts for column in table.T])
    return np.asarray(table - means[place], dtype=float)
