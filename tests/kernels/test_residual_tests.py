import numpy as np
import pytest
from scipy.stats import chi2
from statsmodels.regression.linear_model import OLS
from statsmodels.stats.stattools import jarque_bera as theirs_normal

from preflight_magic.kernels.residual_tests import arch_lm, jarque_bera


def arch(n: int, alpha: float, seed: int = 1) -> np.ndarray:
    noise = np.random.default_rng(seed).normal(size=n)
    out = np.zeros(n)
    for t in range(n):
        out[t] = noise[t] * np.sqrt(1.0 + alpha * (out[t - 1] ** 2 if t else 0.0))
    return out


@pytest.mark.parametrize("lags", [1, 4, 8])
def test_arch_test_is_that_of_the_regression_of_squares(lags: int) -> None:
    values = arch(200, 0.4)
    found = arch_lm(values, lags)
    assert found is not None
    squares = values**2
    lagged = np.column_stack([np.ones(200 - lags), *(squares[lags - k : 200 - k] for k in range(1, lags + 1))])
    # Engle (1982): nobs R squared; statsmodels' het_arch gives the same, in a form that differs between releases.
    theirs = OLS(squares[lags:], lagged).fit()
    statistic = theirs.nobs * theirs.rsquared
    assert found.statistic == pytest.approx(statistic, rel=1e-9)
    assert found.p_value == pytest.approx(chi2.sf(statistic, lags), rel=1e-9)
    assert (found.lags, found.degrees, found.nobs) == (lags, lags, 200 - lags)


def test_arch_is_seen_and_missing_values_are_skipped() -> None:
    values = arch(600, 0.6)
    values[[10, 200, 201]] = np.nan
    found = arch_lm(values, 2)
    assert found is not None
    assert found.p_value < 0.001
    assert found.nobs == 598 - 7
    noise = arch_lm(np.random.default_rng(3).normal(size=600), 2)
    assert noise is not None
    assert noise.p_value > 0.01


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_normality_test_is_that_of_statsmodels(seed: int) -> None:
    values = np.random.default_rng(seed).standard_t(5, size=150)
    found = jarque_bera(np.r_[values, np.nan])
    assert found is not None
    statistic, p_value, *_ = theirs_normal(values)
    assert found.statistic == pytest.approx(float(statistic), rel=1e-9)
    assert found.p_value == pytest.approx(float(p_value), rel=1e-9)
    assert found.nobs == 150


def test_degenerate_innovations_have_no_test() -> None:
    for values in (np.ones(50), np.zeros(3), np.full(30, np.nan)):
        assert arch_lm(values, 4) is None
        assert jarque_bera(values) is None
