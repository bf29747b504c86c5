"""Rung 5: is there a level shift, and a trend?"""

from __future__ import annotations

from collections.abc import Hashable, Mapping
from typing import cast

import numpy as np
import pandas as pd

from preflight_magic.kernels.plan_likelihood import Candidate, Comparison
from preflight_magic.kernels.seasonal_presence import without_pattern
from preflight_magic.kernels.trend_evidence import TREND_TEST, TrendEvidence, trend_evidence
from preflight_magic.model import (
    Evidence,
    HypothesisTest,
    Judgement,
    RemoveShift,
    RemoveTrend,
    Step,
    TimeSeries,
    Verdict,
)
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context, Rung
from preflight_magic.rungs.shares import capital, shares, told
from preflight_magic.stamps import stamp_text

METHOD = (
    "A change of level is dated where it explains most, then a stationary series around two levels is compared with "
    "all other plans: its evidence pays for the freedom of size and date. A trend is compared in the same way, with "
    "and without a unit root, so that a random walk is not taken for a line. A trend is removed as a line only where "
    "nothing is differenced; with one difference it is the mean of the changes, which stays in the forecast. Beside it "
    "stand a test of a trend that holds with and without a unit root, an interval for the date of the shift, and one "
    "change of slope: its date and size are reported, nothing is removed for it."
)
_CORNER_T = 3.5
"""Size of t from which a change of slope is told: the date is searched, so its square is held against the 1 % point of
the largest F, 12.35 with 15 % trimmed. Andrews (1993), table I, from memory."""

_WORDS: Mapping[Hashable, str] = {
    "shift": "a level shift",
    "no shift": "no level shift",
    "trend": "a trend",
    "no trend": "no trend",
    "second": "a second difference, which follows any slope",
}


def _trend(candidate: Candidate) -> str:
    if candidate.d + candidate.D >= 2:
        return "second"
    return "trend" if candidate.trend else "no trend"


def examine(series: TimeSeries, context: Context) -> Evidence:
    """Shares of the evidence for a shift and for a trend.

    Parameters
    ----------
    series : TimeSeries
    context : Context

    Returns
    -------
    Evidence
        Measures `shift_shares`, `trend_shares`, `differences` (of the leading plan), `shift_at` (stamp), `shift_text`,
        `shift_f`, `shift_t`, `trend_t`; where they can be computed `shift_first`, `shift_last` (interval of the date),
        `shift_size`, `corner` (last stamp before the slope changes), `slope_before`, `slope_after` (a step) and
        `corner_t`, all after a log where there is one. The robust test of a trend.
    """
    comparison = context.comparison
    if comparison is None:
        return Evidence(problem="no plan could be computed.")
    best = comparison.best
    measures: dict[str, object] = {
        "shift_shares": shares(comparison, lambda one: "no shift" if one.shift is None else "shift"),
        "trend_shares": shares(comparison, _trend),
        "differences": best.d + best.D,
        "trend_t": best.trend_t,
    }
    dated = comparison.dated
    if dated is not None:
        at = series.values.index[dated.position]
        kind = series.calendar.kind if series.calendar else None
        shifted = next(one for one in comparison.candidates if one.shift == dated.position)
        measures |= {
            "shift_at": at if isinstance(at, pd.Period | pd.Timestamp) else int(at),
            "shift_text": stamp_text(at, kind),
            "shift_f": dated.statistic,
            "shift_t": shifted.shift_t,
        }
    beside = _evidence(series, comparison)
    measures |= _told_measures(series, beside, best.d + best.D)
    return Evidence(measures, () if beside.test is None else (beside.test,))


def _evidence(series: TimeSeries, comparison: Comparison) -> TrendEvidence:
    """Test, interval and change of slope of the series after a log, without isolated outliers."""
    values = series.values.to_numpy(dtype=float, copy=True)
    values[list(comparison.outliers)] = np.nan
    values = np.log(values) if comparison.log else values
    period, pattern = comparison.period, comparison.best.pattern or comparison.best.D > 0
    if period > series.season[0]:
        values, period, pattern = without_pattern(values, period), 1, False
    dated, best = comparison.dated, comparison.best
    shifted = next((one for one in comparison.candidates if dated and one.shift == dated.position), best)
    words = ["log" if comparison.log else "as given"] + (["outliers left out"] if comparison.outliers else [])
    return trend_evidence(
        values,
        period,
        dated.position if dated else None,
        with_line=shifted.trend,
        with_pattern=pattern,
        series=", ".join(words),
    )


