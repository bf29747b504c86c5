"""Many tests of the same kind at once: how many of those that reject do so by chance."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from preflight_magic.kernels.least_squares import FloatArray


def adjusted(p_values: ArrayLike) -> FloatArray:
    """Share of false rejections from which each test of a family is rejected.

    Parameters
    ----------
    p_values : array_like, shape (m,)
        One for each test of the family, or a bound from above; NaN where there was no test.

    Returns
    -------
    ndarray, shape (m,)
        Rejecting all that are at most q keeps the expected share of true null hypotheses among those rejected at or
        below q, for tests that are independent or positively dependent. NaN where the p-value is.

    References
    ----------
    Benjamini and Hochberg (1995), Journal of the Royal Statistical Society B 57, 289-300; for positively dependent
    tests Benjamini and Yekutieli (2001), Annals of Statistics 29, 1165-1188.
    """
    p = np.asarray(p_values, dtype=np.float64)
    found = np.full(p.shape, np.nan)
    there = np.flatnonzero(np.isfinite(p))
    order = there[np.argsort(p[there], kind="stable")]
    scaled = p[order] * len(order) / np.arange(1, len(order) + 1)
    found[order] = np.minimum(np.minimum.accumulate(scaled[::-1])[::-1], 1.0)
    return found
