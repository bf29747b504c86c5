"""Rung 5: is there a level shift, and a trend?"""

from __future__ import annotations

from collections.abc import Hashable, Mapping
from typing import cast

import pandas as pd

from preflight_magic.kernels.plan_likelihood import Candidate
from preflight_magic.model import Evidence, Judgement, RemoveShift, RemoveTrend, Step, TimeSeries, Verdict
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context, Rung
from preflight_magic.rungs.shares import capital, shares, told
from preflight_magic.stamps import stamp_text

METHOD = (
    "A change of level is dated where it explains most, then a stationary series around two levels is compared with "
    "all other plans: its evidence pays for the freedom of size and date. A trend is compared in the same way, with "
    "and without a unit root, so that a random walk is not taken for a line. A trend is removed as a line only where "
    "nothing is differenced; with one difference it is the mean of the changes, which stays in the forecast."
)

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
        `shift_f`, `shift_t`, `trend_t`.
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
    return Evidence(measures)


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
        reason += f" The level changes at {found['shift_text']} ({_t(cast(float, found['shift_t']))})."
    reason += f" {told(trend_shares, _WORDS)}" if trend != "second" or even_trend else ""
    if trend == "trend" and differences:
        reason += " It is the mean of the changes, so no step of its own is needed."
    if trend == "second":
        reason += " Two differences leave no trend to remove."
    if even:
        reason += " That is too even to call."
    headline = " and ".join(heads) or ("nothing to remove" if trend == "second" else "no trend, no level shift")
    verdict: Verdict = "inconclusive" if even else "transform" if steps else "clear"
    return Judgement(verdict, headline, reason.strip(), tuple(steps))


def _t(value: float) -> str:
    """t-value in a sentence; beyond a thousand, where only rounding is left unexplained, its size says nothing."""
    if abs(value) <= 1000.0:
        return f"t = {value:.1f}"
    return "t > 1000" if value > 0 else "t < -1000"


RUNG = Rung(
    name="shift and trend",
    question="Is there one change of level, and does the series follow a line?",
    after=("spread",),
    method=METHOD,
    sources=(
        "Andrews (1993), Tests for parameter instability and structural change with unknown change point, "
        "Econometrica 61, 821-856",
        "Kass and Raftery (1995), Bayes factors, Journal of the American Statistical Association 90, 773-795",
    ),
    examine=examine,
    judge=judge,
)
