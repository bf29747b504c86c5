"""Does a log help? Laws of the gain, and series whose answer is known."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.signal import lfilter

from preflight_magic.kernels.power_transform import log_gain


def growing(n=120, seed=0, spread=0.1):
    """Growth and season in proportion to the level."""
    t = np.arange(n)
    noise = spread * np.random.default_rng(seed).standard_normal(n)
    return np.exp(4 + 0.01 * t + 0.3 * np.sin(2 * np.pi * t / 12) + noise)


def additive(n=120, seed=0):
    """Line, season and noise of constant size."""
    t = np.arange(n)
    return 100 + 0.6 * t + 15 * np.sin(2 * np.pi * t / 12) + 6 * np.random.default_rng(seed).standard_normal(n)


@pytest.mark.parametrize("seed", range(5))
@pytest.mark.parametrize("period", [1, 12])
def test_gain_is_large_where_the_spread_grows_with_the_level(seed, period):
    assert log_gain(growing(seed=seed), period) > 7


@pytest.mark.parametrize("period", [1, 12])
def test_gain_is_seldom_large_where_it_does_not(period):
    gains = np.array([log_gain(additive(seed=seed), period) for seed in range(30)])
    assert (gains > 7).mean() <= 0.05
    assert np.median(gains) < 0


@pytest.mark.parametrize("series", [growing, additive])
@pytest.mark.parametrize("factor", [1e-12, 3.7, 1e12])
def test_unit_changes_nothing(series, factor):
    # Without the Jacobian the gain would grow with the logarithm of the unit.
    assert log_gain(factor * series(), 12) == pytest.approx(log_gain(series(), 12), abs=1e-6)


def test_small_relative_spread_decides_nothing():
    # Where all values lie within a thousandth of the level, the log is a straight line.
    values = 1.0 + 1e-4 * np.random.default_rng(3).standard_normal(100)
    assert abs(log_gain(values, 1)) < 0.5


@pytest.mark.parametrize("smallest", [0.0, -1.0])
def test_no_log_where_a_value_is_not_positive(smallest):
    values = growing()
    values[17] = smallest
    assert log_gain(values, 12) == -np.inf


def test_missing_values_are_left_out():
    values = growing()
    values[[5, 40, 41, 90]] = np.nan
    assert log_gain(values, 12) > 7
    values[3] = -1.0
    assert log_gain(values, 12) == -np.inf


@pytest.mark.parametrize(("n", "period"), [(6, 1), (8, 1), (18, 12)])
def test_too_short(n, period):
    assert np.isnan(log_gain(growing(n), period))


@pytest.mark.parametrize(
    "values",
    [5.0 + 2.0 * np.arange(60), 3.0 + np.sin(2 * np.pi * np.arange(60) / 12), 1.05 ** np.arange(60), np.full(60, 2.0)],
    ids=["line", "sine", "growth", "constant"],
)
def test_exact_series_give_no_false_figure(values):
    gain = log_gain(values, 1)
    assert np.isnan(gain) or np.isfinite(gain)


@pytest.mark.parametrize("seed", range(8))
def test_spikes_on_a_series_of_constant_spread_call_no_log(seed):
    rng = np.random.default_rng(seed)
    values = 200.0 + 5.0 * lfilter([1.0], [1.0, -0.5], rng.standard_normal(480))
    values[rng.choice(480, 10, replace=False)] += 60.0
    assert log_gain(values, 1) < 7


@pytest.mark.parametrize("seed", range(4))
def test_spikes_do_not_hide_that_the_spread_grows(seed):
    values = growing(240, seed=seed)
    values[[50, 120, 200]] *= 3.0
    assert log_gain(values, 12) > 7
