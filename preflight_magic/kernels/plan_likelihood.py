"""The shared comparison of candidate plans: which differences, trend, pattern and shift describe a series best.

Every candidate is a linear model with ARMA errors. Its evidence is the restricted likelihood of the same contrasts
of the data, integrated over the ARMA coefficients and summed over their orders; the slope and the shift carry proper
priors, so that plans with and without them are comparable too.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from scipy.special import logsumexp

from preflight_magic.kernels.arma_parameters import Order, polynomials
from preflight_magic.kernels.arma_search import ORDERS, Fitted, fit
from preflight_magic.kernels.breaks import DatedShift, date_shift
from preflight_magic.kernels.power_transform import log_gain
from preflight_magic.kernels.restricted_likelihood import (
    Array,
    Contrasts,
    Levels,
    contrasts,
    effects,
    line_column,
    missing_columns,
    pattern_columns,
)
from preflight_magic.kernels.seasonal_presence import Presence, season_presence

_LOG_2PI = float(np.log(2.0 * np.pi))
_SHORTEST_WITH_SHIFT = 24
"""Fewest observed values in which a level shift is looked for. Common practice: a dozen on each side."""


@dataclass(frozen=True)
class PlanPrior:
    """What is believed before the data, and the two margins outside the comparison. Natural logarithms.

    Attributes
    ----------
    log_margin : float
        Fall of -2 log likelihood from which a log is taken.
    season_p : float
        p-value below which a season is there.
    trend, shift, second, wandering : float
        Log odds against a trend, a shift (besides the number of its dates), a second difference, and a seasonal
        difference where there is a season.
    slope : float
        Prior standard deviation of the slope a step, in units of the spread of the first differences.
    """

    log_margin: float
    season_p: float
    trend: float
    shift: float
    second: float
    wandering: float
    slope: float


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
class Comparison:
    """All that rungs 4 to 7 tell of one series.

    `candidates` are sorted, the best first; `weights` are their shares of the evidence, summing to one. `dated` is
    the most likely level shift, whether taken or not. `count` is the number of observed values.
    """

    log: bool
    log_gain: float
    period: int
    presence: Presence | None
    dated: DatedShift | None
    candidates: tuple[Candidate, ...]
    weights: tuple[float, ...]
    count: int

    @property
    def best(self) -> Candidate:
        """The leading plan."""
        return self.candidates[0]


@dataclass(frozen=True)
class _Subject:
    levels: Levels
    prior: PlanPrior
    spread: float


def compare(values: Array, period: int, prior: PlanPrior) -> Comparison | None:
    """Compare candidate plans of one series.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing; first and last are observed.
    period : int
        Seasonal period to consider; 1 for none.
    prior : PlanPrior

    Returns
    -------
    Comparison or None
        None where no candidate can be computed.

    Notes
    -----
    Harville (1974), Bayesian inference for variance components using only error contrasts, Biometrika 61, 383-385;
    Kass and Raftery (1995), Bayes factors, Journal of the American Statistical Association 90, 773-795.
    """
    n = len(values)
    usable = period if period > 1 and _cycles(values, period) else 1
    gain = log_gain(values, usable)
    log = bool(gain > prior.log_margin)
    x = np.log(values) if log else values
    centre, scale = float(np.nanmean(x)), float(np.nanstd(x))
    if not scale > 0.0:
        return None
    x = (x - centre) / scale
    presence = season_presence(x, usable) if usable > 1 else None
    pattern = presence is not None and presence.p_value < prior.season_p
    seen = np.isfinite(x)
    filled = np.where(seen, x, np.interp(np.arange(n), np.flatnonzero(seen), x[seen]))
    levels = Levels(filled, usable if pattern else 1, True, pattern, missing_columns(x))
    subject = _Subject(levels, prior, _spread_of_changes(filled, levels.period))
    found: list[Candidate] = []
    for D in (0, 1) if pattern else (0,):
        for d in (0, 1) if D else (0, 1, 2):
            for trend in (True, False) if d + D < 2 else (True,):
                found += _candidate(subject, d, D, trend, None)
    dates: dict[bool, DatedShift] = {}
    if int(seen.sum()) >= _SHORTEST_WITH_SHIFT:
        for trend in (True, False):
            dated = date_shift(x, np.column_stack(_base(levels, trend)))
            if dated is not None:
                dates[trend] = dated
                found += _candidate(subject, 0, 0, trend, dated)
    if not found:
        return None
    found.sort(key=lambda candidate: -candidate.evidence)
    evidence = np.array([candidate.evidence for candidate in found])
    weights = np.exp(evidence - logsumexp(evidence))
    shifted = next((candidate for candidate in found if candidate.shift is not None), None)
    return Comparison(
        log=log,
        log_gain=gain,
        period=usable,
        presence=presence,
        dated=dates[shifted.trend] if shifted else None,
        candidates=tuple(found),
        weights=tuple(weights.tolist()),
        count=int(seen.sum()),
    )


def _cycles(values: Array, period: int) -> bool:
    """Enough cycles to speak of a season: two and a half, and every position seen."""
    seen = np.isfinite(values)
    position = np.flatnonzero(seen) % period
    return len(values) >= 2.5 * period and bool(np.bincount(position, minlength=period).all())


def _spread_of_changes(filled: Array, period: int) -> float:
    """Robust standard deviation of the first differences, the mean pattern taken out."""
    changes = np.diff(filled)
    if period > 1:
        position = np.arange(len(changes)) % period
        changes = changes - (np.bincount(position, changes) / np.bincount(position))[position]
    spread = 1.4826 * float(np.median(np.abs(changes - np.median(changes))))
    return spread if spread > 0.0 else max(float(changes.std()), 1e-12)


def _base(levels: Levels, trend: bool) -> list[Array]:
    n = len(levels.values)
    columns = [np.ones((n, 1))]
    if trend:
        columns.append(line_column(n)[:, None])
    if levels.pattern:
        columns.append(pattern_columns(n, levels.period))
    return columns


def _candidate(subject: _Subject, d: int, D: int, trend: bool, dated: DatedShift | None) -> list[Candidate]:
    """The plan with its evidence, in a list that is empty where it cannot be computed."""
    levels = replace(subject.levels, trend=trend)
    n = len(levels.values)
    step = (np.arange(n) >= dated.position).astype(float)[:, None] if dated else np.empty((n, 0))
    levels = replace(levels, others=np.column_stack([levels.others, step]))
    view = contrasts(levels, d, D)
    if view is None:
        return []
    fits = _fits(view, levels.period, D)
    if not fits:
        return []
    leading = max(fits, key=lambda one: one.evidence)
    estimates, covariance = effects(view, *polynomials(leading.order, leading.coefficients))
    deviations = np.sqrt(np.maximum(covariance.diagonal(), 1e-300))
    # Restricted likelihoods that condition on a slope or a step become densities of the same contrasts as those
    # without by the prior density of the slope or step, over the scale of its contrast.
    evidence = float(logsumexp([one.evidence for one in fits]) - np.log(len(ORDERS)))
    base = [*_base(levels, False), subject.levels.others]
    prior = subject.prior
    free_trend = trend and d + D < 2
    if trend:
        width = prior.slope * subject.spread * n
        evidence -= _log_size(line_column(n)[:, None], base) + 0.5 * _LOG_2PI + float(np.log(width))
        base.append(line_column(n)[:, None])
    if dated is not None:
        # unit information (Kass and Wasserman 1995): as much as one observation tells
        width = float(np.sqrt(view.count) * deviations[-1])
        evidence -= _log_size(step, base) + 0.5 * _LOG_2PI + float(np.log(width))
        evidence -= prior.shift + float(np.log(n))
    evidence -= prior.trend * free_trend + prior.second * (d + D == 2) + prior.wandering * D
    place = 0 if d + D else 1
    return [
        Candidate(
            d=d,
            D=D,
            trend=free_trend,
            pattern=levels.pattern and D == 0,
            shift=dated.position if dated else None,
            evidence=evidence,
            order=leading.order,
            coefficients=leading.coefficients,
            trend_t=float(estimates[place] / deviations[place]) if free_trend else float("nan"),
            shift_t=float(estimates[-1] / deviations[-1]) if dated else float("nan"),
        )
    ]


def _log_size(column: Array, base: list[Array]) -> float:
    """Log of the length of a column after what the base explains is taken out."""
    basis = np.linalg.qr(np.column_stack(base))[0]
    rest = column - basis @ (basis.T @ column)
    return 0.5 * float(np.log(max(float((rest**2).sum()), 1e-300)))


def _fits(view: Contrasts, period: int, D: int) -> list[Fitted]:
    orders = [Order(p, q, 0, D, period) for p, q in ORDERS]
    fits = [one for order in orders if order.size + 2 < view.count and (one := fit(view, order)) is not None]
    if D and fits:
        # the leading order once more without its seasonal moving average: a season that wanders freely
        leading = max(fits, key=lambda one: one.evidence).order
        free = fit(view, Order(leading.p, leading.q, 0, 0, period))
        fits += [free] if free is not None else []
    return fits
