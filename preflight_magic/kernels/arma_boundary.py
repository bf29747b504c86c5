"""What it costs a model to hold an MA root at one: the likelihood ratio against over-differencing."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from preflight_magic.kernels.arma import ArmaFit, contrasts
from preflight_magic.kernels.arma_likelihood import Sample, prepare
from preflight_magic.kernels.arma_maximum import maximise
from preflight_magic.kernels.arma_parameters import Array, Order, split

_AT_ONE = 0.9999
"""As near one as a root is held: the likelihood is flat there."""
_FAR = 0.5
"""Moduli of the largest positive root below which it is not asked whether it is one."""

_TOLERANCE = 1e-6
"""Of the likelihoods compared; far below what is notable."""


@dataclass(frozen=True)
class RootAtOne:
    """Fall of the restricted log likelihood when an MA root is held at one, NaN where there is none to hold.

    `plain` is that of ``1 - B``, `seasonal` that of ``1 - B**s``.
    """

    plain: float
    seasonal: float


def root_at_one(
    fit: ArmaFit, values: Array, *, mean: bool, nuisance: Array | None = None, fixed: Array | None = None
) -> RootAtOne:
    """Compare a fit with those that have an MA root at one in place of one MA term.

    Parameters
    ----------
    fit : ArmaFit
    values, mean, nuisance, fixed
        As they were fitted.

    Returns
    -------
    RootAtOne

    Notes
    -----
    Davis, Chen and Dunsmuir (1995), Inference for MA(1) processes with a root on or near the unit circle,
    Probability and Mathematical Statistics 15, 227-242. The restricted likelihood is used since the ordinary one rises
    at one where a mean is fitted (Shephard 1993, Distribution of the ML estimator of an MA(1) and a local level model,
    Econometric Theory 9, 377-401).
    """
    _, ma, _, sma = split(fit.order, fit.restricted)
    nothing = RootAtOne(float("nan"), float("nan"))
    if not fit.order.q and not fit.order.Q:
        return nothing
    given = prepare(values, mean=mean, nuisance=nuisance, fixed=fixed)
    if given is None:
        return nothing
    sample = contrasts(given)
    free = maximise(sample, fit.order, [fit.restricted], _TOLERANCE)
    if free is None:
        return nothing
    order, start = free.order, fit.restricted
    plain = seasonal = float("nan")
    root = _largest_positive(ma)
    if root >= _FAR:
        rest = np.polydiv(np.concatenate([[1.0], ma]), np.array([1.0, -root]))[0][1:]
        place = slice(order.p, order.p + order.q)
        without = np.concatenate([start[: place.start], rest, start[place.stop :]])
        held = replace(sample, factor=(1.0, -_AT_ONE))
        plain = free.log_likelihood - _height(held, replace(order, q=order.q - 1), without)
    if order.Q == 1 and -sma[0] >= _FAR:
        held = replace(sample, factor=(1.0, *[0.0] * (order.period - 1), -_AT_ONE))
        seasonal = free.log_likelihood - _height(held, replace(order, Q=0), start[:-1])
    return RootAtOne(plain, seasonal)


def _largest_positive(ma: Array) -> float:
    """Largest positive real inverse root of an MA polynomial, zero where there is none."""
    roots = np.roots(np.concatenate([[1.0], ma])) if len(ma) else np.zeros(1)
    real = roots.real[(np.abs(roots.imag) <= 1e-7 * np.abs(roots)) & (roots.real > 0.0)]
    return float(real.max(initial=0.0))


def _height(sample: Sample, order: Order, start: Array) -> float:
    found = maximise(sample, order, [start], _TOLERANCE)
    return -np.inf if found is None else found.log_likelihood
