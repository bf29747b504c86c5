from time import process_time

import numpy as np
import pytest
from scipy.signal import lfilter

from preflight_magic.kernels.arma import ArmaFit, fit
from preflight_magic.kernels.arma_conditional import inside, refine, regression, start
from preflight_magic.kernels.arma_order import search
from preflight_magic.kernels.arma_parameters import Order, coefficients, polynomials
from tests.kernels.test_arma import air, reference, with_gaps

PLAIN = [(p, q) for p in range(3) for q in range(3)] + [(3, 0)]


def simulated(order: Order, values: list[float], n: int, seed: int) -> np.ndarray:
    ar, ma = polynomials(order, np.array(values))
    return np.asarray(lfilter(ma, ar, np.random.default_rng(seed).normal(size=n + 300))[300:])


def exhaustive(values: np.ndarray) -> float:
    """Least restricted AICc over all plain orders."""
    found = [fit(values, Order(p, q), mean=False, fixed=np.ones((len(values), 1))) for p, q in PLAIN]
    # the mean counts as a parameter
    return min(
        -2 * one.log_likelihood + 2 * (k := one.parameters + 1) * one.nobs / (one.nobs - k - 1) for one in found if one
    )


def restricted_aicc(values: np.ndarray, found: ArmaFit) -> float:
    one = fit(values, found.order, mean=False, fixed=np.ones((len(values), 1)))
    assert one is not None
    k = one.parameters + 1
    return -2 * one.log_likelihood + 2 * k * one.nobs / (one.nobs - k - 1)


def test_orders_of_the_textbooks() -> None:
    found = search(air(), 12, mean=False, seasonal=True)
    assert found is not None
    # Box and Jenkins (1976): the airline model.
    assert found.order == Order(0, 1, 0, 1, 12)
    np.testing.assert_allclose(found.coefficients, [-0.40182802, -0.55694484], atol=1e-4)
    lake = search(reference("lake_huron"), mean=True)
    assert lake is not None
    # Brockwell and Davis (1991) fit an ARMA(1,1) to the lake's level too.
    assert lake.order == Order(1, 1)


def test_missing_values_enter_the_choice_by_the_likelihood_alone() -> None:
    found = []
    for fill in (0.0, 5.0):
        values, columns = with_gaps(fill)
        one = search(values, 12, mean=False, seasonal=True, nuisance=columns)
        airline = fit(values, Order(0, 1, 0, 1, 12), mean=False, nuisance=columns)
        assert one is not None
        assert airline is not None
        assert (one.order.Q, one.order.period) == (1, 12)
        assert one.aicc <= airline.aicc + 1e-6
        found.append(one)
    assert found[0].order == found[1].order
    np.testing.assert_allclose(found[0].coefficients, found[1].coefficients, atol=1e-5)


@pytest.mark.parametrize(
    ("order", "values"),
    [
        (Order(), []),
        (Order(1), [0.7]),
        (Order(0, 1), [-0.6]),
        (Order(2), [1.2, -0.6]),
        (Order(1, 1), [0.8, 0.5]),
        (Order(2, 2), [1.0, -0.8, 0.6, 0.5]),
        (Order(3), [0.4, 0.7, -0.5]),
    ],
    ids=str,
)
def test_pruning_loses_next_to_nothing(order: Order, values: list[float]) -> None:
    lost = []
    for seed in range(6):
        series = simulated(order, values, 120, seed)
        found = search(series, mean=True)
        assert found is not None
        lost.append(restricted_aicc(series, found) - exhaustive(series))
    assert np.median(lost) < 0.01
    assert max(lost) < 3.0


def test_clear_orders_are_found() -> None:
    cases = [
        (Order(2), [1.2, -0.6], False),
        (Order(1, 1), [0.8, 0.6], False),
        (Order(0, 1, 0, 1, 12), [-0.6, -0.6], True),
        (Order(1, 0, 1, 0, 12), [0.6, 0.7], True),
    ]
    for order, values, seasonal in cases:
        hits = 0
        for seed in range(10):
            found = search(simulated(order, values, 300, seed), 12, mean=False, seasonal=seasonal)
            hits += found is not None and found.order == order
        assert hits >= 6, order


def test_a_removed_pattern_leaves_no_season_behind() -> None:
    dummies = np.eye(12)[np.arange(72) % 12]
    seasonal = 0
    for seed in range(20):
        values = np.random.default_rng(seed).normal(size=72)
        left = values - dummies @ (np.linalg.pinv(dummies) @ values)
        found = search(left, 12, mean=False, seasonal=True, fixed=dummies)
        seasonal += found is not None and found.order.P + found.order.Q > 0
    # without the columns about half of them are found seasonal
    assert seasonal <= 4


@pytest.mark.parametrize(
    "values",
    [np.zeros(0), np.ones(1), np.full(40, 3.0), np.arange(7.0), np.r_[np.arange(30.0), np.inf], np.full(20, np.nan)],
)
def test_degenerate_series_have_none(values: np.ndarray) -> None:
    assert search(values, 12, mean=True, seasonal=True) is None


@pytest.mark.parametrize("n", [8, 9, 12, 20])
def test_short_series_are_fitted(n: int) -> None:
    rng = np.random.default_rng(n)
    for values in (rng.normal(size=n), rng.normal(size=n).cumsum(), np.arange(float(n)), rng.integers(0, 2, n) * 1.0):
        found = search(values, 4, mean=True, seasonal=True)
        assert found is not None
        assert found.parameters < found.nobs
        assert np.isfinite(found.log_likelihood)


def test_odd_series_do_no_harm() -> None:
    t = np.arange(96)
    spike = np.zeros(96)
    spike[50] = 1.0
    for values in (spike, np.sin(2 * np.pi * t / 12), (t % 2) * 1.0, t**2.0, 1e12 + (t % 5), 1e-12 * np.sin(t)):
        found = search(values, 12, mean=True, seasonal=True)
        assert found is not None
        assert np.isfinite(found.coefficients).all()


def test_the_conditional_estimate_is_near_the_likely_one() -> None:
    order = Order(1, 1, 0, 1, 4)
    series = simulated(order, [0.7, 0.4, -0.5], 400, 3)
    found = regression(series - series.mean(), 4)
    estimate, square = refine(found, order, start(found, order))
    exact = fit(series, order, mean=True)
    assert exact is not None
    np.testing.assert_allclose(estimate, exact.coefficients, atol=0.05)
    assert square == pytest.approx(exact.variance, rel=0.05)


def test_starts_are_drawn_inside() -> None:
    for order in (Order(1, 1), Order(2, 2), Order(3, 0)):
        drawn = inside(order, np.full(order.size, 1.5))
        ar = np.abs(np.roots(np.r_[1.0, -drawn[: order.p]])).max()
        ma = np.abs(np.roots(np.r_[1.0, drawn[order.p :]])).max() if order.q else 0.0
        assert max(ar, ma) <= 0.97 + 1e-9
    kept = coefficients(Order(2, 2), np.full(4, 0.3))
    np.testing.assert_array_equal(inside(Order(2, 2), kept), kept)


def test_searches_are_quick() -> None:
    plain = simulated(Order(1, 1), [0.7, 0.3], 120, 1)

    def cost(values: np.ndarray, seasonal: bool) -> float:
        costs = []
        for _ in range(7):
            begin = process_time()
            search(values, 12, mean=not seasonal, seasonal=seasonal)
            costs.append(process_time() - begin)
        return min(costs)

    assert cost(plain, False) < 0.025
    assert cost(air()[:120], True) < 0.050
