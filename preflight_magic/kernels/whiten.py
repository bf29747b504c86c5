"""Whitening by an ARMA covariance: an AR filter, then a banded Cholesky factor of what remains.

The rotation of Ansley (1979): keep the first p values, filter the rest by the AR polynomial. The covariance of the
result is banded and the rotation has determinant one, so one banded factor gives the exact Gaussian likelihood.
"""

from __future__ import annotations

from functools import lru_cache
from math import log, sqrt

import numpy as np
from numpy.typing import NDArray
from scipy.linalg.lapack import dgesv, dpbtrf, dpotrf, dtbtrs, dtrtrs

Array = NDArray[np.float64]


class NotPositiveDefiniteError(ArithmeticError):
    """The covariance is singular to working precision: the parameters lie on the boundary."""


@lru_cache(maxsize=64)
def _autocovariance_indices(p: int) -> tuple[NDArray[np.intp], NDArray[np.intp], NDArray[np.intp]]:
    rows, columns = np.mgrid[0 : p + 1, 0 : p + 1]
    return rows.ravel(), np.abs(rows - columns).ravel(), columns.ravel()


def psi_weights(ar: Array, ma: Array, count: int) -> Array:
    """Weights of the infinite moving average of an ARMA process.

    Parameters
    ----------
    ar, ma : ndarray, shapes (p + 1,), (q + 1,)
        Polynomials in the lag operator with leading one: ``ar(B) w = ma(B) e``.
    count : int
        Number of weights, the leading one included.

    Returns
    -------
    ndarray, shape (count,)
    """
    from scipy.signal import lfilter

    impulse = np.zeros(count)
    impulse[0] = 1.0
    return np.asarray(lfilter(ma, ar, impulse), dtype=float)


def autocovariances(ar: Array, ma: Array) -> Array:
    """Autocovariances at lags 0 to p of an ARMA process with unit innovation variance.

    Parameters
    ----------
    ar, ma : ndarray, shapes (p + 1,), (q + 1,)

    Returns
    -------
    ndarray, shape (p + 1,)

    Raises
    ------
    NotPositiveDefiniteError
        When the AR polynomial has a root on the circle.

    Notes
    -----
    The third method of Brockwell and Davis (1991), *Time Series: Theory and Methods*, section 3.3.
    """
    return _autocovariances(ar, _cross(ar, ma))


def _cross(ar: Array, ma: Array) -> Array:
    """Covariances of w[t] with the moving average ma(B) e at times t to t + q, shape (q + 1,)."""
    q = len(ma) - 1
    taps = [(lag, -value) for lag, value in enumerate(ar.tolist()) if lag and value]
    psi = ma.tolist()
    for j in range(1, q + 1):
        for lag, value in taps:
            if lag > j:
                break
            psi[j] += value * psi[j - lag]
    return np.correlate(ma, np.array(psi), "full")[q:]


def _autocovariances(ar: Array, cross: Array) -> Array:
    p = len(ar) - 1
    right = np.zeros(p + 1)
    right[: len(cross)] = cross[: p + 1]
    if p <= 2:
        return _short_autocovariances(ar.tolist(), right.tolist())
    rows, lags, terms = _autocovariance_indices(p)
    matrix = np.bincount(rows * (p + 1) + lags, ar[terms], (p + 1) ** 2).reshape(p + 1, p + 1)
    _, _, solution, info = dgesv(matrix, right)
    if info != 0:
        raise NotPositiveDefiniteError
    return np.asarray(solution, dtype=float)


def _short_autocovariances(ar: list[float], right: list[float]) -> Array:
    """The equations for one or two AR coefficients written out: this is called some thousand times a series."""
    if len(ar) == 1:
        return np.array(right)
    one, two = -ar[1], -ar[2] if len(ar) == 3 else 0.0
    further = right[2] if len(right) == 3 else 0.0
    side = (1.0 - two) * (1.0 - two * two) - one * one * (1.0 + two)
    if side <= 0.0 or abs(two) >= 1.0:
        raise NotPositiveDefiniteError
    zero = ((1.0 - two) * (right[0] + two * further) + one * (1.0 + two) * right[1]) / side
    first = (right[1] + one * zero) / (1.0 - two)
    return np.array([zero, first, further + one * first + two * zero][: len(ar)])


def _filter(ar: Array, values: Array) -> Array:
    """AR polynomial applied to the rows after the first p; those stay as they are."""
    p = len(ar) - 1
    out = values.copy(order="F")
    for lag in range(1, p + 1):
        if ar[lag] != 0.0:
            out[p:] += ar[lag] * values[p - lag : len(values) - lag]
    return out


def whiten(ar: Array, ma: Array, values: Array) -> tuple[Array, float]:
    """Multiply by the inverse Cholesky factor of an ARMA covariance matrix of unit innovation variance.

    Parameters
    ----------
    ar, ma : ndarray, shapes (p + 1,), (q + 1,)
        Polynomials with leading one.
    values : ndarray, shape (n, k)
        Columns to whiten: the series and its regressors.

    Returns
    -------
    whitened : ndarray, shape (n, k)
    log_determinant : float
        Of the covariance matrix.

    Raises
    ------
    NotPositiveDefiniteError
        When the AR polynomial has a root on the circle, or the matrix is singular to working precision.

    Notes
    -----
    Ansley (1979), An algorithm for the exact likelihood of a mixed autoregressive-moving average process,
    Biometrika 66, 59-65.
    """
    p, q = len(ar) - 1, len(ma) - 1
    n = len(values)
    if p == 0 and q == 0:
        return values, 0.0
    if p >= n:
        raise NotPositiveDefiniteError
    rotated = _filter(ar, values) if p else values
    cross = _cross(ar, ma) if p else None
    gamma = _autocovariances(ar, cross) if cross is not None else None
    if q == 0:
        assert gamma is not None
        return _start_whitened(gamma[:p], rotated)
    band = _band(ma, n, p, gamma, cross)
    factor, info = dpbtrf(band, lower=1, overwrite_ab=1)
    if info != 0:
        raise NotPositiveDefiniteError
    whitened, info = dtbtrs(factor, rotated, uplo="L")
    if info != 0:
        raise NotPositiveDefiniteError
    return whitened, 2.0 * float(np.log(factor[0]).sum())


def _start_whitened(gamma: Array, rotated: Array) -> tuple[Array, float]:
    """Whiten the first rows of a filtered autoregression, which are still as they were."""
    p = len(gamma)
    if p == 1:
        scale = float(gamma[0])
        if scale <= 0.0:
            raise NotPositiveDefiniteError
        rotated[0] /= sqrt(scale)
        return rotated, log(scale)
    factor, info = dpotrf(gamma[np.abs(np.subtract.outer(np.arange(p), np.arange(p)))], lower=1)
    if info != 0:
        raise NotPositiveDefiniteError
    rotated[:p] = dtrtrs(factor, rotated[:p], lower=1)[0]
    return rotated, 2.0 * sum(map(log, factor.diagonal().tolist()))


def _band(ma: Array, n: int, p: int, gamma: Array | None, cross: Array | None) -> Array:
    """Lower band of the covariance after the rotation; rows are lags, columns are times."""
    q = len(ma) - 1
    width = min(max(q, p - 1), n - 1)
    used = min(q, width) + 1
    band = np.zeros((width + 1, n), order="F")
    band[:used] = np.correlate(ma, ma, "full")[q : q + used, None]
    if gamma is not None and cross is not None:
        for column in range(p):
            here = min(p - column, width + 1)
            band[:here, column] = gamma[:here]
            band[here:, column] = 0.0
            band[here:used, column] = cross[here:used]
    return band
