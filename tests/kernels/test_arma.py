"""Fits against R 4.2.2 (arima) and statsmodels (SARIMAX), both exact maximum likelihood."""

from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from scipy.optimize import minimize_scalar
from scipy.signal import lfilter
from statsmodels.tsa.statespace.sarimax import SARIMAX

from preflight_magic.kernels.arma import ArmaFit, fit
from preflight_magic.kernels.arma_likelihood import evaluate, prepare
from preflight_magic.kernels.arma_parameters import Order

REFERENCES = Path(__file__).parents[1] / "references"
AIRLINE = Order(0, 1, 0, 1, 12)
GAPS = np.array([20, 49, 60, 61, 62, 99])


def reference(name: str) -> np.ndarray:
    # Sources stand in the files.
    return np.array(pd.read_csv(REFERENCES / f"{name}.csv", comment="#").iloc[:, 1], dtype=float)


def differenced(values: np.ndarray) -> np.ndarray:
    season = values[12:] - values[:-12]
    return season[1:] - season[:-1]


def air() -> np.ndarray:
    return differenced(np.log(reference("air_passengers")))


def errors(found: ArmaFit) -> np.ndarray:
    return np.sqrt(found.covariance.diagonal())


def model_of(values: np.ndarray, order: Order) -> SARIMAX:
    seasonal = (order.P, 0, order.Q, order.period) if order.P or order.Q else (0, 0, 0, 0)
    return SARIMAX(values, order=(order.p, 0, order.q), seasonal_order=seasonal)


def test_airline_model() -> None:
    found = fit(air(), AIRLINE, mean=False)
    assert found is not None
    # R 4.2.2: arima(log(AirPassengers), order = c(0, 1, 1), seasonal = c(0, 1, 1)); statsmodels puts the likelihood,
    # without R's diffuse start, at 244.6965.
    np.testing.assert_allclose(found.coefficients, [-0.40182802, -0.55694484], atol=1e-4)
    np.testing.assert_allclose(errors(found), [0.08964385, 0.07309968], rtol=0.02)
    assert found.variance == pytest.approx(0.0013480348, rel=1e-3)
    assert found.log_likelihood == pytest.approx(244.6965, abs=1e-4)
    assert found.nobs == 131
    assert found.parameters == 3


def test_autoregression_with_mean() -> None:
    found = fit(reference("luteinizing_hormone"), Order(3), mean=True)
    assert found is not None
    # R 4.2.2: arima(lh, order = c(3, 0, 0)), also in the examples of its help page.
    np.testing.assert_allclose(found.coefficients, [0.6448, -0.0634, -0.2198], atol=1e-4)
    np.testing.assert_allclose(errors(found), [0.1394, 0.1668, 0.1421], rtol=0.02)
    assert found.mean == pytest.approx(2.3931, abs=1e-4)
    assert found.mean_error == pytest.approx(0.0963, rel=0.02)
    assert found.variance == pytest.approx(0.1787, abs=1e-4)
    assert found.log_likelihood == pytest.approx(-27.09241107, abs=1e-4)


def test_mixed_model_with_mean() -> None:
    found = fit(reference("lake_huron"), Order(1, 1), mean=True)
    assert found is not None
    # R 4.2.2: arima(LakeHuron, order = c(1, 0, 1))
    np.testing.assert_allclose(found.coefficients, [0.7449, 0.3206], atol=1e-4)
    np.testing.assert_allclose(errors(found), [0.0777, 0.1135], rtol=0.02)
    assert found.mean == pytest.approx(579.0555, abs=1e-4)
    assert found.mean_error == pytest.approx(0.3501, rel=0.02)
    assert found.log_likelihood == pytest.approx(-103.2452606, abs=1e-4)
    # AIC = 214.49 in R, which counts the variance too: 4 parameters, 98 values.
    assert found.aicc == pytest.approx(214.49 + 2 * 4 * 5 / (98 - 5), abs=0.005)
    assert found.bic == pytest.approx(2 * 103.2452606 + 4 * np.log(98), abs=1e-3)


