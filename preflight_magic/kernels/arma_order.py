"""The order of an ARMA model by corrected AIC: conditional estimates rank the orders, exact likelihood decides."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from preflight_magic.kernels.arma import ArmaFit, centred, contrasts, corrected_aic, finish
from preflight_magic.kernels.arma_conditional import refine, regression, start
from preflight_magic.kernels.arma_likelihood import Sample, prepare
from preflight_magic.kernels.arma_maximum import Maximum, maximise
from preflight_magic.kernels.arma_parameters import Array, Order
from preflight_magic.kernels.arma_parameters import coefficients as bounded

_FINALISTS = 4
"""Orders whose exact likelihood is found."""
_LOOKED_AT = 8
"""Orders whose conditional estimate is made exact before the finalists are picked."""
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
    fixed: Array | None = None,
    most: tuple[int, int] = (2, 2),
) -> ArmaFit | None:
    """Choose an order and fit it.

    Parameters
    ----------
    values : ndarray, shape (n,)
        No NaN; missing values hold any number and have a column in `nuisance`.
    period : int
        Seasonal lag.
    mean : bool
        Whether a mean is estimated.
    seasonal : bool
        Whether orders with a seasonal AR or MA coefficient are tried.
    nuisance : ndarray, shape (n, k), optional
        See `arma.fit`. The ranking fills missing values by least squares, the likelihoods do not.
    fixed : ndarray, shape (n, l), optional
        See `arma.fit`.
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
    81-94. The seasonal terms are ranked first, with a plain ARMA(1,1); the plain orders then with the two best. Orders
    are compared by the restricted likelihood: with a mean, the ordinary one rises at MA roots of one.
    """
    sample = prepare(values, mean=mean, nuisance=nuisance, fixed=fixed)
    if sample is None:
        return None
    judged = contrasts(sample)
    best: tuple[float, Maximum] | None = None
    for one in _finalists(sample, period, seasonal and 1 < period < len(values) // 2, most):
        maximum = maximise(judged, one.order, [one.coefficients, *_typical(one.order)], _COARSE)
        if maximum is None:
            continue
        criterion = corrected_aic(maximum.log_likelihood, one.order.size + mean + 1, sample.count)
        if best is None or criterion < best[0]:
            best = criterion, maximum
    if best is None:
        return None
    coarse = best[1]
    found = maximise(sample, coarse.order, [bounded(coarse.order, coarse.free)])
    return None if found is None else finish(sample, found, coarse if mean else None)


def _finalists(sample: Sample, period: int, seasonal: bool, most: tuple[int, int]) -> list[_Ranked]:
    """The best orders by conditional estimates; with two kinds of seasonal terms, the best of each."""
    extra = int(sample.mean) + 1
    room = max(sample.count // 4, 1)
    found = regression(centred(sample), period if seasonal else 1, max(*most, 3))
    done: dict[Order, _Ranked] = {}

    def ranked(order: Order) -> _Ranked:
        if order not in done:
            done[order] = refined(order, start(found, order), 1)
        return done[order]

    def refined(order: Order, begin: Array, rounds: int) -> _Ranked:
        estimate, square = refine(found, order, begin, rounds)
        height = -0.5 * sample.count * float(np.log(max(square, 1e-300)))
        return _Ranked(corrected_aic(height, order.size + extra, sample.count), order, estimate)

    plain = [(p, q) for p in range(most[0] + 1) for q in range(most[1] + 1)]
    plain += [(3, 0)] if most[0] >= 2 else []
    terms = [(0, 0)]
    if seasonal:
        middle = Order(min(1, most[0]), min(1, most[1]), period=period)
        pairs = [(P, Q) for P in (0, 1) for Q in (0, 1)]
        terms = sorted(pairs, key=lambda pair: ranked(replace(middle, P=pair[0], Q=pair[1])).criterion)
        if sample.flat > sample.gaps:
            # what is left of a pattern removed by least squares looks seasonal to conditional estimates
            terms.sort(key=lambda pair: pair != (0, 0))
        terms = terms[:2]
    finalists: list[_Ranked] = []
    for P, Q in terms:
        orders = [Order(p, q, P, Q, period if P or Q else 1) for p, q in plain]
        likely = sorted((ranked(order) for order in orders if order.size <= room), key=lambda one: one.criterion)
        group = [refined(one.order, one.coefficients, 2) for one in likely[: _LOOKED_AT // len(terms)]]
        group.sort(key=lambda one: one.criterion)
        # each group by itself: between groups only the likelihood decides
        finalists += [one for one in group[: _FINALISTS // len(terms)] if one.criterion <= group[0].criterion + _NEAR]
    return finalists


def _typical(order: Order) -> list[Array]:
    points = []
    for first, second in _TYPICAL if order.size else ():
        point = np.zeros(order.size)
        point[: min(order.p, 1)] = first
        point[order.p : order.p + min(order.q, 1)] = second
        point[order.p + order.q + order.P :][:1] = -0.6
        points.append(point)
    return points
