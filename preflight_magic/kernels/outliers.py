"""Isolated outliers under an ARMA model with differences, found one after the other."""

from __future__ import annotations

import numpy as np
from scipy.signal import fftconvolve

from preflight_magic.kernels.restricted_likelihood import Array
from preflight_magic.kernels.whiten import psi_weights

_MEMORY = 200
"""Weights of the infinite autoregression that are kept: what is left of a root of 0.97 is a fifth of a per cent."""


def additive_outliers(innovations: Array, ar: Array, ma: Array, *, bound: float, most: int) -> tuple[int, ...]:
    """Places where one value stands alone, so far that the model cannot mean it.

    Parameters
    ----------
    innovations : ndarray, shape (n,)
        One-step errors of the model, zero where there are none (the values lost to differencing).
    ar, ma : ndarray, shapes (p + 1,), (q + 1,)
        Polynomials with leading one, the differences multiplied into `ar`.
    bound : float
        Absolute t-value from which a value stands alone; the scale of the errors is a robust one.
    most : int
        No more than so many are taken.

    Returns
    -------
    tuple of int
        Positions, the largest outlier first.

    Notes
    -----
    Chang, Tiao and Chen (1988), Estimation of time series parameters in the presence of outliers, Technometrics 30,
    193-204: a single wrong value leaves a trace of the shape of the autoregressive weights in the errors that follow.
    """
    n = len(innovations)
    weights = psi_weights(ma, ar, min(n, _MEMORY))
    errors = innovations.copy()
    there = (innovations != 0.0).astype(float)
    size = fftconvolve(there[::-1], weights**2)[:n][::-1]
    size = np.maximum(size, 1e-12)
    found: list[int] = []
    scale = 1.4826 * float(np.median(np.abs(errors[there > 0]))) if there.any() else 0.0
    while scale > 0.0 and len(found) < most:
        effect = fftconvolve(errors[::-1], weights)[:n][::-1] / size
        t = np.abs(effect) * np.sqrt(size) / scale
        t[found] = 0.0
        place = int(np.argmax(t))
        if t[place] < bound:
            break
        found.append(place)
        trace = weights[: n - place] * effect[place]
        errors[place : place + len(trace)] -= trace * there[place : place + len(trace)]
    return tuple(found)
