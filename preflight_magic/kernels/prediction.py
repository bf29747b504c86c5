"""Best linear unbiased prediction: what lies ahead of a series with ARMA errors and fitted columns, and its error."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.signal import lfilter

from preflight_magic.kernels.arma_parameters import Array
from preflight_magic.kernels.whiten import whiten


@dataclass(frozen=True)
class Prediction:
    """Mean path and the error after undoing differences.

    Attributes
    ----------
    mean : ndarray, shape (steps,)
        Of the differenced series, in its unit.
    noise : ndarray, shape (steps, steps)
        Covariance of the errors after undoing differences, for innovations of variance one and known effects.
    effects : ndarray, shape (steps, steps)
        What the estimation of the effects adds to it.
    square : float
        Sum of squared whitened residuals, in the squared unit of the series.
    """

    mean: Array
    noise: Array
    effects: Array
    square: float

    def variance(self, rows: int, coefficients: int, degrees: float) -> Array:
        """Error variance after undoing differences, shape (steps,).

        Parameters
        ----------
        rows : int
            Values after differences.
        coefficients : int
            ARMA coefficients that were estimated from them.
        degrees : float
            Values less all numbers estimated.

        Notes
        -----
        What the coefficients add is that of the final prediction error (Akaike 1969, Fitting autoregressive models for
        prediction, Annals of the Institute of Statistical Mathematics 21, 243-247): one part in n for each.
        """
        unit = self.square / degrees * (1.0 + coefficients / rows)
        return np.asarray(unit * (self.noise + self.effects).diagonal())


def predict(
    ar: Array,
    ma: Array,
    values: Array,
    steps: int,
    *,
    columns: Array | None = None,
    differences: tuple[int, ...] = (),
    exact: bool = True,
) -> Prediction:
    """Predict a series that is a linear combination of columns plus an ARMA process.

    Parameters
    ----------
    ar, ma : ndarray
        Polynomials of the process with leading one.
    values : ndarray, shape (n,)
        The series after its differences.
    steps : int
        Steps ahead.
    columns : ndarray, shape (n + steps, k), optional
        Regressors over the past and what lies ahead, differenced like the series. Their effects are estimated by
        generalised least squares; those that the past does not show count as zero.
    differences : tuple of int
        Lags of the differences that were taken.
    exact : bool
        False takes the values before the first to be zero, for covariances too wide to be factored.

    Returns
    -------
    Prediction

    Raises
    ------
    NotPositiveDefiniteError
        At parameters on the boundary.

    Notes
    -----
    Goldberger (1962), Best linear unbiased prediction in the generalized linear regression model, Journal of the
    American Statistical Association 57, 369-375. The Cholesky factor of the covariance of past and future together,
    in blocks, holds both the predictor of the process and the covariance of its error.
    """
    n = len(values)
    total = n + steps
    regressors = np.empty((total, 0)) if columns is None else np.asarray(columns, dtype=float)
    k = regressors.shape[1]
    stacked = np.zeros((total, 1 + k + steps), order="F")
    stacked[:n, 0] = values
    stacked[:n, 1 : 1 + k] = regressors[:n]
    stacked[n + np.arange(steps), 1 + k + np.arange(steps)] = 1.0
    whitened = whiten(ar, ma, stacked)[0] if exact else np.asarray(lfilter(ar, ma, stacked, axis=0), dtype=float)
    # Whitening is triangular: the expectation of what lies ahead is the continuation whose whitened values are zero.
    factor = np.linalg.inv(whitened[n:, 1 + k :])
    ahead = -factor @ whitened[n:, : 1 + k]
    unseen = regressors[n:] - ahead[:, 1:]
    past = whitened[:n]
    inverse = np.linalg.pinv(past[:, 1 : 1 + k].T @ past[:, 1 : 1 + k], rcond=1e-11, hermitian=True)
    estimates = inverse @ (past[:, 1 : 1 + k].T @ past[:, 0])
    left = past[:, 0] - past[:, 1 : 1 + k] @ estimates
    undone, spread = _undone(factor, differences), _undone(unseen, differences)
    return Prediction(
        mean=ahead[:, 0] + unseen @ estimates,
        noise=undone @ undone.T,
        effects=spread @ inverse @ spread.T,
        square=float(left @ left),
    )


def undo_differences(values: Array, lag: int, past: Array | None = None) -> Array:
    """Sum up what one difference took apart.

    Parameters
    ----------
    values : ndarray, shape (steps, ...)
        Differences ahead.
    lag : int
    past : ndarray, shape (n,), optional
        Values before them; zeros by default.

    Returns
    -------
    ndarray, shape (steps, ...)
    """
    poles = np.zeros(lag + 1)
    poles[0], poles[lag] = 1.0, -1.0
    summed = np.asarray(lfilter(np.ones(1), poles, values, axis=0), dtype=float)
    return summed if past is None else summed + np.resize(past[-lag:], len(values))


def _undone(columns: Array, differences: tuple[int, ...]) -> Array:
    for lag in differences:
        columns = undo_differences(columns, lag)
    return columns
