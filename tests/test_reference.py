"""The reference forecast, against statsmodels and against formulas."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from scipy.signal import lfilter
from scipy.stats import t as student
from statsmodels.tsa.statespace.sarimax import SARIMAX

import preflight_magic as pf
from preflight_magic.kernels.candidate_prediction import Ahead
from preflight_magic.reference import following
from preflight_magic.reference_mixture import Mixture, Part

REFERENCES = Path(__file__).parent / "references"
DEMO = pf.demo.ferry_line()


def checked(name):
    return pf.check(DEMO[[name]], progress=False)[name]


def airline():
    # Sources stand in the file.
    values = pd.read_csv(REFERENCES / "air_passengers.csv", comment="#").iloc[:, 1].to_numpy(dtype=float)
    return pd.Series(values, index=pd.period_range("1949-01", periods=144, freq="M"), name="passengers")


def test_airline_model_for_1960_agrees_with_statsmodels():
    y = airline()[:132]
    one = pf.check(y, progress=False)["passengers"]
    assert str(one.plan) == "log, difference 12, difference 1"
    assert one.findings["roots"].measures["order"] == "ARMA(0,1)(0,1) at 12"
    model = SARIMAX(np.log(y.to_numpy()), order=(0, 1, 1), seasonal_order=(0, 1, 1, 12), use_exact_diffuse=True).fit(
        disp=0, maxiter=200
    )
    other = model.get_forecast(12)
    found = one.reference_forecast(12, average=False)
    assert found["median"].to_numpy() == pytest.approx(np.exp(other.predicted_mean), rel=1e-5)
    # Two coefficients are estimated beside the variance: 119 values over 117 degrees of freedom, and Student's t; they
    # add two parts in 119 (Akaike 1969, final prediction error).
    width = np.log(found["upper"] / found["lower"]).to_numpy() / 2
    expected = other.se_mean * np.sqrt(119 / 117 * 121 / 119) * student.ppf(0.95, 117)
    assert width == pytest.approx(expected, rel=1e-3)
    # Other plans are not ruled out, but agree: the forecast is the plan's own, its interval theirs.
    both = one.reference_forecast(12)
    assert both["median"].to_numpy() == pytest.approx(np.exp(other.predicted_mean), rel=1e-5)
    assert (both["upper"] != found["upper"]).all()


def test_mean_of_a_log_is_that_of_the_lognormal():
    one = checked("passengers")
    found = one.reference_forecast(6, coverage=0.8, average=False)
    degrees = one.findings["roots"].measures["fit"].nobs - 2
    deviation = np.log(found["upper"] / found["median"]) / student.ppf(0.9, degrees)
    # Johnson, Kotz and Balakrishnan (1994), Continuous Univariate Distributions 1, chapter 14: exp(mu + sigma^2 / 2)
    assert (found["mean"] / found["median"]).to_numpy() == pytest.approx(np.exp(deviation**2 / 2).to_numpy(), rel=1e-9)


def test_random_walk_with_drift_widens_by_its_formula():
    one = checked("fuel_price")
    found = one.reference_forecast(9, average=False)
    changes = DEMO["fuel_price"].diff().dropna()
    m, h = len(changes), np.arange(1, 10)
    # h steps of the walk, and h times the error of the mean change
    expected = student.ppf(0.95, m - 1) * np.sqrt(changes.var() * (h + h**2 / m))
    assert ((found["upper"] - found["lower"]) / 2).to_numpy() == pytest.approx(expected, rel=1e-8)
    assert found["median"].to_numpy() == pytest.approx(DEMO["fuel_price"].iloc[-1] + h * changes.mean(), rel=1e-8)


def test_plans_that_disagree_are_averaged():
    # Too short to tell a slow return to the mean from a random walk.
    noise = np.random.default_rng(3).normal(size=40)
    y = pd.Series(50 + lfilter([1.0], [1.0, -0.85], noise), index=pd.RangeIndex(40), name="berths")
    one = pf.check(y, season=1, progress=False)["berths"]
    alone, both = one.reference_forecast(6, average=False), one.reference_forecast(6)
    assert not np.allclose(alone["median"], both["median"])
    assert ((both["lower"] < both["median"]) & (both["median"] < both["upper"])).all()
    # A plan chosen by a person is not averaged with others.
    step = pf.Difference(1)
    mine = one.leave_out(step) if step in one.plan.steps else one.put_in(step)
    pd.testing.assert_frame_equal(mine.reference_forecast(6), mine.reference_forecast(6, average=False))


def test_a_mixture_has_the_quantiles_and_the_mean_of_its_parts():
    index = pd.RangeIndex(5, 7)
    history = pd.Series(np.arange(1.0, 6.0), index=pd.RangeIndex(5))
    one = Part(0.3, Ahead(np.array([4.0, 5.0]), np.array([1.0, 4.0]), 7.0))
    two = Part(0.7, Ahead(np.array([1.5, 1.6]), np.array([0.04, 0.09]), 9.0), logged=True)
    found = Mixture((one, two), (), history, index).table(0.8)
    for column, probability in (("lower", 0.1), ("median", 0.5), ("upper", 0.9)):
        x = found[column].to_numpy()
        below = 0.3 * student.cdf((x - one.ahead.mean) / [1.0, 2.0], 7)
        below += 0.7 * student.cdf((np.log(x) - two.ahead.mean) / [0.2, 0.3], 9)
        assert below == pytest.approx([probability] * 2, abs=1e-9)
    lognormal = np.exp(two.ahead.mean + two.ahead.variance / 2)
    assert found["mean"].to_numpy() == pytest.approx(0.3 * one.ahead.mean + 0.7 * lognormal, rel=1e-12)


def test_shares_stay_between_their_bounds():
    rng = np.random.default_rng(8)
    share = 1 / (1 + np.exp(-(2.5 + 0.6 * np.cumsum(rng.normal(size=60)) * 0.3)))
    y = pd.Series(share, index=pd.period_range("2018-01", periods=60, freq="M"), name="share")
    one = pf.check(y, season=1, progress=False)["share"]
    given = one if pf.Logit(0.0, 1.0) in one.plan.steps else one.put_in(pf.Logit(0.0, 1.0))
    found = given.reference_forecast(24, coverage=0.99)
    assert found.to_numpy().min() > 0.0
    assert found.to_numpy().max() < 1.0


def test_the_days_of_the_months_ahead_count():
    days = pd.period_range("2014-01", periods=96, freq="M")
    rng = np.random.default_rng(4)
    y = pd.Series(days.days_in_month * (10 + 0.05 * rng.normal(size=96)), index=days, name="trips")
    one = pf.check(y, season=1, progress=False)["trips"]
    given = one if any(isinstance(step, pf.PerDay) for step in one.plan.steps) else one.put_in(pf.PerDay("days"))
    found = given.reference_forecast(2, average=False)["median"]
    # January and February 2022
    assert found.to_numpy() == pytest.approx([310.0, 280.0], rel=0.01)


@pytest.mark.parametrize(("kind", "expected"), [("mean", 0.9), ("walk", 0.9)])
def test_intervals_cover_what_they_say(kind, expected):
    inside = []
    for seed in range(60):
        noise = np.random.default_rng([seed, 77]).normal(size=64)
        y = pd.Series(20 + (noise if kind == "mean" else np.cumsum(noise)), index=pd.RangeIndex(64), name="y")
        plan = pf.check(y[:60], season=1, progress=False)["y"]
        wanted = (pf.Difference(1),) if kind == "walk" else ()
        for step in plan.plan.steps:
            plan = plan.leave_out(step) if step not in wanted else plan
        for step in wanted:
            plan = plan if step in plan.plan.steps else plan.put_in(step)
        found = plan.reference_forecast(4, average=False)
        inside.append(bool(found["lower"].iloc[-1] <= y.iloc[-1] <= found["upper"].iloc[-1]))
    # within two standard errors of a binomial share
    assert abs(np.mean(inside) - expected) <= 2 * np.sqrt(expected * (1 - expected) / len(inside))


@pytest.mark.parametrize("name", DEMO.columns)
def test_columns_and_index(name):
    one = checked(name)
    found = one.reference_forecast()
    assert list(found.columns) == ["median", "mean", "lower", "upper"]
    assert len(found) == one.horizon == 12
    assert found.index[0] == DEMO.index[-1] + 1
    assert (found["lower"] < found["median"]).all()
    assert (found["median"] < found["upper"]).all()


def test_pattern_comes_back():
    found = checked("berth_power").reference_forecast(12)["median"].to_numpy()
    means = DEMO["berth_power"].groupby(DEMO.index.month).mean().to_numpy()
    assert np.corrcoef(found, means)[0, 1] > 0.95


def test_an_exact_line_goes_on():
    index = pd.period_range("2015-01", periods=48, freq="M")
    one = pf.check(pd.Series(3.0 + 2.0 * np.arange(48), index=index, name="x"), season=1, progress=False)["x"]
    found = one.reference_forecast(3)
    assert found["median"].to_numpy() == pytest.approx([99.0, 101.0, 103.0], abs=1e-6)


@pytest.mark.parametrize(
    "index",
    [
        pd.period_range("2020Q1", periods=5, freq="Q"),
        pd.date_range("2020-01-31", periods=5, freq="ME"),
        pd.date_range("2020-01-03", periods=8, freq="B"),
        pd.date_range("2020-01-01", periods=5, freq="h", tz="Atlantic/Faroe"),
        pd.RangeIndex(3, 23, 4),
    ],
)
def test_following_stamps_continue_the_index(index):
    ahead = following(index[:-2], 2)
    assert list(ahead) == list(index[-2:])


@pytest.mark.parametrize(
    ("options", "said"),
    [
        ({"horizon": 0}, "horizon is 0"),
        ({"horizon": 2.5}, "horizon is 2.5"),
        ({"horizon": True}, "horizon is True"),
        ({"coverage": 1.0}, "coverage is 1.0"),
        ({"coverage": "wide"}, "coverage is 'wide'"),
    ],
)
def test_options_out_of_range(options, said):
    with pytest.raises(pf.CheckError, match=said):
        checked("fuel_price").reference_forecast(**options)


def test_a_series_that_could_not_be_checked():
    frame = DEMO[["fuel_price"]].assign(tide="high")
    with pytest.raises(pf.CheckError, match="tide"):
        pf.check(frame, progress=False)["tide"].reference_forecast()
