"""The evidence for one plan: restricted likelihood integrated over ARMA models, with proper priors where needed."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace

import numpy as np
from scipy.special import logsumexp

from preflight_magic.kernels.arma_parameters import Order, polynomials
from preflight_magic.kernels.arma_search import FIRST_ORDERS, FURTHER_ORDERS, Fitted, fit
from preflight_magic.kernels.breaks import DatedShift
from preflight_magic.kernels.plan_prior import PlanPrior
from preflight_magic.kernels.restricted_likelihood import (
    Array,
    Contrasts,
    Levels,
    contrasts,
    effects,
    line_column,
    pattern_columns,
)

_LOG_2PI = float(np.log(2.0 * np.pi))
_T3 = float(np.log(2.0 / (np.pi * np.sqrt(3.0))))
"""Log density of Student's t with three degrees of freedom at zero."""
_ORDERS = len(FIRST_ORDERS) + len(FURTHER_ORDERS)
_HOPELESS = 12.0
"""Log evidence behind the best plan so far from which the larger ARMA orders of a plan are not tried."""
_NEGLIGIBLE = 7.0
"""Log evidence behind the leading order from which an order adds less than a thousandth."""


@dataclass(frozen=True)
class Candidate:
    """One plan with its evidence.

    Attributes
    ----------
    d, D : int
        Ordinary and seasonal differences.
    trend, pattern : bool
        In the model; with d + D of two a trend is implied and `trend` is False.
    shift : int or None
        First position of the new level, where the model has one.
    evidence : float
        Log of the integrated likelihood times the prior odds of the plan.
    order : Order
        The ARMA order that contributes most.
    coefficients : ndarray
    trend_t, shift_t : float
        Generalised least squares t-values, NaN where not in the model.
    """

    d: int
    D: int
    trend: bool
    pattern: bool
    shift: int | None
    evidence: float
    order: Order
    coefficients: Array
    trend_t: float
    shift_t: float


@dataclass(frozen=True)
class Subject:
    """What all plans of one series share.

    The series in levels, the prior, the spread of its first differences, and how many of its values are missing.
    """

    levels: Levels
    prior: PlanPrior
    spread: float
    gaps: int


@dataclass(frozen=True)
class Assessed:
    """A candidate with the fits of its ARMA orders, from which a sibling plan can start.

    `slope_density` is the log of the prior density of its slope, averaged over what is uncertain about the slope.
    """

    candidate: Candidate
    fits: tuple[Fitted, ...]
    slope_density: float

    @property
    def hints(self) -> dict[Order, Array]:
        """Coefficients of the orders that matter."""
        most = max(one.evidence for one in self.fits)
        return {one.order: one.coefficients for one in self.fits if one.evidence > most - _NEGLIGIBLE}


def base_columns(levels: Levels, trend: bool) -> list[Array]:
    """Constant, line where there is a trend, and pattern columns of the levels."""
    n = len(levels.values)
    columns = [np.ones((n, 1))]
    if trend:
        columns.append(line_column(n)[:, None])
    if levels.pattern:
        columns.append(pattern_columns(n, levels.period))
    return columns


def assess(
    subject: Subject,
    d: int,
    D: int,
    *,
    trend: bool,
    dated: DatedShift | None = None,
    best: float = -np.inf,
    hints: Mapping[Order, Array] | None = None,
    slope_density: float = 0.0,
) -> Assessed | None:
    """Evidence for one plan.

    Parameters
    ----------
    subject : Subject
    d, D : int
    trend : bool
        Must be True where d + D is two.
    dated : DatedShift, optional
        A level shift in the model.
    best : float
        The largest evidence so far; a plan far behind it is not looked into further.
    hints : Mapping from Order to coefficients, optional
        Only these orders are tried, from these coefficients.
    slope_density : float
        Of the plan with one difference: two differences know no slope of their own, and take over its log density.

    Returns
    -------
    Assessed or None
        None where the plan cannot be computed.
    """
    levels = replace(subject.levels, trend=trend)
    n = len(levels.values)
    step = (np.arange(n) >= dated.position).astype(float)[:, None] if dated else np.empty((n, 0))
    levels = replace(levels, others=np.column_stack([levels.others, step]))
    view = contrasts(levels, d, D)
    if view is None:
        return None
    fits = _fits(view, levels.period, D, best, hints)
    if not fits:
        return None
    leading = max(fits, key=lambda one: one.evidence)
    prior = subject.prior
    evidence = float(logsumexp([one.evidence for one in fits]) - np.log(_ORDERS))
    evidence -= prior.of_differences(d, D, n - subject.gaps)
    free_trend = trend and d + D < 2
    trend_t = shift_t = float("nan")
    if free_trend or dated:
        estimates, covariance = effects(view, *polynomials(leading.order, leading.coefficients))
        deviations = np.sqrt(np.maximum(covariance.diagonal(), 1e-300))
        place = 0 if d + D else 1
        if free_trend:
            trend_t = float(estimates[place] / deviations[place])
            slope_density = _slope_density(subject, float(estimates[place]), float(deviations[place]))
            evidence -= prior.trend
        if dated:
            shift_t = float(estimates[-1] / deviations[-1])
            # unit information (Kass and Wasserman 1995): a prior as wide as what one observation tells
            base = [*base_columns(levels, trend), subject.levels.others]
            width = float(np.sqrt(view.count) * deviations[-1])
            evidence -= _log_size(step, base) + 0.5 * _LOG_2PI + float(np.log(width))
            evidence -= prior.shift + float(np.log(n))
    if trend:
        # With it a restricted likelihood that conditions on a slope becomes a density of the same contrasts as those
        # without.
        base = [*base_columns(subject.levels, False), subject.levels.others]
        evidence += slope_density - _log_size(line_column(n)[:, None], base)
    candidate = Candidate(
        d=d,
        D=D,
        trend=free_trend,
        pattern=levels.pattern and D == 0,
        shift=dated.position if dated else None,
        evidence=evidence,
        order=leading.order,
        coefficients=leading.coefficients,
        trend_t=trend_t,
        shift_t=shift_t,
    )
    return Assessed(candidate, tuple(fits), slope_density)


