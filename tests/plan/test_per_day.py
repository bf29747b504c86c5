"""Days and workdays of a period."""

import numpy as np
import pandas as pd
import pytest

from preflight_magic.model import PerDay
from preflight_magic.plan.plan import Plan
from preflight_magic.plan.points import day_counts

ANY = pd.Series(dtype="float64")


@pytest.mark.parametrize(
    "index",
    [
        pd.period_range("2019-11", periods=6, freq="M"),
        pd.date_range("2019-11-01", periods=6, freq="MS"),
        pd.date_range("2019-11-01", periods=6, freq="ME"),
        pd.date_range("2019-11-01", periods=6, freq="MS", tz="Europe/Oslo"),
        pd.date_range("2019-11-01", periods=6, freq="BME"),
    ],
)
def test_days_of_months(index):
    assert day_counts(index, "days", ANY).tolist() == [30, 31, 31, 29, 31, 30]


@pytest.mark.parametrize(
    "index",
    [
        pd.period_range("2020Q1", periods=4, freq="Q"),
        pd.date_range("2020-01-01", periods=4, freq="QS"),
        pd.date_range("2020-01-01", periods=4, freq="QE"),
    ],
)
def test_days_of_quarters(index):
    assert day_counts(index, "days", ANY).tolist() == [91, 91, 92, 92]


@pytest.mark.parametrize(
    "index",
    [
        pd.period_range(pd.Period("2020-02", freq="Q-JAN"), periods=4, freq="Q-JAN"),
        pd.date_range("2020-02-01", periods=4, freq="QS-FEB"),
        pd.date_range("2020-04-30", periods=4, freq="QE-JAN"),
    ],
)
def test_days_of_quarters_that_begin_in_february(index):
    # February to April of a leap year, May to July, August to October, November to January.
    assert day_counts(index, "days", ANY).tolist() == [90, 92, 92, 92]


def test_days_of_years_and_of_one_stamp():
    index = pd.period_range("2019", periods=3, freq="Y")
    assert day_counts(index, "days", ANY).tolist() == [365, 366, 365]
    assert day_counts(index[1:2], "days", ANY).tolist() == [366]
    assert day_counts(pd.date_range("2020-02-01", periods=1, freq="MS"), "days", ANY).tolist() == [29]


def test_workdays():
    index = pd.period_range("2021-01", periods=3, freq="M")
    wanted = [
        np.is_busday(pd.date_range(p.start_time, p.end_time.normalize()).to_numpy("datetime64[D]")).sum() for p in index
    ]
    assert day_counts(index, "workdays", ANY).tolist() == wanted == [21, 20, 23]


def test_future_months_have_their_own_days():
    history = pd.Series(300.0, index=pd.period_range("2020-06", periods=8, freq="M"))
    forecast = pd.Series(10.0, index=pd.period_range("2021-02", periods=2, freq="M"))
    assert Plan((), (PerDay(),)).back_transform(forecast, history).tolist() == [280.0, 310.0]
