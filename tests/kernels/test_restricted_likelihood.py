"""The laws that make likelihoods of differencing plans comparable."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.linalg import null_space, toeplitz
from statsmodels.regression.linear_model import GLS
from statsmodels.tsa.arima_process import arma_acovf

from preflight_magic.kernels.arma_parameters import Order, polynomials
from preflight_magic.kernels.restricted_likelihood import (
    Levels,
    contrasts,
    difference,
    effects,
    evaluate,
    line_column,
    missing_columns,
    pattern_columns,
)
from preflight_magic.kernels.whiten import NotPositiveDefiniteError

ONE = np.ones(1)
N = 61
PLAIN = [(0, 0), (1, 0), (2, 0)]
SEASONAL = [(0, 0), (1, 0), (2, 0), (0, 1), (1, 1)]


def made(n=N, seed=3):
    """Something that wanders, with a slope and a season, so that no term of the likelihood vanishes."""
    noise = np.random.default_rng(seed).standard_normal(n)
    t = np.arange(n)
    return 0.3 * np.cumsum(noise) + noise[::-1] + 0.05 * t + np.sin(t)


def levels(period, *, trend=True, n=N, others=None, values=None):
    y = made(n) if values is None else values
    return Levels(y, period, trend, period > 1, np.empty((len(y), 0)) if others is None else others)


def value(given, d, D, ar=ONE, ma=ONE):
    view = contrasts(given, d, D)
    assert view is not None
    return evaluate(view, np.asarray(ar, dtype=float), np.asarray(ma, dtype=float))[0]


def filter_of(d, D, period):
    """Polynomial of the differencing filter."""
    out = ONE
    for lag in (1,) * d + (period,) * D:
        factor = np.zeros(lag + 1)
        factor[0], factor[-1] = 1.0, -1.0
        out = np.convolve(out, factor)
    return out


def seasonal(period, d, D, ar=(), ma=(), sma=()):
    order = Order(len(ar), len(ma), 0, len(sma), period)
    return polynomials(order, np.array([*ar, *ma, *sma], dtype=float))


@pytest.mark.parametrize("period", [1, 4, 12])
def test_white_noise_is_the_same_through_every_plan(period):
    given = levels(period)
    plans = SEASONAL if period > 1 else PLAIN
    values = [value(given, d, D, ma=filter_of(d, D, period)) for d, D in plans]
    np.testing.assert_allclose(values, values[0], rtol=0, atol=1e-6)
    views = [contrasts(given, d, D) for d, D in plans]
    assert {view.count for view in views} == {N - 2 - (period - 1)}


@pytest.mark.parametrize("gaps", [(4,), (10, 11, 12, 40)])
def test_white_noise_is_the_same_through_every_plan_with_missing_values_and_a_step(gaps):
    y = made()
    y[list(gaps)] = np.nan
    columns = np.column_stack([missing_columns(y), (np.arange(N) >= 30).astype(float)])
    given = levels(4, values=np.nan_to_num(y, nan=5.0), others=columns)
    values = [value(given, d, D, ma=filter_of(d, D, 4)) for d, D in SEASONAL]
    np.testing.assert_allclose(values, values[0], rtol=0, atol=1e-6)


@pytest.mark.parametrize("period", [1, 4, 12])
@pytest.mark.parametrize("theta", [-0.5, 0.4])
def test_ar_root_at_one_gives_one_difference_more(period, theta):
    given = levels(period)
    pairs = [((0, 0), (1, 0)), ((1, 0), (2, 0))] + ([((0, 1), (1, 1))] if period > 1 else [])
    for (d, D), (more, same) in pairs:
        near = value(given, d, D, *seasonal(period, d, D, ar=(1 - 1e-8,), ma=(theta,)))
        there = value(given, more, same, *seasonal(period, d, D, ma=(theta,)))
        assert near == pytest.approx(there, abs=1e-4)


def test_ar_root_comes_to_one_at_a_steady_rate():
    # The gap shrinks with the distance of the root from one: a limit, not an accident of rounding.
    given = levels(4)
    there = value(given, 1, 0, *seasonal(4, 0, 0, ma=(0.4,)))
    gaps = [abs(value(given, 0, 0, *seasonal(4, 0, 0, ar=(1 - e,), ma=(0.4,))) - there) for e in (1e-3, 1e-4, 1e-5)]
    assert gaps[0] > 5 * gaps[1] > 25 * gaps[2] > 0


@pytest.mark.parametrize("period", [1, 4, 12])
@pytest.mark.parametrize("phi", [0.6, -0.3])
def test_ma_root_at_one_gives_one_difference_less(period, phi):
    given = levels(period)
    pairs = [((1, 0), (0, 0)), ((2, 0), (1, 0))] + ([((1, 1), (0, 1))] if period > 1 else [])
    for (d, D), (fewer, same) in pairs:
        near = value(given, d, D, *seasonal(period, d, D, ar=(phi,), ma=(-1.0,)))
        there = value(given, fewer, same, *seasonal(period, d, D, ar=(phi,)))
        assert near == pytest.approx(there, abs=1e-4)


@pytest.mark.parametrize("period", [4, 12])
@pytest.mark.parametrize("d", [0, 1])
def test_seasonal_ma_root_at_one_gives_the_fixed_pattern(period, d):
    given = levels(period)
    near = value(given, d, 1, *seasonal(period, d, 1, ar=(0.5,), sma=(-1.0,)))
    there = value(given, d, 0, *seasonal(period, d, 0, ar=(0.5,)))
    assert near == pytest.approx(there, abs=1e-4)


def brute_force(given, d, D, ar, ma, seen=None):
    """Density of orthonormal contrasts of the levels, from dense matrices and another library's autocovariances."""
    n, s = len(given.values), given.period
    seen = np.arange(n) if seen is None else seen
    columns = [np.ones((n, 1)), given.others]
    columns += [line_column(n)[:, None]] if given.trend else []
    columns += [pattern_columns(n, s)] if given.pattern else []
    basis = np.zeros((n, len(seen) - np.linalg.matrix_rank(np.column_stack(columns)[seen])))
    basis[seen] = null_space(np.column_stack(columns)[seen].T)
    operator = np.eye(n)
    for lag in (s,) * D + (1,) * d:
        operator = difference(operator, lag)
    rows = len(operator)
    back = basis.T @ np.linalg.pinv(operator)
    covariance = back @ toeplitz(arma_acovf(ar, ma, rows)[:rows]) @ back.T
    z = basis.T @ np.where(np.isfinite(given.values), given.values, 0.0)
    m = len(z)
    variance = float(z @ np.linalg.solve(covariance, z)) / m
    return -0.5 * (m * (np.log(2 * np.pi * variance) + 1) + np.linalg.slogdet(covariance)[1])


