import numpy as np
import pytest

from preflight_magic.kernels.arma import fit
from preflight_magic.kernels.arma_parameters import Order
from preflight_magic.kernels.innovation_correlation import portmanteau, whitened
from preflight_magic.kernels.plan_columns import LikelihoodColumns


def pattern(n: int, period: int) -> np.ndarray:
    return np.linalg.qr(np.eye(period)[np.arange(n) % period])[0]


def left(n: int, basis: np.ndarray, rng: np.random.Generator, phi: float = 0.0) -> np.ndarray:
    noise = rng.normal(size=n)
    for t in range(1, n):
        noise[t] += phi * noise[t - 1]
    return noise - basis @ (basis.T @ noise)


def test_one_lag_is_standardised_by_its_exact_moments() -> None:
    basis = pattern(36, 12)
    rng = np.random.default_rng(1)
    found = [portmanteau(left(36, basis, rng), basis, 1, 0) for _ in range(4000)]
    statistics = np.array([one.statistic for one in found if one is not None])
    assert len(statistics) == 4000
    # The square of a standardised value has mean one; four thousand of them have a standard error of 0.022.
    assert statistics.mean() == pytest.approx(1.0, abs=0.08)
    # By a matrix, for the lag of one year, where three years of a pattern leave a correlation of about -1/3.
    values = left(36, basis, rng)
    projection = np.eye(36) - basis @ basis.T
    total = 0.0
    for lag in range(1, 13):
        shift = 0.5 * (np.eye(36, k=lag) + np.eye(36, k=-lag))
        both = projection @ shift
        m = 24
        mean = np.trace(both) / m
        variance = 2.0 * (m * np.trace(both @ both) - np.trace(both) ** 2) / (m**2 * (m + 2))
        total += (values @ shift @ values / (values @ values) - mean) ** 2 / variance
    assert mean < -0.3
    one = portmanteau(values, basis, 12, 0)
    assert one is not None
    assert one.statistic == pytest.approx(total, rel=1e-9)
    assert (one.lags, one.degrees, one.nobs) == (12, 12, 24)


def test_a_pattern_taken_out_of_five_years_is_not_taken_for_correlation() -> None:
    basis = pattern(60, 12)
    rng = np.random.default_rng(2)
    rejected = [
        portmanteau(left(60, basis, rng), basis, lags, 0).p_value < 0.05 for _ in range(300) for lags in (12, 20)
    ]  # type: ignore[union-attr]
    assert 0.01 < np.mean(rejected) < 0.09
    strong = [portmanteau(left(60, basis, rng, 0.6), basis, 12, 0).p_value < 0.05 for _ in range(100)]  # type: ignore[union-attr]
    assert np.mean(strong) > 0.8


def test_residuals_are_orthogonal_to_what_was_estimated() -> None:
    rng = np.random.default_rng(3)
    columns = pattern(80, 4)
    values = left(80, columns, rng, 0.5)
    beside = LikelihoodColumns(mean=False, nuisance=None, fixed=columns, gaps="none")
    model = fit(values, Order(1, 0), mean=False, fixed=columns)
    assert model is not None
    found = whitened(model, values, beside)
    assert found is not None
    residuals, basis = found
    assert basis.shape == (80, 4)
    assert np.abs(basis.T @ residuals).max() < 1e-10
    size = np.sqrt(1.0 - (basis**2).sum(axis=1))
    assert residuals / size / residuals.std() == pytest.approx(
        model.innovations * (residuals / size).std() / residuals.std() / model.innovations.std(), abs=1e-6
    )


def test_what_cannot_be_tested_has_no_test() -> None:
    basis = pattern(24, 12)
    values = left(24, basis, np.random.default_rng(4))
    assert portmanteau(values, basis, 11, 0) is None
    assert portmanteau(values, basis, 3, 3) is None
    assert portmanteau(np.zeros(24), basis, 3, 0) is None
