"""The small least squares search against closed forms and against MINPACK."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import least_squares as referee

from preflight_magic.kernels.quasi_newton import least_squares


def exponential(p, x, y):
    return y - p[0] * np.exp(-p[1] * x)


def test_a_line_is_found_at_once():
    x = np.linspace(0, 1, 20)
    y = 0.3 + 0.8 * x + 0.1 * np.cos(9 * x)
    point, curvature, total = least_squares(
        lambda p: y - p[0] - p[1] * x, np.array([0.2, 0.7]), y - 0.2 - 0.7 * x, 1e-12, np.zeros(2)
    )
    design = np.column_stack([np.ones(20), x])
    found, square, *_ = np.linalg.lstsq(design, y, rcond=None)
    assert point == pytest.approx(found, abs=1e-6)
    assert total == pytest.approx(square[0], rel=1e-6)
    assert curvature == pytest.approx(design.T @ design, rel=1e-4)


@pytest.mark.parametrize("start", [(0.5, 0.1), (2.0, 2.0), (-1.0, 0.3)])
def test_a_curved_valley_as_minpack_finds_it(start):
    rng = np.random.default_rng(0)
    x = np.linspace(0, 4, 60)
    y = 1.4 * np.exp(-0.7 * x) + 0.05 * rng.standard_normal(60)
    point, _, total = least_squares(
        lambda p: exponential(p, x, y), np.array(start), exponential(start, x, y), 1e-12, np.zeros(2)
    )
    found = referee(lambda p: exponential(p, x, y), start)
    assert point == pytest.approx(found.x, rel=1e-4)
    assert total == pytest.approx(2.0 * found.cost, rel=1e-8)


def test_large_residuals_do_not_slow_it():
    # Where residuals stay large the Gauss-Newton curvature is wrong; the minimum of the logarithm is that of the sum.
    def residuals(p):
        return np.array([1.0, np.sin(3 * p[0]), p[0] - 2.0, 0.5 * p[0] ** 2])

    calls = []

    def counted(p):
        calls.append(p)
        return residuals(p)

    point, _, total = least_squares(counted, np.array([0.3]), residuals([0.3]), 1e-10, np.zeros(1))
    grid = np.linspace(-1, 1.2, 200_001)
    lowest = 1.0 + np.sin(3 * grid) ** 2 + (grid - 2.0) ** 2 + 0.25 * grid**4
    assert total == pytest.approx(lowest.min(), rel=1e-6)
    assert point[0] == pytest.approx(grid[np.argmin(lowest)], abs=1e-3)
    assert len(calls) < 25


def test_points_without_residuals_are_stepped_around():
    def residuals(p):
        return None if p[0] > 1.0 else np.array([p[0] - 0.9, 0.1])

    point, *_ = least_squares(residuals, np.array([-2.0]), residuals(np.array([-2.0])), 1e-12, np.zeros(1))
    assert point == pytest.approx([0.9], abs=1e-5)


def test_nothing_to_fit_is_left_alone():
    point, _, total = least_squares(lambda p: np.zeros(3), np.array([0.4]), np.zeros(3), 1e-6, np.zeros(1))
    assert point == pytest.approx([0.4])
    assert total == 0.0


def test_a_search_that_cannot_get_far_enough_is_given_up():
    x = np.linspace(0, 4, 60)
    y = 1.4 * np.exp(-0.7 * x) + 0.5 * np.cos(40 * x)
    calls = []

    def residuals(p):
        calls.append(p)
        return exponential(p, x, y)

    start = np.array([1.2, 0.6])
    first = exponential(start, x, y)
    least_squares(residuals, start, first, 1e-12, np.zeros(2))
    whole = len(calls)
    calls.clear()
    point, _, total = least_squares(residuals, start, first, 1e-12, np.zeros(2), useful=0.1 * float(first @ first))
    assert len(calls) == 2 < whole
    assert (point == start).all()
    assert total == float(first @ first)


def test_a_flat_place_is_left_alone():
    point, _, total = least_squares(lambda p: np.ones(3), np.array([0.4]), np.ones(3), 1e-6, np.zeros(1))
    assert point == pytest.approx([0.4])
    assert total == 3.0
