"""How shares for each order of differencing are judged, and what is said of the tests beside them."""

from __future__ import annotations

import itertools

import numpy as np
import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic.model import Difference, Evidence, HypothesisTest, TimeSeries
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context
from preflight_magic.rungs.unit_root import RUNG
from tests.sentences import assert_reads_well

BOUNDS = Thresholds(significance=0.05, even_share=0.7)
ONE = Difference(1)


def beside(adf, kpss, terms="ct", series="as given", bound="exact"):
    def test(name, null, p):
        return HypothesisTest(name, null, -1.0, p, bound, 90, 3, terms, options={"series": series})

    return (test("ADF", "a unit root", adf), test("KPSS", "stationary", kpss))


def evidence(split, tests=()):
    return Evidence({"d_shares": split, "n": 96}, tests)


@pytest.mark.parametrize(
    ("split", "verdict", "steps", "headline"),
    [
        ({0: 0.97, 1: 0.03}, "clear", (), "no difference needed"),
        ({0: 0.6, 1: 0.4}, "inconclusive", (), "no difference needed"),
        ({1: 0.9, 0: 0.08, 2: 0.02}, "transform", (ONE,), "one difference"),
        ({1: 0.69, 0: 0.31}, "inconclusive", (ONE,), "one difference"),
        ({1: 0.3, 0: 0.7}, "inconclusive", (ONE,), "one difference"),
        ({2: 0.8, 1: 0.2}, "transform", (ONE, ONE), "two differences"),
        ({2: 1.0}, "transform", (ONE, ONE), "two differences"),
    ],
)
def test_judgement(split, verdict, steps, headline):
    for tests in ((), beside(0.01, 0.3)):
        found = RUNG.judge(evidence(split, tests), BOUNDS)
        assert (found.verdict, found.steps, found.headline) == (verdict, steps, headline)
        assert ("too even to call" in found.reason) == (verdict == "inconclusive")
        assert_reads_well(found.reason)


@pytest.mark.parametrize(
    ("adf", "kpss", "d", "said"),
    [
        (0.01, 0.3, 0, "they agree with it"),
        (0.3, 0.01, 1, "they agree with it"),
        (0.3, 0.01, 0, "a break, or the low power of ADF near one"),
        (0.01, 0.3, 1, "a moving average near -1, where ADF rejects too often"),
        (0.3, 0.3, 0, "neither rejects"),
        (0.3, 0.3, 1, "neither rejects"),
        (0.01, 0.01, 0, "both reject"),
        (0.01, 0.01, 2, "both reject"),
    ],
)
def test_tests_beside_are_compared_with_the_likelihood(adf, kpss, d, said):
    other = 1 if d != 1 else 0
    found = RUNG.judge(evidence({d: 0.95, other: 0.05}, beside(adf, kpss)), BOUNDS)
    assert said in found.reason
    assert ("ADF rejects" in found.reason) == (adf < 0.05)
    assert ("KPSS rejects" in found.reason) == (kpss < 0.05)
    assert "accept" not in found.reason
    assert_reads_well(found.reason)


@pytest.mark.parametrize(("adf", "kpss", "d"), list(itertools.product([0.001, 0.04, 0.2], [0.01, 0.06], [0, 1])))
def test_significance_changes_what_is_said_and_never_the_plan(adf, kpss, d):
    given = evidence({d: 0.9, 1 - d: 0.1}, beside(adf, kpss))
    found = [RUNG.judge(given, Thresholds(significance=size)) for size in (0.005, 0.05, 0.3)]
    assert len({(one.verdict, one.steps, one.headline) for one in found}) == 1
    if adf == 0.2:
        assert len({one.reason for one in found}) > 1


def test_only_the_level_with_a_line_is_told():
    once = beside(0.001, 0.9, series="as given, differenced once")
    alone = RUNG.judge(evidence({1: 1.0}, (*beside(0.5, 0.5, terms="c"), *once)), BOUNDS)
    assert "Beside it" not in alone.reason
    both = RUNG.judge(evidence({1: 1.0}, (*beside(0.4, 0.02), *once)), BOUNDS)
    assert "p = 0.400" in both.reason
    assert "p = 0.020" in both.reason


def test_bounds_of_p_values_are_told():
    found = RUNG.judge(evidence({0: 1.0}, beside(0.01, 0.1, bound="at least")), BOUNDS)
    assert "p at least 0.100" in found.reason


def test_examination_shows_tests_that_can_be_repeated():
    values = pd.Series(
        np.cumsum(np.random.default_rng(1).standard_normal(80)), index=pd.period_range("2015-01", periods=80, freq="M")
    )
    from preflight_magic.kernels.plan_likelihood import compare
    from preflight_magic.ladder import prior_of

    comparison = compare(values.to_numpy(), 1, prior_of(BOUNDS))
    found = RUNG.examine(TimeSeries("x", values, None), Context(comparison=comparison))
    assert {(one.test, one.terms) for one in found.tests} >= {
        ("ADF", "c"),
        ("ADF", "ct"),
        ("KPSS", "c"),
        ("KPSS", "ct"),
    }
    assert {one.options["series"] for one in found.tests} == {"as given", "as given, differenced once"}
    for one in found.tests:
        assert 0 <= one.p_value <= 1
        assert np.isfinite(one.statistic)
        assert one.lags is not None
    assert sum(found.measures["d_shares"].values()) == pytest.approx(1)


def test_without_a_comparison():
    found = RUNG.judge(RUNG.examine(TimeSeries("x", pd.Series(np.arange(9.0)), None), Context()), BOUNDS)
    assert (found.verdict, found.steps) == ("inconclusive", ())
    assert_reads_well(found.reason)


def test_what_is_done_about_outliers_is_said() -> None:
    values = pd.Series(
        np.random.default_rng(12).normal(size=90), index=pd.period_range("2010-01", periods=90, freq="M")
    )
    values.iloc[40] += 12.0
    values.iloc[70] -= 15.0
    report = pf.check(values.rename("freight"), season=1, cache=False, progress=False)["freight"]
    finding = report.findings["unit root"]
    assert finding.measures["outliers_at"] == ("2013-05", "2015-11")
    said = "2 isolated outliers were left out of the comparison of plans and stay in the data: 2013-05, 2015-11."
    assert finding.reason.endswith(said)
    assert report.transformed.loc["2013-05"] == values.loc["2013-05"]
