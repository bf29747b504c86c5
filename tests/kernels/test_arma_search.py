"""What a fitted order promises, whatever way it is searched for."""

from __future__ import annotations

import numpy as np
import pytest
from statsmodels.tsa.arima.model import ARIMA

from preflight_magic.kernels.arma_parameters import Order, polynomials
from preflight_magic.kernels.arma_search import FIRST_ORDERS, FURTHER_ORDERS, fit
from preflight_magic.kernels.restricted_likelihood import Levels, contrasts, evaluate

ORDERS = (*FIRST_ORDERS, *FURTHER_ORDERS)


def arma(n, ar=(), ma=(), seed=0):
    from scipy.signal import lfilter

    noise = np.random.default_rng(seed).standard_normal(n + 200)
    return lfilter(np.r_[1.0, ma], np.r_[1.0, -np.asarray(ar)], noise)[200:]


def view(values, d=0, D=0, period=1, *, trend=False):
    return contrasts(Levels(values, period, trend, period > 1, np.empty((len(values), 0))), d, D)


@pytest.mark.parametrize(
    ("ar", "ma"), [((0.6,), ()), ((), (-0.5,)), ((0.7,), (0.4,)), ((1.2, -0.5), ()), ((), (0.5, 0.3))]
)
def test_coefficients_agree_with_full_maximum_likelihood(ar, ma):
    # statsmodels is the referee; in 600 values neither the prior nor the restricted likelihood moves much.
    values = arma(600, ar, ma, seed=4)
    seen = view(np.cumsum(np.r_[0.0, values]), d=1)
    found = fit(seen, Order(len(ar), len(ma)))
    referee = ARIMA(values, order=(len(ar), 0, len(ma)), trend="n").fit()
    errors = np.sqrt(np.diag(referee.cov_params()))[:-1]
    assert (np.abs(found.coefficients - referee.params[:-1]) < 0.3 * errors).all()
    # The constant brings the density of the differences to that of the contrasts of the levels.
    assert found.log_likelihood - seen.constant == pytest.approx(referee.llf, abs=0.1)


@pytest.mark.parametrize("order", ORDERS)
def test_log_likelihood_is_that_of_the_coefficients(order):
    seen = view(arma(90, (0.5,), (0.3,)))
    found = fit(seen, Order(*order))
    assert found.log_likelihood == pytest.approx(evaluate(seen, *polynomials(found.order, found.coefficients))[0])
    assert len(found.coefficients) == sum(order)
    assert np.isfinite(found.evidence)


def test_no_coefficients_leave_nothing_to_integrate():
    found = fit(view(arma(50)), Order())
    assert found.evidence == found.log_likelihood


@pytest.mark.parametrize(("d", "D", "period"), [(0, 0, 1), (1, 0, 4), (1, 1, 4)])
@pytest.mark.parametrize("factor", [1e-5, 1e5])
def test_unit_moves_every_order_alike(d, D, period, factor):
    values = np.cumsum(arma(80, (0.4,), seed=2))
    for p, q in ORDERS:
        one, other = (fit(view(c * values, d, D, period, trend=True), Order(p, q, 0, D, period)) for c in (1.0, factor))
        m = one.contrasts.count
        np.testing.assert_allclose(other.coefficients, one.coefficients, atol=1e-4)
        assert other.evidence == pytest.approx(one.evidence - m * np.log(factor), abs=1e-3)


@pytest.mark.parametrize(
    ("ar", "ma", "right", "wrong"),
    [
        ((0.8,), (), Order(1, 0), Order(0, 0)),
        ((), (0.8,), Order(0, 1), Order(1, 0)),
        ((), (), Order(0, 0), Order(2, 1)),
        ((0.5,), (), Order(1, 0), Order(2, 1)),
    ],
)
def test_evidence_prefers_the_order_that_made_the_series(ar, ma, right, wrong):
    gains = []
    for seed in range(6):
        seen = view(arma(150, ar, ma, seed=seed))
        gains.append(fit(seen, right).evidence - fit(seen, wrong).evidence)
    assert np.mean(gains) > 1.0


def test_seasonal_moving_average_is_found():
    noise = arma(312, seed=7)
    ma = np.zeros(13)
    ma[0], ma[12] = 1.0, -0.6
    changes = np.convolve(noise, ma)[12:312]
    values = np.zeros(312)
    for t in range(12, 312):
        values[t] = values[t - 12] + changes[t - 12]
    found = fit(view(values, D=1, period=12), Order(0, 0, 0, 1, 12))
    assert found.coefficients[0] == pytest.approx(-0.6, abs=0.12)


def test_hint_at_the_estimate_stays_there():
    seen = view(arma(120, (0.6,), (0.3,)))
    one = fit(seen, Order(1, 1))
    again = fit(seen, Order(1, 1), one.coefficients)
    assert again.evidence == pytest.approx(one.evidence, abs=0.02)


@pytest.mark.parametrize("order", ORDERS)
@pytest.mark.parametrize(
    "values",
    [
        np.sin(2 * np.pi * np.arange(60) / 12),
        5.0 + 2.0 * np.arange(60),
        np.where(np.arange(60) < 30, 0.0, 1.0),
        np.arange(60) % 2.0,
        1.03 ** np.arange(60),
    ],
    ids=["sine", "line", "step", "alternating", "growth"],
)
def test_exact_series_give_finite_numbers(values, order):
    for d, trend in [(0, False), (0, True), (1, True), (2, True)]:
        found = fit(view(values, d, trend=trend), Order(*order))
        assert found is not None
        assert np.isfinite([found.evidence, found.log_likelihood, *found.coefficients]).all()
