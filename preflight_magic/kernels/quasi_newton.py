"""A small search for the least sum of squares of functions that cost more than the algebra around them."""

from __future__ import annotations

from collections.abc import Callable
from math import log

import numpy as np
from numpy.typing import NDArray
from scipy.linalg.lapack import dposv

Array = NDArray[np.float64]

_STEP = 1e-6
"""Increment of the forward differences: parameters are of order one, residuals known to some 12 digits."""
_LONGEST = 1.5
"""Longest step of a parameter: a search in inverse hyperbolic tangents loses its way on longer ones."""
_MOST_STEPS = 12
_MOST_TRIALS = 6
_HOPE = 4.0
"""A search that is no use is given up when this many times the fall that is promised next is not enough."""


def least_squares(
    residuals: Callable[[Array], Array | None],
    start: Array,
    first: Array,
    tolerance: float,
    stiffness: Array,
    useful: float = np.inf,
) -> tuple[Array, Array, float]:
    """Minimise the logarithm of half a sum of squares.

    Parameters
    ----------
    residuals : Callable
        From parameters, shape (k,), to residuals, shape (m,), or None where they do not exist.
    start : ndarray, shape (k,)
    first : ndarray, shape (m,)
        Residuals at `start`.
    tolerance : float
        Relative fall of the sum of squares below which the next step is the last.
    stiffness : ndarray, shape (k,)
        Relative curvature that the derivatives of the residuals do not show, such as that of a prior; zeros where
        there is none.
    useful : float
        A sum of squares that has to be reached for the minimum to be of use; a search that will not is given up.

    Returns
    -------
    point : ndarray, shape (k,)
    curvature : ndarray, shape (k, k)
        ``J'J`` at the last point but one, where J are the derivatives of the residuals.
    total : float
        The sum of squares.

    Notes
    -----
    Gauss and Newton's curvature, completed from the gradients met on the way: Dennis, Gay and Welsch (1981), An
    adaptive nonlinear least-squares algorithm, ACM Transactions on Mathematical Software 7, 348-368, here with the
    update of Broyden, Fletcher, Goldfarb and Shanno.
    """
    point, values = start, first
    total = float(values @ values)
    curvature = np.eye(len(start))
    missed = np.zeros((len(start), len(start)))
    gradient = np.zeros(len(start))
    step: Array | None = None
    for _ in range(_MOST_STEPS if total > 0.0 else 0):
        jacobian = _differences(residuals, point, values)
        curvature = jacobian @ jacobian.T
        shown = curvature / total + np.diag(stiffness + 1e-12)
        before, gradient = gradient, jacobian @ values / total
        if step is not None:
            missed = _updated(shown + missed, step, gradient - before) - shown
        step = _downhill(shown, missed, gradient)
        promised = -float(gradient @ step)
        last = promised <= tolerance
        if promised <= 0.0 or log(total) - _HOPE * promised > log(useful):
            break
        step = np.minimum(np.maximum(step, -_LONGEST), _LONGEST)
        share, found = _shorter(residuals, point, step, total, promised, 1 if last else _MOST_TRIALS)
        if found is None:
            break
        step = share * step
        point, values, total = point + step, found, float(found @ found)
        if last or total <= 0.0:
            break
    return point, curvature, total


def _shorter(
    residuals: Callable[[Array], Array | None], point: Array, step: Array, total: float, slope: float, trials: int
) -> tuple[float, Array | None]:
    """The share of a step that lowers the sum of squares, and the residuals there; None where none was found."""
    share = 1.0
    for _ in range(trials):
        found = residuals(point + share * step)
        new = float(found @ found) if found is not None else np.inf
        if new < total:
            return share, found
        # the lowest point of the parabola through what is known along the step
        rise = 0.5 * log(new / total) + share * slope if np.isfinite(new) else np.inf
        share *= min(max(0.5 * share * slope / rise, 0.1), 0.5)
    return share, None


def _differences(residuals: Callable[[Array], Array | None], point: Array, values: Array) -> Array:
    """Forward differences, shape (k, m)."""
    jacobian = np.zeros((len(point), len(values)))
    for k, at in enumerate(point.tolist()):
        # inwards, so that a point on the edge has a derivative
        change = -_STEP if at > 0.0 else _STEP
        moved = point.copy()
        moved[k] += change
        there = residuals(moved)
        if there is not None:
            jacobian[k] = (there - values) / change
    return jacobian


def _updated(curvature: Array, step: Array, change: Array) -> Array:
    """A curvature that maps the step to the change of the gradient."""
    bend = float(step @ change)
    mapped = curvature @ step
    if bend <= 1e-3 * float(step @ mapped):
        return curvature
    return np.asarray(
        curvature - np.outer(mapped, mapped) / float(step @ mapped) + np.outer(change, change) / bend, dtype=float
    )


def _downhill(shown: Array, missed: Array, gradient: Array) -> Array:
    """Newton's step, by the Gauss-Newton curvature alone where the completed one does not lead downhill."""
    _, step, info = dposv(shown + missed, -gradient)
    if info != 0:
        _, step, info = dposv(shown, -gradient)
    return np.asarray(step, dtype=float) if info == 0 else -gradient
