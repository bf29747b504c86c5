from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from preflight_magic.kernels.arma import fit
from preflight_magic.kernels.arma_boundary import root_at_one
from preflight_magic.kernels.arma_parameters import Order, coefficients, polynomials
from preflight_magic.kernels.arma_response import implied_variance, response
from preflight_magic.kernels.arma_roots import common_factors, inverse_roots, is_stationary
from preflight_magic.kernels.whiten import psi_weights
from preflight_magic.model import Root

REFERENCES = Path(__file__).parents[1] / "references"


def vector(*values: float) -> np.ndarray:
    return np.array(values, dtype=float)


# --------------------------------------------------------------------------------------------------- roots
def test_roots_of_small_models() -> None:
    assert inverse_roots(Order(1), vector(0.5)) == (Root("AR", 0.5, np.inf, pytest.approx(np.nan, nan_ok=True)),)
    (root,) = inverse_roots(Order(1), vector(-0.5))
    assert (root.modulus, root.period) == (0.5, 2.0)
    (root,) = inverse_roots(Order(0, 1), vector(-0.8))
    assert (root.part, root.modulus, root.period) == ("MA", pytest.approx(0.8), np.inf)
    # 1 - 1.4 B + 0.7 B^2: modulus sqrt(0.7), R 4.2.2: 1 / Mod(polyroot(c(1, -1.4, 0.7))) with 1.195229
    (root,) = inverse_roots(Order(2), vector(1.4, -0.7))
    assert root.modulus == pytest.approx(1 / 1.195229, abs=1e-6)
    assert root.period == pytest.approx(2 * np.pi / np.arccos(1.4 / (2 * np.sqrt(0.7))))
    assert inverse_roots(Order(), vector()) == ()
    assert [root.modulus for root in inverse_roots(Order(2), vector(0.5, 0.0))] == [0.5, 0.0]
    # a double root is two real ones, not a pair with an endless cycle
    assert [round(root.modulus, 6) for root in inverse_roots(Order(2), vector(1.0, -0.25))] == [0.5, 0.5]


def test_a_seasonal_root_is_given_once_with_its_modulus_per_step() -> None:
    order = Order(1, 0, 1, 1, 12)
    roots = inverse_roots(order, vector(0.5, 0.6, -0.4), np.eye(3) * 0.01)
    assert [(root.part, root.seasonal) for root in roots] == [("AR", False), ("AR", True), ("MA", True)]
    every = np.abs(np.roots(polynomials(order, vector(0.5, 0.6, -0.4))[0]))
    assert roots[1].modulus == pytest.approx(every.max())
    assert np.isclose(every, roots[1].modulus).sum() == 12
    assert roots[1].period == 12.0
    # d L**(1/12) / d L
    assert roots[1].standard_error == pytest.approx(0.1 * 0.6 ** (1 / 12 - 1) / 12)
    assert inverse_roots(Order(0, 0, 1, 0, 4), vector(-0.5))[0].period == 8.0


@pytest.mark.parametrize(
    ("order", "values"),
    [
        (Order(2), [1.4, -0.7]),
        (Order(2), [1.1, -0.2]),
        (Order(1, 2), [0.5, 0.4, 0.3]),
        (Order(3), [0.3, 0.2, -0.4]),
        (Order(0, 1, 1, 1, 4), [0.5, 0.6, -0.7]),
    ],
    ids=str,
)
def test_standard_errors_are_those_of_the_delta_method(order: Order, values: list[float]) -> None:
    rng = np.random.default_rng(1)
    half = rng.normal(size=(order.size, order.size))
    covariance = 1e-10 * half @ half.T
    draws = rng.multivariate_normal(values, covariance, size=1500)
    spread = np.std([[root.modulus for root in inverse_roots(order, draw)] for draw in draws], axis=0)
    stated = [root.standard_error for root in inverse_roots(order, np.array(values), covariance)]
    np.testing.assert_allclose(stated, spread, rtol=0.08)


