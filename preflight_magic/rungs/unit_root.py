"""Rung 7: how many ordinary differences?"""

from __future__ import annotations

import math
from collections.abc import Hashable, Mapping
from typing import cast

import numpy as np
from numpy.typing import NDArray

from preflight_magic.kernels.restricted_likelihood import difference, pattern_columns
from preflight_magic.kernels.unit_root_evidence import level_tests, root_tests
from preflight_magic.model import (
    Difference,
    Evidence,
    HypothesisTest,
    Judgement,
    Log,
    RemovePattern,
    TimeSeries,
    Verdict,
)
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context, Rung
from preflight_magic.rungs.shares import capital, does, p_text, shares, told
from preflight_magic.stamps import stamp_text

METHOD = (
    "Plans with no, one and two differences are models of the same contrasts of the data, so their restricted "
    "likelihoods can be compared, integrated over small ARMA models. The likelihood decides. ADF, DF-GLS, "
    "Phillips-Perron and Zivot-Andrews (null: a unit root) and KPSS (null: stationary) are shown beside it, each "
    "resting on an assumption. With a moving average near -1 Phillips-Perron rejects a true unit root far too often; "
    "the lags that the modified AIC gives ADF, DF-GLS and Zivot-Andrews mend most of it, and cost power: in a hundred "
    "values of white noise ADF misses one case in four (by simulation). With strong dependence KPSS rejects too often. "
    "A break looks like a unit root to all but Zivot-Andrews. None can tell a root of 0.95 from one in a hundred "
    "values. The union of rejections asks DF-GLS and ADF, with and without a line, at stretched critical values."
)

_WORDS: Mapping[Hashable, str] = {0: "no difference", 1: "one difference", 2: "two differences"}
# Known reasons why a test differs from ADF: where the other rejects, and where it does not.
_OTHERS: Mapping[str, tuple[str, str]] = {
    "DF-GLS": (
        "it has more power where the series starts near its line",
        "it has little power where the series starts far off its line",
    ),
    "Phillips-Perron": (
        "with a moving average near -1 it rejects too often, and ADF with many lags too seldom",
        "where changes follow each other it rejects too seldom",
    ),
    "Zivot-Andrews": (
        "a break, dated {at}, looks like a unit root to tests that know none",
        "its search for a break costs power where there is none",
    ),
    "union of rejections": (
        "it also counts tests without a line and tests for a start near or far from it",
        "it asks more of each of its four tests",
    ),
}
_HEADLINES = {0: "no difference needed", 1: "one difference", 2: "two differences"}


def examine(series: TimeSeries, context: Context) -> Evidence:
    """Shares of the evidence for each order of differencing, and the tests beside it.

    Parameters
    ----------
    series : TimeSeries
    context : Context

    Returns
    -------
    Evidence
        Measures `d_shares`, `n` and `outliers_at` (text: values that the comparison left out); ADF, KPSS, DF-GLS and
        Phillips-Perron with constant, and with constant and line, of the series after log and season, and once more
        of its first difference where the leading plan takes one; Zivot-Andrews and the union of rejections of the
        former.
    """
    comparison = context.comparison
    if comparison is None:
        return Evidence(problem="no plan could be computed.")
    kind = series.calendar.kind if series.calendar else None
    measures = {
        "d_shares": shares(comparison, lambda one: one.d),
        "n": comparison.count,
        "outliers_at": tuple(stamp_text(series.values.index[at], kind) for at in sorted(comparison.outliers)),
    }
    values, told_series = _subject(series, context)
    lost = len(series.values) - len(values)  # at the start, to seasonal differences
    tests = level_tests(values, told_series, lambda at: stamp_text(series.values.index[lost + at]))
    if comparison.best.d:
        tests += root_tests(difference(values, 1), f"{told_series}, differenced once")
    return Evidence(measures, tuple(tests))


def _subject(series: TimeSeries, context: Context) -> tuple[NDArray[np.float64], str]:
    """What the tests look at: the series after log and season, gaps on a straight line."""
    values = series.values.to_numpy(dtype=float)
    words = ["as given"]
    if Log() in context.steps:
        values, words = np.log(values), ["log"]
    seen = np.isfinite(values)
    if not seen.all():
        values = np.interp(np.arange(len(values)), np.flatnonzero(seen), values[seen])
        words.append("gaps interpolated")
    for step in context.steps:
        match step:
            case Difference(lag=lag):
                values = difference(values, lag)
                words.append(f"differenced at lag {lag}")
            case RemovePattern(period=period):
                columns = np.column_stack([np.ones(len(values)), pattern_columns(len(values), period)])
                effects = np.linalg.lstsq(columns, values, rcond=None)[0]
                values = values - columns[:, 1:] @ effects[1:]
                words.append(f"mean pattern of {period} removed")
            case _:
                pass
    return values, ", ".join(words)


def judge(evidence: Evidence, thresholds: Thresholds) -> Judgement:
    """As many differences as the leading plan has."""
    if evidence.problem is not None:
        return Judgement("inconclusive", "not examined", capital(evidence.problem))
    split = cast("Mapping[Hashable, float]", evidence.measures["d_shares"])
    found, d = evidence.measures, cast(int, next(iter(split)))
    even = split[d] < thresholds.even_share
    reason = told(split, _WORDS)
    if even:
        reason += (
            " That is too even to call: near a unit root no method can tell on so few values, and both forecasts "
            "deserve a look."
        )
    beside = _beside(evidence.tests, d, thresholds.significance)
    steps = tuple(Difference(1) for _ in range(d))
    verdict: Verdict = "inconclusive" if even else "transform" if d else "clear"
    return Judgement(verdict, _HEADLINES[d], f"{reason} {beside}".strip() + _outliers(found), steps)


