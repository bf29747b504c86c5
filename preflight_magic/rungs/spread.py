"""Rung 4: does the spread grow with the level?"""

from __future__ import annotations

import math
from collections.abc import Mapping

import numpy as np

from preflight_magic.kernels.box_cox import box_cox
from preflight_magic.kernels.guerrero import guerrero
from preflight_magic.model import Evidence, Judgement, Log, TimeSeries
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context, Rung
from preflight_magic.rungs.shares import capital

METHOD = (
    "The series and its logarithm are each described by a line, a seasonal pattern and three lags, and their "
    "likelihoods are compared with the Jacobian of the logarithm, so that both speak of the original values. A log "
    "needs clear evidence, since it changes what the forecast minimises. Beside it stand the Box-Cox exponent of the "
    "same likelihood with its interval, and Guerrero's, which compares the spread of the years with their level."
)


def examine(series: TimeSeries, context: Context) -> Evidence:
    """Gain of the log.

    Parameters
    ----------
    series : TimeSeries
    context : Context

    Returns
    -------
    Evidence
        Measures `log_gain` (fall of -2 log likelihood), `smallest` value; where all values are positive and enough
        `box_cox`, `box_cox_lower`, `box_cox_upper` (exponent and its 95 % interval) and `guerrero` (exponent).
    """
    if context.comparison is None:
        return Evidence(problem="no plan could be computed, so the log could not be compared either.")
    values = series.values.to_numpy(dtype=float)
    # of several seasons the shortest: it tells the spread as well, and costs a tenth
    period = min(context.comparison.period, series.season[0])
    measures: dict[str, object] = {"log_gain": context.comparison.log_gain, "smallest": float(np.nanmin(values))}
    likely, steady = box_cox(values, period), guerrero(values, period)
    if likely is not None:
        measures |= {"box_cox": likely.exponent, "box_cox_lower": likely.lower, "box_cox_upper": likely.upper}
    if steady is not None:
        measures["guerrero"] = steady
    return Evidence(measures)


def judge(evidence: Evidence, thresholds: Thresholds) -> Judgement:
    """A log where its gain passes the margin; inconclusive close to it."""
    if evidence.problem is not None:
        return Judgement("inconclusive", "spread not examined", capital(evidence.problem))
    gain, smallest = evidence.measures["log_gain"], evidence.measures["smallest"]
    assert isinstance(gain, float)
    assert isinstance(smallest, float)
    margin = thresholds.log_margin
    if smallest <= 0:
        seen = "zero" if smallest == 0 else "negative"
        return Judgement("clear", "as given", f"The smallest value is {seen}, so no logarithm can be taken.")
    if math.isnan(gain):
        return Judgement("clear", "as given", "Too few values, or too regular ones, to tell whether a log would help.")
    told = f"the log {'lowers' if gain >= 0 else 'raises'} -2 log likelihood by {abs(gain):.1f}"
    even = abs(gain - margin) < thresholds.log_even
    if gain > margin:
        headline = "the spread grows with the level"
        reason = f"Jacobian included, {told}; more than {margin:g} speaks for it."
        reason = _even(reason, even) + _exponents(evidence.measures)
        return Judgement("inconclusive" if even else "transform", headline, reason, (Log(),))
    headline = "the spread does not follow the level"
    reason = f"Jacobian included, {told}; a log needs more than {margin:g}."
    reason = _even(reason, even) + _exponents(evidence.measures)
    return Judgement("inconclusive" if even else "clear", headline, reason)


def _exponents(measures: Mapping[str, object]) -> str:
    """Box-Cox and Guerrero exponents in a few words; empty where there are none."""
    likely, lower, upper = (measures.get(name) for name in ("box_cox", "box_cox_lower", "box_cox_upper"))
    steady = measures.get("guerrero")
    if not (isinstance(likely, float) and isinstance(lower, float) and isinstance(upper, float)):
        return ""
    beside = f"; Guerrero's is {_number(steady)}" if isinstance(steady, float) else ""
    return f" The Box-Cox exponent is {_number(likely)} ({_number(lower)} to {_number(upper)}){beside}."


def _number(value: float) -> str:
    return f"{value + 0.0:.2f}".replace("-0.00", "0.00")


def _even(reason: str, even: bool) -> str:
    return f"{reason} That is too close to call: compare forecasts with and without the log." if even else reason


RUNG = Rung(
    name="spread",
    question="Does the spread grow with the level?",
    after=("calendar length",),
    method=METHOD,
    sources=(
        "Box and Cox (1964), An analysis of transformations, Journal of the Royal Statistical Society B 26, 211-252",
        "Guerrero (1993), Time-series analysis supported by power transformations, Journal of Forecasting 12, 37-48",
    ),
    examine=examine,
    judge=judge,
)
