"""Filling gaps."""

import numpy as np
import pandas as pd
import pytest

from preflight_magic.model import CheckError, Difference, FillGaps, Log, RemovePattern
from preflight_magic.plan.plan import Plan


def test_straight_line():
    y = pd.Series([1.0, np.nan, np.nan, 4.0, 2.0])
    assert Plan((FillGaps(),)).apply(y).tolist() == [1.0, 2.0, 3.0, 4.0, 2.0]


def test_ends_stay_missing():
    y = pd.Series([np.nan, 1.0, np.nan, 3.0, np.nan])
    filled = Plan((FillGaps(),)).apply(y)
    assert filled.isna().tolist() == [True, False, False, False, True]


@pytest.mark.parametrize("period", [4, 7, 12])
def test_pattern_on_a_line_is_filled_exactly(period):
    t = np.arange(8 * period)
    pattern = np.random.default_rng(3).permutation(period) * 2.0
    whole = pd.Series(50 + 0.5 * t + pattern[t % period])
    y = whole.copy()
    y.iloc[[3 * period + 1, 4 * period + 2, 4 * period + 3]] = np.nan
    seasonal = Plan((FillGaps(period),)).apply(y)
    straight = Plan((FillGaps(1),)).apply(y)
    # The gaps themselves enter the moving average on a straight line, so the fill is near, not equal.
    assert np.abs(seasonal - whole).max() < 0.5 * np.abs(straight - whole).max()
    pd.testing.assert_series_equal(seasonal[y.notna()], whole[y.notna()])


def test_less_than_two_cycles_is_filled_on_a_line(monthly):
    y = monthly.iloc[:23].copy()
    y.iloc[7] = np.nan
    pd.testing.assert_series_equal(Plan((FillGaps(12),)).apply(y), Plan((FillGaps(1),)).apply(y))


def test_later_values_do_not_change_the_fills_of_the_history(gappy):
    plan = Plan((FillGaps(12),))
    history = gappy.iloc[:50]
    spoiled = gappy.copy()
    spoiled.iloc[50:] *= 100
    one, two = plan.apply(gappy, history=history), plan.apply(spoiled, history=history)
    pd.testing.assert_series_equal(one.iloc[:50], two.iloc[:50])
    pd.testing.assert_series_equal(one.iloc[:50], plan.apply(history))


def test_later_gaps_are_filled(gappy):
    filled = Plan((FillGaps(12),)).apply(gappy, history=gappy.iloc[:50])
    assert filled.notna().all()
    # Position 60 is filled from its neighbours and the pattern of the history.
    assert filled.iloc[60] == pytest.approx(400 * np.exp(0.008 * 60), rel=0.15)


def test_fills_of_a_positive_series_stay_positive():
    t = np.arange(96)
    y = pd.Series(np.exp(0.08 * t) * (1 + 0.9 * np.sin(2 * np.pi * t / 12)), name="freight")
    y.iloc[[7, 8, 9, 10]] = np.nan
    filled = Plan((FillGaps(12),)).apply(y)
    assert filled.min() == y.min()
    assert np.isfinite(Plan((FillGaps(12),), (Log(),)).apply(y)).all()


def test_a_position_that_is_never_observed_is_filled():
    t = np.arange(60)
    y = pd.Series(np.where(t % 6 == 5, np.nan, 10.0 + t % 6))
    filled = Plan((FillGaps(6),)).apply(y)
    assert filled.iloc[:59].notna().all()
    assert filled.min() >= 10.0
    assert filled.max() <= 14.0


def test_without_the_repair_gaps_spread_through_differences(gappy):
    rest = Plan((), (Difference(12),)).apply(gappy)
    assert rest.isna().sum() == 12 + 2 * 5 - 1


def test_undoing_a_difference_needs_the_last_values(monthly):
    monthly.iloc[-10] = np.nan
    plan = Plan((), (Difference(12),))
    history = monthly.iloc[:-4]
    forecast = plan.apply(monthly, history=history).iloc[-4:]
    # The missing value is needed from the seventh step on only.
    assert plan.back_transform(forecast, history).notna().all()
    longer = pd.Series(0.0, index=pd.period_range(forecast.index[0], periods=9, freq="M"))
    with pytest.raises(CheckError, match=r"Series 'passengers' has no value at or before 2020-11.*FillGaps"):
        plan.back_transform(longer, history)
    assert Plan((FillGaps(12),), plan.steps).back_transform(longer, history).notna().all()


def test_a_history_that_ends_missing_cannot_carry_a_difference(monthly):
    monthly.iloc[-5] = np.nan
    plan = Plan((FillGaps(12),), (Difference(1), RemovePattern(12)))
    forecast = plan.apply(monthly, history=monthly.iloc[:-4]).iloc[-4:]
    with pytest.raises(CheckError, match="forecast from the stamp after the last observed value"):
        plan.back_transform(forecast, monthly.iloc[:-4])
