"""How strong season and trend are beside what they leave: two decompositions, one measure.

`stl_strength` needs statsmodels, whose import takes longer than the check of a series; `average_strength` stands in for
it where nobody asked.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from preflight_magic.kernels.restricted_likelihood import Array


@dataclass(frozen=True)
class Strength:
    """Strength of season and trend.

    Attributes
    ----------
    seasonal, trend : float
        In [0, 1]: one less the variance of the remainder over that of the remainder with the component put back.
    """

    seasonal: float
    trend: float


def stl_strength(values: Array, period: int, robust: bool = False) -> Strength | None:
    """Strength of season and trend by STL.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing; filled along the mean pattern.
    period : int
        At least 2.
    robust : bool
        Down-weight outliers.

    Returns
    -------
    Strength or None
        None where there are fewer than two cycles or the series does not vary.

    Raises
    ------
    ValueError
        For a period below 2.

    References
    ----------
    Cleveland, Cleveland, McRae and Terpenning (1990), STL: a seasonal-trend decomposition procedure based on loess,
    Journal of Official Statistics 6, 3-73. The measure: Wang, Smith and Hyndman (2006), Characteristic-based clustering
    for time series data, Data Mining and Knowledge Discovery 13, 335-364.
    """
    filled = _filled(values, period)
    if filled is None:
        return None
    from statsmodels.tsa.seasonal import STL

    found = STL(filled, period=period, robust=robust).fit()
    return _strength(np.asarray(found.seasonal), np.asarray(found.trend), np.asarray(found.resid))


def average_strength(values: Array, period: int) -> Strength | None:
    """Strength of season and trend by a moving average of one cycle and the mean of each season.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing; filled along the mean pattern.
    period : int
        At least 2.

    Returns
    -------
    Strength or None
        None where there are fewer than three cycles or the series does not vary. The pattern of the decomposition is
        fixed, so a season that wanders is weaker here than by STL.

    Raises
    ------
    ValueError
        For a period below 2.

    References
    ----------
    Classical decomposition: Kendall and Stuart (1966), The advanced theory of statistics, volume 3 (from memory); the
    measure as for `stl_strength`.
    """
    filled = _filled(values, period)
    if filled is None or len(filled) < 3 * period:
        return None
    weights = np.ones(period) / period
    if period % 2 == 0:  # half weights at both ends keep the average centred
        weights = np.concatenate([[0.5], np.ones(period - 1), [0.5]]) / period
    trend = np.convolve(filled, weights, "valid")
    edge = len(weights) // 2
    detrended = filled[edge : edge + len(trend)] - trend
    position = (np.arange(len(trend)) + edge) % period
    means = np.bincount(position, detrended) / np.bincount(position)
    seasonal = (means - means.mean())[position]
    return _strength(seasonal, trend, detrended - seasonal)


def fill_along_pattern(values: Array, period: int) -> Array:
    """Fill gaps on a straight line between what their neighbours are beside the mean of their season.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing, at least one value observed.
    period : int
        1 for no season.

    Returns
    -------
    ndarray, shape (n,)
    """
    seen = np.isfinite(values)
    if seen.all():
        return values
    position = np.arange(len(values)) % period
    centre = float(values[seen].mean())
    counts = np.bincount(position[seen], minlength=period)
    means = np.bincount(position[seen], values[seen] - centre, period) / np.maximum(counts, 1)
    pattern = means[position] + centre
    level = np.interp(np.arange(len(values)), np.flatnonzero(seen), (values - pattern)[seen])
    return np.where(seen, values, level + pattern)


def _filled(values: Array, period: int) -> Array | None:
    if period < 2:
        raise ValueError(f"the seasonal period is {period}; it must be at least 2")
    seen = np.isfinite(values)
    if len(values) < 2 * period + 1 or not seen.any():
        return None
    filled = fill_along_pattern(values, period)
    filled = filled - filled.mean()
    return filled if float(np.abs(filled).max()) > 1e-12 * float(np.abs(values[seen]).max()) else None


def _strength(seasonal: Array, trend: Array, remainder: Array) -> Strength:
    noise = float(remainder.var())
    return Strength(*(max(0.0, 1.0 - noise / max(float((one + remainder).var()), 1e-300)) for one in (seasonal, trend)))