def test_the_stationary_triangle_of_an_ar2() -> None:
    rng = np.random.default_rng(3)
    for one, two in rng.uniform([-2.2, -1.2], [2.2, 1.2], size=(400, 2)):
        # Brockwell and Davis (1991), section 3.1
        inside = abs(two) < 1 and one + two < 1 and two - one < 1
        assert is_stationary(Order(2), vector(one, two)) == inside
        assert np.isfinite(response(Order(2), vector(one, two)).psi_sum) == inside


@pytest.mark.parametrize(("last", "low", "high"), [(1924, 10.0, 11.0), (2008, 10.5, 11.5)])
def test_sunspots_have_a_cycle_of_about_eleven_years(last: int, low: float, high: float) -> None:
    table = pd.read_csv(REFERENCES / "sunspots.csv", comment="#")
    values = table[table["year"].between(1749, last)]["number"].to_numpy(dtype=float)
    found = fit(values, Order(2), mean=True)
    assert found is not None
    (root,) = inverse_roots(found.order, found.coefficients, found.covariance)
    # Yule (1927), Philosophical Transactions A 226, 267-298: an AR(2) of the numbers of 1749 to 1924 has a period
    # of 10.6 years (from memory).
    assert low < root.period < high
    assert root.modulus + 2 * root.standard_error < 1.0


def test_sunspots_as_in_another_program() -> None:
    table = pd.read_csv(REFERENCES / "sunspots.csv", comment="#")
    found = fit(table[table["year"] <= 1988]["number"].to_numpy(dtype=float), Order(2), mean=True)
    assert found is not None
    # R 4.2.2: arima(sunspot.year, order = c(2, 0, 0)), 1700 to 1988, s.e. 0.0434 both
    np.testing.assert_allclose(found.coefficients, [1.388635, -0.690629], atol=1e-3)
    np.testing.assert_allclose(np.sqrt(found.covariance.diagonal()), [0.04337, 0.04334], rtol=0.03)


# --------------------------------------------------------------------------------------------- psi weights
def test_response_of_an_ar1() -> None:
    found = response(Order(1), vector(0.5))
    assert found.psi_sum == pytest.approx(2.0, abs=1e-9)
    assert found.half_life == pytest.approx(1.0)
    assert response(Order(1), vector(0.9)).half_life == pytest.approx(np.log(0.5) / np.log(0.9))
    assert response(Order(1), vector(-0.5)).psi_sum == pytest.approx(2.0, abs=1e-9)


@pytest.mark.parametrize("phi", [0.99, 0.9999, 0.99999])
def test_response_next_to_the_circle(phi: float) -> None:
    found = response(Order(1), vector(phi))
    # 1 / (1 - phi) is at most the bound away
    assert abs(found.psi_sum - 1 / (1 - phi)) <= found.bound + 1e-9 / (1 - phi)
    assert found.bound < (1e-8 if phi < 0.99999 else 1e-4) * found.psi_sum
    assert found.half_life == pytest.approx(np.log(0.5) / np.log(phi), rel=1e-6)


def test_a_unit_root_has_no_finite_sum() -> None:
    for order, values in (
        (Order(1), vector(1.0)),
        (Order(2), vector(1.5, -0.5)),
        (Order(1), vector(1.2)),
        (Order(0, 0, 1, 0, 12), vector(1.0)),
    ):
        found = response(order, values)
        assert np.isinf([found.psi_sum, found.bound, found.half_life]).all()
        assert np.isinf(implied_variance(order, values, 1.0))


def test_response_of_moving_averages() -> None:
    assert response(Order(), vector()).psi_sum == 1.0
    assert response(Order(), vector()).half_life == 0.0
    assert response(Order(0, 1), vector(0.8)).psi_sum == pytest.approx(1.8)
    assert response(Order(0, 2), vector(-0.2, 0.7)).half_life == 2.0


