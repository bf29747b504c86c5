"""Ticks of time, lags and values."""

import pandas as pd
import pytest

from preflight_magic.present import ticks

HALF_YEARS = ["Jan 2015", "Jul 2015", "Jan 2016", "Jul 2016", "Jan 2017", "Jul 2017"]
MONTHS = ["Feb 2021", "Mar 2021", "Apr 2021", "May 2021", "Jun 2021", "Jul 2021"]


@pytest.mark.parametrize(
    ("index", "labels"),
    [
        (pd.period_range("2014-05", periods=120, freq="M"), ["2016", "2018", "2020", "2022", "2024"]),
        (pd.date_range("2015-01-01", periods=36, freq="MS"), HALF_YEARS),
        (pd.period_range("2021-02", periods=6, freq="M"), MONTHS),
        (pd.period_range("1900", periods=100, freq="Y"), ["1900", "1920", "1940", "1960", "1980"]),
        (pd.date_range("2021-03-01", periods=72, freq="h"), ["1 Mar", "2 Mar", "3 Mar"]),
        (pd.RangeIndex(100), ["0", "20", "40", "60", "80"]),
        (pd.RangeIndex(5, 9), ["5", "6", "7", "8"]),
    ],
)
def test_time_ticks(index: pd.Index, labels: list[str]) -> None:
    assert ticks.time_ticks(index)[1] == labels


def test_ticks_stand_where_the_year_begins() -> None:
    index = pd.period_range("2014-05", periods=120, freq="M")
    positions, _ = ticks.time_ticks(index)
    assert [str(index[p]) for p in positions] == ["2016-01", "2018-01", "2020-01", "2022-01", "2024-01"]


@pytest.mark.parametrize("freq", ["YE", "QE", "ME", "W", "D", "B", "h", "min"])
@pytest.mark.parametrize("n", [2, 3, 8, 50, 300, 3000])
def test_any_calendar_has_two_to_seven_ticks(freq: str, n: int) -> None:
    index = pd.date_range("1950-02-03", periods=min(n, 150) if freq in ("YE", "QE") else n, freq=freq)
    positions, labels = ticks.time_ticks(index)
    assert 2 <= len(positions) == len(labels) <= 7
    assert sorted(set(positions)) == positions


def test_lag_ticks_follow_the_season() -> None:
    assert ticks.lag_ticks(25, 12) == [6, 12, 18, 24]
    assert ticks.lag_ticks(24, 4) == [8, 16, 24]
    assert ticks.lag_ticks(24, 1) == [5, 10, 15, 20]
    assert ticks.lag_ticks(10, 12) == [2, 4, 6, 8, 10]


@pytest.mark.parametrize(
    ("low", "high", "labels"),
    [
        (312, 1890, ["500", "1,000", "1,500"]),
        (-0.16, 0.16, ["−0.1", "0", "0.1"]),
        (0.0, 1e-6, ["0", "5e−7", "1e−6"]),
        (1.0e9, 3.0e9, ["1e9", "2e9", "3e9"]),
        (5.0, 5.0, ["5"]),
    ],
)
def test_value_ticks(low: float, high: float, labels: list[str]) -> None:
    assert ticks.value_ticks(low, high)[1] == labels
