"""Rung 7: how many ordinary differences?"""

from __future__ import annotations

import math
from collections.abc import Hashable, Mapping
from typing import cast

import numpy as np
from numpy.typing import NDArray

from preflight_magic.kernels.restricted_likelihood import difference, pattern_columns
from preflight_magic.kernels.unit_root import adf, kpss
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
from preflight_magic.rungs.shares import capital, shares, told

METHOD = (
    "Plans with no, one and two differences are models of the same contrasts of the data, so their restricted "
    "likelihoods can be compared, integrated over small ARMA models. The likelihood decides. ADF (null: a unit root) "
    "and KPSS (null: stationary) are shown beside it: with a moving average near -1 ADF rejects too often, with strong "
    "dependence KPSS does, and neither can tell a root of 0.95 from one in a hundred values."
)

_WORDS: Mapping[Hashable, str] = {0: "no difference", 1: "one difference", 2: "two differences"}
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
        Measures `d_shares` and `n`; ADF and KPSS with constant, and with constant and line, of the series after log
        and season, and once more of its first difference where the leading plan takes one.
    """
    comparison = context.comparison
    if comparison is None:
        return Evidence(problem="no plan could be computed.")
    measures = {"d_shares": shares(comparison, lambda one: one.d), "n": comparison.count}
    values, told_series = _subject(series, context)
    tests = [*_tests(values, told_series)]
    if comparison.best.d:
        tests += _tests(difference(values, 1), f"{told_series}, differenced once")
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


def _tests(values: NDArray[np.float64], told_series: str) -> list[HypothesisTest]:
    found: list[HypothesisTest] = []
    for terms in ("c", "ct"):
        one = adf(values, terms)
        if one is not None:
            found.append(
                HypothesisTest(
                    test="ADF",
                    null="a unit root",
                    statistic=one.statistic,
                    p_value=one.p_value,
                    p_bound=one.p_bound,
                    nobs=one.nobs,
                    lags=one.lags,
                    terms=one.terms,
                    critical_values=one.critical_values,
                    options={"series": told_series, "lag choice": "AIC"},
                )
            )
        two = kpss(values, terms)
        if two is not None:
            found.append(
                HypothesisTest(
                    test="KPSS",
                    null="stationary" if terms == "c" else "stationary about a line",
                    statistic=two.statistic,
                    p_value=two.p_value,
                    p_bound="exact",
                    nobs=two.nobs,
                    lags=two.bandwidth,
                    terms=two.terms,
                    options={"series": told_series, "kernel": "Bartlett"},
                )
            )
    return found


def judge(evidence: Evidence, thresholds: Thresholds) -> Judgement:
    """As many differences as the leading plan has."""
    if evidence.problem is not None:
        return Judgement("inconclusive", "not examined", capital(evidence.problem))
    split = cast("Mapping[Hashable, float]", evidence.measures["d_shares"])
    d = cast(int, next(iter(split)))
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
    return Judgement(verdict, _HEADLINES[d], f"{reason} {beside}".strip(), steps)


def _beside(tests: tuple[HypothesisTest, ...], d: int, significance: float) -> str:
    """What ADF and KPSS say of the level, with a line among the terms, and why they may differ from the likelihood."""
    level = {test.test: test for test in tests if test.terms == "ct" and "once" not in str(test.options["series"])}
    adf_test, kpss_test = level.get("ADF"), level.get("KPSS")
    if adf_test is None or kpss_test is None or math.isnan(adf_test.p_value):
        return ""
    rejects_root, rejects_stationary = adf_test.p_value < significance, kpss_test.p_value < significance
    text = (
        f"Beside it, with constant and line, ADF {_does(rejects_root)} a unit root ({_p(adf_test)}) and KPSS "
        f"{_does(rejects_stationary)} stationarity ({_p(kpss_test)})"
    )
    if rejects_root == rejects_stationary:
        why = (
            "both reject, as with a break, a moving average near -1 or strong dependence"
            if rejects_root
            else "neither rejects, as in short samples, where both have little power"
        )
        return f"{text}: {why}."
    if rejects_root == (d == 0):
        return f"{text}: they agree with it."
    why = "a moving average near -1, where ADF rejects too often" if d else "a break, or the low power of ADF near one"
    return f"{text}: they differ from it; known reasons are {why}."


def _does(rejects: bool) -> str:
    return "rejects" if rejects else "does not reject"


def _p(test: HypothesisTest) -> str:
    bound = {"exact": "", "at most": "at most ", "at least": "at least "}[test.p_bound]
    return "p < 0.001" if test.p_value < 0.001 else f"p = {bound}{test.p_value:.3f}"


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
        "Kwiatkowski, Phillips, Schmidt and Shin (1992), Testing the null hypothesis of stationarity, "
        "Journal of Econometrics 54, 159-178",
    ),
    examine=examine,
    judge=judge,
)
