"""Do totals follow the number of days of their months? Likelihoods of a series and of its values per day."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from preflight_magic.kernels.power_transform import deviance
from preflight_magic.kernels.restricted_likelihood import Array, line_column, pattern_columns

_CYCLES_FOR_LAGS = 5
"""Cycles from which two seasonal lags are worth the rows that they cost. Common practice."""
_HARMONICS = (0, 1, 2)
"""Waves a year of the smooth patterns that are tried beside a free one: days of a month vary from month to month, what
people do mostly from season to season."""


@dataclass(frozen=True)
class CalendarGain:
    """How much better values per day are described than totals.

    Attributes
    ----------
    gains : Mapping[str, float]
        Fall of the criterion, -2 log likelihood with its penalty, by the unit of the days.
    best : str
        The unit with the largest gain.
    waves : int
        Waves a cycle in the pattern that describes the better of totals and values per day best: 0 for none, half a
        period for a free pattern.
    """

    gains: Mapping[str, float]
    best: str
    waves: int


def calendar_gain(totals: Array, days: Mapping[str, Array], period: int) -> CalendarGain | None:
    """Compare totals with the same totals divided by numbers of days.

    Parameters
    ----------
    totals : ndarray, shape (n,)
        Positive; NaN where missing.
    days : Mapping from unit to ndarray, shape (n,)
        Positive counts.
    period : int
        Steps a year.

    Returns
    -------
    CalendarGain or None
        None where the series is too short for a line, a free pattern and three lags, or does not vary.

    Notes
    -----
    Totals and values per day are described alike by a line, lags and a seasonal pattern: none, one of few waves or a
    free one, in levels or in logarithms, whichever the criterion of Schwarz (1978), Annals of Statistics 6, 461-464,
    likes best. Dividing changes the unit, hence the Jacobian (Box and Cox 1964). A free pattern takes up all that the
    months have in common over the years, so with it only leap years speak of days, and the changing number of workdays
    of workdays; a pattern of few waves does not follow the days. Cleveland and Devlin (1982), Calendar effects in
    monthly time series: modeling and adjustment, Journal of the American Statistical Association 77, 520-528. Errors
    have Student's t distribution, so that a few outliers do not decide.
    """
    n = len(totals)
    seen = np.isfinite(totals)
    lags = (1, 2, 3, period, period + 1) if period > 3 and n >= _CYCLES_FOR_LAGS * period else (1, 2, 3)
    rows = seen.copy()
    rows[: max(lags)] = False
    if int(rows.sum()) < period + len(lags) + 4 or np.ptp(totals[seen]) == 0.0:
        return None
    patterns = _patterns(n, period)
    plain = _lowest(totals, np.ones(n), patterns, lags, rows)
    found = {unit: _lowest(totals, count, patterns, lags, rows) for unit, count in days.items()}
    gains = {unit: plain[0] - one[0] for unit, one in found.items()}
    best = max(gains, key=lambda unit: gains[unit])
    return CalendarGain(gains, best, (found[best] if gains[best] > 0.0 else plain)[1])


def _patterns(n: int, period: int) -> dict[int, Array]:
    """Columns of the patterns by their waves: none, few, and as many as there are."""
    angle = 2.0 * np.pi * np.arange(n) / period
    found = {}
    for waves in _HARMONICS:
        if 2 * waves < period - 1:
            turns = [wave(k * angle) for k in range(1, waves + 1) for wave in (np.cos, np.sin)]
            found[waves] = np.column_stack(turns) if turns else np.empty((n, 0))
    found[period // 2] = pattern_columns(n, period)
    return found


def _lowest(
    totals: Array, days: Array, patterns: Mapping[int, Array], lags: tuple[int, ...], rows: Array
) -> tuple[float, int]:
    """Lowest criterion of the totals over days, and the waves of its pattern."""
    seen = np.isfinite(totals)
    level = float(np.exp(np.log(totals[seen]).mean()))
    relative = days / float(np.exp(np.log(days[seen]).mean()))
    plain = totals / level / relative
    cost = 2.0 * float(np.log(relative[rows]).sum())
    forms = ((plain, cost), (np.log(plain), cost + 2.0 * float(np.log(plain[rows]).sum())))
    found = []
    for values, jacobian in forms:
        base, response = _regressors(values, lags)[rows], values[rows]
        n = len(response)
        designs = {waves: np.column_stack([base, columns[rows]]) for waves, columns in patterns.items()}
        # Which pattern, by least squares: the t errors cost a search each.
        waves = min(designs, key=lambda one: _schwarz(designs[one], response))
        penalty = patterns[waves].shape[1] * float(np.log(n))
        found.append((deviance(designs[waves], response) + jacobian + penalty, waves))
    return min(found)


def _schwarz(design: Array, response: Array) -> float:
    n, columns = design.shape
    basis = np.linalg.qr(design)[0]
    left = response - basis @ (basis.T @ response)
    return float(n * np.log(max(float(left @ left) / n, 1e-300)) + columns * np.log(n))


def _regressors(values: Array, lags: tuple[int, ...]) -> Array:
    """Constant, line and lagged values; a missing value among the lags is interpolated."""
    n = len(values)
    seen = np.isfinite(values)
    filled = values if seen.all() else np.interp(np.arange(n), np.flatnonzero(seen), values[seen])
    shifted = np.zeros((n, len(lags)))
    for place, lag in enumerate(lags):
        shifted[lag:, place] = filled[:-lag]
    return np.column_stack([np.ones(n), line_column(n), shifted])
