"""Tests of unit roots at the seasonal frequencies and at zero, for any seasonal period.

A series that cannot carry a test (too short, constant, fitted without error, regressors that depend on each other)
gives None; input that no series should bring here (missing or infinite values, unknown terms) raises ValueError.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from math import inf, isfinite, nan, sqrt
from typing import Literal

import numpy as np
from scipy.linalg.lapack import dtrtri

from preflight_magic.kernels.distributions import Bound
from preflight_magic.kernels.lag_length import Criterion, schwert, searched_lags
from preflight_magic.kernels.least_squares import FloatArray, leading_rank, polynomial, triangle
from preflight_magic.kernels.scaling import to_unit_size, within_rounding
from preflight_magic.kernels.seasonal_unit_root_surfaces import Kind, hegy_p_values

HegyTerms = Literal["n", "c", "ct"]

_DEGREE = {"n": -1, "c": 0, "ct": 1}
_ROUNDING = 32.0 * float(np.finfo(np.float64).eps)  # of residuals beside the largest value: there is no error
_COLLINEAR = 1e-12  # determinant of a pair beside its diagonal, below which the two cannot be told apart
_FEWEST_DEGREES = 4  # of freedom; fewer make the residual variance meaningless (common practice)


@dataclass(frozen=True)
class SeasonalRoot:
    """One statistic of the HEGY regression.

    Attributes
    ----------
    kind : {"zero", "pi", "pair", "seasonal", "all"}
        A t-ratio at frequency zero or pi, an F statistic of one pair of complex roots, or a joint F statistic of all
        seasonal frequencies or of all frequencies.
    cycle : float
        Period of the root in steps: inf at zero, 2 at pi, NaN for the joint statistics.
    statistic : float
    p_value : float
        Of the lower tail for a t-ratio, of the upper for F. Read it with `p_bound`.
    p_bound : {"exact", "at most", "at least"}
    """

    kind: Kind
    cycle: float
    statistic: float
    p_value: float
    p_bound: Bound


@dataclass(frozen=True)
class HegyResult:
    """HEGY test; the null hypothesis of each statistic is a unit root at its frequency.

    Attributes
    ----------
    roots : tuple of SeasonalRoot
        Zero, pi (for an even period), then the pairs from the longest cycle to the shortest.
    seasonal, all : SeasonalRoot
        The joint statistics.
    period : int
    terms : {"n", "c", "ct"}
    dummies : bool
    lags : int
        Lagged seasonal differences in the regression.
    nobs : int
        Observations in the regression.
    """

    roots: tuple[SeasonalRoot, ...]
    seasonal: SeasonalRoot
    all: SeasonalRoot
    period: int
    terms: HegyTerms
    dummies: bool
    lags: int
    nobs: int


def hegy(
    y: FloatArray,
    period: int,
    terms: HegyTerms = "c",
    *,
    dummies: bool = True,
    lags: int | None = None,
    max_lags: int | None = None,
    criterion: Criterion | None = "AIC",
) -> HegyResult | None:
    """HEGY test at every frequency of a seasonal period.

    Parameters
    ----------
    y : ndarray, shape (n,)
        No missing values.
    period : int
        Seasonal period s, at least 2.
    terms : {"n", "c", "ct"}
        None, constant, constant and straight line.
    dummies : bool
        Seasonal dummies besides; they need a constant.
    lags : int, optional
        Lagged seasonal differences, where they are not to be searched.
    max_lags : int, optional
        Longest length in the search, by default that of Schwert (1989), shortened for a short series.
    criterion : {"AIC", "BIC", "t-stat", "MAIC"} or None
        How the length is searched, see `lag_length.searched_lags`; None takes `max_lags` itself. All lengths are
        compared on one common sample.

    Returns
    -------
    HegyResult or None
        None where the series is too short, does not vary, or is fitted without error.

    Raises
    ------
    ValueError
        For missing or infinite values, unknown terms, an unknown criterion, a period below 2, or negative lags.

    Notes
    -----
    Rejections by the joint statistic of the seasonal frequencies at 5 %, random walks for each season, s = 4 and then
    12, constant, line and dummies, n = 50, 100 and 400 (own simulation, 1000 series): lags by AIC .086, .085, .058 and
    .114, .084, .059; by BIC .062, .072, .058 and .117, .061, .047; by the modified AIC .034, .047, .050 and .049, .046,
    .044. A seasonal moving average near -1 makes all of them reject too often, the modified AIC least.

    References
    ----------
    Hylleberg, Engle, Granger and Yoo (1990), Seasonal integration and cointegration, Journal of Econometrics 44,
    215-238. Any period: Smith, Taylor and del Barrio Castro (2009), Regression-based seasonal unit root tests,
    Econometric Theory 25, 527-560.
    """
    if terms not in _DEGREE or (dummies and terms == "n"):
        raise ValueError(f"there are no terms {terms!r}{' with dummies' if dummies else ''}; use 'c' or 'ct'")
    if period < 2:
        raise ValueError(f"the seasonal period is {period}; it must be at least 2")
    n, s = y.size, period
    low, high = (float(y.min()), float(y.max())) if n else (0.0, 0.0)
    if not isfinite(high - low):
        raise ValueError("a seasonal unit-root test needs finite values; it got missing or infinite ones")
    width = _DEGREE[terms] + 1 + (s - 1 if dummies else 0)
    room = (n - 2 * s - width - _FEWEST_DEGREES) // 2
    longest = lags if lags is not None else max_lags
    if longest is None:
        longest = min(schwert(n), room)
    elif longest < 0:
        raise ValueError(f"the lag length is {longest}; it must not be negative")
    if room < 0 or longest > room or within_rounding(low, high):
        return None
    scaled, scale = to_unit_size(y if terms == "n" else y - y.sum() / n)
    columns = _columns(scaled, s, terms, dummies, longest)
    chosen = longest
    if lags is None and criterion is not None and longest:
        search = [*range(width), *range(width + longest, width + longest + s), *range(width, width + longest), -1]
        common = triangle(np.asfortranarray(columns[longest:, search]))
        searched = searched_lags(common, width + s, n - s - longest, criterion, levels=s)
        if searched is None:
            return None
        chosen = searched
    kept = columns if chosen == longest else np.delete(columns, np.s_[width + chosen : width + longest], axis=1)
    factor = triangle(np.asfortranarray(kept[chosen:]))
    nobs, before = n - s - chosen, width + chosen
    noise = _ROUNDING * max(abs(low), abs(high)) / scale
    if abs(factor[-1, -1]) <= noise * sqrt(nobs) or leading_rank(factor) < before + s:
        return None
    found = _statistics(factor[before:, before:], s, nobs - before - s)
    return None if found is None else _with_p_values(found, s, terms, dummies, chosen, n)


def _columns(y: FloatArray, s: int, terms: HegyTerms, dummies: bool, lags: int) -> FloatArray:
    """Terms, dummies, lagged seasonal differences, the filtered levels and the seasonal difference; n - s rows.

    The first `lags` rows hold zeros where a lagged difference does not exist.
    """
    change = y[s:] - y[:-s]
    rows, start = change.size, _DEGREE[terms] + 1
    width = start + (s - 1 if dummies else 0)
    columns = np.zeros((rows, width + lags + s + 1), order="F")
    columns[:, :start] = polynomial(rows, _DEGREE[terms])
    if dummies:
        columns[:, start:width] = np.eye(s)[np.arange(rows) % s, 1:]
    for lag in range(1, lags + 1):
        columns[lag:, width + lag - 1] = change[:-lag]
    windows = np.lib.stride_tricks.sliding_window_view(y, s)[:-1]
    columns[:, width + lags : -1] = windows @ _frequencies(s)
    columns[:, -1] = change
    return columns


@cache
def _frequencies(s: int) -> FloatArray:
    """Weights of s successive values, the earliest first, at zero, pi and the pairs; shape (s, s).

    The sign at pi is the one that makes a root inside the circle show as a negative t-ratio.
    """
    lag = np.arange(s, 0, -1)
    columns = [np.ones(s)]
    if s % 2 == 0:
        columns.append(np.where(lag % 2 == 0, 1.0, -1.0))
    for k in range(1, (s + 1) // 2):
        columns += [np.cos(2.0 * np.pi * k * lag / s), np.sin(2.0 * np.pi * k * lag / s)]
    found = np.column_stack(columns)
    found.setflags(write=False)
    return found


def _statistics(factor: FloatArray, s: int, degrees: int) -> list[tuple[Kind, float, float]] | None:
    """(kind, cycle, statistic) from the last rows and columns of the triangular factor; None where a pair is one."""
    variance = float(factor[-1, -1]) ** 2 / degrees
    z = factor[:-1, -1]
    inverse = dtrtri(factor[:-1, :-1])[0]
    effects = inverse @ z
    found: list[tuple[Kind, float, float]] = []
    singles: tuple[tuple[Kind, float], ...] = (("zero", inf), ("pi", 2.0))
    simple = 2 - s % 2
    for j, (kind, cycle) in enumerate(singles[:simple]):
        found.append((kind, cycle, float(effects[j]) / sqrt(float(inverse[j] @ inverse[j]) * variance)))
    first, second = inverse[simple::2], inverse[simple + 1 :: 2]
    a, b, c = (first * first).sum(axis=1), (first * second).sum(axis=1), (second * second).sum(axis=1)
    determinant = a * c - b * b
    if (determinant <= _COLLINEAR * a * c).any():
        return None
    e, f = effects[simple::2], effects[simple + 1 :: 2]
    pairs = (c * e * e - 2.0 * b * e * f + a * f * f) / determinant / (2.0 * variance)
    found += [("pair", s / k, value) for k, value in enumerate(pairs.tolist(), 1)]
    squares = z * z
    found.append(("seasonal", nan, float(squares[1:].sum()) / (s - 1) / variance))
    found.append(("all", nan, float(squares.sum()) / s / variance))
    return found


def _with_p_values(
    found: list[tuple[Kind, float, float]], s: int, terms: HegyTerms, dummies: bool, lags: int, n: int
) -> HegyResult:
    p_values = hegy_p_values([(kind, value) for kind, _, value in found], terms, dummies, s, n, lags)
    tests = [
        SeasonalRoot(kind, cycle, value, p, bound)
        for (kind, cycle, value), (p, bound) in zip(found, p_values, strict=True)
    ]
    return HegyResult(tuple(tests[:-2]), tests[-2], tests[-1], s, terms, dummies, lags, n - s - lags)
