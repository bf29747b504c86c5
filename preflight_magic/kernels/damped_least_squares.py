"""A small Levenberg-Marquardt search for functions that cost more than the algebra around them."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

_STEP = 1e-6
"""Increment of the forward differences: parameters are of order one, residuals known to some 12 digits."""
_LONGEST = 1.5
"""Longest step of a parameter: a search in inverse hyperbolic tangents loses its way on longer ones."""
_MOST_STEPS = 12
_MOST_TRIALS = 5


def least_squares(
    residuals: Callable[[Array], Array | None], start: Array, first: Array, tolerance: float
) -> tuple[Array, Array]:
    """Minimise a sum of squares.

    Parameters
    ----------
    residuals : Callable
        From parameters, shape (k,), to residuals, shape (m,), or None where they do not exist.
    start : ndarray, shape (k,)
    first : ndarray, shape (m,)
        Residuals at `start`.
    tolerance : float
        Relative fall of the sum of squares below which the search stops.

    Returns
    -------
    point : ndarray, shape (k,)
    curvature : ndarray, shape (k, k)
        ``J'J`` at the last point but one, where J are the derivatives of the residuals.

    Notes
    -----
    Marquardt (1963), An algorithm for least-squares estimation of nonlinear parameters, SIAM Journal 11, 431-441.
    """
    point, values = start, first
    size = len(start)
    total = float(values @ values)
    damping = 1e-3
    curvature = np.eye(size)
    jacobian = np.empty((size, len(values)))
    for _ in range(_MOST_STEPS if total > 0.0 else 0):
        for k in range(size):
            moved = point.copy()
            # inwards, so that a point on the edge has a derivative
            change = -_STEP if point[k] > 0.0 else _STEP
            moved[k] += change
            there = residuals(moved)
            jacobian[k] = 0.0 if there is None else (there - values) / change
        curvature, gradient = jacobian @ jacobian.T, jacobian @ values
        scale = curvature.diagonal() + 1e-12 * total
        fall = 0.0
        for _ in range(_MOST_TRIALS):
            step = np.linalg.solve(curvature + np.diag(damping * scale + 1e-300), -gradient)
            trial = point + np.clip(step, -_LONGEST, _LONGEST)
            found = residuals(trial)
            if found is not None:
                new = float(found @ found)
                if new < total:
                    fall = total - new
                    point, values, total = trial, found, new
                    damping *= 0.1
                    break
            damping *= 10.0
        if fall <= tolerance * total:
            break
    return point, curvature
