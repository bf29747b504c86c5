"""Rung 6: is there a season, and is its pattern fixed or wandering?"""

from __future__ import annotations

import math
from collections.abc import Hashable, Mapping
from dataclasses import replace
from typing import cast

import numpy as np
from numpy.typing import NDArray

from preflight_magic.kernels.plan_likelihood import Candidate, Comparison
from preflight_magic.kernels.seasonal_evidence import seasonal_evidence
from preflight_magic.kernels.seasonal_presence import cycle_presence
from preflight_magic.kernels.seasonal_strength import average_strength, fill_along_pattern
from preflight_magic.model import Difference, Evidence, HypothesisTest, Judgement, RemovePattern, TimeSeries
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context, Rung
from preflight_magic.rungs.shares import capital, does, p_text, shares, told

METHOD = (
    "First whether there is a season at all: an F test of the pattern beside a line and three lags, at a strict level "
    "that grows stricter with the length of the series. Where there are several periods, the cycles of the shortest "
    "may differ within a longer one (the hours of a day within the week): then the longer pattern is removed. "
    "For days, two pairs of yearly waves are tested beside that and told, not removed. "
    "Then whether the pattern is fixed: a seasonal difference of a fixed pattern leaves a seasonal moving average with "
    "a root at one, so both plans are models of the same data and their likelihoods are compared. HEGY (null: a unit "
    "root at every seasonal frequency) and Canova-Hansen (null: a fixed pattern) are shown beside it; HEGY is weak in "
    "few cycles, and Canova-Hansen rejects where the errors are strongly dependent. Neither decides, nor does the "
    "strength of the pattern, which a fixed one has as well as a wandering one."
)

