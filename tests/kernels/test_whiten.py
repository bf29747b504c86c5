import numpy as np
import pytest
from scipy.linalg import toeplitz
from statsmodels.tsa.arima_process import arma2ma, arma_acovf

from preflight_magic.kernels.arma_parameters import Order, coefficients, polynomials
from preflight_magic.kernels.whiten import NotPositiveDefiniteError, autocovariances, psi_weights, whiten

ORDERS = [
    Order(),
    Order(1),
    Order(0, 1),
    Order(1, 1),
    Order(3, 0),
    Order(2, 2),
    Order(0, 1, 0, 1, 4),
    Order(1, 1, 1, 1, 5),
]


def some(order: Order) -> tuple[np.ndarray, np.ndarray]:
    return polynomials(order, coefficients(order, np.random.default_rng(order.size).normal(scale=0.7, size=order.size)))


@pytest.mark.parametrize("order", ORDERS, ids=str)
def test_whitening_gives_the_quadratic_form_and_the_determinant_of_the_covariance(order: Order) -> None:
    ar, ma = some(order)
    n = 40
    columns = np.random.default_rng(5).normal(size=(n, 3))
    covariance = toeplitz(arma_acovf(ar, ma, nobs=n)[:n])
    whitened, log_determinant = whiten(ar, ma, columns)
    np.testing.assert_allclose(whitened.T @ whitened, columns.T @ np.linalg.solve(covariance, columns), atol=1e-9)
    assert log_determinant == pytest.approx(np.linalg.slogdet(covariance)[1], abs=1e-9)


@pytest.mark.parametrize("order", ORDERS, ids=str)
def test_whitening_never_looks_ahead(order: Order) -> None:
    ar, ma = some(order)
    columns = np.random.default_rng(5).normal(size=(30, 1))
    changed = columns.copy()
    changed[20:] += 7.0
    np.testing.assert_array_equal(whiten(ar, ma, columns)[0][:20], whiten(ar, ma, changed)[0][:20])


def test_whitening_leaves_its_input_alone() -> None:
    columns = np.random.default_rng(5).normal(size=(30, 2))
    before = columns.copy()
    whiten(np.array([1.0, -0.5]), np.array([1.0, 0.4]), columns)
    np.testing.assert_array_equal(columns, before)


@pytest.mark.parametrize("order", ORDERS, ids=str)
def test_autocovariances_and_psi_weights_are_those_of_statsmodels(order: Order) -> None:
    ar, ma = some(order)
    p = len(ar) - 1
    np.testing.assert_allclose(autocovariances(ar, ma), arma_acovf(ar, ma, nobs=p + 1)[: p + 1], atol=1e-9)
    np.testing.assert_allclose(psi_weights(ar, ma, 30), arma2ma(ar, ma, lags=30), atol=1e-12)


def test_a_root_on_the_circle_is_refused() -> None:
    columns = np.ones((20, 1))
    for ar in ([1.0, -1.0], [1.0, -1.0, 0.0, 0.0]):
        with pytest.raises(NotPositiveDefiniteError):
            whiten(np.array(ar), np.ones(1), columns)
    with pytest.raises(NotPositiveDefiniteError):
        whiten(np.concatenate([[1.0], np.zeros(19), [-0.5]]), np.ones(1), columns)


def test_a_moving_average_root_at_one_is_no_obstacle() -> None:
    # log|V| = log(n + 1) for 1 - B: the covariance is the second difference matrix.
    _, log_determinant = whiten(np.ones(1), np.array([1.0, -1.0]), np.ones((25, 1)))
    assert log_determinant == pytest.approx(np.log(26.0), abs=1e-9)
