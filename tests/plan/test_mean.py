"""Medians and means in the original units."""

import numpy as np
import pandas as pd
import pytest
from scipy import integrate, stats

from preflight_magic.model import CheckError, Difference, Log, Logit, PerDay, Power
from preflight_magic.plan.plan import Plan

INDEX = pd.period_range("2014-03", periods=40, freq="M")
HISTORY = pd.Series(np.linspace(0.2, 0.8, 40), index=INDEX, name="share")
FUTURE = pd.period_range("2017-07", periods=3, freq="M")
FORECAST = pd.Series([-1.0, 0.3, 2.0], index=FUTURE, name="share")


def expected_mean(level, mean, variance):
    """Mean by adaptive quadrature."""
    sd = np.sqrt(variance)
    value, _ = integrate.quad(lambda z: level(mean + sd * z) * stats.norm.pdf(z), -9, 9, epsabs=1e-13, epsrel=1e-12)
    return value


def test_log_without_variance_is_the_median_and_with_it_the_mean():
    plan = Plan((), (Log(),))
    np.testing.assert_allclose(plan.back_transform(FORECAST, HISTORY), np.exp(FORECAST), rtol=1e-14)
    # Mean of the log-normal distribution, exp(mu + sigma^2 / 2).
    variance = np.array([0.1, 0.5, 2.0])
    wanted = stats.lognorm(s=np.sqrt(variance), scale=np.exp(FORECAST)).mean()
    for given in (variance, pd.Series(variance, index=FUTURE), list(variance)):
        np.testing.assert_allclose(plan.back_transform(FORECAST, HISTORY, given), wanted, rtol=1e-13)
    np.testing.assert_allclose(
        plan.back_transform(FORECAST, HISTORY, 0.5),
        stats.lognorm(s=0.5**0.5, scale=np.exp(FORECAST)).mean(),
        rtol=1e-13,
    )


def test_mean_against_a_large_sample():
    sample = np.exp(0.3 + 0.6 * np.random.default_rng(11).standard_normal(400_000))
    mean = Plan((), (Log(),)).back_transform(FORECAST, HISTORY, 0.36).iloc[1]
    assert mean == pytest.approx(sample.mean(), abs=4 * sample.std() / np.sqrt(sample.size))


@pytest.mark.parametrize("variance", [0.01, 0.5, 4.0])
@pytest.mark.parametrize(("lower", "upper"), [(0.0, 1.0), (-2.0, 3.0)])
def test_mean_of_a_share(variance, lower, upper):
    back = Plan((), (Logit(lower, upper),)).back_transform(FORECAST, HISTORY, variance)
    wanted = [lower + (upper - lower) * expected_mean(lambda z: 1 / (1 + np.exp(-z)), m, variance) for m in FORECAST]
    np.testing.assert_allclose(back, wanted, rtol=1e-9)


def test_mean_of_a_square_root():
    # With y = (1 + z / 2)^2 and z normal, E y = (1 + m / 2)^2 + v / 4.
    far = FORECAST + 20
    back = Plan((), (Power(0.5, 3.0),)).back_transform(far, HISTORY, 1.5)
    np.testing.assert_allclose(back, (1 + far / 2) ** 2 + 1.5 / 4 - 3.0, rtol=1e-12)


@pytest.mark.parametrize("exponent", [-0.1, 0.2, 0.8])
def test_mean_of_other_powers(exponent):
    variance = 0.04
    back = Plan((), (Power(exponent),)).back_transform(FORECAST * 0.3, HISTORY, variance)
    wanted = [
        expected_mean(lambda z: max(1 + exponent * z, 1e-9) ** (1 / exponent), 0.3 * m, variance) for m in FORECAST
    ]
    np.testing.assert_allclose(back, wanted, rtol=1e-8)


def test_power_zero_is_the_log_with_an_offset():
    y = HISTORY
    np.testing.assert_allclose(Plan((), (Power(0.0, 2.0),)).apply(y), np.log(y + 2), rtol=1e-14)
    for variance in (None, 0.3):
        one = Plan((), (Power(0.0, 2.0),)).back_transform(FORECAST, y, variance)
        two = Plan((), (Log(),)).back_transform(FORECAST, y, variance) - 2
        pd.testing.assert_series_equal(one, two, rtol=1e-13)
        near = Plan((), (Power(1e-9, 2.0),)).back_transform(FORECAST, y, variance)
        pd.testing.assert_series_equal(one, near, rtol=1e-6)


def test_power_is_box_and_cox():
    y = HISTORY * 100
    np.testing.assert_allclose(Plan((), (Power(0.3, 1.0),)).apply(y), ((y + 1.0) ** 0.3 - 1) / 0.3, rtol=1e-13)


def test_power_stops_at_its_lower_bound():
    low = pd.Series([-5.0, -2.0, 0.0], index=FUTURE)
    plan = Plan((), (Power(0.5, 1.0),))
    assert plan.back_transform(low, HISTORY).tolist() == [-1.0, -1.0, 0.0]
    assert (plan.back_transform(low, HISTORY, 1.0) > -1.0).all()


def test_no_variance_changes_a_linear_plan():
    plan = Plan((), (PerDay(), Difference(1)))
    pd.testing.assert_series_equal(plan.back_transform(FORECAST, HISTORY), plan.back_transform(FORECAST, HISTORY, 9.0))


def test_zero_variance_gives_the_median():
    for step in (Log(), Logit(), Power(0.4)):
        plan = Plan((), (step,))
        pd.testing.assert_series_equal(
            plan.back_transform(FORECAST, HISTORY, 0.0), plan.back_transform(FORECAST, HISTORY), rtol=1e-12
        )


@pytest.mark.parametrize(
    ("variance", "words"),
    [
        (-1.0, "below zero"),
        ([0.1, 0.2], "shape"),
        (pd.Series([0.1, 0.2, 0.3]), "another index"),
        ("much", "not a number"),
    ],
)
def test_variances_that_cannot_be(variance, words):
    with pytest.raises(CheckError, match=words):
        Plan((), (Log(),)).back_transform(FORECAST, HISTORY, variance)
