"""How a plan stands on the data of a series: the odds of the best plan against it, and since when they are long."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import replace
from typing import cast

import numpy as np

from preflight_magic.kernels.plan_likelihood import Comparison, compare
from preflight_magic.kernels.plan_standing import PlanForm, below_best
from preflight_magic.ladder import Climb, climb, per_day
from preflight_magic.model import (
    CheckError,
    Difference,
    Finding,
    Log,
    PerDay,
    RemovePattern,
    RemoveShift,
    RemoveTrend,
    Stamp,
    Step,
    TimeSeries,
)
from preflight_magic.plan.plan import Plan
from preflight_magic.policy import Settings, Thresholds
from preflight_magic.record.fingerprint import position_of, stamp_of, steps_on
from preflight_magic.rungs.shares import prior_of

ENOUGH = math.log(1e6)
"""Log odds beyond which nothing more is computed."""


_MOST = 700.0
"""Log odds whose exponential is still a number; longer odds are infinite."""


def odds_against(source: TimeSeries, found: Climb, thresholds: Thresholds, plan: Plan) -> float:
    """Odds of the recommended plan against another one, from the logarithm that `below` gives."""
    log_odds = below(source, found, thresholds, plan)
    return math.inf if log_odds > _MOST else math.exp(log_odds)


def below(source: TimeSeries, found: Climb, thresholds: Thresholds, plan: Plan) -> float:
    """Log odds of the recommended plan against another one.

    Parameters
    ----------
    source : TimeSeries
        That could be checked.
    found : Climb
        Of this series.
    thresholds : Thresholds
    plan : Plan

    Returns
    -------
    float
        Zero for the recommended plan; infinite for a plan that these data do not allow; NaN for one that the
        comparison of plans does not know, such as one with a power.
    """
    steps = steps_on(plan.steps, source.values.index)
    if steps == found.recommended.steps:
        return 0.0
    if not _applies(source, steps):
        return math.inf
    mine, recommended = _per_day(steps), _per_day(found.recommended.steps)
    first = _per_day_odds(found.findings.get("calendar length"), thresholds, mine, recommended)
    if math.isnan(first) or first > ENOUGH:
        return first
    subject = per_day(source, steps)
    comparison = found.comparison if mine == recommended else _compared(subject, thresholds)
    if comparison is None:
        return math.nan
    return first + _below(subject, comparison, thresholds, steps)


def fails_since(source: TimeSeries, settings: Settings, plan: Plan, start: int, margin: float) -> Stamp:
    """First stamp with whose value a plan no longer stands, found by halving, so with few climbs.

    Parameters
    ----------
    source : TimeSeries
        On all of which the plan does not stand.
    settings : Settings
    plan : Plan
    start : int
        Number of steps on which the plan was chosen.
    margin : float
        Log odds.

    Returns
    -------
    Period, Timestamp or int
        Where the odds go up and down, one of the stamps with which they went beyond the margin.
    """
    stands, fails = start, len(source.values)
    while fails - stands > 1:
        middle = (stands + fails) // 2
        values = source.values.iloc[:middle]
        shorter = replace(source, values=values.loc[: values.last_valid_index()])
        if below(shorter, climb(shorter, settings), settings.thresholds, plan) <= margin:
            stands = middle
        else:
            fails = middle
    return stamp_of(source.values.index[fails - 1])


def _below(subject: TimeSeries, comparison: Comparison, thresholds: Thresholds, steps: tuple[Step, ...]) -> float:
    form = _form(steps, subject)
    if form is None:
        return math.nan
    values = subject.values.to_numpy(dtype=float)
    return below_best(values, subject.season, comparison, prior_of(thresholds), form, ENOUGH)


def _compared(subject: TimeSeries, thresholds: Thresholds) -> Comparison | None:
    return compare(subject.values.to_numpy(dtype=float), subject.season[0], prior_of(thresholds), subject.season[1:])


def _applies(source: TimeSeries, steps: tuple[Step, ...]) -> bool:
    try:
        return bool(np.isfinite(Plan(source.repairs, steps).apply(source.values)).any())
    except CheckError:
        return False


def _per_day(steps: Iterable[Step]) -> PerDay | None:
    return next((step for step in steps if isinstance(step, PerDay)), None)


def _per_day_odds(
    finding: Finding | None, thresholds: Thresholds, mine: PerDay | None, recommended: PerDay | None
) -> float:
    """Log odds against dividing by days, or not, as half the distance of -2 log likelihood from its margin."""
    if mine == recommended:
        return 0.0
    measures = finding.measures if finding is not None else {}
    gains = [measures.get(f"per_{one.unit}") for one in (mine, recommended) if one is not None]
    if not gains or not all(isinstance(gain, float) for gain in gains):
        return math.nan
    if mine is not None and recommended is not None:
        return abs(cast(float, gains[0]) - cast(float, gains[1])) / 2.0
    return abs(cast(float, gains[0]) - thresholds.calendar_margin) / 2.0


def _form(steps: Iterable[Step], subject: TimeSeries) -> PlanForm | None:
    """Plan as the comparison knows plans; None for one that it does not know."""
    log = trend = pattern = False
    d = D = 0
    shift: int | None = None
    period = 1
    for step in steps:
        match step:
            case PerDay():
                continue
            case Log():
                log = True
            case Difference(lag=1):
                d += 1
            case Difference(lag=lag) if lag in subject.season:
                D, period = D + 1, lag
            case RemoveTrend():
                trend = True
            case RemovePattern(period=length) if length in subject.season and period in (1, length):
                pattern, period = True, length
            case RemoveShift(at=at) if shift is None:
                shift = position_of(at, subject.values.index)
                if shift is None:
                    return None
            case _:
                return None
    known = d + D <= 2 and D <= 1 and not (pattern and D) and not ((trend or shift is not None) and d + D)
    return PlanForm(log, d, D, trend, pattern, shift, period) if known else None