@pytest.mark.parametrize("order", [Order(2, 2), Order(3, 1), Order(1, 1, 1, 1, 12), Order(2, 0, 1, 0, 4)], ids=str)
def test_sums_are_those_of_many_weights(order: Order) -> None:
    values = coefficients(order, np.random.default_rng(7).normal(scale=0.8, size=order.size))
    psi = psi_weights(*polynomials(order, values), 200_000)
    found = response(order, values)
    assert found.psi_sum == pytest.approx(np.abs(psi).sum(), rel=1e-9)
    assert implied_variance(order, values, 2.0) == pytest.approx(2.0 * (psi**2).sum(), rel=1e-9)
    above = np.flatnonzero(np.abs(psi) > 0.5)[-1]
    assert above <= found.half_life <= above + 1


def test_implied_variance_of_an_ar1() -> None:
    assert implied_variance(Order(1), vector(0.5), 3.0) == pytest.approx(3.0 / (1 - 0.25))


# ------------------------------------------------------------------------------------------- common factors
def test_roots_that_may_cancel() -> None:
    order, covariance = Order(1, 1), np.diag([0.01, 0.01])
    (pair,) = common_factors(order, vector(0.6, -0.5), covariance)
    assert pair.distance == pytest.approx(0.1)
    assert pair.standard_error == pytest.approx(np.sqrt(0.02))
    assert str(pair) == "AR 0.60 and MA 0.50, 0.10 apart"
    assert common_factors(order, vector(0.6, 0.5), covariance) == ()
    # roots that move together are told apart sooner
    together = np.array([[0.01, -0.0099], [-0.0099, 0.01]])
    assert common_factors(order, vector(0.6, -0.5), together) == ()
    assert common_factors(order, vector(0.6, -0.5)) == ()
    assert len(common_factors(order, vector(0.6, -0.59))) == 1


def test_every_root_cancels_once() -> None:
    found = common_factors(Order(2, 1), vector(1.19, -0.354, -0.595))
    assert len(found) == 1
    pair = common_factors(Order(2, 2), vector(1.4, -0.7, -1.4, 0.7), np.eye(4) * 0.01)
    assert len(pair) == 1
    assert pair[0].ar.period == pytest.approx(pair[0].ma.period)
    seasonal = common_factors(Order(0, 1, 1, 1, 12), vector(-0.5, 0.5, -0.5), np.eye(3) * 0.01)
    assert [factor.ar.seasonal for factor in seasonal] == [True]


# --------------------------------------------------------------------------------------- MA roots held at one
def test_the_cost_of_a_root_at_one() -> None:
    rng = np.random.default_rng(4)
    noise = rng.normal(size=201)
    costs = {}
    for theta in (-0.4, -0.8, -1.0):
        values = noise[1:] + theta * noise[:-1]
        found = fit(values, Order(0, 1), mean=True)
        assert found is not None
        costs[theta] = root_at_one(found, values, mean=True).plain
    assert np.isnan(costs[-0.4]) or costs[-0.4] > 20.0
    assert costs[-0.8] > 2.0
    assert -1e-3 < costs[-1.0] < 1.0


def test_ninety_in_a_hundred_true_roots_at_one_pass_the_ten_per_cent_point() -> None:
    # Davis, Chen and Dunsmuir (1995): twice the fall exceeds 1.00 in 10% of samples (from memory; here by simulation).
    rng = np.random.default_rng(12)
    costs = []
    for _ in range(150):
        values = np.diff(rng.normal(size=101))
        found = fit(values, Order(0, 1), mean=True)
        assert found is not None
        costs.append(root_at_one(found, values, mean=True).plain)
    assert 0.03 < np.mean(np.array(costs) > 0.5) < 0.18


def test_the_cost_of_a_seasonal_root_at_one() -> None:
    rng = np.random.default_rng(5)
    noise = rng.normal(size=132)
    order = Order(0, 0, 0, 1, 12)
    for theta, fixed_pattern in ((-1.0, True), (-0.5, False)):
        values = noise[12:] + theta * noise[:-12]
        found = fit(values, order, mean=False)
        assert found is not None
        cost = root_at_one(found, values, mean=False)
        assert np.isnan(cost.plain)
        assert (cost.seasonal < 0.5) == fixed_pattern