@pytest.mark.parametrize("period", [1, 4, 12])
@pytest.mark.parametrize("trend", [True, False])
def test_dense_matrices_give_the_same_value(period, trend):
    given = levels(period, trend=trend, others=(np.arange(N) >= 23).astype(float)[:, None])
    ar, ma = np.array([1.0, -0.9, 0.35]), np.array([1.0, -0.4])
    plans = SEASONAL if period > 1 else PLAIN
    for d, D in [(d, D) for d, D in plans if trend or d + D < 2]:
        assert value(given, d, D, ar, ma) == pytest.approx(brute_force(given, d, D, ar, ma), abs=1e-7)


@pytest.mark.parametrize("gaps", [(1,), (7, 8, 9, 33), (2, 20, 21, 22, 23, 50, 59)])
@pytest.mark.parametrize(("d", "D"), SEASONAL)
def test_indicators_of_missing_values_leave_the_likelihood_of_the_observed_ones(gaps, d, D):
    y = made()
    y[list(gaps)] = np.nan
    seen = np.flatnonzero(np.isfinite(y))
    ar, ma = np.array([1.0, -0.7]), np.array([1.0, 0.3])
    dense = brute_force(levels(4, values=y), d, D, ar, ma, seen)
    for filler in (0.0, -3.0):
        given = levels(4, values=np.nan_to_num(y, nan=filler), others=missing_columns(y))
        assert value(given, d, D, ar, ma) == pytest.approx(dense, abs=1e-7)


