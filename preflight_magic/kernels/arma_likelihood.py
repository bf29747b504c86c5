"""Gaussian likelihood of a seasonal ARMA model on one series, with a mean and missing values."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import qr
from scipy.linalg.lapack import dpotrf, dpotrs
from scipy.signal import lfilter

from preflight_magic.kernels.arma_parameters import Array, Order, polynomials
from preflight_magic.kernels.long_run_variance import does_not_vary
from preflight_magic.kernels.whiten import NotPositiveDefiniteError, whiten

FEWEST = 8
"""Observed values below which nothing is fitted. Common practice."""

_EXACT_WORK = 2e8
"""Multiplications of one banded factor beyond which residuals are conditional: first values set to the mean."""
_ROUNDING = 1e-10
"""Relative size of residuals that are rounding errors."""


@dataclass(frozen=True)
class Sample:
    """A series made ready for its likelihood.

    Attributes
    ----------
    stacked : ndarray, shape (n, gaps + mean + 1)
        Orthonormal nuisance columns, ones if there is a mean, and the series divided by `scale`.
    gaps : int
    mean : bool
    scale : float
    missing : ndarray of int
        Rows at which a nuisance column first differs from zero.
    """

    stacked: Array
    gaps: int
    mean: bool
    scale: float
    missing: NDArray[np.intp]

    @property
    def count(self) -> int:
        """Observed values."""
        return len(self.stacked) - self.gaps


def prepare(values: Array, *, mean: bool, nuisance: Array | None = None) -> Sample | None:
    """Scale a series and orthonormalise its nuisance columns.

    Parameters
    ----------
    values : ndarray, shape (n,)
        No NaN.
    mean : bool
    nuisance : ndarray, shape (n, k), optional

    Returns
    -------
    Sample or None
        None with fewer than `FEWEST` observed values, with values that are not finite, or where nothing varies.
    """
    series = np.asarray(values, dtype=float)
    columns = np.empty((len(series), 0)) if nuisance is None else np.asarray(nuisance, dtype=float)
    if len(series) - columns.shape[1] < FEWEST or not np.isfinite(series).all() or does_not_vary(series):
        return None
    observed = series
    missing = np.unique((columns != 0.0).argmax(axis=0)) if columns.shape[1] else np.empty(0, dtype=np.intp)
    if columns.shape[1]:
        basis, triangle, _ = qr(columns, mode="economic", pivoting=True)
        size = np.abs(triangle.diagonal())
        columns = basis[:, : int((size > 1e-9 * max(size[0], 1e-300)).sum())]
        observed = series - columns @ (columns.T @ series)
    centre = float(observed.mean()) if mean else 0.0
    scale = float(np.sqrt(np.mean((observed - centre) ** 2)))
    if not scale > _ROUNDING * float(np.abs(series).max()):
        return None
    parts = [columns, np.ones((len(series), int(mean))), series[:, None] / scale]
    return Sample(np.asfortranarray(np.column_stack(parts)), columns.shape[1], mean, scale, missing)


def whitened_columns(sample: Sample, order: Order, values: Array) -> tuple[Array, float]:
    """Columns of the sample whitened at given coefficients, and the log determinant of the covariance matrix."""
    ar, ma = polynomials(order, values)
    if is_exact(sample, order):
        return whiten(ar, ma, sample.stacked)
    return np.asarray(lfilter(ar, ma, sample.stacked, axis=0), dtype=float), 0.0


def is_exact(sample: Sample, order: Order) -> bool:
    """Whether the exact likelihood of an order is affordable."""
    width = max(order.p + order.P * order.period, order.q + order.Q * order.period)
    return len(sample.stacked) * width**2 <= _EXACT_WORK


def regress(whitened: Array) -> tuple[Array, Array, Array]:
    """Last column less what the others explain; their effects; the Cholesky factor of their moments."""
    series, regressors = whitened[:, -1], whitened[:, :-1]
    factor, info = dpotrf(regressors.T @ regressors, lower=1)
    if info != 0:
        raise NotPositiveDefiniteError
    effects = dpotrs(factor, regressors.T @ series, lower=1)[0]
    return series - regressors @ effects, effects, factor


def evaluate(sample: Sample, order: Order, values: Array) -> tuple[float, Array]:
    """Log likelihood at given coefficients, mean and variance concentrated out.

    Parameters
    ----------
    sample : Sample
    order : Order
    values : ndarray, shape (order.size,)

    Returns
    -------
    log_likelihood : float
        In the unit of `Sample.stacked`, that is without ``count * log(scale)``.
    residuals : ndarray, shape (n,)
        Whitened residuals times a factor, so that their sum of squares is a monotone function of the likelihood.

    Raises
    ------
    NotPositiveDefiniteError
        At parameters on the boundary.

    Notes
    -----
    The nuisance columns Z have flat effects: the likelihood integrated over them is ``N - k`` observations, the
    residual sum of squares after them, and ``-1/2 log|Z' V^-1 Z|``. With one indicator per missing value, differenced
    as the series was, that is the density of the observed values up to a factor without parameters; without
    differences the factor is one. The columns are orthonormalised first, which also leaves parameters untouched.
    """
    series, log_determinant = whitened_columns(sample, order, values)
    if series.shape[1] > 1:
        residuals, _, factor = regress(series)
        log_determinant += 2.0 * float(np.log(factor.diagonal()[: sample.gaps]).sum())
    else:
        residuals = series[:, 0]
    m = sample.count
    total = max(float(residuals @ residuals), m * _ROUNDING**2)
    value = -0.5 * (m * (np.log(2.0 * np.pi * total / m) + 1.0) + log_determinant)
    return value, residuals * np.exp(log_determinant / (2.0 * m))
