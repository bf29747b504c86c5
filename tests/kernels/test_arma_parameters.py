import numpy as np
import pytest

from preflight_magic.kernels.arma_parameters import (
    Order,
    coefficients,
    free_parameters,
    from_partial,
    polynomials,
    polynomials_at,
    split,
    to_partial,
)

ORDERS = [Order(1), Order(2, 1), Order(3, 2), Order(0, 2, 0, 1, 4), Order(2, 2, 1, 1, 12)]


def moduli(part: np.ndarray) -> np.ndarray:
    return np.abs(np.roots(np.concatenate([[1.0], -part])))


@pytest.mark.parametrize("order", ORDERS, ids=str)
def test_any_numbers_give_roots_inside_the_circle(order: Order) -> None:
    rng = np.random.default_rng(order.size)
    for _ in range(50):
        ar, ma, sar, sma = split(order, coefficients(order, rng.normal(scale=2.0, size=order.size)))
        for part in (ar, -ma, sar, -sma):
            assert (moduli(part) < 1.0).all()


@pytest.mark.parametrize("order", ORDERS, ids=str)
def test_free_parameters_undo_coefficients(order: Order) -> None:
    free = np.random.default_rng(1).normal(size=order.size)
    np.testing.assert_allclose(free_parameters(order, coefficients(order, free)), free, atol=1e-10)


def test_partial_autocorrelations_of_an_autoregression() -> None:
    # Durbin-Levinson written out: phi_1 = r_1 (1 - r_2), phi_2 = r_2 (Brockwell and Davis 1991, section 3.4).
    np.testing.assert_allclose(from_partial(np.array([0.6, -0.3])), [0.6 * 1.3, -0.3])
    np.testing.assert_allclose(to_partial(np.array([0.78, -0.3])), [0.6, -0.3])


def test_coefficients_outside_the_triangle_are_held_within_the_limit() -> None:
    # The stationary triangle of an AR(2): |phi_2| < 1, phi_1 + phi_2 < 1, phi_2 - phi_1 < 1.
    held = coefficients(Order(2), free_parameters(Order(2), np.array([1.2, 0.1])))
    assert (moduli(held) < 1.0).all()
    assert np.isinf(to_partial(np.array([0.5, 1.0]))).all()


def test_seasonal_polynomials_multiply() -> None:
    ar, ma = polynomials(Order(1, 1, 1, 1, 4), np.array([0.5, 0.2, 0.3, -0.6]))
    np.testing.assert_allclose(ar, [1.0, -0.5, 0.0, 0.0, -0.3, 0.15])
    np.testing.assert_allclose(ma, [1.0, 0.2, 0.0, 0.0, -0.6, -0.12])


def test_orders_say_what_they_are() -> None:
    assert str(Order(2, 1)) == "ARMA(2,1)"
    assert str(Order(0, 1, 0, 1, 12)) == "ARMA(0,1)(0,1) at 12"
    assert Order(2, 1, 1, 1, 4).size == 5


EVERY = [Order(p, q, P, Q, 4) for p in range(4) for q in range(4) for P in (0, 1) for Q in (0, 1, 2)]


@pytest.mark.parametrize("order", EVERY, ids=str)
def test_polynomials_at_unconstrained_numbers(order):
    free = np.random.default_rng(order.size).normal(0.0, 0.8, order.size)
    for found, wanted in zip(polynomials_at(order, free), polynomials(order, coefficients(order, free)), strict=True):
        assert found == pytest.approx(wanted, abs=1e-14)
