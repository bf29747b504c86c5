"""How long an autoregression remembers: sum of its coefficients, largest root, half-life."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.signal import lfilter

from preflight_magic.kernels.least_squares import FloatArray


@dataclass(frozen=True)
class Persistence:
    """One autoregression, told by three numbers.

    Attributes
    ----------
    coefficient_sum : float
        Sum of the autoregressive coefficients; one at a unit root.
    root : float
        Largest modulus of an inverse root.
    half_life : float
        Steps after which the response to an impulse stays below one half; infinite at a unit root.
    """

    coefficient_sum: float
    root: float
    half_life: float


def half_life(coefficients: FloatArray, longest: int = 10_000) -> float:
    """Steps after which the response to an impulse stays below one half.

    Parameters
    ----------
    coefficients : ndarray, shape (p,)
        Of an autoregression, the first lag first.
    longest : int
        Steps looked at.

    Returns
    -------
    float
        On the straight line between two steps; one half without coefficients, infinite where the response does not
        come below one half for good within `longest` steps.
    """
    impulse = np.zeros(longest + 1)
    impulse[0] = 1.0
    modulus = largest_modulus(coefficients)
    if modulus >= 1.0 - 1e-9:
        return float("inf")
    response = np.abs(lfilter([1.0], np.concatenate([[1.0], -coefficients]), impulse))
    last = int(np.flatnonzero(response > 0.5)[-1])
    if last == longest:
        return float("inf")
    return last + float((response[last] - 0.5) / (response[last] - response[last + 1]))


def largest_modulus(coefficients: FloatArray) -> float:
    """Largest modulus of an inverse root of an autoregression.

    Parameters
    ----------
    coefficients : ndarray, shape (p,)
        The first lag first.

    Returns
    -------
    float
        0 without coefficients.
    """
    roots = np.roots(np.concatenate([[1.0], -coefficients]))
    return float(np.abs(roots).max()) if roots.size else 0.0
