import numpy as np
import pytest

from preflight_magic.kernels.least_squares import (
    detrend,
    last_t_ratio,
    leading_rank,
    polynomial,
    residual_sums,
    triangle,
)


def sample(n: int = 40, k: int = 5, seed: int = 3) -> tuple[np.ndarray, np.ndarray]:
    rng = np.random.default_rng(seed)
    x = rng.standard_normal((n, k))
    return x, x @ rng.standard_normal(k) + rng.standard_normal(n)


def stacked(x: np.ndarray, y: np.ndarray) -> np.ndarray:
    return np.column_stack([x, y]).copy(order="F")


def test_triangle_is_upper_and_has_the_gram_matrix_of_its_columns() -> None:
    z = stacked(*sample())
    factor = triangle(z.copy(order="F"))
    assert factor.shape == (6, 6)
    assert np.array_equal(factor, np.triu(factor))
    np.testing.assert_allclose(factor.T @ factor, z.T @ z, rtol=1e-12)


def test_residual_sums_are_those_of_separate_regressions() -> None:
    x, y = sample()
    sums = residual_sums(triangle(stacked(x, y)))
    expected = [y @ y]
    for j in range(1, 6):
        beta = np.linalg.lstsq(x[:, :j], y, rcond=None)[0]
        expected.append(np.sum((y - x[:, :j] @ beta) ** 2))
    np.testing.assert_allclose(sums, expected, rtol=1e-12)


def test_last_t_ratio_is_that_of_the_normal_equations() -> None:
    x, y = sample()
    inverse = np.linalg.inv(x.T @ x)
    beta = inverse @ x.T @ y
    s2 = np.sum((y - x @ beta) ** 2) / (40 - 5)
    expected = beta[-1] / np.sqrt(s2 * inverse[-1, -1])
    assert last_t_ratio(triangle(stacked(x, y)), 40) == pytest.approx(expected, rel=1e-12)
    assert last_t_ratio(triangle(stacked(-x, y)), 40) == pytest.approx(-expected, rel=1e-12)


@pytest.mark.parametrize("scale", [1e-6, 1.0, 1e6])
def test_leading_rank_stops_before_a_dependent_column(scale: float) -> None:
    x, y = sample()
    assert leading_rank(triangle(stacked(x * scale, y))) == 5
    x[:, 3] = x[:, 0] - 2.0 * x[:, 1]
    assert leading_rank(triangle(stacked(x * scale, y))) == 3
    x[:, 0] = 0.0
    assert leading_rank(triangle(stacked(x * scale, y))) == 0


def test_polynomial_spans_the_powers_of_time() -> None:
    assert polynomial(10, -1).shape == (10, 0)
    columns = polynomial(10, 2)
    time = np.arange(10.0)
    powers = np.column_stack([np.ones(10), time, time**2])
    fitted = columns @ np.linalg.lstsq(columns, powers, rcond=None)[0]
    np.testing.assert_allclose(fitted, powers, atol=1e-12)
    assert np.abs(columns).max() <= 1.0


def test_detrend_leaves_what_a_regression_on_time_leaves() -> None:
    _, y = sample()
    time = np.arange(40.0)
    np.testing.assert_allclose(detrend(y, 0), y - y.mean(), atol=1e-14)
    np.testing.assert_allclose(detrend(y, 1), y - np.polyval(np.polyfit(time, y, 1), time), atol=1e-12)
