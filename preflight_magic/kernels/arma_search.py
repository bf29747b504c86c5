"""ARMA orders fitted to one plan by restricted likelihood, and the evidence that each gives."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from math import exp

import numpy as np

from preflight_magic.kernels.arma_parameters import Order, coefficients, free_parameters, polynomials_at
from preflight_magic.kernels.arma_start import periodogram, whittle_start
from preflight_magic.kernels.quasi_newton import least_squares
from preflight_magic.kernels.restricted_likelihood import Array, Contrasts, concentrated, evaluate
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

_TOLERANCE = 4e-4
"""A relative fall of the sum of squares below which the next step is the last; m / 2 times that in log likelihood."""
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


@lru_cache(maxsize=64)
def _prior(order: Order) -> tuple[Array, Array]:
    parts = zip(("ar", "ma", "sar", "sma"), (order.p, order.q, order.P, order.Q), strict=True)
    pairs = [_PRIOR[part][min(k, 1)] for part, count in parts for k in range(count)]
    table = np.array(pairs, dtype=float).reshape(-1, 2)
    return table[:, 0], table[:, 1]


def fit(view: Contrasts, order: Order, hint: Array | None = None, useful: float = -np.inf) -> Fitted | None:
    """Fit one order to one plan and integrate its likelihood.

    Parameters
    ----------
    view : Contrasts
    order : Order
    hint : ndarray, shape (order.size,), optional
        Coefficients to start from; by default the best of a grid under Whittle's likelihood.
    useful : float
        Evidence from which the order matters; where it seems out of reach the search is given up early, and the
        evidence returned is too low.

    Returns
    -------
    Fitted or None
        None where the start has no finite likelihood.

    Notes
    -----
    The mode of likelihood times prior is found by Levenberg-Marquardt on scaled residuals whose sum of squares is a
    monotone function of it; the curvature at the mode gives the integral (Tierney and Kadane 1986, Accurate
    approximations for posterior moments and marginal densities, Journal of the American Statistical Association 81,
    82-86).
    """
    mean, width = _prior(order)
    m = view.count

    def residuals(free: Array) -> Array | None:
        try:
            _, scaled = evaluate(view, *polynomials_at(order, np.minimum(np.maximum(free, -EDGE), EDGE)))
        except NotPositiveDefiniteError:
            return None
        return scaled * exp(min(penalty(free) / m, 50.0))

    def penalty(free: Array) -> float:
        away = (free - mean) / width
        return 0.5 * float(away @ away)

    free = _start(view, order, hint, mean, width)
    scaled = residuals(free)
    if scaled is None:
        return None
    total = float(scaled @ scaled)
    if order.size == 0:
        height = concentrated(view, total)
        return Fitted(view, order, np.empty(0), height, height)
    # The sum of squares at which the height is that of the evidence wanted.
    wanted = total * exp(min(2.0 * (concentrated(view, total) - useful) / m, 700.0)) if useful > -np.inf else np.inf
    free, curvature, total = least_squares(residuals, free, scaled, _TOLERANCE, width**-2.0 / m, wanted)
    height = concentrated(view, total)
    precision = (m / total * curvature if total > 0.0 else m * np.eye(order.size)) + np.diag(width**-2.0)
    evidence = height - float(np.log(width).sum()) - 0.5 * float(np.linalg.slogdet(precision)[1])
    found = coefficients(order, np.clip(free, -EDGE, EDGE))
    return Fitted(view, order, found, height + penalty(free), evidence)


def _start(view: Contrasts, order: Order, hint: Array | None, mean: Array, width: Array) -> Array:
    """Unconstrained parameters where the search begins."""
    if hint is not None:
        return free_parameters(order, hint)
    if order.size == 0:
        return np.empty(0)
    series, regressors = view.stacked[:, 0], view.stacked[:, 1:]
    left = series - regressors @ (regressors.T @ series)
    return whittle_start(periodogram(left), len(left), order, mean, width)
