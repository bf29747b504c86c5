"""Rung 6: is there a season, and is its pattern fixed or wandering?"""

from __future__ import annotations

import math
from collections.abc import Hashable, Mapping
from typing import cast

from preflight_magic.kernels.plan_likelihood import Candidate
from preflight_magic.model import Difference, Evidence, HypothesisTest, Judgement, RemovePattern, TimeSeries
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context, Rung
from preflight_magic.rungs.shares import capital, shares, told

METHOD = (
    "First whether there is a season at all: an F test of the pattern beside a line and three lags, at a strict level. "
    "Then whether the pattern is fixed: a seasonal difference of a fixed pattern leaves a seasonal moving average with "
    "a root at one, so both plans are models of the same data and their likelihoods are compared."
)

_WORDS: Mapping[Hashable, str] = {"fixed": "a fixed pattern", "difference": "a wandering one"}


def _kind(candidate: Candidate) -> str:
    return "difference" if candidate.D else "fixed" if candidate.pattern else "none"


def examine(series: TimeSeries, context: Context) -> Evidence:
    """Presence of a season and shares of the evidence for a fixed and a wandering one.

    Parameters
    ----------
    series : TimeSeries
    context : Context

    Returns
    -------
    Evidence
        Measures `period`, `asked` (the period considered), `presence_p`, `season_shares`; one test, where there is a
        period.
    """
    comparison = context.comparison
    if comparison is None:
        return Evidence(problem="no plan could be computed.")
    asked = series.season[0]
    measures: dict[str, object] = {"asked": asked, "period": comparison.period, "presence_p": math.nan}
    tests: tuple[HypothesisTest, ...] = ()
    presence = comparison.presence
    if presence is not None and math.isfinite(presence.p_value):
        measures |= {"presence_p": presence.p_value, "season_shares": shares(comparison, _kind)}
    # An exact pattern leaves nothing to divide by: there is a season, and no test to show.
    if presence is not None and math.isfinite(presence.p_value) and math.isfinite(presence.statistic):
        tests = (
            HypothesisTest(
                test="F test of the pattern",
                null="no season",
                statistic=presence.statistic,
                p_value=presence.p_value,
                p_bound="exact",
                nobs=presence.numerator + presence.denominator + 5,
                lags=3,
                terms="ct",
                options={
                    "series": "log" if comparison.log else "as given",
                    "degrees of freedom": f"{presence.numerator} and {presence.denominator}",
                },
            ),
        )
    return Evidence(measures, tests)


def judge(evidence: Evidence, thresholds: Thresholds) -> Judgement:
    """Difference at the seasonal lag, remove the pattern, or leave it."""
    if evidence.problem is not None:
        return Judgement("inconclusive", "not examined", capital(evidence.problem))
    found = evidence.measures
    asked, period = cast(int, found["asked"]), cast(int, found["period"])
    p = cast(float, found["presence_p"])
    if asked == 1:
        return Judgement("clear", "no seasonal period", "The series is read without a seasonal period.")
    if period == 1 or math.isnan(p):
        reason = f"There are too few complete cycles of {asked} to tell a season."
        return Judgement("clear", "no season can be shown", reason)
    p_text = "p < 0.001" if p < 0.001 else f"p = {p:.3f}"
    if not p < thresholds.season_p:
        reason = f"The F test of a pattern of {period} does not reject at {thresholds.season_p:g} ({p_text})."
        return Judgement("clear", "no season", reason)
    split = cast("Mapping[Hashable, float]", found["season_shares"])
    kind = next(iter(split))
    even = split[kind] < thresholds.even_share
    reason = f"There is a season of {period} ({p_text}). {told(split, _WORDS)}"
    if even:
        reason += " That is too even to call: both plans are worth a forecast."
    if kind == "difference":
        return Judgement("inconclusive" if even else "transform", "a wandering season", reason, (Difference(period),))
    return Judgement("inconclusive" if even else "transform", "a fixed pattern", reason, (RemovePattern(period),))


RUNG = Rung(
    name="season",
    question="Is there a season, and is its pattern fixed or wandering?",
    after=("shift and trend",),
    method=METHOD,
    sources=(
        "Harville (1974), Bayesian inference for variance components using only error contrasts, "
        "Biometrika 61, 383-385",
        "Kass and Raftery (1995), Bayes factors, Journal of the American Statistical Association 90, 773-795",
    ),
    examine=examine,
    judge=judge,
)