_YEAR = {"daily": 365.25, "business daily": 260.9}
"""Steps a year of calendars whose own season is the week."""
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
        Measures `period`, `asked` (the period considered), `presence_p`, `presence_standardised` (to 100 values),
        `season_shares`; where they can be computed `seasonal_strength` (by moving averages), `hegy_by_cycle` and
        `canova_hansen_by_cycle` (p-values by the length of the cycle in steps), and for days `year` (steps) and
        `year_standardised` (p-value). The F test of the pattern, HEGY and Canova-Hansen, where there is a period.
    """
    comparison = context.comparison
    if comparison is None:
        return Evidence(problem="no plan could be computed.")
    asked = series.season[0]
    measures: dict[str, object] = {"asked": asked, "period": comparison.period, "presence_p": math.nan}
    measures |= _yearly(series, comparison)
    tests: tuple[HypothesisTest, ...] = ()
    presence = comparison.presence
    if presence is not None and math.isfinite(presence.p_value):
        measures |= {"presence_p": presence.p_value, "presence_standardised": presence.standardised}
        measures |= {"season_shares": shares(comparison, _kind)}
    # An exact pattern leaves nothing to divide by: there is a season, and no test to show.
    if presence is not None and math.isfinite(presence.p_value) and math.isfinite(presence.statistic):
        tests = (
            HypothesisTest(
                test="F test of the pattern",
                null="no season" if comparison.period <= asked else f"cycles of {asked} that are alike",
                statistic=presence.statistic,
                p_value=presence.p_value,
                p_bound="exact",
                nobs=presence.nobs,
                lags=3 if comparison.period <= asked else asked + 1,
                terms="ct",
                options={
                    "series": "log" if comparison.log else "as given",
                    "degrees of freedom": f"{presence.numerator} and {presence.denominator}",
                },
            ),
        )
    if comparison.period > 1:
        values, told_series = _subject(series, comparison)
        beside = seasonal_evidence(values, comparison.period, comparison.best.d, told_series)
        strength = average_strength(values, comparison.period)
        tests += beside.tests
        measures |= {} if strength is None else {"seasonal_strength": strength.seasonal}
        measures |= {"hegy_by_cycle": beside.hegy} if beside.hegy else {}
        measures |= {"canova_hansen_by_cycle": beside.canova_hansen} if beside.canova_hansen else {}
    return Evidence(measures, tests)


def _yearly(series: TimeSeries, comparison: Comparison) -> dict[str, object]:
    """The test of a yearly cycle, where the steps are days and two years are there."""
    length = _YEAR.get(series.calendar.kind if series.calendar else "")
    if length is None or len(series.values) < 2.0 * length or series.season[-1] >= int(length):
        return {}
    values = series.values.to_numpy(dtype=float, copy=True)
    values[list(comparison.outliers)] = np.nan
    found = cycle_presence(np.log(values) if comparison.log else values, comparison.period, length)
    return {"year": length, "year_standardised": found.standardised} if math.isfinite(found.p_value) else {}


def _subject(series: TimeSeries, comparison: Comparison) -> tuple[NDArray[np.float64], str]:
    """What the tests look at: the series after a log; gaps, and isolated outliers, along the mean pattern."""
    values = series.values.to_numpy(dtype=float, copy=True)
    values[list(comparison.outliers)] = np.nan
    words = ["log" if comparison.log else "as given"]
    if not np.isfinite(values).all():
        words.append("gaps and outliers filled along the mean pattern")
    values = np.log(values) if comparison.log else values
    return fill_along_pattern(values, comparison.period), ", ".join(words)


def judge(evidence: Evidence, thresholds: Thresholds) -> Judgement:
    """Difference at the seasonal lag, remove the pattern, or leave it; a yearly cycle of days is told."""
    found = _short_season(evidence, thresholds)
    year = cast(float, evidence.measures.get("year_standardised", math.nan))
    if not year < thresholds.season_p:
        return found
    reason = (
        f" Beyond it there is a yearly cycle of {evidence.measures['year']:g} steps, which no step of a plan removes: "
        "give the model two or three pairs of yearly waves, and trust the plan without them for horizons of weeks only."
    )
    return replace(found, headline=f"{found.headline}, and a yearly cycle", reason=found.reason + reason)


def _short_season(evidence: Evidence, thresholds: Thresholds) -> Judgement:
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
    standardised = cast(float, found["presence_standardised"])
    if not standardised < thresholds.season_p:
        reason = (
            f"The F test of a pattern of {period} says too little for a season: {p_text}, standardised to 100 values "
            f"{standardised:.{4 if standardised < 0.01 else 3}f}; below {thresholds.season_p:g} is wanted."
        )
        return Judgement("clear", "no season", reason)
    if period > asked:
        reason = (
            f"The cycles of {asked} differ within a longer season of {period} ({p_text}). A pattern that long is "
            f"removed, never differenced: a difference at {period} would cost that many values, and there are few "
            "cycles to tell how it wanders."
        )
        return Judgement("transform", "a fixed pattern", reason, (RemovePattern(period),))
    split = cast("Mapping[Hashable, float]", found["season_shares"])
    kind = next(iter(split))
    even = split[kind] < thresholds.even_share
    split_text = told(split, _WORDS)
    # One sentence: the code quotes the first as the reason of its step.
    reason = f"There is a season of {period} ({p_text}); {split_text[:1].lower()}{split_text[1:]}"
    if even:
        reason += " That is too even to call: both plans are worth a forecast."
    reason += _beside(evidence.tests, kind == "difference", thresholds.significance)
    if kind == "difference":
        return Judgement("inconclusive" if even else "transform", "a wandering season", reason, (Difference(period),))
    return Judgement("inconclusive" if even else "transform", "a fixed pattern", reason, (RemovePattern(period),))


def _beside(tests: tuple[HypothesisTest, ...], wanders: bool, significance: float) -> str:
    """What HEGY and Canova-Hansen say; empty where either is missing."""
    found = {test.test: test for test in tests}
    roots, stability = found.get("HEGY"), found.get("Canova-Hansen")
    if roots is None or stability is None:
        return ""
    fixed = (roots.p_value < significance, stability.p_value >= significance)  # what each speaks for
    if fixed[0] != fixed[1]:
        why = (
            "both reject, as where some frequencies wander and others do not"
            if fixed[0]
            else "neither rejects, as in few cycles, where both have little power"
        )
    elif fixed[0] == wanders:
        why = "they differ from it"
    else:
        why = "they agree with it"
    return (
        f" Beside it HEGY {does(fixed[0])} unit roots at the seasonal frequencies ({p_text(roots)}) and Canova-Hansen "
        f"{does(not fixed[1])} a fixed pattern ({p_text(stability)}): {why}."
    )


RUNG = Rung(
    name="season",
    question="Is there a season, and is its pattern fixed or wandering?",
    after=("shift and trend",),
    method=METHOD,
    sources=(
        "Good (1992), The Bayes/non-Bayes compromise: a brief review, "
        "Journal of the American Statistical Association 87, 597-606",
        "Harville (1974), Bayesian inference for variance components using only error contrasts, "
        "Biometrika 61, 383-385",
        "Kass and Raftery (1995), Bayes factors, Journal of the American Statistical Association 90, 773-795",
        "Hylleberg, Engle, Granger and Yoo (1990), Seasonal integration and cointegration, "
        "Journal of Econometrics 44, 215-238",
        "Smith, Taylor and del Barrio Castro (2009), Regression-based seasonal unit root tests, "
        "Econometric Theory 25, 527-560",
        "Canova and Hansen (1995), Are seasonal patterns constant over time? A test for seasonal stability, "
        "Journal of Business and Economic Statistics 13, 237-252",
        "Wang, Smith and Hyndman (2006), Characteristic-based clustering for time series data, "
        "Data Mining and Knowledge Discovery 13, 335-364",
    ),
    examine=examine,
    judge=judge,
)
