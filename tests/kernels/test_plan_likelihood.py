"""What the comparison of plans promises: shares, invariance, and the plan of series whose making is known."""

from __future__ import annotations

from dataclasses import replace
from functools import cache

import numpy as np
import pytest
from scipy.signal import lfilter

from preflight_magic.kernels.plan_likelihood import compare
from preflight_magic.ladder import prior_of
from preflight_magic.policy import Thresholds

PRIOR = prior_of(Thresholds())
N = 96
PATTERN = np.array([3.0, 1, 0, -2, -1, 2, 4, 3, 0, -3, -4, -3])


def noise(n, seed=0, ar=()):
    e = np.random.default_rng([11, seed]).standard_normal(n + 100)
    return lfilter([1.0], np.r_[1.0, -np.asarray(ar)], e)[100:]


def airline(n, seed=0):
    e = np.random.default_rng([12, seed]).standard_normal(n)
    changes = lfilter(np.convolve([1, -0.4], np.r_[1, np.zeros(11), -0.2]), [1.0], e)
    return lfilter([1.0], np.convolve([1, -1], np.r_[1, np.zeros(11), -1]), changes)


def stepped(n, seed=0):
    return noise(n, seed, (0.4,)) + 5.0 * (np.arange(n) >= n // 2)


def patterned(n, seed=0):
    return noise(n, seed, (0.4,)) + 1.5 * PATTERN[np.arange(n) % 12]


def in_logs(n, seed=0):
    return np.exp(5 + 0.3 * np.cumsum(noise(n, seed)))


# Name: series of length n, period, (log, d, D, pattern, shift).
MADE = {
    "white noise": (noise, 1, (False, 0, 0, False, False)),
    "autoregression": (lambda n, seed: noise(n, seed, (0.5,)), 1, (False, 0, 0, False, False)),
    "random walk": (lambda n, seed: np.cumsum(noise(n, seed)), 1, (False, 1, 0, False, False)),
    "random walk in the logs": (in_logs, 1, (True, 1, 0, False, False)),
    "double random walk": (lambda n, seed: np.cumsum(np.cumsum(noise(n, seed))), 1, (False, 2, 0, False, False)),
    "level shift": (stepped, 1, (False, 0, 0, False, True)),
    "fixed pattern": (patterned, 12, (False, 0, 0, True, False)),
    "airline": (airline, 12, (False, 1, 1, False, False)),
}


@cache
def compared(name, seed, n=N):
    make, period, _ = MADE[name]
    return compare(make(n, seed), period, PRIOR)


def answer(found):
    best = found.best
    return found.log, best.d, best.D, best.pattern, best.shift is not None


@pytest.mark.parametrize("name", MADE)
def test_leading_plan_is_mostly_the_one_that_made_the_series(name):
    right = sum(answer(compared(name, seed)) == MADE[name][2] for seed in range(4))
    assert right >= 3


@pytest.mark.parametrize("name", MADE)
def test_candidates_are_ranked_and_shares_sum_to_one(name):
    found = compared(name, 0)
    evidence = [one.evidence for one in found.candidates]
    assert evidence == sorted(evidence, reverse=True)
    assert found.best is found.candidates[0]
    assert sum(found.weights) == pytest.approx(1.0)
    np.testing.assert_allclose(found.weights, np.exp(np.array(evidence) - evidence[0]) * found.weights[0])
    plans = [(one.d, one.D, one.trend, one.pattern, one.shift) for one in found.candidates]
    assert len(set(plans)) == len(plans)
    assert np.isfinite(evidence).all()
    assert found.count == N


@pytest.mark.parametrize("name", MADE)
def test_candidates_carry_what_they_say(name):
    for one in compared(name, 0).candidates:
        assert np.isfinite(one.trend_t) == one.trend
        assert np.isfinite(one.shift_t) == (one.shift is not None)
        assert not (one.pattern and one.D)
        assert not (one.trend and one.d + one.D >= 2)
        assert one.d + one.D <= 2
        assert len(one.coefficients) == one.order.size


@pytest.mark.parametrize("name", ["level shift", "fixed pattern"])
@pytest.mark.parametrize("factor", [1e-9, 1e9])
def test_unit_changes_no_share(name, factor):
    make, period, _ = MADE[name]
    # Below zero, where no log is in question.
    y = make(60, 0)
    y = y - y.max() - 1
    one, other = compare(y, period, PRIOR), compare(factor * y, period, PRIOR)
    assert answer(other) == answer(one)
    np.testing.assert_allclose(other.weights, one.weights, atol=2e-3)


@pytest.mark.parametrize("name", ["random walk", "fixed pattern"])
def test_level_changes_no_share_where_there_is_no_log(name):
    make, period, _ = MADE[name]
    y = make(60, 0) - 1000.0
    one, other = compare(y, period, PRIOR), compare(y - 1e5, period, PRIOR)
    np.testing.assert_allclose(other.weights, one.weights, atol=2e-3)


def test_unit_of_positive_values_changes_no_log():
    y = in_logs(80)
    one, other = compare(y, 1, PRIOR), compare(1e7 * y, 1, PRIOR)
    assert (one.log, other.log) == (True, True)
    assert other.log_gain == pytest.approx(one.log_gain, abs=1e-6)
    np.testing.assert_allclose(other.weights, one.weights, atol=2e-3)


def test_shift_is_dated():
    for seed in range(4):
        assert abs(compared("level shift", seed).dated.position - N // 2) <= 2


@pytest.mark.parametrize("name", ["random walk", "fixed pattern"])
def test_some_missing_values_change_no_plan(name):
    make, period, right = MADE[name]
    found = []
    for seed in range(2):
        y = make(N, seed)
        y[[7, 30, 31, 32, 77]] = np.nan
        found.append(compare(y, period, PRIOR))
    assert {one.count for one in found} == {N - 5}
    assert sum(answer(one) == right for one in found) >= 1


def test_margins_decide_log_and_season():
    grown, seasonal = in_logs(60), patterned(60)
    gain = compare(grown, 1, PRIOR).log_gain
    assert compare(grown, 1, replace(PRIOR, log_margin=gain - 0.01)).log
    assert not compare(grown, 1, replace(PRIOR, log_margin=gain + 0.01)).log
    assert compare(seasonal, 12, PRIOR).best.pattern
    without = compare(seasonal, 12, replace(PRIOR, season_p=0.0))
    assert not any(one.pattern or one.D for one in without.candidates)


@pytest.mark.parametrize(
    ("field", "holds"),
    [
        ("trend", lambda one: one.trend),
        ("second", lambda one: one.d + one.D == 2),
        ("shift", lambda one: one.shift is not None),
        ("wandering", lambda one: one.D == 1),
    ],
)
def test_prior_odds_against_a_feature_lower_its_share(field, holds):
    y = patterned(60) + 0.03 * np.arange(60) + 2.0 * (np.arange(60) > 35)

    def share(prior):
        found = compare(y, 12, prior)
        return sum(w for one, w in zip(found.candidates, found.weights, strict=True) if holds(one))

    low, high = (replace(PRIOR, **{field: getattr(PRIOR, field) + by}) for by in (-2.0, 2.0))
    assert share(high) < share(low)


def test_too_few_cycles_leave_no_season():
    found = compare(patterned(27), 12, PRIOR)
    assert found.period == 1
    assert found.presence is None
    assert compare(patterned(60), 12, PRIOR).period == 12


def test_position_never_observed_leaves_no_season():
    y = patterned(72)
    y[5::12] = np.nan
    assert compare(y, 12, PRIOR).period == 1


def test_constant_leaves_no_plan():
    assert compare(np.full(30, 7.0), 1, PRIOR) is None


@pytest.mark.parametrize("n", [8, 12, 23])
def test_short_series_have_plans_without_a_shift(n):
    found = compare(noise(n), 1, PRIOR)
    assert all(one.shift is None for one in found.candidates)
    assert sum(found.weights) == pytest.approx(1.0)
