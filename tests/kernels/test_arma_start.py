"""Where a search begins: near the estimate that exact likelihood finds, and cheaply."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.signal import lfilter

from preflight_magic.kernels.arma_parameters import Order, coefficients, polynomials
from preflight_magic.kernels.arma_start import _grid, periodogram, whittle_start

ORDERS = (Order(1, 0), Order(0, 1), Order(1, 1), Order(2, 0), Order(0, 2), Order(2, 1), Order(1, 1, 0, 1, 12))


def flat(order):
    return np.zeros(order.size), np.full(order.size, 10.0)


@pytest.mark.parametrize("order", ORDERS, ids=str)
def test_inverse_spectra_are_those_of_the_polynomials(order):
    rows = 50
    points, inverse, _ = _grid(order, rows, *(tuple(part.tolist()) for part in flat(order)))
    frequencies = 2.0 * np.pi * np.arange(1, rows // 2 + 1) / rows
    for row in (0, len(points) // 3, len(points) - 1):
        ar, ma = polynomials(order, coefficients(order, points[row]))
        gains = [np.abs(np.polyval(part[::-1], np.exp(-1j * frequencies))) ** 2 for part in (ar, ma)]
        assert inverse[row] == pytest.approx(gains[0] / gains[1], rel=1e-9)


@pytest.mark.parametrize(
    ("order", "truth"),
    [
        (Order(1, 0), (0.7,)),
        (Order(0, 1), (-0.6,)),
        (Order(2, 0), (1.3, -0.6)),
        (Order(1, 1), (0.8, 0.4)),
        (Order(0, 1, 0, 1, 12), (-0.4, -0.6)),
    ],
    ids=str,
)
def test_start_is_near_the_truth_of_a_long_series(order, truth):
    ar, ma = polynomials(order, np.array(truth))
    values = lfilter(ma, ar, np.random.default_rng(3).standard_normal(900))[300:]
    found = whittle_start(periodogram(values - values.mean()), len(values), order, *flat(order))
    # a grid of partial autocorrelations some 0.5 apart in inverse hyperbolic tangents
    assert coefficients(order, found) == pytest.approx(truth, abs=0.35)


def test_prior_decides_where_the_data_say_nothing():
    order = Order(1, 0)
    power = np.zeros(20)
    near = whittle_start(power, 41, order, np.array([0.9]), np.array([0.1]))
    assert near[0] == pytest.approx(0.9, abs=0.25)


def test_long_periodograms_are_averaged_and_keep_their_sum():
    values = np.random.default_rng(1).standard_normal(5001)
    power = periodogram(values)
    assert len(power) <= 256
    assert power.mean() == pytest.approx((np.abs(np.fft.rfft(values)[1:]) ** 2).mean(), rel=0.05)
    grid = _grid(Order(1, 0), 5001, (0.0,), (1.0,))
    assert grid[1].shape[1] == len(power)