@pytest.mark.parametrize("order", [Order(2, 1), Order(1, 2), Order(0, 1, 1, 0, 4), Order(1, 0, 1, 1, 4)], ids=str)
def test_no_maximum_of_statsmodels_is_higher(order: Order) -> None:
    rng = np.random.default_rng(4)
    values = lfilter([1.0, 0.4], [1.0, -0.5, 0.0, 0.0, -0.3, 0.15], rng.normal(size=250))[100:]
    found = fit(values, order, mean=False)
    assert found is not None
    theirs = model_of(values, order).fit(
        start_params=np.r_[np.full(order.size, 0.1), values.var()], disp=0, maxiter=300
    )
    assert found.log_likelihood >= theirs.llf - 1e-4
    # at our estimates both likelihoods are the same number
    at = model_of(values, order).loglike(np.r_[found.coefficients, found.variance])
    assert found.log_likelihood == pytest.approx(at, abs=1e-6)


def test_innovations_are_the_standardised_errors_of_the_kalman_filter() -> None:
    found = fit(air(), AIRLINE, mean=False)
    assert found is not None
    theirs = model_of(air(), AIRLINE).smooth(np.r_[found.coefficients, found.variance])
    np.testing.assert_allclose(found.innovations, theirs.filter_results.standardized_forecasts_error[0], atol=1e-6)


# ------------------------------------------------------------------------------------------ missing values
def with_gaps(fill: float = 0.0) -> tuple[np.ndarray, np.ndarray]:
    values = np.log(reference("air_passengers"))
    values[GAPS] = fill
    return differenced(values), differenced(np.eye(144)[:, GAPS])


def test_airline_model_with_missing_values() -> None:
    found = fit(with_gaps()[0], AIRLINE, mean=False, nuisance=with_gaps()[1])
    assert found is not None
    # R 4.2.2: x <- log(AirPassengers); x[c(21, 50, 61, 62, 63, 100)] <- NA, then arima as above.
    np.testing.assert_allclose(found.coefficients, [-0.4011084, -0.5544878], atol=1e-3)
    np.testing.assert_allclose(errors(found), [0.0896499, 0.0712479], rtol=0.03)
    assert found.nobs == 125
    assert np.isnan(found.innovations[GAPS - 13]).all()
    assert np.isfinite(np.delete(found.innovations, GAPS - 13)).all()


def test_fills_do_not_matter() -> None:
    one, two = (fit(with_gaps(fill)[0], AIRLINE, mean=False, nuisance=with_gaps()[1]) for fill in (0.0, 5.0))
    assert one is not None
    assert two is not None
    np.testing.assert_allclose(one.coefficients, two.coefficients, atol=1e-6)
    assert one.log_likelihood == pytest.approx(two.log_likelihood, abs=1e-6)
    np.testing.assert_allclose(with_gaps(0.0)[0] - one.correction, with_gaps(5.0)[0] - two.correction, atol=1e-6)


def test_likelihood_with_missing_values_differs_from_the_diffuse_one_by_a_constant() -> None:
    values = np.log(reference("air_passengers"))
    values[GAPS] = np.nan
    model = SARIMAX(values, order=(0, 1, 1), seasonal_order=(0, 1, 1, 12), use_exact_diffuse=True)
    sample = prepare(with_gaps()[0], mean=False, nuisance=with_gaps()[1])
    assert sample is not None
    gaps = []
    for point in ((-0.4, -0.5), (0.3, -0.9), (-0.95, 0.2)):
        value, _ = evaluate(sample, AIRLINE, np.array(point))
        theirs = minimize_scalar(
            lambda log, at=point: -model.loglike(np.r_[at, np.exp(log)]),
            bounds=(-9.0, -4.0),
            method="bounded",
            options={"xatol": 1e-7},
        )
        gaps.append(value + theirs.fun)
    assert np.ptp(gaps) < 1e-4


