"""Does a logarithm make a series easier to describe? Likelihoods with the Jacobian of the transform."""

from __future__ import annotations

import numpy as np

from preflight_magic.kernels.restricted_likelihood import Array, line_column, pattern_columns


def lagged_design(values: Array, period: int, lags: tuple[int, ...]) -> tuple[Array, Array, int]:
    """Regressors constant, line, pattern and lagged values, on the rows where everything is observed.

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
    first : int
        Rank of the design, or -1 where fewer than three degrees of freedom remain.
    """
    n = len(values)
    columns = [np.ones((n, 1)), line_column(n)[:, None]]
    if period > 1:
        columns.append(pattern_columns(n, period))
    for lag in lags:
        shifted = np.full((n, 1), np.nan)
        shifted[lag:, 0] = values[:-lag]
        columns.append(shifted)
    design = np.column_stack(columns)
    rows = np.isfinite(design).all(axis=1) & np.isfinite(values)
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
        too short or one of the two regressions leaves nothing.

    Notes
    -----
    Box and Cox (1964), An analysis of transformations, Journal of the Royal Statistical Society B 26, 211-252, in a
    regression on constant, line, pattern and three lags.
    """
    seen = values[np.isfinite(values)]
    if not (seen > 0).all():
        return -np.inf
    level = float(np.exp(np.log(seen).mean()))
    plain = values / level
    raw = lagged_design(plain, period, (1, 2, 3))
    logged = lagged_design(np.log(plain), period, (1, 2, 3))
    if raw[2] < 0 or logged[2] < 0:
        return float("nan")
    # what rounding leaves: relative to the level for the plain series, absolute for the logarithm
    tiny = len(raw[1]) * 1e-20
    before, after = residual_sum(*raw[:2]), residual_sum(*logged[:2])
    if before < tiny or after < tiny:
        return 0.0 if before < tiny else float("nan")
    return float(len(raw[1]) * (np.log(before) - np.log(after)) - 2.0 * logged[1].sum())
