"""Box-Cox exponent that makes the spread of short blocks least dependent on their level."""

from __future__ import annotations

from math import sqrt

import numpy as np
from scipy.optimize import minimize_scalar

from preflight_magic.kernels.restricted_likelihood import Array

LOWEST, HIGHEST = -1.0, 2.0
"""Exponents that are searched. Common practice."""
_FEWEST_BLOCKS = 3


def guerrero(values: Array, period: int) -> float | None:
    """Guerrero's Box-Cox exponent.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    period : int
        Seasonal period, the length of a block; two values where there is no season.

    Returns
    -------
    float or None
        In [-1, 2], where the coefficient of variation of ``spread / mean**(1 - exponent)`` over the blocks is least.
        None where a value is not positive, fewer than three blocks are observed whole, or no block varies.

    References
    ----------
    Guerrero (1993), Time-series analysis supported by power transformations, Journal of Forecasting 12, 37-48. Blocks
    are counted from the end, so that the oldest values are left out where the last block would not be whole.
    """
    seen = values[np.isfinite(values)]
    length = max(period, 2)
    count = len(values) // length
    if not seen.size or not (seen > 0).all() or count < _FEWEST_BLOCKS:
        return None
    blocks = values[len(values) - count * length :].reshape(count, length)
    blocks = blocks[np.isfinite(blocks).all(axis=1)] / float(np.exp(np.log(seen).mean()))
    if len(blocks) < _FEWEST_BLOCKS:
        return None
    level, spread = blocks.mean(axis=1), blocks.std(axis=1, ddof=1)
    if not spread.max() > 1e-12 * level.max():
        return None
    logs = np.log(level)

    def variation(power: float) -> float:
        ratio = spread * np.exp((power - 1.0) * logs)
        left = ratio - ratio.sum() / ratio.size
        return float(sqrt(float(left @ left) / (ratio.size - 1)) * ratio.size / ratio.sum())

    grid = np.linspace(LOWEST, HIGHEST, 13).tolist()
    best = min(grid, key=variation)
    bounds = (max(best - 0.25, LOWEST), min(best + 0.25, HIGHEST))
    found = minimize_scalar(variation, bounds=bounds, method="bounded", options={"xatol": 1e-6})
    return float(found.x) if found.fun <= variation(best) else best
