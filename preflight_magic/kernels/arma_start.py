"""Where the search for an ARMA model begins: the best of many points under Whittle's approximate likelihood."""

from __future__ import annotations

from functools import lru_cache
from itertools import product

import numpy as np
from numpy.typing import NDArray

from preflight_magic.kernels.arma_parameters import Order
from preflight_magic.kernels.restricted_likelihood import Array

_MOST_FREQUENCIES = 256
"""Longer periodograms are averaged down to so many: a start needs no more."""
_AXES = {
    # Values tried for each unconstrained parameter (inverse hyperbolic tangent of a partial autocorrelation), by how
    # many of them there are.
    1: tuple(np.linspace(-2.0, 2.4, 12).tolist()),
    2: tuple(np.linspace(-1.6, 2.1, 8).tolist()),
    3: (-1.5, -0.8, -0.3, 0.2, 0.7, 1.2, 1.8),
}
_SEASONAL_AXIS = (-1.5, -0.9, -0.5, -0.1)


def periodogram(values: Array) -> Array:
    """Periodogram at the frequencies above zero, at most 256 of them, shape (f,).

    Parameters
    ----------
    values : ndarray, shape (n,)
        About zero.

    Returns
    -------
    ndarray
        In any scale; averaged over neighbours where there are more.
    """
    power = np.abs(np.fft.rfft(values)[1:]) ** 2
    if len(power) > _MOST_FREQUENCIES:
        edges = _edges(len(power))
        power = np.add.reduceat(power, edges) / np.diff(np.r_[edges, len(power)])
    return power


def whittle_start(power: Array, rows: int, order: Order, mean: Array, width: Array) -> Array:
    """The best point of a grid under Whittle's likelihood and normal priors.

    Parameters
    ----------
    power : ndarray, shape (f,)
        From `periodogram`, of `rows` values.
    rows : int
    order : Order
        At most two AR, two MA and one seasonal MA coefficient.
    mean, width : ndarray, shape (order.size,)
        Of the priors of the unconstrained parameters.

    Returns
    -------
    ndarray, shape (order.size,)

    Notes
    -----
    Whittle (1953), Estimation and information in stationary time series, Arkiv för Matematik 2, 423-434.
    """
    points, inverse, penalty = _grid(order, rows, tuple(mean.tolist()), tuple(width.tolist()))
    height = -0.5 * rows * np.log(np.maximum(inverse @ power, 1e-300)) - penalty
    return np.asarray(points[int(np.argmax(height))], dtype=float)


@lru_cache(maxsize=128)
def _grid(order: Order, rows: int, mean: tuple[float, ...], width: tuple[float, ...]) -> tuple[Array, Array, Array]:
    """Points, shape (g, k), their inverse spectra, shape (g, f), and half squared distances from the priors."""
    plain = order.p + order.q
    axes = [_AXES[min(max(plain, 1), 3)]] * plain + [_SEASONAL_AXIS] * order.Q
    points = np.array(list(product(*axes)), dtype=float)
    every = np.arange(1, rows // 2 + 1) * (2.0 * np.pi / rows)
    edges = _edges(len(every)) if len(every) > _MOST_FREQUENCIES else np.arange(len(every), dtype=np.intp)
    wave = np.exp(-1j * np.add.reduceat(every, edges) / np.diff(np.r_[edges, len(every)]))
    partial = np.tanh(points)
    spectrum = _gain(partial[:, order.p : plain], wave) * _gain(partial[:, plain:], wave**order.period)
    inverse = _gain(-partial[:, : order.p], wave) / spectrum
    penalty = 0.5 * (((points - np.array(mean)) / np.array(width)) ** 2).sum(axis=1)
    return points, inverse, penalty


def _gain(partial: Array, wave: NDArray[np.complex128]) -> Array:
    """Squared gain of the filters ``1 + c B + ...`` with these partial coefficients, shape (g, f)."""
    count = partial.shape[1]
    if count == 0:
        return np.ones((1, len(wave)))
    first = partial[:, :1] * (1.0 + partial[:, 1:2]) if count == 2 else partial
    total = 1.0 + first * wave + (partial[:, 1:2] * wave**2 if count == 2 else 0.0)
    return np.asarray(np.abs(total) ** 2, dtype=float)


@lru_cache(maxsize=128)
def _edges(count: int) -> NDArray[np.intp]:
    return np.unique(np.linspace(0, count, _MOST_FREQUENCIES + 1).astype(np.intp)[:-1])
