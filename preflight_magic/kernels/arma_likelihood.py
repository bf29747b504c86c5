"""Gaussian likelihood of a seasonal ARMA model on one series, with a mean and missing values."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import qr
from scipy.linalg.lapack import dpotrf, dpotrs
from scipy.signal import lfilter

from preflight_magic.kernels.arma_parameters import Array, Order, polynomials
from preflight_magic.kernels.scaling import does_not_vary
from preflight_magic.kernels.whiten import NotPositiveDefiniteError, whiten

FEWEST = 8
"""Observed values below which nothing is fitted. Common practice."""

_EXACT_WORK = 2e8
"""Multiplications of one banded factor beyond which residuals are conditional: first values set to the mean."""
_ROUNDING = 1e-10
"""Relative size of residuals that are rounding errors."""
_SMALLEST = 1e-12
"""Spread relative to the largest value below which nothing varies but rounding errors."""


@dataclass(frozen=True)
class Sample:
    """A series made ready for its likelihood.

    Attributes
    ----------
    stacked : ndarray, shape (n, flat + mean + 1)
        Nuisance columns and fixed columns, each set orthonormal, ones if there is a mean, and the series less
        `centre` divided by `scale`.
    gaps, flat : int
        Nuisance columns; nuisance and fixed columns: all those with flat effects.
    mean : bool
    centre, scale : float
    missing : ndarray of int
        Rows at which a nuisance column first differs from zero.
    factor : tuple of float
        Polynomial by which every MA part is multiplied: one, or what holds an MA root at one.
    """

    stacked: Array
    gaps: int
    flat: int
    mean: bool
    centre: float
    scale: float
    missing: NDArray[np.intp]
    factor: tuple[float, ...] = (1.0,)

    @property
    def count(self) -> int:
        """Rows less columns with flat effects."""
        return len(self.stacked) - self.flat


def prepare(values: Array, *, mean: bool, nuisance: Array | None = None, fixed: Array | None = None) -> Sample | None:
    """Scale a series and orthonormalise its columns with flat effects.

    Parameters
    ----------
    values : ndarray, shape (n,)
        No NaN.
    mean : bool
        Whether a mean is estimated.
    nuisance : ndarray, shape (n, k), optional
        Indicators of missing values.
    fixed : ndarray, shape (n, l), optional
        Columns whose effects were taken out of the series before: line, shift, pattern.

    Returns
    -------
    Sample or None
        None with fewer than `FEWEST` observed values, with values that are not finite, or where nothing varies.
    """
    series = np.asarray(values, dtype=float)
    if len(series) < FEWEST or not np.isfinite(series).all() or does_not_vary(series):
        return None
    none = np.empty((len(series), 0))
    given = none if nuisance is None else np.asarray(nuisance, dtype=float)
    gaps = _basis(given, none)
    missing = np.unique((given != 0.0).argmax(axis=0)) if given.shape[1] else np.empty(0, dtype=np.intp)
    others = _basis(none if fixed is None else np.asarray(fixed, dtype=float), gaps)
    if len(series) - gaps.shape[1] - others.shape[1] < FEWEST:
        return None
    observed = series - gaps @ (gaps.T @ series)
    centre = float(observed.mean()) if mean else 0.0
    scale = float(np.sqrt(np.mean((observed - centre) ** 2)))
    if not scale > _SMALLEST * float(np.abs(series).max()):
        return None
    parts = [gaps, others, np.ones((len(series), int(mean))), (series[:, None] - centre) / scale]
    flat = gaps.shape[1] + others.shape[1]
    return Sample(np.asfortranarray(np.column_stack(parts)), gaps.shape[1], flat, mean, centre, scale, missing)


def _basis(columns: Array, others: Array) -> Array:
    """Orthonormal basis of those columns that add something to `others`, itself orthonormal."""
    if columns.shape[1] == 0:
        return columns
    if others.shape[1]:
        columns = columns[:, _pivoted(columns - others @ (others.T @ columns))[1]]
        if columns.shape[1] == 0:
            return columns
    basis, kept = _pivoted(columns)
    return basis[:, : len(kept)]


def _pivoted(columns: Array) -> tuple[Array, NDArray[np.intp]]:
    """Orthonormal basis by pivoting, and the columns that are linearly independent."""
    basis, triangle, order = qr(columns, mode="economic", pivoting=True)
    size = np.abs(np.asarray(triangle, dtype=np.float64).diagonal())
    rank = int((size > 1e-9 * max(float(size[0]), 1e-300)).sum())
    return np.asarray(basis, dtype=np.float64), np.asarray(order, dtype=np.intp)[:rank]


def whitened_columns(sample: Sample, order: Order, values: Array) -> tuple[Array, float]:
    """Columns of the sample whitened at given coefficients, and the log determinant of the covariance matrix."""
    ar, ma = polynomials(order, values)
    if len(sample.factor) > 1:
        ma = np.convolve(ma, sample.factor)
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
    Nuisance and fixed columns Z have flat effects: the likelihood integrated over them is that of ``N - k``
    observations, with the residual sum of squares after them and the term ``-1/2 log|Z' V^-1 Z|``. With one indicator
    per missing value, differenced as the series was, it is the density of the observed values up to a factor without
    parameters; without differences the factor is one. With the columns of what was removed by least squares it is the
    restricted likelihood (Harville 1974), which the removal does not bias: it is the same before and after it.
    """
    series, log_determinant = whitened_columns(sample, order, values)
    if series.shape[1] > 1:
        residuals, _, factor = regress(series)
        log_determinant += 2.0 * float(np.log(factor.diagonal()[: sample.flat]).sum())
    else:
        residuals = series[:, 0]
    m = sample.count
    total = max(float(residuals @ residuals), m * _ROUNDING**2)
    value = -0.5 * (m * (np.log(2.0 * np.pi * total / m) + 1.0) + log_determinant)
    return value, residuals * np.exp(log_determinant / (2.0 * m))