def _told_measures(series: TimeSeries, beside: TrendEvidence, differences: int) -> dict[str, object]:
    kind = series.calendar.kind if series.calendar else None
    index, found = series.values.index, dict[str, object]()
    if beside.interval is not None:
        found |= {
            "shift_first": stamp_text(index[beside.interval.first], kind),
            "shift_last": stamp_text(index[beside.interval.last], kind),
            "shift_size": beside.interval.size,
        }
    if beside.corner is not None:
        found |= {
            "corner": stamp_text(index[beside.corner.position], kind),
            "slope_before": beside.corner.before,
            "slope_after": beside.corner.after,
            "corner_t": beside.corner.t_differences if differences else beside.corner.t_levels,
        }
    return found


def judge(evidence: Evidence, thresholds: Thresholds) -> Judgement:
    """Remove a shift, and a line where nothing is differenced, when the leading plan has them."""
    if evidence.problem is not None:
        return Judgement("inconclusive", "not examined", capital(evidence.problem))
    found = evidence.measures
    shift_shares = cast("Mapping[Hashable, float]", found["shift_shares"])
    trend_shares = cast("Mapping[Hashable, float]", found["trend_shares"])
    differences = cast(int, found["differences"])
    shift, trend = next(iter(shift_shares)), next(iter(trend_shares))
    steps: list[Step] = []
    heads: list[str] = []
    if trend == "trend" and differences == 0:
        steps.append(RemoveTrend())
        heads.append("a linear trend")
    elif trend == "trend":
        heads.append("drift")
    if shift == "shift":
        steps.append(RemoveShift(cast("pd.Period", found["shift_at"])))
        heads.append(f"a level shift at {found['shift_text']}")
    even_trend = trend_shares[trend] < thresholds.even_share
    even = even_trend or shift_shares[shift] < thresholds.even_share
    reason = told(shift_shares, _WORDS) if len(shift_shares) > 1 else ""
    if shift == "shift":
        reason += f" The level changes at {found['shift_text']} ({_t(cast(float, found['shift_t']))}{_span(found)})."
    reason += f" {told(trend_shares, _WORDS)}" if trend != "second" or even_trend else ""
    if trend == "trend" and differences:
        reason += " It is the mean of the changes, so no step of its own is needed."
    if trend == "second":
        reason += " Two differences leave no trend to remove."
    if even:
        reason += " That is too even to call."
    reason += _beside(evidence.tests, trend == "trend", thresholds.significance) if trend != "second" else ""
    reason += _corner(found)
    headline = " and ".join(heads) or ("nothing to remove" if trend == "second" else "no trend, no level shift")
    verdict: Verdict = "inconclusive" if even else "transform" if steps else "clear"
    return Judgement(verdict, headline, reason.strip(), tuple(steps))


def _t(value: float) -> str:
    """t-value in a sentence; beyond a thousand, where only rounding is left unexplained, its size says nothing."""
    if abs(value) <= 1000.0:
        return f"t = {value:.1f}"
    return "t > 1000" if value > 0 else "t < -1000"


def _span(found: Mapping[str, object]) -> str:
    first, last = found.get("shift_first"), found.get("shift_last")
    return "" if first is None or last is None else f"; 95 % interval of the date {first} to {last}"


def _beside(tests: tuple[HypothesisTest, ...], trend: bool, significance: float) -> str:
    """What the robust test of a trend says; empty where it could not be carried."""
    test = next((one for one in tests if one.test == TREND_TEST), None)
    if test is None:
        return ""
    rejects = test.p_value < significance
    p = "p < 0.001" if test.p_value < 0.001 else f"p = {test.p_value:.3f}"
    agrees = "agrees with it" if rejects == trend else "differs from it"
    return (
        f" Beside it a test that holds with and without a unit root {_does(rejects)} the absence of a trend ({p}), "
        f"which {agrees}."
    )


def _does(rejects: bool) -> str:
    return "rejects" if rejects else "does not reject"


def _corner(found: Mapping[str, object]) -> str:
    """One change of slope, where it is large beside its standard error."""
    t = found.get("corner_t")
    if not isinstance(t, float) or not abs(t) > _CORNER_T:
        return ""
    return f" The slope seems to change after {found['corner']} ({_t(t)}); that is reported, not removed."


RUNG = Rung(
    name="shift and trend",
    question="Is there one change of level, and does the series follow a line?",
    after=("spread",),
    method=METHOD,
    sources=(
        "Andrews (1993), Tests for parameter instability and structural change with unknown change point, "
        "Econometrica 61, 821-856",
        "Kass and Raftery (1995), Bayes factors, Journal of the American Statistical Association 90, 773-795",
        "Harvey, Leybourne and Taylor (2007), A simple, robust and powerful test of the trend hypothesis, "
        "Journal of Econometrics 141, 1302-1330",
        "Bai (1997), Estimation of a change point in multiple regression models, "
        "Review of Economics and Statistics 79, 551-563",
        "Perron and Zhu (2005), Structural breaks with deterministic and stochastic trends, "
        "Journal of Econometrics 129, 65-119",
    ),
    examine=examine,
    judge=judge,
)