def test_without_differences_the_likelihood_is_that_of_the_observed_values() -> None:
    values = reference("lake_huron")
    gaps = np.array([5, 20, 21, 60])
    values[gaps] = 0.0
    found = fit(values, Order(1, 1), mean=True, nuisance=np.eye(98)[:, gaps])
    assert found is not None
    # R 4.2.2: y <- LakeHuron; y[c(6, 21, 22, 61)] <- NA; arima(y, order = c(1, 0, 1))
    np.testing.assert_allclose(found.coefficients, [0.7444493, 0.3383675], atol=1e-4)
    assert found.mean == pytest.approx(579.0662052, abs=1e-3)
    assert found.log_likelihood == pytest.approx(-99.6422903213, abs=1e-4)


def test_a_nuisance_column_twice_counts_once() -> None:
    values, columns = with_gaps()
    once = fit(values, AIRLINE, mean=False, nuisance=columns)
    twice = fit(values, AIRLINE, mean=False, nuisance=np.column_stack([columns, columns[:, :2]]))
    assert once is not None
    assert twice is not None
    assert twice.nobs == once.nobs
    np.testing.assert_allclose(twice.coefficients, once.coefficients, atol=1e-6)


# --------------------------------------------------------------------------------------------- fixed columns
def test_what_was_removed_by_least_squares_does_not_bias_the_restricted_likelihood() -> None:
    rng = np.random.default_rng(8)
    values = lfilter([1.0], [1.0, -0.6], rng.normal(size=160))[100:]
    columns = np.column_stack([np.ones(60), np.arange(60.0)])
    left = values - columns @ np.linalg.lstsq(columns, values, rcond=None)[0]
    before, after = (fit(one, Order(1), mean=False, fixed=columns) for one in (values + 3.0, left))
    plain = fit(left, Order(1), mean=False)
    assert before is not None
    assert after is not None
    assert plain is not None
    assert before.coefficients[0] == pytest.approx(after.coefficients[0], abs=1e-6)
    assert after.coefficients[0] > plain.coefficients[0]


def test_the_mean_is_among_the_contrasts_of_the_restricted_estimate() -> None:
    values = reference("lake_huron")
    found = fit(values, Order(1, 1), mean=True)
    restricted = fit(values, Order(1, 1), mean=False, fixed=np.ones((98, 1)))
    assert found is not None
    assert restricted is not None
    np.testing.assert_allclose(found.restricted, restricted.coefficients, atol=1e-4)


# ------------------------------------------------------------------------------------------------- the edges
def test_unit_and_level_do_not_matter() -> None:
    values = reference("lake_huron")
    one, two = fit(values, Order(1, 1), mean=True), fit(1e6 * (values - 579.0), Order(1, 1), mean=True)
    assert one is not None
    assert two is not None
    np.testing.assert_allclose(one.coefficients, two.coefficients, atol=1e-6)
    assert two.mean == pytest.approx(1e6 * (one.mean - 579.0), rel=1e-4)
    assert two.log_likelihood == pytest.approx(one.log_likelihood - 98 * np.log(1e6), abs=1e-5)


def test_a_moving_average_at_the_edge_has_no_standard_error() -> None:
    values = np.diff(np.random.default_rng(2).normal(size=120))
    found = fit(values, Order(0, 1), mean=True)
    assert found is not None
    assert found.coefficients[0] < -0.999
    assert np.isnan(found.covariance).all()


@pytest.mark.parametrize("values", [np.ones(50), np.zeros(50), np.arange(7.0), np.r_[np.nan, np.arange(20.0)]])
def test_degenerate_series_have_no_fit(values: np.ndarray) -> None:
    assert fit(values, Order(1, 1), mean=True) is None


def test_the_input_is_left_alone() -> None:
    values, columns = with_gaps()
    before = values.copy(), columns.copy()
    fit(values, AIRLINE, mean=True, nuisance=columns)
    np.testing.assert_array_equal(values, before[0])
    np.testing.assert_array_equal(columns, before[1])
