"""ARMA orders fitted to one plan by restricted likelihood, and the evidence that each gives."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from preflight_magic.kernels.arma_parameters import Order, coefficients, free_parameters, polynomials
from preflight_magic.kernels.damped_least_squares import least_squares
from preflight_magic.kernels.restricted_likelihood import Array, Contrasts, evaluate
from preflight_magic.kernels.whiten import NotPositiveDefiniteError

EDGE = 4.0
"""Unconstrained parameters stay within this bound: tanh(4) = 0.9993 is as near the circle as a search goes."""

# Normal priors (mean, standard deviation) on the inverse hyperbolic tangent of each partial autocorrelation: first
# and further ones of the AR part, of the MA part, the seasonal AR and the seasonal MA. Weakly informative: positive
# dependence in what is not differenced, negative in what is, and little mass next to the circle, where the plan with
# one difference more (or less) says the same with a parameter less.
_PRIOR = {
    "ar": ((0.3, 1.0), (0.0, 0.7)),
    "ma": ((-0.2, 1.0), (0.0, 0.5)),
    "sar": ((0.3, 0.7), (0.0, 0.5)),
    "sma": ((-0.6, 0.5), (0.0, 0.5)),
}

# Where a search may start, by (p, q): a few typical points, the best of which is taken.
_STARTS: dict[tuple[int, int], tuple[tuple[float, ...], ...]] = {
    (0, 0): ((),),
    (1, 0): ((0.3,), (0.8,), (0.97,)),
    (0, 1): ((0.4,), (-0.4,), (-0.8,)),
    (1, 1): ((0.5, 0.3), (0.9, -0.5), (0.97, -0.8), (-0.4, 0.6), (0.4, -0.9)),
    (2, 0): ((0.5, 0.2), (1.2, -0.4), (1.7, -0.75), (-0.3, 0.1), (0.3, 0.6)),
    (0, 2): ((0.3, 0.1), (-0.3, -0.1), (-1.2, 0.4), (-0.6, 0.1)),
    (2, 1): ((1.2, -0.4, 0.1), (1.5, -0.55, -0.6), (0.4, 0.1, 0.3), (0.4, 0.1, -0.8), (1.6, -0.8, -0.3)),
}
_SEASONAL_START = -0.5
FIRST_ORDERS = ((0, 0), (1, 0), (0, 1), (1, 1), (2, 0))
FURTHER_ORDERS = ((0, 2), (2, 1))
"""The plain orders (p, q) that are tried, the further ones only where a plan is not far behind."""


@dataclass(frozen=True)
class Fitted:
    """One ARMA order fitted to one plan.

    `log_likelihood` is the restricted one at the estimate; `evidence` the logarithm of its integral over the
    coefficients, by Laplace's method.
    """

    contrasts: Contrasts
    order: Order
    coefficients: Array
    log_likelihood: float
    evidence: float


def _prior(order: Order) -> tuple[Array, Array]:
    parts = zip(("ar", "ma", "sar", "sma"), (order.p, order.q, order.P, order.Q), strict=True)
    pairs = [_PRIOR[part][min(k, 1)] for part, count in parts for k in range(count)]
    table = np.array(pairs, dtype=float).reshape(-1, 2)
    return table[:, 0], table[:, 1]


def fit(view: Contrasts, order: Order, hint: Array | None = None) -> Fitted | None:
    """Fit one order to one plan and integrate its likelihood.

    Parameters
    ----------
    view : Contrasts
    order : Order
        Without a hint, ``(p, q)`` must be one of `FIRST_ORDERS` or `FURTHER_ORDERS`.
    hint : ndarray, shape (order.size,), optional
        Coefficients to start from, instead of the usual points.

    Returns
    -------
    Fitted or None
        None where no start gives a finite likelihood.

    Notes
    -----
    The mode of likelihood times prior is found by Levenberg-Marquardt on scaled residuals whose sum of squares is a
    monotone function of it; the curvature at the mode gives the integral (Tierney and Kadane 1986, Accurate
    approximations for posterior moments and marginal densities, Journal of the American Statistical Association 81,
    82-86).
    """
    mean, width = _prior(order)
    m = view.count

    def at(free: Array) -> tuple[float, float, Array]:
        inside = np.clip(free, -EDGE, EDGE)
        value, scaled = evaluate(view, *polynomials(order, coefficients(order, inside)))
        penalty = 0.5 * float((((free - mean) / width) ** 2).sum())
        return value, value - penalty, scaled * np.exp(min(penalty / m, 50.0))

    best: tuple[float, float, Array, Array] | None = None
    usual = ((*start, *(_SEASONAL_START,) * (order.P + order.Q)) for start in _STARTS.get((order.p, order.q), ()))
    for start in (hint,) if hint is not None else usual:
        free = free_parameters(order, np.asarray(start, dtype=float))
        try:
            value, height, scaled = at(free)
        except NotPositiveDefiniteError:
            continue
        if best is None or height > best[1]:
            best = (value, height, free, scaled)
    if best is None:
        return None
    value, height, free, scaled = best
    if order.size == 0:
        return Fitted(view, order, np.empty(0), value, height)

    def residuals(point: Array) -> Array | None:
        try:
            return at(point)[2]
        except NotPositiveDefiniteError:
            return None

    # A relative fall of 5e-5 in the sum of squares is m / 2 of that in the log likelihood: far below what matters.
    free, curvature = least_squares(residuals, free, scaled, 5e-5)
    value, height, scaled = at(free)
    left = float(scaled @ scaled)
    curvature = m / left * curvature if left > 0.0 else m * np.eye(order.size)
    precision = curvature + np.diag(width**-2.0)
    evidence = height - float(np.log(width).sum()) - 0.5 * float(np.linalg.slogdet(precision)[1])
    return Fitted(view, order, coefficients(order, np.clip(free, -EDGE, EDGE)), value, evidence)
