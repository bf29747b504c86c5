"""Candidate plans brought forward: against formulas and against each other."""

from __future__ import annotations

import numpy as np
import pytest

from preflight_magic.kernels.arma_parameters import Order
from preflight_magic.kernels.candidate_prediction import predict_candidate, within_window
from preflight_magic.kernels.plan_evidence import Candidate
from preflight_magic.kernels.student import student_cdf, student_quantile


def candidate(d: int = 0, D: int = 0, *, trend: bool = False, pattern: bool = False, shift: int | None = None):
    nothing = float("nan")
    return Candidate(d, D, trend, pattern, shift, 0.0, Order(), np.empty(0), nothing, nothing)


def test_a_mean_has_the_variance_of_one_more_value() -> None:
    values = np.random.default_rng(1).normal(5.0, 2.0, 25)
    found = predict_candidate(candidate(), values, 1, (), 3)
    assert found is not None
    np.testing.assert_allclose(found.mean, values.mean())
    # The interval of one more value: s^2 (1 + 1/n) with n - 1 degrees of freedom (any text on the normal mean).
    np.testing.assert_allclose(found.variance, values.var(ddof=1) * (1 + 1 / 25))
    assert found.degrees == 24.0


def test_a_line_goes_on() -> None:
    found = predict_candidate(candidate(trend=True), 3.0 + 0.5 * np.arange(30), 1, (), 2)
    assert found is not None
    np.testing.assert_allclose(found.mean, [18.0, 18.5])


def test_a_pattern_and_a_seasonal_difference_repeat_a_season() -> None:
    values = np.resize([1.0, 4.0, 2.0, 7.0], 24)
    for one in (candidate(pattern=True), candidate(D=1), candidate(1, pattern=True), candidate(1, 1)):
        found = predict_candidate(one, values, 4, (), 6)
        assert found is not None
        np.testing.assert_allclose(found.mean, [1.0, 4.0, 2.0, 7.0, 1.0, 4.0], atol=1e-9)


def test_a_shift_stays() -> None:
    values = np.r_[np.zeros(15), np.full(15, 9.0)]
    found = predict_candidate(candidate(shift=15), values, 1, (), 2)
    assert found is not None
    np.testing.assert_allclose(found.mean, 9.0)


def test_missing_values_add_no_information() -> None:
    values = np.random.default_rng(2).normal(size=30)
    gaps = values.copy()
    gaps[[4, 17]] = np.nan
    found = predict_candidate(candidate(), gaps, 1, (), 1)
    assert found is not None
    seen = values[np.isfinite(gaps)]
    assert found.mean[0] == pytest.approx(seen.mean())
    assert found.variance[0] == pytest.approx(seen.var(ddof=1) * (1 + 1 / 28))


def test_an_outlier_moves_no_mean_but_may_come_again() -> None:
    values = np.random.default_rng(3).normal(size=40)
    calm = predict_candidate(candidate(), values, 1, (10,), 1)
    values[10] = 50.0
    found = predict_candidate(candidate(), values, 1, (10,), 1)
    assert calm is not None
    assert found is not None
    assert found.mean[0] == pytest.approx(calm.mean[0])
    between = (values[9] + values[11]) / 2
    extra = (50.0 - between) ** 2 / 40
    assert found.variance[0] == pytest.approx(extra + values[np.arange(40) != 10].var(ddof=1) * (1 + 1 / 39))


def test_too_few_values_give_nothing() -> None:
    assert predict_candidate(candidate(pattern=True), np.arange(4.0), 4, (), 2) is None


def test_the_window_drops_what_is_twenty_times_less_likely() -> None:
    kept = within_window([0.0, -2.9, -3.1, -40.0])
    assert [place for place, _ in kept] == [0, 1]
    assert sum(weight for _, weight in kept) == pytest.approx(1.0)
    assert kept[0][1] / kept[1][1] == pytest.approx(np.exp(2.9))


def test_student() -> None:
    # Student's table of t, five degrees of freedom, two sided 5 %: 2.571 (any text; scipy has 2.5706)
    assert student_quantile(0.975, 5.0) == pytest.approx(2.5706, abs=1e-4)
    np.testing.assert_allclose(student_cdf(np.array([-2.5706, 0.0]), 5.0), [0.025, 0.5], atol=1e-5)
