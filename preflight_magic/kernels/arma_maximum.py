"""The maximum of an ARMA likelihood and the information there."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import leastsq

from preflight_magic.kernels.arma_likelihood import Sample, evaluate
from preflight_magic.kernels.arma_parameters import Array, Order, coefficients, free_parameters
from preflight_magic.kernels.whiten import NotPositiveDefiniteError

EDGE = 6.0
"""Unconstrained parameters stay within this bound: tanh(6) = 0.99999 is as near the circle as a fit goes."""


@dataclass(frozen=True)
class Maximum:
    """Unconstrained parameters and log likelihood where a search ended."""

    order: Order
    free: Array
    log_likelihood: float


def maximise(sample: Sample, order: Order, starts: Sequence[Array], tolerance: float = 1e-10) -> Maximum | None:
    """Maximise the likelihood from the best of several starts.

    Parameters
    ----------
    sample : Sample
    order : Order
    starts : sequence of ndarray, shape (order.size,)
        Coefficients.
    tolerance : float
        Relative change of the sum of squares at which the search ends: ``count / 2`` of it in the log likelihood.

    Returns
    -------
    Maximum or None
        None where no start has a finite likelihood.

    Notes
    -----
    Levenberg-Marquardt on scaled residuals: ``S exp(log|V| / m)`` is a sum of squares whose logarithm is, up to a
    constant, ``-2 / m`` times the log likelihood.
    """

    def at(free: Array) -> tuple[float, Array]:
        return evaluate(sample, order, coefficients(order, np.clip(free, -EDGE, EDGE)))

    best: Maximum | None = None
    for values in starts:
        free = free_parameters(order, values)
        try:
            height = at(free)[0]
        except NotPositiveDefiniteError:
            continue
        if best is None or height > best.log_likelihood:
            best = Maximum(order, free, height)
    if best is None or order.size == 0:
        return best
    far = np.full(len(sample.stacked), 1e3)

    def residuals(free: Array) -> Array:
        try:
            return at(free)[1]
        except NotPositiveDefiniteError:
            return far

    rounds = 25 if tolerance < 1e-6 else 6
    found, *_ = leastsq(
        residuals,
        best.free,
        ftol=tolerance,
        xtol=max(tolerance, 1e-8),
        epsfcn=1e-12,
        maxfev=rounds * (order.size + 1),
        full_output=True,
    )
    try:
        free = np.clip(found, -EDGE, EDGE)
        height = at(free)[0]
    except NotPositiveDefiniteError:
        return best
    return Maximum(order, free, height) if height >= best.log_likelihood else best


def polish(sample: Sample, found: Maximum) -> tuple[Maximum, Array]:
    """One Newton step, and the inverse observed information in unconstrained parameters, NaN at the edge."""
    order, size, step = found.order, found.order.size, 1e-3
    inner = np.flatnonzero(np.abs(found.free) < EDGE - 1.0)
    inverse = np.full((size, size), np.nan)

    def height(shift: Array) -> float:
        return evaluate(sample, order, coefficients(order, found.free + shift))[0]

    try:
        gradient, hessian = _derivatives(height, inner, size, step)
        block = np.linalg.inv(-hessian)
    except (NotPositiveDefiniteError, np.linalg.LinAlgError):
        return found, inverse
    if len(inner) == 0 or not np.linalg.eigvalsh(block).min() > 0.0:
        return found, inverse
    inverse[np.ix_(inner, inner)] = block
    move = np.zeros(size)
    move[inner] = block @ gradient
    try:
        there = height(move)
    except NotPositiveDefiniteError:
        return found, inverse
    return (Maximum(order, found.free + move, there) if there > found.log_likelihood else found), inverse


def _derivatives(
    height: Callable[[Array], float], inner: NDArray[np.intp], size: int, step: float
) -> tuple[Array, Array]:
    """Central differences of a function at zero, in the coordinates `inner`."""
    k = len(inner)
    moves = np.zeros((k, size))
    moves[np.arange(k), inner] = step
    middle = height(np.zeros(size))
    above = np.array([height(move) for move in moves])
    below = np.array([height(-move) for move in moves])
    hessian = np.diag(above + below - 2.0 * middle)
    for i in range(k):
        for j in range(i):
            both = height(moves[i] + moves[j]) + height(-moves[i] - moves[j])
            hessian[i, j] = hessian[j, i] = 0.5 * (both - above[i] - below[i] - above[j] - below[j] + 2.0 * middle)
    return (above - below) / (2.0 * step), hessian / step**2


def coefficient_covariance(order: Order, free: Array, inverse: Array) -> Array:
    """Covariance of the coefficients from that of the unconstrained parameters."""
    size, step = order.size, 1e-6
    slopes = np.empty((size, size))
    for k, move in enumerate(step * np.eye(size)):
        slopes[:, k] = (coefficients(order, free + move) - coefficients(order, free - move)) / (2.0 * step)
    unknown = np.isnan(inverse.diagonal())
    found = slopes @ np.where(unknown[:, None] | unknown, 0.0, inverse) @ slopes.T
    touched = (slopes[:, unknown] != 0.0).any(axis=1)
    found[touched, :] = found[:, touched] = np.nan
    return np.asarray(found)