def step_t(subject: Subject, without: Assessed, dated: DatedShift) -> float:
    """t-value of a level shift under the ARMA model that was fitted without it.

    Parameters
    ----------
    subject : Subject
    without : Assessed
        The plan without differences and without the shift.
    dated : DatedShift

    Returns
    -------
    float
        Small where the shift cannot win: a true one makes the model without it nearly a random walk, under which the
        jump itself stands out.
    """
    leading = max(without.fits, key=lambda one: one.evidence)
    step = (np.arange(len(subject.levels.values)) >= dated.position).astype(float)[:, None]
    levels = replace(subject.levels, trend=without.candidate.trend)
    view = contrasts(replace(levels, others=np.column_stack([levels.others, step])), 0, 0)
    if view is None:
        return 0.0
    estimates, covariance = effects(view, *polynomials(leading.order, leading.coefficients))
    return float(estimates[-1] / np.sqrt(max(float(covariance[-1, -1]), 1e-300)))


def _slope_density(subject: Subject, estimate: float, deviation: float) -> float:
    """Log of the prior density of a slope, averaged over what is uncertain about it.

    The prior is Student's t with three degrees of freedom about zero, so that a steep trend is not held against it;
    averaging widens it by the standard error. All in units of the line's whole range.
    """
    n = len(subject.levels.values)
    width = float(np.hypot(subject.prior.slope * subject.spread * n, deviation))
    return _T3 - float(np.log(width)) - 2.0 * float(np.log1p((estimate / width) ** 2 / 3.0))


def _log_size(column: Array, base: list[Array]) -> float:
    """Log of the length of a column after what the base explains is taken out."""
    basis = np.linalg.qr(np.column_stack(base))[0]
    rest = column - basis @ (basis.T @ column)
    return 0.5 * float(np.log(max(float((rest**2).sum()), 1e-300)))


def _fits(view: Contrasts, period: int, D: int, best: float, hints: Mapping[Order, Array] | None) -> list[Fitted]:
    fits: list[Fitted] = []
    if hints is not None:
        _try(fits, view, hints.keys(), hints)
        return fits
    _try(fits, view, [Order(p, q, 0, D, period) for p, q in FIRST_ORDERS], {})
    if fits and max(one.evidence for one in fits) > best - _HOPELESS - 0.05 * view.count:
        _try(fits, view, [Order(p, q, 0, D, period) for p, q in FURTHER_ORDERS], {})
    if D and fits:
        # the leading order once more without its seasonal moving average: a season that wanders freely
        leading = max(fits, key=lambda one: one.evidence).order
        _try(fits, view, [Order(leading.p, leading.q, 0, 0, period)], {})
    return fits


def _try(fits: list[Fitted], view: Contrasts, orders: Iterable[Order], hints: Mapping[Order, Array]) -> None:
    """Add the fits of some orders to those there are; an order that falls far behind them is given up early."""
    for order in orders:
        if order.size + 2 < view.count:
            useful = max((one.evidence for one in fits), default=-np.inf) - _NEGLIGIBLE
            found = fit(view, order, hints.get(order), useful)
            if found is not None:
                fits.append(found)
