"""The order of an ARMA model by corrected AIC: conditional estimates rank the orders, exact likelihood decides."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from preflight_magic.kernels.arma import ArmaFit, Maximum, centred, corrected_aic, finish, maximise
from preflight_magic.kernels.arma_conditional import Regression, refine, regression, start
from preflight_magic.kernels.arma_likelihood import Sample, prepare
from preflight_magic.kernels.arma_parameters import Array, Order
from preflight_magic.kernels.arma_parameters import coefficients as bounded

_FINALISTS = 4
"""Orders whose exact likelihood is found."""
_NEAR = 8.0
"""Orders farther than this from the best conditional AICc are not looked at again."""
_COARSE = 1e-5
"""Tolerance of the likelihoods that are only compared: about 1e-3 in AICc with a hundred values."""
_TYPICAL = ((0.9, -0.5), (0.3, -0.9))
"""First AR and MA coefficients tried besides the conditional estimate."""


@dataclass(frozen=True)
class _Ranked:
    criterion: float
    order: Order
    coefficients: Array


def search(
    values: Array,
    period: int = 1,
    *,
    mean: bool,
    seasonal: bool = False,
    nuisance: Array | None = None,
    most: tuple[int, int] = (2, 2),
) -> ArmaFit | None:
    """Choose an order and fit it.

    Parameters
    ----------
    values : ndarray, shape (n,)
        No NaN; missing values hold a reasonable fill and have a column in `nuisance`.
    period : int
        Seasonal lag.
    mean : bool
        Whether a mean is estimated.
    seasonal : bool
        Whether orders with a seasonal AR or MA coefficient are tried.
    nuisance : ndarray, shape (n, k), optional
        See `arma.fit`. The ranking sees the filled values, the likelihoods do not.
    most : (int, int)
        Largest plain AR and MA orders; with two AR terms or more a pure AR(3) is tried too.

    Returns
    -------
    ArmaFit or None
        None with fewer than 8 observed values, values that are not finite, or where nothing varies.

    Notes
    -----
    Hurvich and Tsai (1989), Regression and time series model selection in small samples, Biometrika 76, 297-307;
    Hannan and Rissanen (1982), Recursive estimation of mixed autoregressive-moving average order, Biometrika 69,
    81-94. The seasonal terms are ranked first, with a plain ARMA(1,1); the plain orders then with the two best.
    """
    sample = prepare(values, mean=mean, nuisance=nuisance)
    if sample is None:
        return None
    found = regression(centred(sample), period if seasonal else 1, max(*most, 3))
    ranked = _rank(sample, found, period, seasonal and 1 < period < len(values) // 2, most)
    best: tuple[float, Maximum] | None = None
    for one in ranked[:_FINALISTS]:
        if one.criterion > ranked[0].criterion + _NEAR:
            break
        maximum = maximise(sample, one.order, [one.coefficients, *_typical(one.order)], _COARSE)
        if maximum is None:
            continue
        criterion = corrected_aic(maximum.log_likelihood, one.order.size + mean + 1, sample.count)
        if best is None or criterion < best[0]:
            best = criterion, maximum
    if best is None:
        return None
    coarse = best[1]
    exact = maximise(sample, coarse.order, [bounded(coarse.order, coarse.free)])
    return finish(sample, exact if exact is not None else coarse)


def _rank(sample: Sample, found: Regression, period: int, seasonal: bool, most: tuple[int, int]) -> list[_Ranked]:
    """Orders with their conditional estimates, the best first."""
    extra = int(sample.mean) + 1
    room = max(sample.count // 4, 1)
    plain = [(p, q) for p in range(most[0] + 1) for q in range(most[1] + 1)]
    plain += [(3, 0)] if most[0] >= 2 else []
    done: dict[Order, _Ranked] = {}

    def ranked(order: Order) -> _Ranked:
        if order not in done:
            estimate, square = refine(found, order, start(found, order))
            height = -0.5 * sample.count * float(np.log(max(square, 1e-300)))
            done[order] = _Ranked(corrected_aic(height, order.size + extra, sample.count), order, estimate)
        return done[order]

    terms = [(0, 0)]
    if seasonal:
        middle = min(1, most[0]), min(1, most[1])
        pairs = [(P, Q) for P in (0, 1) for Q in (0, 1)]
        terms = sorted(pairs, key=lambda pair: ranked(Order(middle[0], middle[1], pair[0], pair[1], period)).criterion)[
            :2
        ]
    for P, Q in terms:
        for p, q in plain:
            order = Order(p, q, P, Q, period if P or Q else 1)
            if order.size <= room:
                ranked(order)
    return sorted(done.values(), key=lambda one: one.criterion)


def _typical(order: Order) -> list[Array]:
    points = []
    for first, second in _TYPICAL if order.size else ():
        point = np.zeros(order.size)
        point[: min(order.p, 1)] = first
        point[order.p : order.p + min(order.q, 1)] = second
        point[order.p + order.q + order.P :][:1] = -0.6
        points.append(point)
    return points
