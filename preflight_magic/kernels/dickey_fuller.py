"""The Dickey-Fuller regression that the tests of a unit root share.

One triangular factor of the longest regression serves every shorter one.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import isfinite, sqrt

import numpy as np

from preflight_magic.kernels.lag_length import Criterion, schwert, searched_lags
from preflight_magic.kernels.least_squares import FloatArray, last_t_ratio, leading_rank, polynomial, triangle

EPSILON = float(np.finfo(np.float64).eps)
ROUNDING = 16.0 * EPSILON  # times the largest value: what a factorisation may leave of an exact fit


@dataclass(frozen=True)
class LevelRegression:
    """The difference on the lagged level, deterministic terms and lagged differences.

    Attributes
    ----------
    statistic : float
        t-ratio of the lagged level.
    lags : int
        Lagged differences in the regression.
    nobs : int
        Observations in the regression.
    """

    statistic: float
    lags: int
    nobs: int


def finite_range(y: FloatArray) -> tuple[float, float]:
    """Smallest and largest value; they carry any NaN or infinity, so that nothing else has to look for it.

    Parameters
    ----------
    y : ndarray, shape (n,)

    Returns
    -------
    low, high : float
        Both 0 for an empty series.

    Raises
    ------
    ValueError
        For missing or infinite values.
    """
    if not y.size:
        return 0.0, 0.0
    low, high = float(y.min()), float(y.max())
    if not isfinite(high - low):
        raise ValueError("a unit-root test needs finite values; it got missing or infinite ones")
    return low, high


def longest_lag(n: int, degree: int, wanted: int | None) -> int | None:
    """Longest lag of the search.

    Parameters
    ----------
    n : int
        Length of the series.
    degree : int
        Of the deterministic polynomial, -1 for none.
    wanted : int or None
        None takes the length of Schwert (1989), shortened for a short series.

    Returns
    -------
    int or None
        None where so many lags would not leave more observations than coefficients.

    Raises
    ------
    ValueError
        For a negative length.
    """
    room = min(n // 2 - degree - 2, (n - 4 - degree) // 2)
    if wanted is not None and wanted < 0:
        raise ValueError(f"the lag length is {wanted}; it must not be negative")
    longest = min(schwert(n), room) if wanted is None else wanted
    return None if room < 0 or longest > room else longest


def level_regression(
    y: FloatArray, degree: int, longest: int, criterion: Criterion | None, noise: float
) -> LevelRegression | None:
    """t-ratio of the lagged level.

    The lag length is searched on one common sample, all lengths read from one triangular factor; then the few
    observations that the chosen length frees are added to that factor.

    Parameters
    ----------
    y : ndarray, shape (n,)
        No missing values.
    degree : int
        Of the deterministic polynomial, -1 for none.
    longest : int
        From `longest_lag`.
    criterion : {"AIC", "BIC", "t-stat", "MAIC"} or None
        None takes `longest` itself.
    noise : float
        Size of the rounding in `y`, in its unit.

    Returns
    -------
    LevelRegression or None
        None where regressors depend on each other or the fit has no error.
    """
    columns = regression_columns(y, degree, longest)
    common = triangle(columns[longest:].copy(order="F"))
    n, chosen = y.size, longest
    if criterion is not None:
        searched = searched_lags(common, degree + 2, n - 1 - longest, criterion)
        if searched is None:
            return None
        chosen = searched
    nobs = n - 1 - chosen
    factor = _with_level_last(common, columns[chosen:longest], degree, chosen)
    if abs(factor[-1, -1]) <= noise * sqrt(nobs) or leading_rank(factor) < degree + 2 + chosen:
        return None
    return LevelRegression(last_t_ratio(factor, nobs), chosen, nobs)


def searched_length(y: FloatArray, degree: int, longest: int, criterion: Criterion) -> int | None:
    """Lag length alone.

    Parameters
    ----------
    y, degree, longest, criterion
        As for `level_regression`.

    Returns
    -------
    int or None
        None where regressors depend on each other already without lags.
    """
    common = triangle(regression_columns(y, degree, longest)[longest:].copy(order="F"))
    return searched_lags(common, degree + 2, y.size - 1 - longest, criterion)


def regression_columns(y: FloatArray, degree: int, lags: int) -> FloatArray:
    """Deterministic terms, level, lagged differences and difference.

    Parameters
    ----------
    y : ndarray, shape (n,)
    degree : int
        Of the deterministic polynomial, -1 for none.
    lags : int

    Returns
    -------
    ndarray, shape (n - 1, degree + 3 + lags), stored by columns
        The first `lags` rows hold unset values where a lagged difference does not exist.
    """
    difference = y[1:] - y[:-1]
    columns = np.empty((difference.size, degree + 3 + lags), order="F")
    columns[:, : degree + 1] = polynomial(difference.size, degree)
    # With a constant the mean of the level is free; without it the sum of squares stays exact far from zero.
    columns[:, degree + 1] = y[:-1] - y.sum() / y.size if degree >= 0 else y[:-1]
    for lag in range(1, lags + 1):
        columns[lag:, degree + 1 + lag] = difference[:-lag]
    columns[:, -1] = difference
    return columns


def _with_level_last(common: FloatArray, freed: FloatArray, degree: int, lags: int) -> FloatArray:
    """Factor of the regression with `lags` lags on all its rows, the level as last regressor.

    Parameters
    ----------
    common : ndarray, shape (k + 1, k + 1)
        Factor of the longest regression on the common sample.
    freed : ndarray, shape (rows, k + 1)
        Rows of the same columns that only the shorter regression can use.
    degree, lags : int
    """
    level = degree + 1
    order = [*range(level), *range(level + 1, level + 1 + lags), level, common.shape[1] - 1]
    size = len(order)
    stacked = np.empty((size + freed.shape[0], size), order="F")
    stacked[: size - 1] = common[: size - 1, order]
    # Below its first rows the response is all residual: one row with its norm stands for them.
    stacked[size - 1] = 0.0
    unexplained = common[size - 1 :, -1]
    stacked[size - 1, -1] = sqrt(unexplained @ unexplained)
    stacked[size:] = freed[:, order]
    return triangle(stacked)
