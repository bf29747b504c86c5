"""The size of a series beside its rounding: whether it varies at all, and a size whose squares do not overflow."""

from __future__ import annotations

from math import frexp, ldexp

import numpy as np

from preflight_magic.kernels.least_squares import FloatArray

_ROUNDING = 4.0 * float(np.finfo(np.float64).eps)


def to_unit_size(y: FloatArray) -> tuple[FloatArray, float]:
    """Series over a power of two, which costs no digit, and that power.

    Parameters
    ----------
    y : ndarray, shape (n,), n > 0
        Finite.

    Returns
    -------
    scaled : ndarray, shape (n,)
        Largest absolute value from 1/2 to 1, or all zero.
    scale : float
        In the unit of `y`.
    """
    scale = ldexp(1.0, frexp(max(-float(y.min()), float(y.max())))[1])
    return y / scale, scale


def does_not_vary(u: FloatArray) -> bool:
    """Whether all values are equal up to the rounding of the largest.

    Parameters
    ----------
    u : ndarray, shape (n,), n > 0

    Returns
    -------
    bool
    """
    return within_rounding(float(u.min()), float(u.max()))


def within_rounding(low: float, high: float) -> bool:
    """Whether two numbers differ by no more than the rounding of the larger.

    Parameters
    ----------
    low, high : float

    Returns
    -------
    bool
    """
    return high - low <= _ROUNDING * max(abs(low), abs(high))
