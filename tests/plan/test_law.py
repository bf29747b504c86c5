"""What `apply` does, `back_transform` undoes."""

import numpy as np
import pandas as pd
import pytest

from preflight_magic.model import Difference, FillGaps, Log, RemovePattern, RemoveTrend
from preflight_magic.plan.plan import Plan


def assert_law(plan, y, h):
    history = y.iloc[:-h]
    forecast = plan.apply(y, history=history).iloc[-h:]
    back = plan.back_transform(forecast, history)
    pd.testing.assert_series_equal(back, y.iloc[-h:].astype("float64"), rtol=1e-9, atol=0)


@pytest.mark.parametrize("h", [1, 15])
def test_law_on_every_index(series, steps_for, h):
    assert_law(Plan((), steps_for(series.index)), series, h)


@pytest.mark.parametrize("h", [1, 15])
@pytest.mark.parametrize("period", [1, 12])
def test_law_with_gaps(gappy, steps_for, h, period):
    assert_law(Plan((FillGaps(period),), steps_for(gappy.index)), gappy, h)


@pytest.mark.parametrize("h", [1, 5])
def test_law_per_day(totals, day_plans, h):
    for plan in day_plans:
        assert_law(plan, totals, h)


def test_values_alone_and_within_the_whole_series_are_transformed_alike(typical, steps_for):
    plan = Plan((FillGaps(12),), steps_for(typical.index))
    history = typical.iloc[:-9]
    whole = plan.apply(typical, history=history).iloc[-9:]
    alone = plan.apply(typical.iloc[-9:], history=history)
    pd.testing.assert_series_equal(whole, alone, rtol=1e-12, check_freq=False)


@pytest.mark.parametrize("factor", [1e-12, 1e12])
def test_law_and_transform_do_not_depend_on_the_unit(monthly, steps_for, factor):
    steps = tuple(s for s in steps_for(monthly.index) if isinstance(s, Difference) or "Remove" in type(s).__name__)
    plan = Plan((FillGaps(12),), steps)
    assert_law(plan, monthly * factor, 8)
    one, two = plan.apply(monthly) * factor, plan.apply(monthly * factor)
    pd.testing.assert_series_equal(one, two, rtol=1e-9, atol=1e-12 * 1000 * factor)


@pytest.mark.parametrize("dtype", ["int64", "float32", "Int64", "Float64"])
def test_any_numeric_dtype(monthly, dtype):
    y = monthly.round().astype(dtype)
    plan = Plan((FillGaps(12),), (Log(), Difference(12), Difference(1)))
    assert plan.apply(y).dtype == "float64"
    assert_law(plan, y, 5)
    if dtype in ("Int64", "Float64"):
        y.iloc[30] = pd.NA
        assert_law(plan, y, 5)


def test_history_with_missing_ends(monthly):
    plan = Plan((FillGaps(12),), (Log(), Difference(1), RemovePattern(12)))
    padded = monthly.copy()
    padded.iloc[:3] = np.nan
    history = padded.iloc[:-6].copy()
    wide = history.reindex(padded.index)
    forecast = plan.apply(padded, history=history).iloc[-6:]
    # The columns of a table may end at different times: what is missing at the end is no part of the history.
    back = plan.back_transform(forecast, wide)
    pd.testing.assert_series_equal(back, monthly.iloc[-6:], rtol=1e-9)
    assert plan.apply(wide).iloc[-6:].isna().all()


def test_missing_end_of_the_history_does_no_harm_without_differences(monthly):
    monthly.iloc[-7] = np.nan
    assert_law(Plan((FillGaps(12),), (Log(), RemoveTrend(), RemovePattern(12))), monthly, 6)


def test_nothing_is_changed_in_place(gappy, steps_for):
    plan = Plan((FillGaps(12),), steps_for(gappy.index))
    history = gappy.iloc[:-6]
    before, before_history = gappy.copy(deep=True), history.copy(deep=True)
    forecast = plan.apply(gappy, history=history).iloc[-6:]
    kept = forecast.copy(deep=True)
    result = plan.back_transform(forecast, history, 0.01)
    result.iloc[0] = -1.0
    own = plan.apply(gappy)
    own.iloc[:] = 0.0
    pd.testing.assert_series_equal(gappy, before)
    pd.testing.assert_series_equal(history, before_history)
    pd.testing.assert_series_equal(forecast, kept)


def test_forecast_may_hold_missing_values(monthly):
    plan = Plan((), (Difference(1),))
    forecast = plan.apply(monthly, history=monthly.iloc[:-4]).iloc[-4:]
    forecast.iloc[1] = np.nan
    back = plan.back_transform(forecast, monthly.iloc[:-4])
    assert back.iloc[0] == pytest.approx(monthly.iloc[-4])
    assert back.iloc[1:].isna().all()
