"""What rungs 4 to 6 show beside the comparison of plans: computed on series, and told from evidence made by hand."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from preflight_magic.ladder import climb
from preflight_magic.model import Evidence, FillGaps, HypothesisTest, TimeSeries
from preflight_magic.policy import Settings, Thresholds
from preflight_magic.rungs import season, shift_trend, spread
from tests.sentences import assert_reads_well

INDEX = pd.period_range("2011-01", periods=144, freq="M")


def findings(values: np.ndarray, period: int = 12) -> dict:
    index = INDEX[: len(values)]
    series = TimeSeries("x", pd.Series(values, index), None, (period,), (FillGaps(period),))
    return dict(climb(series, Settings()).findings)


def fixed(seed: int = 3) -> np.ndarray:
    rng = np.random.default_rng(seed)
    return 100.0 + np.resize(6.0 * rng.standard_normal(12), 144) + 2.0 * rng.standard_normal(144)


def wandering(seed: int = 3) -> np.ndarray:
    return 100.0 + np.random.default_rng(seed).standard_normal((12, 12)).cumsum(axis=0).ravel()


def made(test: str, p: float, bound: str = "exact") -> HypothesisTest:
    return HypothesisTest(test, "", 1.0, p, bound, 100, 0, "ct")  # type: ignore[arg-type]


SEASON = {"asked": 12, "period": 12, "presence_p": 1e-9, "presence_standardised": 1e-9}
SPLIT = {"fixed": {"fixed": 0.9, "difference": 0.1}, "difference": {"difference": 0.9, "fixed": 0.1}}


@pytest.mark.parametrize(
    ("kind", "roots", "stability", "said"),
    [
        ("fixed", 0.001, 0.4, "HEGY rejects unit roots at the seasonal frequencies (p = 0.001)"),
        ("fixed", 0.0006, 0.4, "HEGY rejects unit roots at the seasonal frequencies (p < 0.001)"),
        ("fixed", 0.01, 0.4, "Canova-Hansen does not reject a fixed pattern (p = 0.400): they agree with it."),
        ("difference", 0.4, 0.01, "Canova-Hansen rejects a fixed pattern (p = 0.010): they agree with it."),
        ("fixed", 0.4, 0.01, "they differ from it."),
        ("difference", 0.01, 0.4, "they differ from it."),
        ("fixed", 0.01, 0.01, "both reject, as where some frequencies wander and others do not."),
        ("difference", 0.4, 0.4, "neither rejects, as in few cycles, where both have little power."),
    ],
)
def test_seasonal_tests_are_told_beside_the_likelihood(kind: str, roots: float, stability: float, said: str) -> None:
    tests = (made("HEGY", roots), made("Canova-Hansen", stability))
    evidence = Evidence(SEASON | {"season_shares": SPLIT[kind]}, tests)
    found = season.judge(evidence, Thresholds())
    assert said in found.reason
    assert_reads_well(found.reason)
    bare = season.judge(replace(evidence, tests=()), Thresholds())
    assert (found.verdict, found.steps, found.headline) == (bare.verdict, bare.steps, bare.headline)
    assert found.reason.startswith(bare.reason)


def test_a_bound_is_told_as_one() -> None:
    tests = (made("HEGY", 0.999, "at least"), made("Canova-Hansen", 0.01))
    found = season.judge(Evidence(SEASON | {"season_shares": SPLIT["difference"]}, tests), Thresholds())
    assert "HEGY does not reject unit roots at the seasonal frequencies (p at least 0.999)" in found.reason


def test_significance_changes_what_is_told_and_never_the_plan() -> None:
    tests = (made("HEGY", 0.03), made("Canova-Hansen", 0.4))
    strict, loose = (
        season.judge(Evidence(SEASON | {"season_shares": SPLIT["fixed"]}, tests), Thresholds(significance=level))
        for level in (0.01, 0.05)
    )
    assert (strict.verdict, strict.steps) == (loose.verdict, loose.steps)
    assert "HEGY does not reject" in strict.reason
    assert "HEGY rejects" in loose.reason


@pytest.mark.parametrize("kind", ["fixed", "wandering"])
def test_a_season_shows_its_tests_and_its_strength(kind: str) -> None:
    found = findings({"fixed": fixed, "wandering": wandering}[kind]())["season"]
    tests = {test.test: test for test in found.tests}
    assert set(tests) == {"F test of the pattern", "HEGY", "Canova-Hansen"}
    assert (tests["HEGY"].p_value < 0.05) == (kind == "fixed")
    assert (tests["Canova-Hansen"].p_value < 0.05) == (kind == "wandering")
    assert 0.0 <= found.measures["seasonal_strength"] <= 1.0
    assert len(found.measures["hegy_by_cycle"]) == len(found.measures["canova_hansen_by_cycle"]) == 6
    assert "they agree with it." in found.reason


def test_without_a_season_nothing_is_tested() -> None:
    found = findings(np.random.default_rng(1).standard_normal(60), 1)["season"]
    assert found.tests == ()
    assert "seasonal_strength" not in found.measures


def test_gaps_and_outliers_do_not_stop_the_tests() -> None:
    y = fixed()
    y[[30, 31, 90]] = np.nan
    y[60] += 60.0
    found = findings(y)
    assert {test.test for test in found["season"].tests} >= {"HEGY", "Canova-Hansen"}
    assert "filled along the mean pattern" in str(found["season"].tests[-1].options["series"])
    assert len(found["shift and trend"].tests) == 1


TRENDS = {"shift_shares": {"no shift": 1.0}, "differences": 0, "trend_t": 0.0}


@pytest.mark.parametrize(
    ("shares", "p", "said"),
    [
        ({"trend": 0.9, "no trend": 0.1}, 0.01, "rejects the absence of a trend (p = 0.010), which agrees with it."),
        ({"no trend": 0.9, "trend": 0.1}, 0.3, "does not reject the absence of a trend (p = 0.300), which agrees"),
        ({"no trend": 0.9, "trend": 0.1}, 1e-5, "rejects the absence of a trend (p < 0.001), which differs from it."),
        ({"trend": 0.9, "no trend": 0.1}, 0.3, "which differs from it."),
    ],
)
def test_the_robust_trend_test_is_told(shares: dict, p: float, said: str) -> None:
    tests = (made("Harvey-Leybourne-Taylor trend test", p),)
    found = shift_trend.judge(Evidence(TRENDS | {"trend_shares": shares}, tests), Thresholds())
    assert said in found.reason
    assert_reads_well(found.reason)


def test_the_interval_of_the_date_is_told() -> None:
    measures = TRENDS | {
        "shift_shares": {"shift": 0.95, "no shift": 0.05},
        "trend_shares": {"no trend": 1.0},
        "shift_at": pd.Period("2019-04", "M"),
        "shift_text": "2019-04",
        "shift_t": 9.0,
        "shift_first": "2019-02",
        "shift_last": "2019-06",
    }
    found = shift_trend.judge(Evidence(measures), Thresholds())
    assert "at 2019-04 (t = 9.0; 95 % interval of the date 2019-02 to 2019-06)." in found.reason
    assert_reads_well(found.reason)


@pytest.mark.parametrize(("t", "told"), [(3.4, False), (3.6, True), (-12.0, True), (math.nan, False)])
def test_a_change_of_slope_is_reported_where_it_is_large(t: float, told: bool) -> None:
    measures = TRENDS | {"trend_shares": {"trend": 1.0}, "corner": "2015-07", "corner_t": t}
    found = shift_trend.judge(Evidence(measures), Thresholds())
    assert ("The slope seems to change after 2015-07" in found.reason) == told
    assert_reads_well(found.reason)


def test_a_shift_and_a_corner_are_found_in_a_series() -> None:
    rng = np.random.default_rng(8)
    time = np.arange(144.0)
    shifted = findings(100.0 + 8.0 * (time >= 60) + rng.standard_normal(144), 1)["shift and trend"]
    assert shifted.measures["shift_first"] <= "2016-01" <= shifted.measures["shift_last"]
    assert shifted.measures["shift_size"] == pytest.approx(8.0, abs=0.6)
    assert "95 % interval of the date" in shifted.reason
    bent = findings(100.0 + 0.05 * time + 0.4 * np.maximum(time - 72.0, 0.0) + rng.standard_normal(144), 1)
    measures = bent["shift and trend"].measures
    assert measures["slope_before"] == pytest.approx(0.05, abs=0.02)
    assert measures["slope_after"] == pytest.approx(0.45, abs=0.02)
    assert abs((pd.Period(measures["corner"], "M") - INDEX[72]).n) <= 3


@pytest.mark.parametrize(
    ("measures", "said"),
    [
        (
            {"box_cox": -0.004, "box_cox_lower": -0.104, "box_cox_upper": 0.09, "guerrero": 0.0921},
            "The Box-Cox exponent is 0.00 (-0.10 to 0.09); Guerrero's is 0.09.",
        ),
        ({"box_cox": 0.5, "box_cox_lower": 0.2, "box_cox_upper": 0.8}, "The Box-Cox exponent is 0.50 (0.20 to 0.80)."),
        ({"guerrero": 0.5}, "more than 7 speaks for it."),
        ({}, "more than 7 speaks for it."),
    ],
)
def test_exponents_are_told(measures: dict, said: str) -> None:
    found = spread.judge(Evidence({"log_gain": 90.0, "smallest": 1.0} | measures), Thresholds())
    assert found.reason.endswith(said)
    assert_reads_well(found.reason)


def test_a_series_shows_its_exponents() -> None:
    rng = np.random.default_rng(2)
    level = np.exp(0.01 * np.arange(144) + np.resize(0.2 * rng.standard_normal(12), 144))
    measures = findings(level * np.exp(0.1 * rng.standard_normal(144)))["spread"].measures
    assert measures["box_cox_lower"] <= 0.0 <= measures["box_cox_upper"]
    assert measures["box_cox_upper"] < 1.0
    assert -1.0 <= measures["guerrero"] <= 2.0
    negative = findings(rng.standard_normal(144))["spread"].measures
    assert "box_cox" not in negative
    assert "guerrero" not in negative
