"""Ordinary least squares read from one triangular factor.

With ``Z = [X, y] = Q R`` the last column of R holds all that nested regressions need: what y loses to each column of
X stands in one row, so the residual sums of squares of all models made of leading columns are partial sums of its
squares (Golub and Van Loan 2013, section 5.3). LAPACK is called directly: for the sizes met here the checks of the
numpy and scipy wrappers cost more than the factorisation.
"""

from __future__ import annotations

from functools import cache, lru_cache

import numpy as np
from numpy.typing import NDArray
from scipy.linalg.lapack import dgeqrf

FloatArray = NDArray[np.float64]

_EPSILON = float(np.finfo(np.float64).eps)
_BLOCK = 32  # block size that LAPACK may use, in columns


def triangle(columns: FloatArray) -> FloatArray:
    """Triangular factor R of a QR factorisation.

    Parameters
    ----------
    columns : ndarray, shape (n, k)
        The regressors and, in the last column, the response. Overwritten where it is stored by columns
        (``order="F"``), which also saves a copy.

    Returns
    -------
    ndarray, shape (min(n, k), k)
        Upper triangular. The signs of its rows are arbitrary.
    """
    width = columns.shape[1]
    packed, _, _, _ = dgeqrf(columns, lwork=_BLOCK * width, overwrite_a=True)
    factor: FloatArray = packed[:width] * _upper(width)[: packed.shape[0]]  # LAPACK leaves its reflectors below
    return factor


def residual_sums(factor: FloatArray) -> FloatArray:
    """Residual sums of squares of the nested regressions on the leading columns.

    Parameters
    ----------
    factor : ndarray, shape (k + 1, k + 1)
        From `triangle`: k regressors and the response.

    Returns
    -------
    ndarray, shape (k + 1,)
        Entry j belongs to the regression on the first j columns, entry 0 to none. Valid up to `leading_rank`.
    """
    squares = factor[:, -1] ** 2
    sums: FloatArray = squares[::-1].cumsum()[::-1]
    return sums


def leading_rank(factor: FloatArray) -> int:
    """Count the leading regressors that are linearly independent.

    Parameters
    ----------
    factor : ndarray, shape (k + 1, k + 1)
        From `triangle`: k regressors and the response.

    Returns
    -------
    int
        The number of columns before the first one that the earlier ones explain up to rounding.
    """
    squares = factor * factor
    # Column norms survive the factorisation, so the diagonal entry is compared with the norm of its column.
    dependent = squares.diagonal()[:-1] <= (100.0 * _EPSILON) ** 2 * squares.sum(axis=0)[:-1]
    return int(dependent.argmax()) if dependent.any() else dependent.size


def last_t_ratio(factor: FloatArray, nobs: int) -> float:
    """t-ratio of the last regressor.

    Parameters
    ----------
    factor : ndarray, shape (k + 1, k + 1)
        From `triangle`: k independent regressors, the one tested in the last place, and the response.
    nobs : int
        Observations in the regression, more than k.

    Returns
    -------
    float
        Coefficient over its standard error, residual variance with divisor ``nobs - k``.
    """
    k = factor.shape[1] - 1
    # The coefficient is z / r and its standard error s / |r|, with r the diagonal entry and z what y has beside it.
    z, r = float(factor[k - 1, k]), float(factor[k - 1, k - 1])
    return float(np.copysign(z, z * r)) / (abs(float(factor[k, k])) / float(np.sqrt(nobs - k)))


@cache
def _upper(width: int) -> FloatArray:
    return np.triu(np.ones((width, width)))


@lru_cache(maxsize=64)
def _line(nobs: int) -> FloatArray:
    line: FloatArray = np.linspace(-1.0, 1.0, nobs)
    line.setflags(write=False)
    return line


def polynomial(nobs: int, degree: int) -> FloatArray:
    """Powers of time, centred and scaled to [-1, 1] so that they stay well conditioned.

    Parameters
    ----------
    nobs : int
    degree : int
        0 for a constant, 1 with a linear trend, 2 with a quadratic one, -1 for no column.

    Returns
    -------
    ndarray, shape (nobs, degree + 1), stored by columns
    """
    columns = np.empty((nobs, degree + 1), order="F")
    if degree >= 0:
        columns[:, 0] = 1.0
    if degree >= 1:
        columns[:, 1] = _line(nobs)
    for power in range(2, degree + 1):
        columns[:, power] = columns[:, 1] * columns[:, power - 1]
    return columns


def detrend(y: FloatArray, degree: int) -> FloatArray:
    """Residuals from a constant or a straight line.

    Parameters
    ----------
    y : ndarray, shape (n,)
    degree : {0, 1}
        0 subtracts the mean, 1 the least-squares line.

    Returns
    -------
    ndarray, shape (n,)
    """
    residual: FloatArray = y - y.mean()
    if degree == 1:
        time = _line(y.size)
        residual -= time * (time @ residual / (time @ time))
    return residual
