"""Confidence interval for the persistence of a series that stays valid near a unit root; computed on demand.

The usual interval, estimate and standard error, fails near one: the estimate is biased down and its distribution has
no fixed shape. Here each candidate value is tested with the distribution that the t-ratio has under that very value,
simulated from the residuals; the interval holds the values that are not rejected. Its coverage is right uniformly,
from white noise to a unit root (Mikusheva 2007, Econometrica 75).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from scipy.signal import lfilter

from preflight_magic.kernels.dickey_fuller import (
    ROUNDING,
    finite_range,
    longest_lag,
    regression_columns,
    searched_length,
)
from preflight_magic.kernels.lag_length import Criterion
from preflight_magic.kernels.least_squares import FloatArray
from preflight_magic.kernels.persistence import Persistence, half_life, largest_modulus
from preflight_magic.kernels.scaling import within_rounding

_DEGREE = {"c": 0, "ct": 1}
_CHUNK = 20_000  # values of the simulated series held at a time, few enough for the cache
_EXPLODED = 1e12  # standard deviations of the residual
_BELOW, _ABOVE, _POINTS = 3.0, 5.0, 33  # the grid, in standard errors around the estimate


@dataclass(frozen=True)
class LargestRoot:
    """Persistence with a confidence interval by the grid bootstrap.

    Attributes
    ----------
    least_squares : Persistence
        Biased down near a unit root.
    median_unbiased : Persistence
        The value whose simulated median is the estimate.
    lower, upper : Persistence
        Ends of the interval for the sum of the coefficients, with root and half-life of the autoregression fitted
        under each of them.
    coverage : float
    lags : int
        Lagged differences; the autoregression has one more coefficient.
    nobs : int
    terms : {"c", "ct"}
    replications, seed : int
    """

    least_squares: Persistence
    median_unbiased: Persistence
    lower: Persistence
    upper: Persistence
    coverage: float
    lags: int
    nobs: int
    terms: Literal["c", "ct"]
    replications: int
    seed: int


@dataclass(frozen=True)
class _Design:
    """Regressors with the level apart, in units of the residual's standard deviation."""

    others: FloatArray  # deterministic terms and lagged differences
    level: FloatArray
    response: FloatArray
    terms: int


def largest_root(
    y: FloatArray,
    terms: Literal["c", "ct"] = "ct",
    *,
    coverage: float = 0.9,
    lags: int | None = None,
    criterion: Criterion = "AIC",
    replications: int = 999,
    seed: int = 0,
) -> LargestRoot | None:
    """Persistence of an autoregression about a constant or a line, with a grid-bootstrap interval.

    Parameters
    ----------
    y : ndarray, shape (n,)
        No missing values.
    terms : {"c", "ct"}
    coverage : float
        In (0, 1); both tails alike.
    lags : int, optional
        Lagged differences, where they are not to be searched.
    criterion : {"AIC", "BIC", "t-stat", "MAIC"}
        How they are searched.
    replications : int
        Simulated series at each of the grid's values; all values use the same draws.
    seed : int

    Returns
    -------
    LargestRoot or None
        None where the series is too short for the lags, does not vary, is fitted without error, or where the
        simulated series explode, as in a series so short that roots far above one cannot be excluded.

    Raises
    ------
    ValueError
        For missing or infinite values, unknown terms, a coverage outside (0, 1), fewer than 99 replications or
        negative lags.

    References
    ----------
    Hansen (1999), Review of Economics and Statistics 81: the grid bootstrap of the t-ratio. The simulated series start
    at their deterministic terms, as in Stock (1991), Journal of Monetary Economics 28.
    """
    if terms not in _DEGREE:
        raise ValueError(f"the interval has no terms {terms!r}; use 'c' or 'ct'")
    if not 0.0 < coverage < 1.0:
        raise ValueError(f"the coverage is {coverage:g}; it must lie between 0 and 1")
    if replications < 99:
        raise ValueError(f"{replications} replications are too few for an interval; use at least 99")
    degree = _DEGREE[terms]
    low, high = finite_range(y)
    longest = longest_lag(y.size, degree, lags)
    if longest is None or within_rounding(low, high):
        return None
    chosen = lags if lags is not None else searched_length(y, degree, longest, criterion)
    design = None if chosen is None else _design(y, degree, chosen, ROUNDING * max(abs(low), abs(high)))
    if chosen is None or design is None:
        return None
    estimate, error = _level_coefficient(design)
    grid = estimate + error * np.linspace(-_BELOW, _ABOVE, _POINTS)
    tail = (1.0 - coverage) / 2.0
    simulated = _simulated_quantiles(design, y.size, grid, (tail, 0.5, 1.0 - tail), replications, seed)
    if simulated is None:
        return None
    observed = (estimate - grid) / error
    upper, median, lower = (_crossing(grid, observed - one) for one in simulated.T)
    return LargestRoot(
        least_squares=_persistence(design, estimate),
        median_unbiased=_persistence(design, median),
        lower=_persistence(design, lower),
        upper=_persistence(design, upper),
        coverage=coverage,
        lags=chosen,
        nobs=design.level.size,
        terms=terms,
        replications=replications,
        seed=seed,
    )


