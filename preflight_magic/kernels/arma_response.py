"""The response of an ARMA model to one innovation: sum of its psi weights, half-life, and the variance implied."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.signal import lfilter

from preflight_magic.kernels.arma_parameters import Array, Order, polynomials
from preflight_magic.kernels.arma_roots import is_stationary
from preflight_magic.kernels.whiten import NotPositiveDefiniteError, autocovariances, psi_weights

_TOLERANCE = 1e-9
"""Relative bound on what is left out of the sum of psi weights, unless `_LONGEST` is reached first."""
_BLOCK, _LONGEST = 1 << 16, 1 << 20
"""Psi weights computed at once, and in all."""


@dataclass(frozen=True)
class Response:
    """The response of a series to one innovation.

    Attributes
    ----------
    psi_sum : float
        Sum of the absolute psi weights, the leading one included; inf where the AR part is not stationary.
    bound : float
        What the sum may lack at most; inf with it.
    half_life : float
        Steps after which every later weight is at most one half, between whole steps on a geometric path; 0 for white
        noise, inf where the AR part is not stationary.
    """

    psi_sum: float
    bound: float
    half_life: float


def response(order: Order, values: Array) -> Response:
    """Sum the absolute psi weights of a seasonal ARMA model and find their half-life.

    Parameters
    ----------
    order : Order
    values : ndarray, shape (order.size,)

    Returns
    -------
    Response

    Notes
    -----
    A linear process is stationary where the sum is finite (Brockwell and Davis 1991, *Time Series: Theory and
    Methods*, section 3.1). The bound: if a state of p weights reaches m steps ahead with weights whose absolute sum is
    r < 1, the tail after N + m is at most ``r / (1 - r)`` times the sum of the p + m - 1 weights before.
    """
    ar, ma = polynomials(order, np.asarray(values, dtype=float))
    if not is_stationary(order, values):
        return Response(float("inf"), float("inf"), float("inf"))
    span, ratio = _contraction(ar)
    block = max(_BLOCK if span > _BLOCK // 64 else 64 * span, len(ma) + len(ar) + span)
    state = np.zeros(max(len(ar), len(ma)) - 1)
    source = np.zeros(block)
    source[0] = 1.0
    total, done, last = 0.0, 0, (0, 1.0, 0.0)
    recent = np.empty(0)
    while True:
        weights, state = lfilter(ma, ar, source, zi=state)
        size = np.abs(weights)
        total += float(size.sum())
        last = _last_above(size, done, last)
        done += block
        recent = np.concatenate([recent, size])[-(len(ar) + span) :]
        bound = ratio / (1.0 - ratio) * float(recent.sum()) if len(ar) > 1 else 0.0
        if bound <= _TOLERANCE * total or done >= _LONGEST:
            break
        source[0] = 0.0
    return Response(total, bound, _half_life(last))


def _contraction(ar: Array) -> tuple[int, float]:
    """Steps m, and the absolute sum r < 1 of the weights with which p values determine the one m steps later."""
    p = len(ar) - 1
    if p == 0:
        return 1, 0.0
    span = 2 * p
    while True:
        impulse = psi_weights(ar, np.ones(1), span)
        ahead = impulse[span - p :][::-1]
        ratio = float(np.abs(np.correlate(-ar[1:], ahead, "full")[p - 1 :]).sum())
        if ratio <= 0.5 or span >= _LONGEST:
            return span, min(ratio, 0.999)
        span *= 2


def _last_above(size: Array, done: int, last: tuple[int, float, float]) -> tuple[int, float, float]:
    """Place and size of the last weight above one half, and the size of the one after it."""
    above = np.flatnonzero(size > 0.5)
    if above.size:
        k = int(above[-1])
        return done + k, float(size[k]), float(size[k + 1]) if k + 1 < size.size else float("nan")
    return (last[0], last[1], float(size[0])) if np.isnan(last[2]) else last


def _half_life(last: tuple[int, float, float]) -> float:
    place, above, below = last
    if not below > 0.0:
        return float(place)
    return place + float(np.log(2.0 * above) / np.log(above / below))


def implied_variance(order: Order, values: Array, variance: float) -> float:
    """Variance of the series that a model implies, ``variance * sum(psi**2)``; inf where it is not stationary.

    Parameters
    ----------
    order : Order
    values : ndarray, shape (order.size,)
    variance : float
        Of the innovations.
    """
    if not is_stationary(order, values):
        return float("inf")
    try:
        return variance * float(autocovariances(*polynomials(order, np.asarray(values, dtype=float)))[0])
    except NotPositiveDefiniteError:
        return float("inf")
