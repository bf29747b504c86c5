"""Sentences for what a plan cannot do: the series, what was seen, what to do next."""

import numpy as np
import pandas as pd
import pytest

from preflight_magic.model import CheckError, Difference, Log, Logit, PerDay, Power
from preflight_magic.plan.plan import Plan


@pytest.mark.parametrize(
    ("step", "value", "words"),
    [
        (Log(), 0.0, "is 0 at 2015-01, and 'log' needs values above zero"),
        (Log(), -3.0, "is -3 at 2015-01"),
        (Power(0.5), -1.0, "is -1 at 2015-01, and 'power 0.5' needs values at least 0"),
        (Power(-1.0, 2.0), -2.0, "'power -1 offset 2' needs values above -2"),
        (Logit(0.0, 5000.0), 5000.0, "is 5000 at 2015-01, and 'logit 0 to 5000' needs values between 0 and 5000"),
    ],
)
def test_values_outside_the_domain(monthly, step, value, words):
    monthly.iloc[10] = value
    with pytest.raises(CheckError, match=words) as caught:
        Plan((), (step,)).apply(monthly)
    assert str(caught.value).startswith("Series 'passengers' ")
    assert "; " in str(caught.value)


def test_a_zero_has_a_square_root(monthly):
    monthly.iloc[10] = 0.0
    assert Plan((), (Power(0.5),)).apply(monthly).iloc[10] == -2.0


def test_series_without_a_name(monthly):
    with pytest.raises(CheckError, match=r"^The series is -"):
        Plan((), (Log(),)).apply(-monthly.rename(None))


@pytest.mark.parametrize("shift", [-1, 1, 5])
def test_forecast_that_does_not_follow(series, shift):
    history, future = series.iloc[:60], series.iloc[60 + shift : 70 + shift]
    for plan in (Plan(), Plan((), (Log(), Difference(12)))):
        with pytest.raises(CheckError, match="follow the history's"):
            plan.back_transform(future, history)


def test_forecast_with_a_hole(series):
    future = series.iloc[60:70].drop(series.index[64])
    with pytest.raises(CheckError, match="must be regular"):
        Plan((), (Difference(1),)).back_transform(future, series.iloc[:60])


def test_forecast_on_another_kind_of_index(monthly):
    future = monthly.iloc[-3:].to_timestamp()
    with pytest.raises(CheckError, match="index of timestamps"):
        Plan().back_transform(future, monthly.iloc[:-3])


def test_history_too_short_for_a_difference(monthly):
    plan = Plan((), (Difference(12), Difference(1)))
    with pytest.raises(CheckError, match=r"has 12 values of history, and undoing the differences .* needs 13"):
        plan.back_transform(monthly.iloc[12:15], monthly.iloc[:12])
    assert plan.back_transform(monthly.iloc[13:15], monthly.iloc[:13]).notna().all()


def test_history_without_values(monthly):
    with pytest.raises(CheckError, match="no observed value"):
        Plan().back_transform(monthly.iloc[-3:], monthly.iloc[:-3] * np.nan)


def test_series_that_leaves_out_stamps(series):
    with pytest.raises(CheckError, match="regular"):
        Plan((), (Difference(1),)).apply(series.drop(series.index[40]))
    with pytest.raises(CheckError, match="regular"):
        Plan().apply(series.iloc[60:], history=series.iloc[:50])


def test_series_out_of_order(monthly):
    with pytest.raises(CheckError, match="out of order"):
        Plan().apply(monthly.iloc[::-1])
    with pytest.raises(CheckError, match="out of order"):
        Plan().apply(monthly, history=monthly.iloc[::-1])
    with pytest.raises(CheckError, match="repeated"):
        Plan().apply(pd.concat([monthly, monthly.iloc[-1:]]))


def test_time_zones_are_not_mixed():
    one = pd.Series(1.0, index=pd.date_range("2021-01-01", periods=9, freq="h"))
    two = pd.Series(1.0, index=pd.date_range("2021-01-01 09:00", periods=9, freq="h", tz="Europe/Oslo"))
    with pytest.raises(CheckError, match="same kind of index"):
        Plan().apply(two, history=one)


@pytest.mark.parametrize("values", [["a", "b"], [1 + 2j, 3j], pd.to_datetime(["2021-01-01", "2021-01-02"])])
def test_values_that_are_no_numbers(values):
    with pytest.raises(CheckError, match="holds"):
        Plan().apply(pd.Series(values, name="notes"))


def test_index_that_is_no_time_axis():
    with pytest.raises(CheckError, match="periods, timestamps or integers"):
        Plan().apply(pd.Series([1.0, 2.0], index=["a", "b"]))
    with pytest.raises(CheckError, match="pandas Series"):
        Plan().apply([1.0, 2.0])


def test_days_need_months(monthly):
    for index in (
        pd.RangeIndex(90),
        pd.date_range("2021-01-01", periods=90, freq="D"),
        pd.period_range("2021-01-01", periods=90, freq="W"),
    ):
        with pytest.raises(CheckError, match="no monthly, quarterly or yearly index"):
            Plan((), (PerDay(),)).apply(monthly.set_axis(index))


def test_empty_series():
    assert Plan((), (Log(),)).apply(pd.Series([], dtype="float64")).empty
    assert Plan().back_transform(pd.Series([], dtype="float64"), pd.Series([1.0])).empty
