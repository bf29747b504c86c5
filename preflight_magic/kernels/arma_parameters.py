"""Orders and polynomials of seasonal ARMA models, and an unconstrained parametrisation that keeps them valid."""

from __future__ import annotations

from dataclasses import dataclass
from math import tanh

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Order:
    """Orders of ``phi(B) Phi(B^s) w = theta(B) Theta(B^s) e``; `period` is s."""

    p: int = 0
    q: int = 0
    P: int = 0
    Q: int = 0
    period: int = 1

    @property
    def size(self) -> int:
        """Number of coefficients."""
        return self.p + self.q + self.P + self.Q

    def __str__(self) -> str:
        plain = f"ARMA({self.p},{self.q})"
        return plain if self.P == self.Q == 0 else f"{plain}({self.P},{self.Q}) at {self.period}"


def from_partial(partial: Array) -> Array:
    """Coefficients of a stationary autoregression from its partial autocorrelations.

    Parameters
    ----------
    partial : ndarray, shape (p,)
        Each in (-1, 1).

    Returns
    -------
    ndarray, shape (p,)
        ``w[t] = c[0] w[t-1] + ...``

    Notes
    -----
    Durbin-Levinson recursion; Monahan (1984), A note on enforcing stationarity, Biometrika 71, 403-404.
    """
    if len(partial) < 2:
        return partial
    coefficients = partial[:1]
    for r in partial[1:]:
        coefficients = np.concatenate([coefficients - r * coefficients[::-1], [r]])
    return coefficients


def to_partial(coefficients: Array) -> Array:
    """Inverse of `from_partial`; values outside (-1, 1) mean that the autoregression is not stationary."""
    partial = np.empty(len(coefficients))
    work = np.asarray(coefficients, dtype=float)
    for k in range(len(coefficients) - 1, -1, -1):
        r = work[k]
        partial[k] = r
        if k:
            scale = 1.0 - r * r
            if scale <= 0.0:
                return np.full(len(coefficients), np.inf)
            work = (work[:k] + r * work[:k][::-1]) / scale
    return partial


def split(order: Order, values: Array) -> tuple[Array, Array, Array, Array]:
    """Cut a parameter vector into AR, MA, seasonal AR and seasonal MA parts."""
    p, q, P = order.p, order.q, order.P
    return values[:p], values[p : p + q], values[p + q : p + q + P], values[p + q + P :]


def coefficients(order: Order, free: Array) -> Array:
    """Coefficients from unconstrained numbers: ``tanh`` gives partial autocorrelations.

    AR parts as ``1 - c B``, MA parts as ``1 + c B``; the MA part is made invertible as the AR part is made
    stationary.
    """
    ar, ma, sar, sma = split(order, np.tanh(free))
    return np.concatenate([from_partial(ar), -from_partial(-ma), from_partial(sar), -from_partial(-sma)])


def free_parameters(order: Order, values: Array, limit: float = 0.999) -> Array:
    """Unconstrained numbers from coefficients, with partial autocorrelations held within `limit`."""
    ar, ma, sar, sma = split(order, values)
    partial = np.concatenate([to_partial(ar), -to_partial(-ma), to_partial(sar), -to_partial(-sma)])
    held = np.clip(np.nan_to_num(partial, posinf=limit, neginf=-limit), -limit, limit)
    return np.asarray(np.arctanh(held), dtype=float)


def polynomials(order: Order, values: Array) -> tuple[Array, Array]:
    """AR and MA polynomials in the lag operator, seasonal parts multiplied in.

    Returns
    -------
    ar, ma : ndarray, shapes (p + P s + 1,), (q + Q s + 1,)
    """
    ar, ma, sar, sma = split(order, values)
    left = np.concatenate([[1.0], -ar])
    right = np.concatenate([[1.0], ma])
    if order.P:
        left = np.convolve(left, _spread(-sar, order.period))
    if order.Q:
        right = np.convolve(right, _spread(sma, order.period))
    return left, right


def polynomials_at(order: Order, free: Array) -> tuple[Array, Array]:
    """AR and MA polynomials from unconstrained numbers: ``polynomials(order, coefficients(order, free))``.

    Parameters
    ----------
    order : Order
    free : ndarray, shape (order.size,)

    Returns
    -------
    ar, ma : ndarray, shapes (p + P s + 1,), (q + Q s + 1,)
    """
    if order.p > 2 or order.q > 2 or order.P:
        return polynomials(order, coefficients(order, free))
    # The recursion written out in plain numbers: this is called some thousand times a series.
    partial = [tanh(value) for value in free.tolist()]
    ar, ma = [1.0], [1.0]
    if order.p == 1:
        ar = [1.0, -partial[0]]
    elif order.p == 2:
        ar = [1.0, -partial[0] * (1.0 - partial[1]), -partial[1]]
    if order.q == 1:
        ma = [1.0, partial[order.p]]
    elif order.q == 2:
        first, second = partial[order.p : order.p + 2]
        ma = [1.0, first * (1.0 + second), second]
    right = np.array(ma)
    if order.Q == 1:
        plain, right = right, np.zeros(order.q + order.period + 1)
        right[: order.q + 1] = plain
        right[order.period :] += partial[-1] * plain
    elif order.Q:
        return polynomials(order, coefficients(order, free))
    return np.array(ar), right


def _spread(values: Array, period: int) -> Array:
    out = np.zeros(len(values) * period + 1)
    out[0] = 1.0
    out[period::period] = values
    return out
