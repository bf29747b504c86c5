"""What a person holds of one series."""

from __future__ import annotations

import pickle

import numpy as np
import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic.model import Finding
from tests.sentences import assert_reads_well
from tests.small_table import BAD, small_table

FIRST = ["time index", "values", "spread", "shift and trend", "season", "unit root"]


@pytest.fixture(scope="module")
def report():
    return pf.check(pf.demo.ferry_line()[["berth_power", "fuel_price"]], progress=False)


@pytest.fixture(scope="module")
def bad():
    return pf.check(small_table(bad=True), progress=False)[BAD]


def test_findings_in_the_order_of_the_ladder(report):
    for one in report:
        findings = one.findings
        assert [name for name in findings if name in FIRST] == FIRST
        for name, finding in findings.items():
            assert isinstance(finding, Finding)
            assert finding.rung == name
            assert finding.question.endswith("?")
            assert finding.verdict in ("clear", "transform", "inconclusive", "infeasible")
            assert_reads_well(finding.reason)
            assert_reads_well(finding.headline, whole=False)


def test_plan_is_the_sum_of_what_the_rungs_propose(report):
    for one in report:
        steps = [step for finding in one.findings.values() for step in finding.steps]
        assert one.plan == one.recommended == pf.Plan(one.plan.repairs, tuple(steps))


def test_leading_alternative_is_the_recommended_plan(report):
    for one in report:
        text, below, steps = one.alternatives[0]
        assert (text, below, steps) == (str(one.plan), 0.0, one.plan.steps)
        odds = [below for _, below, _ in one.alternatives]
        assert odds == sorted(odds)
        assert len({steps for *_, steps in one.alternatives}) == len(one.alternatives)


def test_series_and_transformed_are_copies(report):
    one = report["fuel_price"]
    before = one.series.copy()
    for mine in (one.series, one.transformed):
        mine.iloc[0] = -99.0
    one.findings.clear()
    pd.testing.assert_series_equal(one.series, before)
    assert one.transformed.iloc[0] != -99.0
    assert one.findings


def test_correlograms(report):
    one = report["fuel_price"]
    before, after, band = one.correlograms(20)
    assert len(before) == len(after) == 20
    assert before[0] > 0.8
    assert abs(after[0]) < 0.3
    assert band == pytest.approx(1.96 / np.sqrt(143))


@pytest.mark.parametrize(
    ("n", "season", "horizon", "expected"),
    [(40, 1, None, 6), (20, 1, None, 5), (60, 12, None, 12), (36, 12, None, 9), (40, 1, 17, 17)],
)
def test_horizon_is_one_season_within_bounds(n, season, horizon, expected):
    y = small_table(n=n)["cargo"]
    assert pf.check(y, season=season, horizon=horizon, progress=False)["cargo"].horizon == expected


def test_words_about_the_calendar(report):
    assert report["berth_power"].noun == "month"
    assert report["berth_power"].season == (12,)
    assert report["berth_power"].name == "berth_power"


def test_unknown_form_of_code(report):
    with pytest.raises(pf.CheckError, match="form 'poetry'"):
        report["fuel_price"].code("poetry")


def test_series_that_cannot_be_checked(bad):
    assert bad.verdict == "infeasible"
    assert bad.answer == bad.problem
    assert "'remarks'" in bad.problem
    assert list(bad.findings) == ["time index", "values"]
    assert bad.findings["values"].verdict == "infeasible"
    assert not bad.plan
    assert bad.alternatives == ()
    assert bad.transformed.empty
    assert "\n" not in repr(bad)
    with pytest.raises(pf.CheckError, match="'remarks'"):
        bad.code()


def test_series_report_travels(report, bad):
    for one in (*report, bad, report["fuel_price"].leave_out(0)):
        copy = pickle.loads(pickle.dumps(one))
        assert (copy.name, copy.plan, copy.verdict, copy.answer) == (one.name, one.plan, one.verdict, one.answer)
        pd.testing.assert_series_equal(copy.series, one.series)


def test_tests_shown_can_be_repeated(report):
    for one in report:
        for finding in one.findings.values():
            for test in finding.tests:
                assert np.isfinite(test.statistic)
                assert 0 <= test.p_value <= 1
                assert test.p_bound in ("exact", "at most", "at least")
                assert test.terms in ("n", "c", "ct", "ctt")
                assert test.options["series"]
                assert test.nobs <= len(one.series)


@pytest.mark.filterwarnings("ignore:adfuller currently returns:FutureWarning")
def test_adf_agrees_with_statsmodels(report):
    # statsmodels is the referee, told the lags that the finding names.
    from statsmodels.tsa.stattools import adfuller

    one = report["fuel_price"]
    shown = [t for t in one.findings["unit root"].tests if t.test == "ADF" and t.options["series"] == "as given"]
    assert {test.terms for test in shown} == {"c", "ct"}
    for test in shown:
        statistic, p_value, lags, nobs, *_ = adfuller(
            one.series.to_numpy(), maxlag=test.lags, regression=test.terms, autolag=None
        )
        assert (test.lags, test.nobs) == (lags, nobs)
        assert test.statistic == pytest.approx(statistic, rel=1e-7)
        if test.p_bound == "exact":
            assert test.p_value == pytest.approx(p_value, rel=1e-6)
