"""Does a logarithm make a series easier to describe? Likelihoods with the Jacobian of the transform."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.linalg.lapack import dposv

from preflight_magic.kernels.restricted_likelihood import Array, line_column, pattern_columns


def lagged_design(values: Array, period: int, lags: tuple[int, ...]) -> tuple[Array, Array, int]:
    """Regressors constant, line, pattern and lagged values, on the rows where the value is observed.

    A missing value among the lags is interpolated, so that a gap costs one row and not one more for each lag.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    period : int
        Seasonal period of the pattern; 1 for none.
    lags : tuple of int

    Returns
    -------
    design : ndarray, shape (rows, 1 + 1 + period - 1 + len(lags))
    response : ndarray, shape (rows,)
    rank : int
        Columns of the design, or -1 where fewer than three degrees of freedom remain.
    """
    n = len(values)
    columns = [np.ones((n, 1)), line_column(n)[:, None]]
    if period > 1:
        columns.append(pattern_columns(n, period))
    seen = np.isfinite(values)
    filled = values if seen.all() else np.interp(np.arange(n), np.flatnonzero(seen), values[seen])
    for lag in lags:
        shifted = np.zeros((n, 1))
        shifted[lag:, 0] = filled[:-lag]
        columns.append(shifted)
    design = np.column_stack(columns)
    rows = seen.copy()
    rows[: max(lags)] = False
    rank = design.shape[1] if int(rows.sum()) >= design.shape[1] + 3 else -1
    return design[rows], values[rows], rank


def residual_sum(design: Array, response: Array) -> float:
    """Sum of squares left by least squares."""
    found = np.linalg.lstsq(design, response, rcond=None)[0]
    left = response - design @ found
    return float(left @ left)


def log_gain(values: Array, period: int) -> float:
    """Fall of -2 log likelihood when a series is taken in logarithms, Jacobian included.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    period : int
        Seasonal period of the pattern allowed for; 1 for none.

    Returns
    -------
    float
        Positive when the log describes the series better; -inf where a value is not positive, NaN where the series is
        too short.

    Notes
    -----
    Box and Cox (1964), An analysis of transformations, Journal of the Royal Statistical Society B 26, 211-252, in a
    regression on constant, line, pattern, three lags and, in longer series, two seasonal lags. Errors have
    Student's t distribution (Lange, Little and Taylor 1989, Robust statistical modeling using the t distribution,
    Journal of the American Statistical Association 84, 881-896), so that a few outliers do not decide; values far off
    in both descriptions are left out and both are made once more.
    """
    seen = values[np.isfinite(values)]
    if not (seen > 0).all():
        return -np.inf
    level = float(np.exp(np.log(seen).mean()))
    plain = values / level
    lags = (1, 2, 3, period, period + 1) if period > 3 and len(values) >= _CYCLES_FOR_LAGS * period else (1, 2, 3)
    gain, apart = _gain(plain, period, lags)
    if apart.any() and apart.sum() <= max(2, _MOST_APART * len(values)):
        gain, _ = _gain(np.where(apart, np.nan, plain), period, lags)
    return gain


def _gain(values: Array, period: int, lags: tuple[int, ...]) -> tuple[float, NDArray[np.bool_]]:
    """The gain, and which values lie far off both with and without the logarithm."""
    apart = np.zeros(len(values), dtype=bool)
    rows = np.isfinite(values)
    rows[: max(lags)] = False
    raw, logged = lagged_design(values, period, lags), lagged_design(np.log(values), period, lags)
    if raw[2] < 0 or logged[2] < 0:
        return float("nan"), apart
    total, far = 0.0, np.ones(len(raw[1]), dtype=bool)
    for sign, (design, response, _) in ((1.0, raw), (-1.0, logged)):
        left, scale = _fitted(design, response)
        total += sign * _deviance(left, scale)
        far &= left**2 > _APART**2 * scale
    apart[rows] = far
    return total - 2.0 * float(logged[1].sum()), apart


_DEGREES = 5.0
"""Degrees of freedom of the errors. Lange, Little and Taylor (1989) use 4 as a robust choice and estimate 3 to 10."""
_CYCLES_FOR_LAGS = 5
"""Cycles from which two seasonal lags are worth the rows that they cost. Common practice."""


_EXACT = 1e-16
"""Variance, relative to the level, at which a description is as good as exact: what is left is rounding."""
_FARTHEST = 8.0
"""Standard deviations beyond which an error counts no further, so that one wild value does not decide."""


_APART = 4.5
"""Standard deviations from which a value that is as far off with the logarithm as without says nothing of either: it is
left out, so that its traces in the lags do not decide. Common practice."""
_MOST_APART = 0.05
"""Share of such values above which they are the way of the series. Common practice."""


def deviance(design: Array, response: Array) -> float:
    """-2 log likelihood of a regression with t errors, without its constant."""
    return _deviance(*_fitted(design, response))


def _fitted(design: Array, response: Array) -> tuple[Array, float]:
    """Errors of a regression with t errors, and their squared scale."""
    basis = np.linalg.qr(design)[0]
    left = response - basis @ (basis.T @ response)
    scale = (1.4826 * float(np.median(np.abs(left)))) ** 2
    for _ in range(20):
        scale = max(scale, _EXACT)
        weights = (_DEGREES + 1.0) / (_DEGREES + left**2 / scale)
        weighted = basis * weights[:, None]
        # the basis is orthonormal, so its weighted products are well conditioned
        _, move, info = dposv(weighted.T @ basis, weighted.T @ left)
        if info != 0:
            break
        left = left - basis @ move
        last, scale = scale, float(np.mean(weights * left**2))
        if abs(scale - last) < 1e-4 * last:
            break
    return left, max(scale, _EXACT)


def _deviance(left: Array, scale: float) -> float:
    total = np.log1p(np.minimum(left**2 / scale, _FARTHEST**2) / _DEGREES).sum()
    return float(len(left) * np.log(scale) + (_DEGREES + 1.0) * total)
