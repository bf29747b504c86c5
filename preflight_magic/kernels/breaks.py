"""Dating one change of level."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from preflight_magic.kernels.restricted_likelihood import Array


@dataclass(frozen=True)
class DatedShift:
    """The most likely place of a level shift: first position of the new level, and the F statistic there."""

    position: int
    statistic: float
    candidates: int


_MOST_DATES = 2000
"""Longer series are searched on an even grid of this many dates."""


def date_shift(values: Array, regressors: Array, trim: float = 0.1) -> DatedShift | None:
    """Date a change of level by the largest F statistic over all dates.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    regressors : ndarray, shape (n, k)
        What else the level may contain; a constant among them.
    trim : float
        Share left out at each end, at least four values.

    Returns
    -------
    DatedShift or None
        None where the series is too short to leave a date.

    Notes
    -----
    Andrews (1993), Tests for parameter instability and structural change with unknown change point, Econometrica 61,
    821-856. The statistic assumes uncorrelated errors; it dates and does not decide, since a random walk nearly
    always exceeds its critical value.
    """
    n = len(values)
    edge = max(int(trim * n), 4)
    at = np.arange(edge, n - edge)
    seen = np.isfinite(values)
    if len(at) == 0 or seen.sum() < regressors.shape[1] + 4:
        return None
    if len(at) > _MOST_DATES:
        at = at[np.linspace(0, len(at) - 1, _MOST_DATES).astype(int)]
    basis = np.linalg.qr(regressors[seen])[0]
    left = values[seen] - basis @ (basis.T @ values[seen])
    # Sums from each date on, of the residuals and of the basis, stand for the step columns themselves.
    start = np.searchsorted(np.flatnonzero(seen), at)
    ends = np.concatenate([np.cumsum(left[::-1])[::-1], [0.0]])[start]
    overlap = np.vstack([np.cumsum(basis[::-1], axis=0)[::-1], np.zeros(basis.shape[1])])[start]
    size = (seen.sum() - start) - (overlap**2).sum(axis=1)
    usable = size > 1e-8 * n
    fall = np.where(usable, ends**2 / np.where(usable, size, 1.0), 0.0)
    best = int(np.argmax(fall))
    degrees = int(seen.sum()) - regressors.shape[1] - 1
    rest = float(left @ left) - float(fall[best])
    floor = 1e-20 * float(np.nansum(values**2)) + 1e-300
    return DatedShift(int(at[best]), float(fall[best]) / (max(rest, floor) / degrees), len(at))
