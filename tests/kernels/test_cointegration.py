"""Engle and Granger, and Johansen, against statsmodels called directly; the mark of a spurious regression by hand."""

from __future__ import annotations

import numpy as np
import pytest
import statsmodels.api as sm
from statsmodels.stats.stattools import durbin_watson
from statsmodels.tsa.stattools import coint
from statsmodels.tsa.vector_ar.vecm import coint_johansen

from preflight_magic.kernels.cointegration import engle_granger, johansen, levels_regression


def tied(n: int = 150, seed: int = 1) -> np.ndarray:
    rng = np.random.default_rng(seed)
    walk = np.cumsum(rng.normal(size=n))
    return np.column_stack([2.0 * walk + rng.normal(size=n), walk])


def apart(n: int = 150, seed: int = 3) -> np.ndarray:
    return np.cumsum(np.random.default_rng(seed).normal(size=(n, 2)), axis=0)


@pytest.mark.parametrize("values", [tied(), apart()], ids=["tied", "apart"])
def test_engle_granger_is_that_of_statsmodels(values: np.ndarray) -> None:
    found = engle_granger(values[:, 0], values[:, 1:])
    assert found is not None
    statistic, p_value, critical = coint(values[:, 0], values[:, 1], trend="c", autolag="aic")
    assert (found.statistic, found.p_value) == (statistic, p_value)
    assert list(found.critical_values.values()) == list(critical)


@pytest.mark.parametrize(("values", "rank"), [(tied(), 1), (apart(), 0)], ids=["tied", "apart"])
def test_johansen_is_that_of_statsmodels(values: np.ndarray, rank: int) -> None:
    found = johansen(values)
    assert found is not None
    theirs = coint_johansen(values, 0, found.lags)
    # The trace does not depend on location and scale.
    np.testing.assert_allclose(found.statistics, theirs.lr1, rtol=1e-7)
    np.testing.assert_allclose(found.critical_values, theirs.cvt[:, 1])
    assert found.rank == rank


def test_johansen_with_more_lags() -> None:
    rng = np.random.default_rng(4)
    walk = np.cumsum(np.convolve(rng.normal(size=303), [1.0, 0.8, 0.6, 0.4], "valid"))
    found = johansen(np.column_stack([walk, 0.5 * walk + rng.normal(size=300)]))
    assert found is not None
    assert found.lags >= 1


def test_levels_regression_by_statsmodels() -> None:
    values = apart()
    r_squared, statistic = levels_regression(values[:, 0], values[:, 1])
    theirs = sm.OLS(values[:, 0], sm.add_constant(values[:, 1])).fit()
    assert r_squared == pytest.approx(theirs.rsquared)
    assert statistic == pytest.approx(durbin_watson(theirs.resid))


def test_independent_walks_bear_the_mark_more_often_than_noise_does() -> None:
    # Granger and Newbold (1974), Journal of Econometrics 2, 111-120: R squared above Durbin-Watson.
    marks = [levels_regression(*apart(60, seed).T) for seed in range(60)]
    noise = [levels_regression(*np.random.default_rng(seed).normal(size=(2, 60))) for seed in range(60)]
    assert sum(r > d for r, d in marks) >= 10
    assert not any(r > d for r, d in noise)


def test_too_short_or_exact_gives_nothing() -> None:
    assert engle_granger(np.arange(10.0), np.ones((10, 1))) is None
    assert johansen(apart(12)) is None
    assert johansen(np.random.default_rng(1).normal(size=(100, 13))) is None
    line = np.arange(30.0)
    assert levels_regression(2 * line, line) == (1.0, 0.0)
    assert levels_regression(np.ones(30), line) == (1.0, 0.0)
