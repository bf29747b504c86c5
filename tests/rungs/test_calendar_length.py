"""The third rung: whether totals follow the number of days."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic.intake import read
from preflight_magic.model import Difference, Evidence, PerDay
from preflight_magic.policy import Settings, Thresholds
from preflight_magic.rungs.calendar_length import RUNG
from preflight_magic.rungs.contract import Context
from tests.sentences import assert_reads_well


def evidence(days: float, workdays: float, unit: str = "days") -> Evidence:
    return Evidence({"per_days": days, "per_workdays": workdays, "unit": unit, "pattern": "none"})


@pytest.mark.parametrize(
    ("found", "verdict", "steps", "words"),
    [
        (evidence(14.1, -80.0), "transform", (PerDay("days"),), "lower -2 log likelihood by 14.1"),
        (evidence(13.9, -80.0), "clear", (), "lower -2 log likelihood by 13.9"),
        (evidence(-30.0, 60.0, "workdays"), "transform", (PerDay("workdays"),), "per workday lower"),
        (evidence(-30.0, -80.0), "clear", (), "raise -2 log likelihood by 30.0"),
        (Evidence({"unasked": "Only months are asked."}), "clear", (), "Only months"),
        (Evidence(problem="nothing there."), "clear", (), "Nothing there."),
    ],
)
def test_judgements(found, verdict, steps, words):
    judged = RUNG.judge(found, Thresholds())
    assert (judged.verdict, judged.steps) == (verdict, steps)
    assert words in judged.reason
    assert_reads_well(judged.reason)
    assert_reads_well(judged.headline, whole=False)


def test_the_bound_is_that_of_the_thresholds():
    assert RUNG.judge(evidence(13.9, -80.0), Thresholds(calendar_margin=10.0)).steps == (PerDay("days"),)


def totals(n=120, freq="M", unit="days", spread=0.02, seed=1):
    """A daily rate that wanders, times the days."""
    index = pd.period_range("1995-01", periods=n, freq=freq)
    start, end = (np.asarray(one, dtype="datetime64[D]") for one in (index.start_time, (index + 1).start_time))
    days = (end - start).astype(int) if unit == "days" else np.busday_count(start, end)
    walk = np.random.default_rng(seed).normal(size=n).cumsum()
    return pd.Series(np.exp(3.0 + spread * walk) * np.asarray(days, dtype=float), index=index, name="freight")


def examined(values):
    (series,) = read(values)
    return RUNG.examine(series, Context(Settings())).measures


@pytest.mark.parametrize("unit", ["days", "workdays"])
@pytest.mark.parametrize("stamps", ["periods", "first days", "last days"])
def test_days_are_found_whatever_the_stamps(unit, stamps):
    y = totals(unit=unit)
    if stamps != "periods":
        y.index = y.index.to_timestamp(how="start" if stamps == "first days" else "end").normalize()
    found = examined(y)
    assert found["unit"] == unit
    assert found[f"per_{unit}"] > Thresholds().calendar_margin
    assert RUNG.judge(Evidence(found), Thresholds()).steps == (PerDay(unit),)


@pytest.mark.parametrize(
    ("values", "words"),
    [
        (totals(n=35), "three years are needed"),
        (totals() - totals().mean(), "Not all values are positive"),
        (totals(n=60, freq="W"), "Only monthly and quarterly"),
        (totals(n=40, freq="Y"), "Only monthly and quarterly"),
    ],
)
def test_where_the_question_does_not_arise(values, words):
    found = Evidence(examined(values))
    judged = RUNG.judge(found, Thresholds())
    assert (judged.verdict, judged.steps) == ("clear", ())
    assert words in judged.reason


# -------------------------------------------------------------------------------------------- what follows from it
@pytest.fixture(scope="module")
def checked():
    y = totals(n=144, spread=0.01, seed=4).copy()
    y.iloc[[30, 31, 77]] = np.nan
    return y, pf.check(y, cache=False, progress=False)["freight"]


def test_all_that_follows_is_decided_on_values_per_day(checked):
    y, report = checked
    assert report.plan.steps == (PerDay("days"), Difference(1))
    per_day = (y / y.index.days_in_month).rename("freight")
    other = pf.check(per_day, cache=False, progress=False)["freight"]
    assert other.plan.steps == (Difference(1),)
    for rung in ("spread", "shift and trend", "season", "unit root"):
        one, two = report.findings[rung], other.findings[rung]
        assert one.reason == two.reason
        assert [test.statistic for test in one.tests] == pytest.approx([test.statistic for test in two.tests])
        assert {str(test.options["series"]).replace("per day", "as given") for test in one.tests} == {
            str(test.options["series"]) for test in two.tests
        }
    assert all(plan.startswith("per day") for plan, _, _ in report.alternatives)
    pd.testing.assert_series_equal(report.transformed, per_day.interpolate().diff().dropna(), rtol=0.02, atol=0.2)


def test_the_step_can_be_left_out_and_put_in_again(checked):
    _, report = checked
    without = report.leave_out(PerDay("days"))
    assert without.plan.steps == (Difference(1),)
    assert without.findings["unit root"] is report.findings["unit root"]
    assert without.findings["roots"].measures["log_likelihood"] != report.findings["roots"].measures["log_likelihood"]
    again = without.put_in(PerDay("days"))
    assert again.plan == report.plan
    assert again.findings["roots"].reason == report.findings["roots"].reason


def test_the_forecast_and_the_code_speak_of_totals(checked):
    y, report = checked
    forecast = report.reference_forecast(3)
    rate = forecast["median"] / forecast.index.days_in_month
    # A random walk of the rate: its forecast moves by the drift alone, the totals with the days.
    assert np.ptp(np.diff(rate)) < 0.3 * np.ptp(np.diff(forecast["median"]))
    namespace = {}
    exec(report.code(), namespace)
    pd.testing.assert_series_equal(
        namespace["prepare"](y).dropna(), report.transformed, check_names=False, check_freq=False
    )


def test_totals_that_are_nothing_but_days_do_no_harm():
    index = pd.period_range("2001-01", periods=60, freq="M")
    y = pd.Series(5.0 * index.days_in_month, index=index, name="shifts")
    report = pf.check(y, cache=False, progress=False)["shifts"]
    assert report.plan.steps == (PerDay("days"),)
    expected = 5.0 * report.reference_forecast(4).index.days_in_month
    assert report.reference_forecast(4)["median"].to_numpy() == pytest.approx(expected.to_numpy())
