"""The shared comparison of candidate plans: which differences, trend, pattern and shift describe a series best.

Every candidate is a linear model with ARMA errors. Its evidence is the restricted likelihood of the same contrasts
of the data, integrated over the ARMA coefficients and summed over their orders; the slope and the shift carry proper
priors, so that plans with and without them are comparable too.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from scipy.special import logsumexp

from preflight_magic.kernels.arma_parameters import polynomials
from preflight_magic.kernels.breaks import DatedShift, date_shift
from preflight_magic.kernels.outliers import additive_outliers
from preflight_magic.kernels.plan_evidence import Assessed, Candidate, Subject, assess, base_columns, step_t
from preflight_magic.kernels.plan_prior import PlanPrior
from preflight_magic.kernels.power_transform import log_gain
from preflight_magic.kernels.restricted_likelihood import Array, Levels, missing_columns, residuals
from preflight_magic.kernels.seasonal_presence import Presence, longer_presence, season_presence, without_pattern

__all__ = ["Candidate", "Comparison", "PlanPrior", "compare"]

_SHORTEST_WITH_SHIFT = 24
"""Fewest observed values in which a level shift is looked for. Common practice: a dozen on each side."""
_GRAIN = 3e-9
"""Standard deviation of a fixed noise, in spreads of the series, that stands for the rounding of its values. Without
it a series that follows a line or a pattern exactly would be described equally well by every difference."""
_MOST_OUTLIERS = 0.05
"""Share of values above which outliers are not isolated but the way of the series. Common practice."""
_SMALLEST_STEP = 2.0
"""t-value in the model without it below which a shift cannot win against its prior odds: it is not looked into."""


@dataclass(frozen=True)
class Comparison:
    """All that rungs 4 to 7 tell of one series.

    `candidates` are sorted, the best first; `weights` are their shares of the evidence, summing to one. `dated` is
    the most likely level shift, whether taken or not. `count` is the number of observed values.
    `outliers` are positions of isolated outliers, which the comparison left out as if missing.
    """

    log: bool
    log_gain: float
    period: int
    presence: Presence | None
    dated: DatedShift | None
    candidates: tuple[Candidate, ...]
    weights: tuple[float, ...]
    count: int
    outliers: tuple[int, ...]

    @property
    def best(self) -> Candidate:
        """The leading plan."""
        return self.candidates[0]


def compare(values: Array, period: int, prior: PlanPrior, longer: tuple[int, ...] = ()) -> Comparison | None:
    """Compare candidate plans of one series.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing; first and last are observed.
    period : int
        Seasonal period to consider; 1 for none.
    prior : PlanPrior
    longer : tuple of int, optional
        Further, longer periods. A multiple of `period` that shows a fixed pattern beyond that of `period` takes its
        place: the pattern is taken out first, by its means, and the plans differ in all else.

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
    x = (x - centre) / scale + _GRAIN * np.random.default_rng(0).standard_normal(n)
    beyond = _longer(x, usable, longer, prior.season_p)
    if beyond is not None:
        x, searched = without_pattern(x, beyond[0]), 1
    else:
        searched = usable
    found = _best_plans(x, searched, prior)
    if found is None:
        return None
    outliers = _outliers(found, x, prior.outlier_bound)
    if outliers:
        kept = x.copy()
        kept[list(outliers)] = np.nan
        found = _best_plans(kept, searched, prior) or found
    every = (replace(one.candidate, pattern=beyond is not None or one.candidate.pattern) for one in found.assessed)
    candidates = sorted(every, key=lambda candidate: -candidate.evidence)
    evidence = np.array([candidate.evidence for candidate in candidates])
    shifted = next((candidate for candidate in candidates if candidate.shift is not None), None)
    return Comparison(
        log=log,
        log_gain=gain,
        period=beyond[0] if beyond else usable,
        presence=beyond[1] if beyond else found.presence,
        dated=found.dates[shifted.trend] if shifted else None,
        candidates=tuple(candidates),
        weights=tuple(np.exp(evidence - logsumexp(evidence)).tolist()),
        count=int(np.isfinite(values).sum()),
        outliers=outliers,
    )


