import numpy as np
import pytest
from scipy.linalg import toeplitz
from scipy.signal import lfilter
from statsmodels.tsa.arima_process import arma_acovf
from statsmodels.tsa.statespace.sarimax import SARIMAX

from preflight_magic.kernels import arma_likelihood
from preflight_magic.kernels.arma import fit
from preflight_magic.kernels.arma_forecast import forecast
from preflight_magic.kernels.arma_parameters import Order
from tests.kernels.test_arma import AIRLINE, GAPS, air, model_of, reference, with_gaps

ORDERS = [Order(1), Order(0, 2), Order(2, 1), Order(1, 1, 1, 1, 4), Order(0, 1, 0, 1, 12), Order(3)]


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
    path, psi = forecast(found, values, steps)
    np.testing.assert_allclose(path, found.mean + theirs.predicted_mean, rtol=1e-6)
    assert path.shape == psi.shape == (steps,)
    # The filter's variance holds what the past does not tell as well; late innovations are known after 90 values.
    np.testing.assert_allclose(found.variance * np.cumsum(psi**2), theirs.var_pred_mean, rtol=0.02)


@pytest.mark.parametrize("order", ORDERS, ids=str)
def test_forecast_is_the_conditional_expectation(order: Order) -> None:
    values = made(40)
    found = fit(values, order, mean=True)
    assert found is not None
    ar, ma = found.polynomials
    covariance = toeplitz(arma_acovf(ar, ma, nobs=52)[:52])
    expected = found.mean + covariance[40:, :40] @ np.linalg.solve(covariance[:40, :40], values - found.mean)
    np.testing.assert_allclose(forecast(found, values, 12)[0], expected, rtol=1e-9)


def test_airline_forecast() -> None:
    found = fit(air(), AIRLINE, mean=False)
    assert found is not None
    path, _ = forecast(found, air(), 3)
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
    np.testing.assert_allclose(forecast(found, filled, 6)[0], expected, rtol=1e-6)


def test_fills_do_not_matter() -> None:
    paths = []
    for fill in (0.0, 5.0):
        values, columns = with_gaps(fill)
        found = fit(values, AIRLINE, mean=False, nuisance=columns)
        assert found is not None
        paths.append(forecast(found, values, 24)[0])
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
    np.testing.assert_allclose(forecast(conditional, values, 12)[0], forecast(exact, values, 12)[0], atol=0.05)


def test_white_noise_is_forecast_by_its_mean() -> None:
    values = np.random.default_rng(1).normal(size=30)
    found = fit(values, Order(), mean=True)
    assert found is not None
    path, psi = forecast(found, values, 3)
    np.testing.assert_allclose(path, values.mean())
    np.testing.assert_array_equal(psi, [1.0, 0.0, 0.0])
