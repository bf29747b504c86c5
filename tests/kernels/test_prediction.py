import numpy as np
import pytest
from scipy.linalg import toeplitz
from scipy.signal import lfilter
from statsmodels.tsa.arima_process import arma_acovf
from statsmodels.tsa.statespace.sarimax import SARIMAX

from preflight_magic.kernels import arma_likelihood
from preflight_magic.kernels.arma import ArmaFit, fit
from preflight_magic.kernels.arma_parameters import Order
from preflight_magic.kernels.prediction import Prediction, predict, undo_differences
from tests.kernels.test_arma import AIRLINE, GAPS, air, model_of, reference, with_gaps

ORDERS = [Order(1), Order(0, 2), Order(2, 1), Order(1, 1, 1, 1, 4), Order(0, 1, 0, 1, 12), Order(3)]


def ahead(found: ArmaFit, values: np.ndarray, steps: int) -> Prediction:
    """Prediction at the mean that was fitted."""
    ar, ma = found.polynomials
    return predict(ar, ma, values - found.correction - found.mean, steps, exact=found.exact)


def made(n: int = 90) -> np.ndarray:
    noise = np.random.default_rng(6).normal(size=n + 100)
    return 5.0 + np.asarray(lfilter([1.0, 0.5], [1.0, -0.6, 0.0, 0.0, -0.3, 0.18], noise)[100:])


@pytest.mark.parametrize("order", ORDERS, ids=str)
@pytest.mark.parametrize("steps", [1, 3, 40])
def test_forecast_is_that_of_statsmodels(order: Order, steps: int) -> None:
    values = made()
    found = fit(values, order, mean=True)
    assert found is not None
    theirs = model_of(values - found.mean, order).smooth(np.r_[found.coefficients, found.variance]).get_forecast(steps)
    mine = ahead(found, values, steps)
    np.testing.assert_allclose(mine.mean, theirs.predicted_mean, rtol=1e-6, atol=1e-9)
    np.testing.assert_allclose(found.variance * mine.noise.diagonal(), theirs.var_pred_mean, rtol=1e-6)


@pytest.mark.parametrize("order", ORDERS, ids=str)
def test_forecast_is_the_conditional_expectation(order: Order) -> None:
    values = made(40)
    found = fit(values, order, mean=True)
    assert found is not None
    ar, ma = found.polynomials
    covariance = toeplitz(arma_acovf(ar, ma, nobs=52)[:52])
    expected = covariance[40:, :40] @ np.linalg.solve(covariance[:40, :40], values - found.mean)
    mine = ahead(found, values, 12)
    np.testing.assert_allclose(mine.mean, expected, rtol=1e-9, atol=1e-12)
    left = covariance[40:, 40:] - covariance[40:, :40] @ np.linalg.solve(covariance[:40, :40], covariance[:40, 40:])
    np.testing.assert_allclose(mine.noise, left, rtol=1e-8, atol=1e-10)


def test_airline_forecast() -> None:
    found = fit(air(), AIRLINE, mean=False)
    assert found is not None
    path = ahead(found, air(), 3).mean
    logs = np.log(reference("air_passengers"))
    levels = []
    for h in range(3):
        series = np.r_[logs, levels]
        levels.append(series[-1] + series[-12] - series[-13] + path[h])
    # R 4.2.2: predict(arima(log(AirPassengers), order = c(0, 1, 1), seasonal = c(0, 1, 1)), n.ahead = 3)
    np.testing.assert_allclose(levels, [6.1101857, 6.0537753, 6.1717149], atol=1e-4)


def test_missing_values_are_skipped() -> None:
    values = reference("lake_huron")
    values[[30, 96]] = np.nan
    filled = np.nan_to_num(values)
    found = fit(filled, Order(1, 1), mean=True, nuisance=np.eye(98)[:, [30, 96]])
    assert found is not None
    theirs = SARIMAX(values - found.mean, order=(1, 0, 1)).smooth(np.r_[found.coefficients, found.variance])
    expected = theirs.get_forecast(6).predicted_mean + found.mean
    np.testing.assert_allclose(ahead(found, filled, 6).mean + found.mean, expected, rtol=1e-6)


def test_fills_do_not_matter() -> None:
    paths = []
    for fill in (0.0, 5.0):
        values, columns = with_gaps(fill)
        found = fit(values, AIRLINE, mean=False, nuisance=columns)
        assert found is not None
        paths.append(ahead(found, values, 24).mean)
    np.testing.assert_allclose(paths[0], paths[1], atol=1e-6)
    assert GAPS.size == 6


def test_conditional_fit_and_forecast_are_close_to_the_exact_ones(monkeypatch: pytest.MonkeyPatch) -> None:
    values = made(3000)
    order = Order(1, 1, 1, 0, 4)
    exact = fit(values, order, mean=True)
    monkeypatch.setattr(arma_likelihood, "_EXACT_WORK", 0.0)
    conditional = fit(values, order, mean=True)
    assert exact is not None
    assert conditional is not None
    assert (exact.exact, conditional.exact) == (True, False)
    np.testing.assert_allclose(conditional.coefficients, exact.coefficients, atol=0.002)
    np.testing.assert_allclose(ahead(conditional, values, 12).mean, ahead(exact, values, 12).mean, atol=0.05)


def test_columns_are_predicted_as_statsmodels_does() -> None:
    rng = np.random.default_rng(11)
    time = np.arange(92.0)
    columns = np.column_stack([np.ones(92), time / 92, np.cos(time)])
    values = columns[:80] @ [3.0, 5.0, 2.0] + lfilter([1.0, 0.4], [1.0, -0.7], rng.normal(size=80))
    mine = predict(np.array([1.0, -0.7]), np.array([1.0, 0.4]), values, 12, columns=columns)
    # The effects are states with a diffuse start there: generalised least squares by another road.
    model = SARIMAX(values, columns[:80], order=(1, 0, 1), mle_regression=False, use_exact_diffuse=True)
    theirs = model.smooth([0.7, 0.4, 1.0]).get_forecast(12, exog=columns[80:])
    np.testing.assert_allclose(mine.mean, theirs.predicted_mean, rtol=1e-7)
    np.testing.assert_allclose((mine.noise + mine.effects).diagonal(), theirs.var_pred_mean, rtol=1e-6)


def test_the_error_accumulates_through_differences() -> None:
    values = np.diff(np.cumsum(np.random.default_rng(12).normal(0.5, 1.0, 60)))
    mine = predict(np.ones(1), np.ones(1), values, 4, columns=np.ones((63, 1)), differences=(1,))
    # A random walk with drift: h for its steps, h^2 / n for its drift.
    np.testing.assert_allclose(mine.noise.diagonal(), [1.0, 2.0, 3.0, 4.0])
    np.testing.assert_allclose(mine.effects.diagonal(), np.arange(1, 5) ** 2 / 59.0)
    np.testing.assert_allclose(mine.mean, values.mean())
    assert mine.square == pytest.approx(((values - values.mean()) ** 2).sum())


def test_a_column_that_the_past_does_not_show_counts_as_zero() -> None:
    values = np.random.default_rng(13).normal(size=30)
    columns = np.column_stack([np.ones(33), np.arange(33) >= 31])
    mine = predict(np.ones(1), np.ones(1), values, 3, columns=columns)
    np.testing.assert_allclose(mine.mean, values.mean())


def test_undoing_a_seasonal_difference() -> None:
    values = np.random.default_rng(14).normal(size=40)
    back = undo_differences(values[34:] - values[30:36], 4, values[:34])
    np.testing.assert_allclose(back, values[34:])