def _longer(x: Array, period: int, longer: tuple[int, ...], bound: float) -> tuple[int, Presence] | None:
    """The longest period with a pattern beyond that of `period`, and its test."""
    for one in sorted(longer, reverse=True):
        if period > 1 and one > period and one % period == 0 and _cycles(x, one):
            presence = longer_presence(x, period, one)
            if presence.standardised < bound:
                return one, presence
    return None


@dataclass(frozen=True)
class _Found:
    """All assessed plans of a series; dates of shifts by whether there is a trend beside them."""

    assessed: tuple[Assessed, ...]
    dates: dict[bool, DatedShift]
    presence: Presence | None


def _best_plans(x: Array, period: int, prior: PlanPrior) -> _Found | None:
    n = len(x)
    presence = season_presence(x, period) if period > 1 and _cycles(x, period) else None
    pattern = presence is not None and presence.standardised < prior.season_p
    seen = np.isfinite(x)
    filled = np.where(seen, x, np.interp(np.arange(n), np.flatnonzero(seen), x[seen]))
    levels = Levels(filled, period if pattern else 1, True, pattern, missing_columns(x))
    assessed, dates = _assessed(
        Subject(levels, prior, _spread_of_changes(filled, levels.period), int(n - seen.sum())), x
    )
    return _Found(tuple(assessed), dates, presence) if assessed else None


def _outliers(found: _Found, x: Array, bound: float) -> tuple[int, ...]:
    """Isolated outliers under the leading plan; none where they are too many to be called isolated."""
    leading = max(found.assessed, key=lambda one: one.candidate.evidence)
    fit = max(leading.fits, key=lambda one: one.evidence)
    view = fit.contrasts
    ar, ma = polynomials(fit.order, fit.coefficients)
    errors = np.zeros(len(x))
    errors[len(x) - len(view.stacked) :] = residuals(view, ar, ma)
    candidate = leading.candidate
    for lag in (*(fit.order.period,) * candidate.D, *(1,) * candidate.d):
        ar = np.convolve(ar, np.r_[1.0, np.zeros(lag - 1), -1.0])
    most = max(2, round(_MOST_OUTLIERS * len(x)))
    places = additive_outliers(errors, ar, ma, bound=bound, most=most + 1)
    return () if len(places) > most else tuple(place for place in places if np.isfinite(x[place]))


def _assessed(subject: Subject, x: Array) -> tuple[list[Assessed], dict[bool, DatedShift]]:
    """Every plan that can be computed, and the dates of the shifts among them by whether there is a trend."""
    found: dict[tuple[int, int, bool], Assessed] = {}
    best = -np.inf
    orders = [(1, 0), (0, 0), (2, 0), *(((0, 1), (1, 1)) if subject.levels.pattern else ())]
    for d, D in orders:
        single = found.get((1, 0, True)) if D == 0 else found.get((0, 1, True), found.get((1, 0, True)))
        density = single.slope_density if single is not None else 0.0
        one = assess(subject, d, D, trend=True, best=best, slope_density=density)
        if one is not None:
            found[d, D, True] = one
            best = max(best, one.candidate.evidence)
    for d, D in orders:
        if d + D < 2 and (d, D, True) in found:
            one = assess(subject, d, D, trend=False, hints=found[d, D, True].hints)
            if one is not None:
                found[d, D, False] = one
                best = max(best, one.candidate.evidence)
    every = list(found.values())
    dates: dict[bool, DatedShift] = {}
    if np.isfinite(x).sum() >= _SHORTEST_WITH_SHIFT:
        for trend in (True, False):
            dated = date_shift(x, np.column_stack(base_columns(subject.levels, trend)))
            without = found.get((0, 0, trend))
            if dated is None or without is None or abs(step_t(subject, without, dated)) < _SMALLEST_STEP:
                continue
            one = assess(subject, 0, 0, trend=trend, dated=dated, best=best)
            if one is not None:
                dates[trend] = dated
                every.append(one)
    return every, dates


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
