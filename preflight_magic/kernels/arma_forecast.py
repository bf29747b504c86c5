"""Forecasts of a fitted ARMA model: the exact predictor given a finite past."""

from __future__ import annotations

import numpy as np
from scipy.signal import lfilter, lfiltic

from preflight_magic.kernels.arma import ArmaFit
from preflight_magic.kernels.arma_parameters import Array
from preflight_magic.kernels.whiten import psi_weights, whiten


def forecast(fit: ArmaFit, values: Array, steps: int) -> tuple[Array, Array]:
    """Mean path after the last value, and the weights of the innovations that lie ahead.

    Parameters
    ----------
    fit : ArmaFit
    values : ndarray, shape (n,)
        The series that was fitted, missing values filled as they were then.
    steps : int

    Returns
    -------
    mean : ndarray, shape (steps,)
        Expectation given the observed values, in the unit of the series.
    psi : ndarray, shape (steps,)
        The error at step h has variance ``fit.variance * sum(psi[:h]**2)``, up to what a finite past does not tell
        about the last innovations, which is nothing for a pure autoregression.

    Notes
    -----
    Whitening is triangular, so the expectation of the future is the continuation whose whitened values are zero
    (Brockwell and Davis 1991, *Time Series: Theory and Methods*, section 5.3: the innovations algorithm). Missing
    values are first replaced by their expectations.
    """
    ar, ma = fit.polynomials
    series = np.asarray(values, dtype=float) - fit.correction - fit.mean
    ahead = min(len(ma) - 1, steps)
    next_values = (_exact if fit.exact else _conditional)(ar, ma, series, ahead)
    past = np.concatenate([series, next_values])
    rest = steps - ahead
    if len(ar) > 1 and rest:
        state = lfiltic(np.ones(1), ar, past[::-1][: len(ar) - 1])
        later, _ = lfilter(np.ones(1), ar, np.zeros(rest), zi=state)
    else:
        later = np.zeros(rest)
    return np.concatenate([next_values, later]) + fit.mean, psi_weights(ar, ma, steps)


def _exact(ar: Array, ma: Array, series: Array, ahead: int) -> Array:
    """Expectations of the next `ahead` values, those that the innovations of the past still enter."""
    n = len(series)
    columns = np.zeros((n + ahead, ahead + 1), order="F")
    columns[:n, 0] = series
    columns[n + np.arange(ahead), 1 + np.arange(ahead)] = 1.0
    whitened = whiten(ar, ma, columns)[0][n:]
    return np.asarray(np.linalg.solve(whitened[:, 1:], -whitened[:, 0]), dtype=float)


def _conditional(ar: Array, ma: Array, series: Array, ahead: int) -> Array:
    """The same where the likelihood was conditional: the values before the first are at the mean."""
    state = np.zeros(max(len(ar), len(ma)) - 1)
    innovations, _ = lfilter(ar, ma, series, zi=state)
    state = lfiltic(ma, ar, series[::-1], innovations[::-1])
    return np.asarray(lfilter(ma, ar, np.zeros(ahead), zi=state)[0], dtype=float)
