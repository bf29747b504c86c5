"""Is there a season at all?"""

from __future__ import annotations

import numpy as np
import pytest
from scipy.signal import lfilter
from statsmodels.regression.linear_model import OLS

from preflight_magic.kernels.power_transform import lagged_design, residual_sum
from preflight_magic.kernels.seasonal_presence import (
    Presence,
    cycle_presence,
    longer_presence,
    season_presence,
    without_pattern,
)


def noise(n, ar=(), seed=0):
    e = np.random.default_rng(seed).standard_normal(n + 100)
    return lfilter([1.0], np.r_[1.0, -np.asarray(ar)], e)[100:]


def referee(values, period):
    """The same regression in another library, with plain dummies; gaps among the lags lie on straight lines."""
    n = len(values)
    seen = np.isfinite(values)
    filled = np.interp(np.arange(n), np.flatnonzero(seen), values[seen])
    lags = np.column_stack([np.r_[np.full(k, np.nan), filled[:-k]] for k in (1, 2, 3)])
    dummies = (np.arange(n)[:, None] % period == np.arange(period)).astype(float)
    full, without = np.column_stack([dummies, np.arange(n), lags]), np.column_stack([np.ones(n), np.arange(n), lags])
    rows = np.isfinite(full).all(axis=1) & np.isfinite(values)
    return OLS(values[rows], full[rows]).fit().compare_f_test(OLS(values[rows], without[rows]).fit())


@pytest.mark.parametrize("period", [4, 12])
@pytest.mark.parametrize("gaps", [(), (9, 30, 31)])
def test_f_test_of_the_dummies(period, gaps):
    values = noise(110, (0.5,)) + 0.4 * np.sin(2 * np.pi * np.arange(110) / period)
    values[list(gaps)] = np.nan
    found = season_presence(values, period)
    statistic, p_value, degrees = referee(values, period)
    assert found.statistic == pytest.approx(statistic, rel=1e-8)
    assert found.p_value == pytest.approx(p_value, rel=1e-7)
    assert found.numerator == degrees == period - 1


@pytest.mark.parametrize("factor", [1e-8, 1e8])
def test_unit_and_level_change_nothing(factor):
    values = noise(96, (0.5,))
    one, other = season_presence(values, 12), season_presence(factor * (values + 50), 12)
    assert other.p_value == pytest.approx(one.p_value, rel=1e-5)


@pytest.mark.parametrize("ar", [(), (0.8,), (1.0,), (0.5, 0.5)], ids=str)
def test_dependence_is_seldom_taken_for_a_season(ar):
    p = np.array([season_presence(noise(120, ar, seed), 12).p_value for seed in range(80)])
    # 0.001 of 80 is none; two are allowed for.
    assert (p < 0.001).sum() <= 2
    assert 0.005 <= (p < 0.05).mean() + 1 / 80 <= 0.2


@pytest.mark.parametrize("ar", [(), (0.8,), (1.0,)], ids=str)
def test_clear_pattern_is_found_on_any_level(ar):
    pattern = 3.0 * np.array([1, 0, -1, 2, 0, 0, -2, 1, 1, -1, 0, -1.0])
    for seed in range(5):
        assert season_presence(noise(96, ar, seed) + pattern[np.arange(96) % 12], 12).p_value < 1e-3


def test_wandering_season_is_found():
    for seed in range(5):
        values = np.cumsum(noise(96, seed=seed).reshape(8, 12), axis=0).ravel()
        assert season_presence(values, 12).p_value < 0.01


def test_exact_pattern_is_a_season():
    found = season_presence(np.tile(np.random.default_rng(0).standard_normal(12), 6), 12)
    assert found.p_value == 0.0


def test_constant_has_none():
    assert season_presence(np.zeros(60), 12).p_value == 1.0


def test_too_short():
    found = season_presence(noise(18), 12)
    assert np.isnan(found.p_value)
    assert np.isnan(found.statistic)


def test_p_value_is_standardised_to_a_hundred_values():
    # Good (1992): p sqrt(n / 100), at most a half.
    found = Presence(2.0, 0.02, 11, 209)
    assert found.nobs == 225
    assert found.standardised == pytest.approx(0.03)
    assert Presence(0.5, 0.9, 11, 209).standardised == 0.5


def days(weeks, seed, *, weekend=0.0, wander=0.0):
    """Six hours a day, seven days a week, with a pattern of the day and, where asked for, one of the week."""
    rng = np.random.default_rng(seed)
    t = np.arange(42 * weeks)
    values = noise(len(t), 0.6, seed) + 3.0 * np.sin(2 * np.pi * t / 6) + weekend * ((t // 6) % 7 >= 5)
    drift = wander * rng.standard_normal((len(t) // 6, 6)).cumsum(axis=0).ravel()
    return values + drift


def test_a_week_beyond_the_day_is_found():
    for seed in range(5):
        assert longer_presence(days(20, seed, weekend=1.5), 6, 42).p_value < 1e-6


@pytest.mark.parametrize("wander", [0.0, 0.4])
def test_a_pattern_of_the_day_alone_is_no_week(wander):
    p = np.array([longer_presence(days(20, seed, wander=wander), 6, 42).p_value for seed in range(60)])
    # 1 % of 60, and Monte Carlo error
    assert (p < 0.01).sum() <= 3


def test_longer_pattern_agrees_with_least_squares_on_dummies():
    values = days(8, 3, weekend=0.5)
    values[[5, 77, 200]] = np.nan
    found = longer_presence(values, 6, 42)
    design, response, _ = lagged_design(values, 1, (1, 2, 3, 6, 7))
    rows = np.flatnonzero(np.isfinite(values))
    rows = rows[rows >= 7]
    sums = [
        residual_sum(np.column_stack([np.eye(period)[rows % period], design[:, 1:]]), response) for period in (42, 6)
    ]
    degrees = len(rows) - 42 - 6
    assert (found.numerator, found.denominator) == (36, degrees)
    assert found.statistic == pytest.approx((sums[1] - sums[0]) / 36 / (sums[0] / degrees), rel=1e-9)


def test_longer_pattern_needs_two_of_each_place():
    assert np.isnan(longer_presence(days(2, 0)[:70], 6, 42).p_value)


def test_mean_pattern_about_a_line_is_taken_out():
    t = np.arange(84.0)
    pattern = np.tile(np.random.default_rng(2).standard_normal(42), 2)
    values = 5.0 + 0.1 * t + pattern - pattern.mean()
    values[10] = np.nan
    left = without_pattern(values, 42)
    assert np.isnan(left[10])
    seen = np.isfinite(left)
    # one place is seen once: there the line and the pattern cannot be told apart, and no value is far off
    assert left[seen] == pytest.approx(5.0 + 0.1 * t[seen], abs=1e-8)


@pytest.mark.parametrize("ar", [0.5, 0.95, 1.0])
def test_no_long_cycle_is_seen_in_what_has_none(ar):
    walks = (np.random.default_rng(seed).standard_normal(1000) for seed in range(40))
    series = [np.cumsum(one) if ar == 1.0 else lfilter([1.0], [1.0, -ar], one) for one in walks]
    # half a per cent is wanted; 2 of 40 would be ten times that
    assert sum(cycle_presence(one, 7, 365.25).standardised < 0.005 for one in series) <= 1


def test_a_long_cycle_is_seen():
    t = np.arange(1000)
    for seed in range(5):
        values = np.sin(2 * np.pi * t / 365.25) + lfilter(
            [1.0], [1.0, -0.5], np.random.default_rng(seed).standard_normal(1000)
        )
        assert cycle_presence(values, 7, 365.25).standardised < 0.005