def _outliers(found: Mapping[str, object]) -> str:
    """What is done about isolated outliers; empty where there are none."""
    stamps = cast("tuple[str, ...]", found.get("outliers_at", ()))
    if not stamps:
        return ""
    shown = ", ".join(stamps[:3]) + (f" and {len(stamps) - 3} more" if len(stamps) > 3 else "")
    what = "One isolated outlier was" if len(stamps) == 1 else f"{len(stamps)} isolated outliers were"
    stay = "stays" if len(stamps) == 1 else "stay"
    return f" {what} left out of the comparison of plans and {stay} in the data: {shown}."


def _beside(tests: tuple[HypothesisTest, ...], d: int, significance: float) -> str:
    """What the tests say of the level, with a line among the terms, and why they may differ from the likelihood."""
    of_level = [test for test in tests if "once" not in str(test.options["series"])]
    level = {test.test: test for test in of_level if test.terms == "ct"}
    adf_test, kpss_test = level.get("ADF"), level.get("KPSS")
    if adf_test is None or kpss_test is None or math.isnan(adf_test.p_value):
        return ""
    rejects_root, rejects_stationary = adf_test.p_value < significance, kpss_test.p_value < significance
    text = (
        f"Beside it, with constant and line, ADF {does(rejects_root)} a unit root ({p_text(adf_test)}) and KPSS "
        f"{does(rejects_stationary)} stationarity ({p_text(kpss_test)})"
    )
    if rejects_root == rejects_stationary:
        why = (
            "both reject, as with a break, a moving average near -1 or strong dependence"
            if rejects_root
            else "neither rejects, as in short samples, where both have little power"
        )
    elif rejects_root == (d == 0):
        why = "they agree with it"
    else:
        known = (
            "a moving average near -1, where ADF rejects too often"
            if d
            else "a break, or the low power of ADF near one and with many lags"
        )
        why = f"they differ from it; known reasons are {known}"
    others = [level[name] for name in _OTHERS if name in level]
    alone = next((test for test in of_level if test.test == "ADF" and test.terms == "c"), None)
    return f"{text}: {why}. {_others(others, alone, rejects_root, significance)}".strip()


def _others(
    others: list[HypothesisTest], without_line: HypothesisTest | None, rejects: bool, significance: float
) -> str:
    """Which of the other tests of a unit root differ from ADF with a line, and the known reason."""
    if not others:
        return ""
    differ = [test for test in others if (test.p_value < significance) != rejects]
    clauses = [
        f"{test.test} {does(not rejects)} ({p_text(test)}): {_OTHERS[test.test][rejects].format(**_break(test))}"
        for test in differ
    ]
    if without_line is not None and (without_line.p_value < significance) != rejects:
        why = "a trend that a constant cannot follow looks like a root" if rejects else "a line not needed costs power"
        clauses.append(f"ADF with a constant alone {does(not rejects)} ({p_text(without_line)}): {why}")
    if not clauses:
        return f"The other tests of a unit root ({', '.join(test.test for test in others)}) say the same as ADF."
    return f"Other tests of a unit root differ from ADF. {capital('; '.join(clauses))}."


def _break(test: HypothesisTest) -> dict[str, object]:
    return {"at": test.options.get("break", "a date of its own")}


RUNG = Rung(
    name="unit root",
    question="How many ordinary differences does the series need?",
    after=("season",),
    method=METHOD,
    sources=(
        "Harville (1974), Bayesian inference for variance components using only error contrasts, "
        "Biometrika 61, 383-385",
        "Said and Dickey (1984), Testing for unit roots in autoregressive-moving average models of unknown order, "
        "Biometrika 71, 599-607",
        "MacKinnon (1994), Approximate asymptotic distribution functions for unit-root and cointegration tests, "
        "Journal of Business and Economic Statistics 12, 167-176",
        "Elliott, Rothenberg and Stock (1996), Efficient tests for an autoregressive unit root, Econometrica 64, "
        "813-836",
        "Ng and Perron (2001), Lag length selection and the construction of unit root tests with good size and power, "
        "Econometrica 69, 1519-1554",
        "Perron and Qu (2007), A simple modification to improve the finite sample properties of Ng and Perron's unit "
        "root tests, Economics Letters 94, 12-19",
        "Phillips and Perron (1988), Testing for a unit root in time series regression, Biometrika 75, 335-346",
        "Schwert (1989), Tests for unit roots: a Monte Carlo investigation, Journal of Business and Economic "
        "Statistics 7, 147-159",
        "Zivot and Andrews (1992), Further evidence on the great crash, the oil-price shock, and the unit-root "
        "hypothesis, Journal of Business and Economic Statistics 10, 251-270",
        "Harvey, Leybourne and Taylor (2009), Unit root testing in practice: dealing with uncertainty over the trend "
        "and initial condition, Econometric Theory 25, 587-636",
        "Kwiatkowski, Phillips, Schmidt and Shin (1992), Testing the null hypothesis of stationarity, "
        "Journal of Econometrics 54, 159-178",
    ),
    examine=examine,
    judge=judge,
)
