"""Isolated outliers under a known model."""

from __future__ import annotations

import numpy as np
import pytest

from preflight_magic.kernels.outliers import additive_outliers


def errors_of(values, ar):
    """One-step errors of an autoregression, zero where there is no past."""
    out = np.zeros(len(values))
    lost = len(ar) - 1
    for t in range(lost, len(values)):
        out[t] = sum(ar[k] * values[t - k] for k in range(lost + 1))
    return out


def autoregression(phi, n, seed):
    noise = np.random.default_rng(seed).standard_normal(n)
    out = np.zeros(n)
    for t in range(1, n):
        out[t] = phi * out[t - 1] + noise[t]
    return out


@pytest.mark.parametrize("phi", [0.0, 0.6, 1.0])
def test_two_wrong_values_are_found_and_no_other(phi):
    values = autoregression(phi, 200, 5)
    values[[60, 61]] += [12.0, -12.0]
    values[140] += 11.0
    ar = np.array([1.0, -phi])
    found = additive_outliers(errors_of(values, ar), ar, np.ones(1), bound=4.5, most=10)
    assert sorted(found) == [60, 61, 140]


def test_a_shock_that_the_model_means_is_no_outlier():
    # In a random walk a jump that stays is one large error without the trace of a wrong value.
    values = autoregression(1.0, 200, 6)
    values[100:] += 5.0
    ar = np.array([1.0, -1.0])
    assert additive_outliers(errors_of(values, ar), ar, np.ones(1), bound=4.5, most=10) == ()


def test_no_more_than_allowed_and_none_without_errors():
    values = np.random.default_rng(1).standard_normal(100)
    values[::10] += 20.0
    found = additive_outliers(values, np.ones(1), np.ones(1), bound=4.5, most=3)
    assert len(found) == 3
    assert additive_outliers(np.zeros(50), np.ones(1), np.ones(1), bound=4.5, most=3) == ()


def test_false_alarms_are_rare():
    rng = np.random.default_rng(2)
    alarms = [
        additive_outliers(rng.standard_normal(120), np.ones(1), np.ones(1), bound=4.5, most=5) for _ in range(300)
    ]
    # 120 places at two-sided 4.5 standard deviations: 0.0008 a series (normal tail); the robust scale adds some.
    assert sum(bool(one) for one in alarms) <= 6
