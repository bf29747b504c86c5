"""Dating one change of level."""

from __future__ import annotations

import numpy as np
import pytest
from statsmodels.regression.linear_model import OLS

from preflight_magic.kernels.breaks import date_shift


def constant(n):
    return np.ones((n, 1))


def with_line(n):
    return np.column_stack([np.ones(n), np.linspace(-0.5, 0.5, n)])


def brute_force(values, regressors, trim=0.1):
    """F statistic of a step at every date, by another library."""
    n, seen = len(values), np.isfinite(values)
    edge = max(int(trim * n), 4)
    found = {}
    for at in range(edge, n - edge):
        design = np.column_stack([regressors, np.arange(n) >= at])[seen]
        without = OLS(values[seen], regressors[seen]).fit()
        if np.linalg.matrix_rank(design) == design.shape[1]:
            found[at] = OLS(values[seen], design).fit().compare_f_test(without)[0]
    best = max(found, key=found.get)
    return best, found[best]


@pytest.mark.parametrize("regressors", [constant, with_line], ids=["constant", "line"])
@pytest.mark.parametrize("gaps", [(), (3, 17, 18, 19, 40)])
def test_largest_f_statistic_of_all_dates(regressors, gaps):
    for seed in range(4):
        values = np.random.default_rng(seed).standard_normal(50)
        values[31:] += seed
        values[list(gaps)] = np.nan
        found = date_shift(values, regressors(50))
        at, statistic = brute_force(values, regressors(50))
        assert found.statistic == pytest.approx(statistic, rel=1e-9)
        # With a value missing at the date, the date before it splits the observed values alike.
        split = np.isfinite(values[min(found.position, at) : max(found.position, at)]).sum()
        assert split == 0


@pytest.mark.parametrize("at", [20, 50, 80])
@pytest.mark.parametrize("size", [6.0, -6.0])
def test_clear_shift_is_dated_to_the_step(at, size):
    values = np.random.default_rng(at).standard_normal(100)
    values[at:] += size
    assert date_shift(values, constant(100)).position == at


def test_exact_shift_is_dated_without_dividing_by_zero():
    values = np.where(np.arange(40) < 22, 3.0, 5.0)
    found = date_shift(values, constant(40))
    assert found.position == 22
    assert np.isfinite(found.statistic)
    assert found.statistic > 1e6


@pytest.mark.parametrize("factor", [1e-9, 1e9, -1.0])
def test_unit_and_level_change_nothing(factor):
    values = np.random.default_rng(1).standard_normal(60)
    one, other = date_shift(values, with_line(60)), date_shift(factor * values + 7 * factor, with_line(60))
    assert (one.position, one.candidates) == (other.position, other.candidates)
    assert other.statistic == pytest.approx(one.statistic, rel=1e-7)


@pytest.mark.parametrize("n", [24, 100, 137])
def test_ends_are_left_out(n):
    edge = max(n // 10, 4)
    # A jump in the last value alone must not be dated there.
    values = np.random.default_rng(n).standard_normal(n)
    values[-1] += 50.0
    found = date_shift(values, constant(n))
    assert edge <= found.position < n - edge
    assert found.candidates == n - 2 * edge


@pytest.mark.parametrize("n", [3, 8])
def test_too_short_for_any_date(n):
    assert date_shift(np.arange(n, dtype=float), constant(n)) is None


def test_too_few_observed_values():
    values = np.full(40, np.nan)
    values[[0, 10, 20, 39]] = [1.0, 2.0, 4.0, 3.0]
    assert date_shift(values, constant(40)) is None


def test_long_series_are_searched_on_a_grid():
    values = np.random.default_rng(2).standard_normal(20_000)
    values[9_000:] += 1.0
    found = date_shift(values, constant(20_000))
    assert found.candidates <= 2000
    assert abs(found.position - 9_000) < 20
