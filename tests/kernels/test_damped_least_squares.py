"""The small least squares search against closed forms and against MINPACK."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import least_squares as referee

from preflight_magic.kernels.damped_least_squares import least_squares


def test_a_line_is_found_in_one_step():
    x = np.linspace(0, 1, 20)
    y = 0.3 + 0.8 * x
    point, curvature = least_squares(lambda p: y - p[0] - p[1] * x, np.zeros(2), y, 1e-12)
    assert point == pytest.approx([0.3, 0.8], abs=1e-6)
    design = np.column_stack([np.ones(20), x])
    assert curvature == pytest.approx(design.T @ design, rel=1e-4)


def test_a_curved_valley_as_minpack_finds_it():
    rng = np.random.default_rng(0)
    x = np.linspace(0, 4, 60)
    y = 1.4 * np.exp(-0.7 * x) + 0.05 * rng.standard_normal(60)

    def residuals(p):
        return y - p[0] * np.exp(-p[1] * x)

    start = np.array([0.5, 0.1])
    point, _ = least_squares(residuals, start, residuals(start), 1e-12)
    assert point == pytest.approx(referee(residuals, start).x, rel=1e-4)


def test_points_without_residuals_are_stepped_around():
    def residuals(p):
        return None if p[0] > 1.0 else np.array([p[0] - 0.9, 0.1])

    point, _ = least_squares(residuals, np.array([-2.0]), residuals(np.array([-2.0])), 1e-12)
    assert point == pytest.approx([0.9], abs=1e-5)


def test_nothing_to_fit_is_left_alone():
    point, _ = least_squares(lambda p: np.zeros(3), np.array([0.4]), np.zeros(3), 1e-6)
    assert point == pytest.approx([0.4])
