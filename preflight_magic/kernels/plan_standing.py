"""How far a given plan lies below the best one in the evidence of a series, also where the log or the season differ."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from scipy.special import chdtri

from preflight_magic.kernels.plan_likelihood import Candidate, Comparison, PlanPrior, compare
from preflight_magic.kernels.restricted_likelihood import Array, line_column, pattern_columns
from preflight_magic.kernels.shift_date import shift_interval

NEAR = 2
"""Steps by which the date of a shift may move without being another shift."""


@dataclass(frozen=True)
class PlanForm:
    """A plan as the comparison knows plans.

    Attributes
    ----------
    log : bool
    d, D : int
        Ordinary and seasonal differences.
    trend : bool
        A line removed; with a difference it is the mean of the changes, and this is not asked.
    pattern : bool
        A fixed seasonal pattern removed.
    shift : int or None
        First position of the new level.
    period : int
        Of the pattern or the seasonal difference; 1 for a plan without a season.
    """

    log: bool
    d: int
    D: int
    trend: bool
    pattern: bool
    shift: int | None
    period: int


def below_best(
    values: Array, periods: tuple[int, ...], comparison: Comparison, prior: PlanPrior, form: PlanForm, enough: float
) -> float:
    """Log odds of the best plan against a given one.

    Within one comparison this is the difference of the evidence. Where the plan differs from the comparison in the
    log or in its season, which are decided before it, the distance of their statistics from their margins is added,
    and the rest is compared with the log and the season of the plan.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing; what `comparison` compared.
    periods : tuple of int
        Seasonal periods considered, shortest first.
    comparison : Comparison
    prior : PlanPrior
    form : PlanForm
    enough : float
        The rest is not compared once log and season alone exceed this.

    Returns
    -------
    float
        At least zero; infinite where the plan cannot be, NaN where it was not compared.
    """
    before = 0.0
    season = comparison.period if _has_season(comparison, prior) else 1
    if form.log != comparison.log:
        before += _finite(abs(comparison.log_gain - prior.log_margin) / 2.0)
    if form.period != season:
        if form.period > 1 and form.period != periods[0]:
            return float("nan")
        before += _season_odds(comparison, prior)
    if before > enough:
        return before
    if form.log != comparison.log or form.period != season:
        forced = replace(prior, log_margin=-np.inf if form.log else np.inf, season_p=2.0 if form.period > 1 else -1.0)
        longer = (form.period,) if form.period > periods[0] else ()
        other = _compared(np.ascontiguousarray(values, dtype=float).tobytes(), periods[0], forced, longer)
        if other is None or other.log != form.log or form.period not in (1, other.period):
            return float("inf")
        comparison = other
    same = [one for one in comparison.candidates if _is(one, form, comparison, values)]
    if not same:
        return float("nan") if form.shift is not None else float("inf")
    return before + max(0.0, comparison.best.evidence - max(one.evidence for one in same))


@lru_cache(maxsize=16)
def _compared(values: bytes, period: int, prior: PlanPrior, longer: tuple[int, ...]) -> Comparison | None:
    """Comparison under a prior that forces the log and the season; several plans of a series ask for the same."""
    return compare(np.frombuffer(values), period, prior, longer)


def _finite(value: float) -> float:
    return value if np.isfinite(value) else float("inf")


def _has_season(comparison: Comparison, prior: PlanPrior) -> bool:
    presence = comparison.presence
    return presence is not None and presence.standardised < prior.season_p


def _season_odds(comparison: Comparison, prior: PlanPrior) -> float:
    """Half the distance of the F test from its level on the scale of chi-squared: log odds as of a likelihood ratio."""
    presence = comparison.presence
    if presence is None or not np.isfinite(presence.p_value):
        return float("inf")
    at, bound = (float(chdtri(presence.numerator, p)) for p in (presence.standardised, prior.season_p))
    return _finite(abs(at - bound) / 2.0)


def _is(candidate: Candidate, form: PlanForm, comparison: Comparison, values: Array) -> bool:
    if (candidate.d, candidate.D, candidate.pattern) != (form.d, form.D, form.pattern):
        return False
    if form.d + form.D == 0 and candidate.trend != form.trend:
        return False
    if candidate.shift is None or form.shift is None:
        return candidate.shift is form.shift
    return abs(candidate.shift - form.shift) <= NEAR or _within(candidate, form.shift, comparison, values)


def _within(candidate: Candidate, position: int, comparison: Comparison, values: Array) -> bool:
    """Whether a date lies in the 95 % interval of the date of a candidate's shift."""
    x = values.copy()
    x[list(comparison.outliers)] = np.nan
    x = np.log(x) if comparison.log else x
    columns = [np.ones((len(x), 1))]
    columns += [line_column(len(x))[:, None]] if candidate.trend else []
    columns += [pattern_columns(len(x), comparison.period)] if candidate.pattern else []
    found = shift_interval(x, np.column_stack(columns), candidate.shift or 0)
    return found is not None and found.first <= position <= found.last
