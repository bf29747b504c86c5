"""Bring a series to a size whose squares neither overflow nor vanish."""

from __future__ import annotations

from math import frexp, ldexp

from preflight_magic.kernels.least_squares import FloatArray


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
