"""Restricted likelihoods of differencing plans, put in the same coordinates so that they can be compared.

With constant, trend and pattern in the levels, the plans d = 0, 1, 2 with a fixed pattern and D = 1 with d = 0, 1 are
models of the same contrasts of the data. The restricted likelihood (Harville 1974) of each, completed by the
Jacobian of its differencing filter, is a density of those contrasts, and the densities are comparable.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from math import exp, log, pi, sqrt

import numpy as np
from numpy.typing import NDArray
from scipy.linalg.blas import dgemm
from scipy.linalg.lapack import dpotrf, dpotrs

from preflight_magic.kernels.whiten import NotPositiveDefiniteError, whiten

Array = NDArray[np.float64]

_ROUNDING = 1e-10
"""Relative size of residuals that are rounding errors: 16 digits less what differencing and regression cost."""


@dataclass(frozen=True)
class Levels:
    """A series and what it may contain besides its stochastic part, in levels.

    Attributes
    ----------
    values : ndarray, shape (n,)
        Missing values hold any number; each has a column in `others`.
    period : int
        Seasonal period of the pattern; 1 for none.
    trend : bool
        A straight line is allowed for.
    pattern : bool
        A seasonal pattern is allowed for.
    others : ndarray, shape (n, k)
        Further columns: a step, one indicator per missing value.
    """

    values: Array
    period: int
    trend: bool
    pattern: bool
    others: Array


@dataclass(frozen=True)
class Contrasts:
    """A plan's view of the data: differenced series and regressors with the constant that makes plans comparable.

    Attributes
    ----------
    stacked : ndarray, shape (rows, 1 + k)
        The differenced series, then the regressors, orthonormal.
    rotation : ndarray, shape (k, k)
        Differenced regressors in their own units = orthonormal ones times this.
    constant : float
        The Jacobian term.
    count : int
        Number m of contrasts, the same for all plans of one `Levels`.
    floor : float
        Variance below which residuals are rounding errors of the series.
    """

    stacked: Array
    rotation: Array
    constant: float
    count: int
    floor: float


def difference(values: Array, lag: int) -> Array:
    """Difference of the rows at one lag."""
    return values[lag:] - values[:-lag]


def missing_columns(values: Array) -> Array:
    """One indicator column per missing value, shape (n, k).

    A restricted likelihood with these columns is exactly that of the observed values alone.
    """
    gaps = np.flatnonzero(~np.isfinite(values))
    columns = np.zeros((len(values), len(gaps)), order="F")
    columns[gaps, np.arange(len(gaps))] = 1.0
    return columns


@lru_cache(maxsize=32)
def pattern_columns(n: int, period: int) -> Array:
    """Orthonormal contrasts between the positions of a cycle, shape (n, period - 1)."""
    basis = np.linalg.qr(np.column_stack([np.ones(period), np.eye(period)[:, : period - 1]]))[0][:, 1:]
    columns = np.asarray(basis[np.arange(n) % period], dtype=float)
    columns.setflags(write=False)
    return columns


def line_column(n: int) -> Array:
    """A centred straight line of unit range, shape (n,)."""
    return (np.arange(n) - (n - 1) / 2.0) / max(n - 1, 1)


def contrasts(levels: Levels, d: int, D: int) -> Contrasts | None:
    """What is left of series and regressors under a plan.

    Parameters
    ----------
    levels : Levels
    d, D : int
        Ordinary and seasonal differences.

    Returns
    -------
    Contrasts or None
        None where too few rows remain or the regressors repeat each other. The constant is
        ``1/2 log|L L'| + 1/2 log|X'(L L')^-1 X|`` for the differencing filter L and the remaining
        regressors X, found from the columns that the filter annihilates: for N spanning its null space,
        ``|L L'| = |N'N| / |N_r|^2`` with N_r the first r rows, and ``X_2' L'(L L')^-1 L X_2 = X_2'(I - P_N) X_2``.

    Raises
    ------
    ValueError
        For two differences of levels without a trend.
    """
    n, s = len(levels.values), levels.period
    if d + D >= 2 and not levels.trend:
        raise ValueError("two differences annihilate a line, so the levels must allow for a trend")
    constant, line = np.ones((n, 1)), line_column(n)[:, None]
    pattern = pattern_columns(n, s) if levels.pattern else np.empty((n, 0))
    null: list[Array] = []
    kept: list[Array] = []
    (null if d + D else kept).append(constant)
    if levels.trend:
        (null if d + D >= 2 else kept).append(line)
    (null if D else kept).append(pattern)
    kept.append(levels.others)
    x2, nil = np.column_stack(kept), np.column_stack(null) if null else np.empty((n, 0))
    stacked = np.column_stack([levels.values, x2])
    for lag in (s,) * D + (1,) * d:
        stacked = difference(stacked, lag)
    lost = d + s * D
    count = n - x2.shape[1] - nil.shape[1]
    if count < 3 or len(stacked) <= x2.shape[1]:
        return None
    jacobian = 0.0
    residual = x2
    if lost:
        q, r = np.linalg.qr(nil)
        jacobian += float(np.log(np.abs(r.diagonal())).sum() - np.linalg.slogdet(nil[:lost])[1])
        residual = x2 - q @ (q.T @ x2)
    q2, rotation = np.linalg.qr(stacked[:, 1:])
    if x2.shape[1]:
        size = np.abs(rotation.diagonal())
        if size.min() < 1e-9 * size.max():
            return None
        jacobian += float(np.log(np.abs(np.diag(np.asarray(np.linalg.qr(residual, mode="r"))))).sum())
        jacobian -= float(np.log(size).sum())
    return Contrasts(
        stacked=np.asfortranarray(np.column_stack([stacked[:, 0], q2])),
        rotation=rotation,
        constant=jacobian,
        count=count,
        floor=float(np.mean(levels.values**2)) * _ROUNDING**2,
    )


def evaluate(view: Contrasts, ar: Array, ma: Array) -> tuple[float, Array]:
    """Restricted log likelihood of an ARMA model seen through a plan, its scale concentrated out.

    Parameters
    ----------
    view : Contrasts
    ar, ma : ndarray
        Polynomials with leading one.

    Returns
    -------
    log_likelihood : float
    residuals : ndarray, shape (rows,)
        Whitened residuals times a factor, so that their sum of squares is a monotone function of the likelihood.

    Raises
    ------
    NotPositiveDefiniteError
        At parameters on the boundary.
    """
    whitened, log_determinant = whiten(ar, ma, view.stacked)
    series = whitened[:, 0]
    if whitened.shape[1] > 1:
        regressors = whitened[:, 1:]
        products = dgemm(1.0, whitened, whitened, trans_a=1)
        factor, info = dpotrf(products[1:, 1:], lower=1)
        if info != 0:
            raise NotPositiveDefiniteError
        series = series - regressors @ dpotrs(factor, products[1:, 0], lower=1)[0]
        log_determinant += 2.0 * sum(map(log, factor.diagonal().tolist()))
    total, floor = float(series @ series), view.count * view.floor
    if total < floor:
        # rounding errors, of which only the size is known
        series, total = np.full(len(series), sqrt(floor / len(series))), floor
    scale = exp(log_determinant / (2.0 * view.count))
    return concentrated(view, total * scale**2), series * scale


def concentrated(view: Contrasts, total: float) -> float:
    """Restricted log likelihood from the sum of squares of the scaled residuals of `evaluate`."""
    m = view.count
    return -0.5 * m * (log(2.0 * pi * total / m) + 1.0) + view.constant


def residuals(view: Contrasts, ar: Array, ma: Array) -> Array:
    """One-step errors of an ARMA model seen through a plan, regressors taken out; shape (rows,)."""
    whitened, _ = whiten(ar, ma, view.stacked)
    found = np.linalg.lstsq(whitened[:, 1:], whitened[:, 0], rcond=None)[0]
    return np.asarray(whitened[:, 0] - whitened[:, 1:] @ found, dtype=float)


def effects(view: Contrasts, ar: Array, ma: Array) -> tuple[Array, Array]:
    """Generalised least squares effects of the regressors in their own units.

    Parameters
    ----------
    view : Contrasts
    ar, ma : ndarray

    Returns
    -------
    estimates : ndarray, shape (k,)
        In the order constant, line, pattern, others, without those that the plan annihilates.
    covariance : ndarray, shape (k, k)
    """
    whitened, _ = whiten(ar, ma, view.stacked)
    series, regressors = whitened[:, 0], whitened[:, 1:]
    inverse = np.linalg.pinv(regressors.T @ regressors)
    estimates = inverse @ (regressors.T @ series)
    residuals = series - regressors @ estimates
    variance = max(float(residuals @ residuals) / view.count, view.floor)
    back = np.linalg.pinv(view.rotation)
    return back @ estimates, back @ inverse @ back.T * variance
