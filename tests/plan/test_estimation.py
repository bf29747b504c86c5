"""What the Remove steps estimate."""

import numpy as np
import pandas as pd
import pytest

from preflight_magic.model import CheckError, Difference, Log, RemovePattern, RemoveShift, RemoveTrend
from preflight_magic.plan.fixed_part import Regressors, regressors
from preflight_magic.plan.plan import Plan


def fixed_series(n=73, factor=1.0):
    """Trend, shift and pattern without noise; a length that is no multiple of the season."""
    index = pd.period_range("2014-03", periods=n, freq="M")
    t = np.arange(n)
    pattern = np.array([5.0, 1.0, -2.0, 0.0, 3.0, 9.0, 12.0, 7.0, -4.0, -8.0, -11.0, -1.0])
    return pd.Series(factor * (100 + 0.7 * t + 25 * (t >= 30) + pattern[t % 12]), index=index, name="freight")


@pytest.mark.parametrize("factor", [1e-12, 1.0, 1e12])
@pytest.mark.parametrize("differences", [(), (Difference(1),), (Difference(12),)])
def test_trend_shift_and_pattern_are_recovered_together(factor, differences):
    y = fixed_series(factor=factor)
    plan = Plan((), (*differences, RemoveTrend(), RemoveShift(y.index[30]), RemovePattern(12)))
    assert np.abs(plan.apply(y).dropna()).max() < 1e-11 * y.abs().max()
    # The same numbers are found from the first four years and carried forward.
    later = plan.apply(y, history=y.iloc[:48])
    assert np.abs(later.dropna()).max() < 1e-11 * y.abs().max()


def test_missing_values_do_not_move_the_estimates():
    y = fixed_series()
    y.iloc[[0, 11, 29, 31, 50]] = np.nan
    plan = Plan((), (RemoveTrend(), RemoveShift(y.index[30]), RemovePattern(12)))
    rest = plan.apply(y)
    assert rest.isna().sum() == 5
    assert np.abs(rest.dropna()).max() < 1e-10


@pytest.mark.parametrize("differences", [(), (Difference(1),), (Difference(12),)])
def test_what_remains_has_mean_zero(monthly, differences):
    for removed in ((RemoveTrend(),), (RemovePattern(7),), (RemoveShift(monthly.index[40]), RemovePattern(7))):
        rest = Plan((), (Log(), *differences, *removed)).apply(monthly).dropna()
        assert abs(rest.mean()) < 1e-12


def test_differences_alone_keep_the_drift(monthly):
    rest = Plan((), (Log(), Difference(1))).apply(monthly)
    total = np.log(monthly.iloc[-1] / monthly.iloc[0])
    assert rest.mean() == pytest.approx(total / (len(monthly) - 1), rel=1e-12)


def test_two_differences_have_no_constant(monthly):
    plan = Plan((), (Difference(1), Difference(1)))
    with_shift = plan.with_step(RemoveTrend())
    pd.testing.assert_series_equal(plan.apply(monthly), with_shift.apply(monthly))
    assert regressors(with_shift.steps) == Regressors()


def test_differencing_takes_regressors_out():
    steps = (Difference(12), RemoveTrend(), RemoveShift(3), RemovePattern(6), RemovePattern(8))
    assert regressors(steps) == Regressors(constant=True, trend=False, shifts=(3,), patterns=(8,))
    assert not regressors((Log(), Difference(1)))


def test_estimates_come_from_the_history_alone(monthly):
    plan = Plan((), (Log(), Difference(1), RemoveShift(monthly.index[40]), RemovePattern(12)))
    history = monthly.iloc[20:70]
    spoiled = monthly.copy()
    spoiled.iloc[:20] *= 3.0
    spoiled.iloc[70:] *= 5.0
    one, two = plan.apply(monthly, history=history), plan.apply(spoiled, history=history)
    pd.testing.assert_series_equal(one.iloc[21:70], two.iloc[21:70], rtol=1e-12)


@pytest.mark.parametrize("stamp", ["2030-01", "1990-01"])
def test_shift_outside_the_history_has_no_effect(monthly, stamp):
    at = pd.Period(stamp, freq="M")
    plain, shifted = Plan((), (RemoveTrend(),)), Plan((), (RemoveTrend(), RemoveShift(at)))
    history = monthly.iloc[:-6]
    one, two = plain.apply(monthly, history=history), shifted.apply(monthly, history=history)
    pd.testing.assert_series_equal(one, two, rtol=1e-9, atol=1e-9)


def test_shift_after_the_end_of_the_history_has_no_effect(monthly):
    history = monthly.iloc[:-6]
    plain, shifted = Plan((), (RemoveTrend(),)), Plan((), (RemoveTrend(), RemoveShift(monthly.index[-3])))
    pd.testing.assert_series_equal(plain.apply(monthly, history), shifted.apply(monthly, history), rtol=1e-12)


def test_pattern_is_the_mean_by_position(monthly):
    y = monthly.iloc[:84]
    rest = Plan((), (RemovePattern(12),)).apply(y)
    by_month = y - y.groupby(np.arange(84) % 12).transform("mean")
    pd.testing.assert_series_equal(rest, by_month, rtol=1e-9, atol=1e-10)


def test_too_short_a_history(monthly):
    with pytest.raises(CheckError, match="'passengers' has 9 values left in its history to estimate 12 numbers"):
        Plan((), (RemovePattern(12),)).apply(monthly, history=monthly.iloc[:9])
    with pytest.raises(CheckError, match="0 values left"):
        Plan((), (Difference(12), RemoveTrend())).apply(monthly.iloc[:9])


@pytest.mark.parametrize("at", [pd.Timestamp("2016-01-01"), 5, pd.Period("2016", freq="Y")])
def test_shift_in_another_kind_of_stamp(monthly, at):
    with pytest.raises(CheckError, match="give the stamp in the kind of the index"):
        Plan((), (RemoveShift(at),)).apply(monthly)


def test_long_line_stays_exact():
    y = pd.Series(1e6 + 3.0 * np.arange(5000), name="berth power")
    assert np.abs(Plan((), (RemoveTrend(),)).apply(y)).max() < 1e-7
