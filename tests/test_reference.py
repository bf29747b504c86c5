"""The reference forecast, against statsmodels and against formulas."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest
from statsmodels.tsa.statespace.sarimax import SARIMAX

import preflight_magic as pf
from preflight_magic.reference import following

DEMO = pf.demo.ferry_line()


def checked(name):
    return pf.check(DEMO[[name]], progress=False)[name]


def test_airline_model_on_logs_agrees_with_statsmodels():
    one = checked("passengers")
    assert str(one.plan) == "log, difference 12, difference 1"
    assert one.findings["roots"].measures["order"] == "ARMA(0,1)(0,1) at 12"
    found = one.reference_forecast(12, coverage=0.9)
    y = np.log(DEMO["passengers"].to_numpy(dtype=float))
    model = SARIMAX(y, order=(0, 1, 1), seasonal_order=(0, 1, 1, 12), trend="c").fit(disp=0)
    other = model.get_forecast(12)
    # The plan keeps the mean of the differences, as statsmodels' constant does. The two treat the start of the
    # differences in another way (diffuse there), hence 2 %.
    assert found["median"].to_numpy() == pytest.approx(np.exp(other.predicted_mean), rel=0.02)
    width = np.log(found["upper"] / found["lower"]).to_numpy() / (2 * 1.6448536)
    assert width == pytest.approx(other.se_mean, rel=0.03)


def test_mean_of_a_log_is_that_of_the_lognormal():
    found = checked("passengers").reference_forecast(6, coverage=0.8)
    deviation = np.log(found["upper"] / found["median"]) / 1.2815515655
    # Johnson, Kotz and Balakrishnan (1994), Continuous Univariate Distributions 1, chapter 14: exp(mu + sigma^2 / 2)
    assert (found["mean"] / found["median"]).to_numpy() == pytest.approx(np.exp(deviation**2 / 2).to_numpy(), rel=1e-9)


def test_random_walk_widens_with_the_square_root():
    found = checked("fuel_price").reference_forecast(9)
    width = (found["upper"] - found["lower"]).to_numpy()
    assert width[3] / width[0] == pytest.approx(2.0, rel=1e-9)
    assert width[8] / width[0] == pytest.approx(3.0, rel=1e-9)


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
    ("options", "said"), [({"horizon": 0}, "horizon is 0"), ({"coverage": 1.0}, "coverage is 1.0")]
)
def test_options_out_of_range(options, said):
    with pytest.raises(pf.CheckError, match=said):
        checked("fuel_price").reference_forecast(**options)


def test_a_series_that_could_not_be_checked():
    frame = DEMO[["fuel_price"]].assign(tide="high")
    with pytest.raises(pf.CheckError, match="tide"):
        pf.check(frame, progress=False)["tide"].reference_forecast()