@pytest.mark.parametrize(("d", "D"), SEASONAL)
@pytest.mark.parametrize("factor", [1e-6, 1e6])
def test_unit_shifts_the_value_by_the_contrasts(d, D, factor):
    # A density of m contrasts in another unit differs by the m-th power of the unit.
    ar, ma = np.array([1.0, -0.5]), np.array([1.0, 0.3])
    one, other = levels(4), levels(4, values=factor * made())
    m = contrasts(one, d, D).count
    assert value(other, d, D, ar, ma) == pytest.approx(value(one, d, D, ar, ma) - m * np.log(factor), abs=1e-7)


@pytest.mark.parametrize(("d", "D"), SEASONAL)
def test_what_the_levels_may_contain_changes_nothing(d, D):
    ar, ma = np.array([1.0, -0.5]), np.array([1.0, 0.3])
    t = np.arange(N)
    plus = made() + 70.0 - 2.0 * t + np.array([3.0, -1.0, 0.0, 5.0])[t % 4]
    assert value(levels(4, values=plus), d, D, ar, ma) == pytest.approx(value(levels(4), d, D, ar, ma), abs=1e-7)


def test_residuals_rank_models_as_the_likelihood_does():
    view = contrasts(levels(4), 1, 0)
    found = [evaluate(view, np.array([1.0, -phi]), np.array([1.0, theta])) for phi in (0.1, 0.7) for theta in (-0.9, 0)]
    constant = [one + view.count / 2 * np.log(float(left @ left)) for one, left in found]
    np.testing.assert_allclose(constant, constant[0], rtol=0, atol=1e-9)
    assert len({round(one, 3) for one, _ in found}) == 4


def test_effects_are_generalised_least_squares():
    ar, ma = np.array([1.0, -0.6]), np.array([1.0, 0.4])
    step = (np.arange(N) >= 23).astype(float)
    view = contrasts(levels(1, others=step[:, None]), 1, 0)
    estimates, covariance = effects(view, ar, ma)
    design = np.column_stack([difference(line_column(N), 1), difference(step, 1)])
    referee = GLS(difference(made(), 1), design, toeplitz(arma_acovf(ar, ma, N - 1)[: N - 1])).fit()
    np.testing.assert_allclose(estimates, referee.params, rtol=1e-8)
    # The contrasts of the levels are as many as the rows after one difference less the columns.
    np.testing.assert_allclose(covariance, referee.cov_params(), rtol=1e-8)


def test_columns_that_repeat_each_other_or_too_few_rows_leave_no_plan():
    step = (np.arange(N) >= 23).astype(float)
    assert contrasts(levels(1, others=np.column_stack([step, step])), 0, 0) is None
    assert contrasts(levels(12, n=14), 0, 1) is None
    assert contrasts(levels(1, n=5), 0, 0) is not None
    assert contrasts(levels(1, n=4), 0, 0) is None


def test_unit_root_in_the_ar_part_is_refused():
    with pytest.raises(NotPositiveDefiniteError):
        evaluate(contrasts(levels(1), 0, 0), np.array([1.0, -1.0]), ONE)


def test_exact_line_keeps_a_finite_value():
    given = levels(1, values=5.0 + 0.1 * np.arange(N))
    assert np.isfinite(value(given, 0, 0))
    assert np.isfinite(value(given, 2, 0))


def test_columns():
    assert missing_columns(np.array([1.0, np.nan, 2.0, np.nan])).tolist() == [[0, 0], [1, 0], [0, 0], [0, 1]]
    assert difference(np.array([1.0, 4.0, 9.0, 16.0]), 2).tolist() == [8.0, 12.0]
    assert line_column(5).tolist() == [-0.5, -0.25, 0.0, 0.25, 0.5]
    pattern = pattern_columns(24, 4)
    np.testing.assert_allclose(pattern.sum(axis=0), 0, atol=1e-12)
    np.testing.assert_allclose(pattern.T @ pattern, 6 * np.eye(3), atol=1e-12)
    assert not pattern.flags.writeable