def _design(y: FloatArray, degree: int, lags: int, noise: float) -> _Design | None:
    columns = regression_columns(y, degree, lags)[lags:]
    level, response = columns[:, degree + 1], columns[:, degree + 1] + columns[:, -1]
    others = columns[:, [*range(degree + 1), *range(degree + 2, degree + 2 + lags)]]
    everything = np.column_stack([others, level])
    beta, _, rank, _ = np.linalg.lstsq(everything, response, rcond=None)
    residual = response - everything @ beta
    spread = float(np.sqrt(residual @ residual / response.size))
    if rank < everything.shape[1] or spread <= noise:
        return None
    others[:, degree + 1 :] /= spread
    return _Design(others, level / spread, response / spread, degree + 1)


def _level_coefficient(design: _Design) -> tuple[float, float]:
    """Least-squares estimate of the sum of the coefficients and its standard error."""
    q = np.linalg.qr(design.others)[0]
    level, response = (x - q @ (q.T @ x) for x in (design.level, design.response))
    square = float(level @ level)
    estimate = float(level @ response) / square
    residual = response - estimate * level
    freedom = level.size - design.others.shape[1] - 1
    return estimate, float(np.sqrt(residual @ residual / freedom / square))


def _restricted(design: _Design, value: float) -> tuple[FloatArray, FloatArray]:
    """Coefficients of an autoregression in levels whose sum is `value`, and its centred residuals."""
    response = design.response - value * design.level
    beta = np.linalg.lstsq(design.others, response, rcond=None)[0]
    residual = response - design.others @ beta
    changes = np.concatenate([beta[design.terms :], [0.0]])
    coefficients: FloatArray = changes - np.concatenate([[0.0], changes[:-1]])
    coefficients[0] += value
    centred: FloatArray = residual - residual.mean()
    return coefficients, centred


def _persistence(design: _Design, value: float) -> Persistence:
    coefficients, _ = _restricted(design, value)
    life = float("inf") if value >= 1.0 else half_life(coefficients)
    return Persistence(value, largest_modulus(coefficients), life)


def _simulated_quantiles(
    design: _Design, n: int, grid: FloatArray, levels: tuple[float, ...], replications: int, seed: int
) -> FloatArray | None:
    """Quantiles of the t-ratio under each value of the grid, shape (grid, levels).

    None where simulated series explode or are fitted without error.
    """
    drawn = np.random.default_rng(seed).integers(0, design.level.size, (replications, n))
    lags = design.others.shape[1] - design.terms
    q = np.linalg.qr(design.others[:, : design.terms])[0]
    rows = max(1, _CHUNK // n)
    parts = [drawn[start : start + rows] for start in range(0, replications, rows)]
    found = np.empty((grid.size, len(levels)))
    for row, value in enumerate(grid.tolist()):
        coefficients, residual = _restricted(design, value)
        filtered, ratios = np.concatenate([[1.0], -coefficients]), []
        for part in parts:
            with np.errstate(all="ignore"):  # what overflows is seen below
                series = lfilter([1.0], filtered, residual[part], axis=1)
            if not np.abs(series).max() < _EXPLODED:
                return None
            ratios.append(_t_ratios(series, value, lags, q))
        together = np.concatenate(ratios)
        if not np.isfinite(together).all():
            return None
        found[row] = np.quantile(together, levels)
    return found


def _t_ratios(series: FloatArray, value: float, lags: int, q: FloatArray) -> FloatArray:
    """t-ratio of the level against `value`; rows of `series` are series, `q` the orthonormal deterministic terms."""
    change = np.diff(series, axis=1)
    t = np.arange(lags, change.shape[1])
    level = series[:, t]
    columns = [*(change[:, t - lag] for lag in range(1, lags + 1)), level, series[:, t + 1] - value * level]
    stacked = np.stack(columns, axis=1)
    stacked -= (stacked @ q) @ q.T
    # Products of explosive series would lose the residual to rounding; their triangular factors do not.
    factor: FloatArray = np.asarray(np.linalg.qr(stacked.transpose(0, 2, 1), mode="r"))
    beside, diagonal, error = factor[:, -2, -1], factor[:, -2, -2], np.abs(factor[:, -1, -1])
    freedom = t.size - lags - 1 - q.shape[1]
    with np.errstate(all="ignore"):  # a perfect fit gives no number, which is seen where the quantiles are taken
        ratios: FloatArray = np.copysign(beside, beside * diagonal) / error * np.sqrt(freedom)
    return ratios


def _crossing(grid: FloatArray, distance: FloatArray) -> float:
    """Where a falling curve meets zero; the end of the grid where it does not."""
    below = np.flatnonzero(distance < 0.0)
    if not below.size:
        return float(grid[-1])
    first = int(below[0])
    if first == 0:
        return float(grid[0])
    share = distance[first - 1] / (distance[first - 1] - distance[first])
    return float(grid[first - 1] + share * (grid[first] - grid[first - 1]))
