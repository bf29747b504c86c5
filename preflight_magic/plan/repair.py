"""Filling gaps: what makes the values of a series complete. It is never undone."""

from __future__ import annotations

import numpy as np
import pandas as pd

from preflight_magic.model import FillGaps, Repair


def repaired(repairs: tuple[Repair, ...], x: pd.Series, history: pd.Series) -> pd.Series:
    """Values of `x` (float64 on a regular index that contains the history's) without gaps, where gaps are filled."""
    for repair in repairs:
        if isinstance(repair, FillGaps):
            x = fill_gaps(x, history, repair.period)
    return x


def fill_gaps(x: pd.Series, history: pd.Series, period: int) -> pd.Series:
    """Fill gaps on a straight line, after taking out the mean pattern of `period` values in the history.

    Gaps of the history are filled from the history alone; later ones from its pattern and the values beside them.
    What lies before the first or after the last observed value stays missing. Fills stay inside the range of the
    observed values, so that a positive series stays positive and a share stays within its bounds.

    Parameters
    ----------
    x : Series, shape (n,)
        float64, on a regular index that contains the index of `history`.
    history : Series, shape (m,)
        float64.
    period : int
        Values per cycle; with 1, or with fewer than two cycles of observed values, the line alone is used.

    Returns
    -------
    Series, shape (n,)
    """
    if not x.isna().any():
        return x
    known = history.reindex(x.index)
    seasonal = period > 1 and history.count() >= 2 * period
    pattern = _mean_pattern(known, period) if seasonal else np.zeros(len(x))
    inside = (known - pattern).interpolate(limit_area="inside") + pattern
    x = x.fillna(inside.clip(known.min(), known.max()))
    later = (x - pattern).interpolate(limit_area="inside") + pattern
    return x.fillna(later.clip(x.min(), x.max()))


def _mean_pattern(known: pd.Series, period: int) -> np.ndarray:
    """Mean deviation from the centred moving average at each position of the cycle, for every row of `known`.

    For an even period the average is the usual one of `period` + 1 terms with half weights at both ends. A position
    that is never observed gets the mean of the others.
    """
    smooth = known.interpolate(limit_area="inside").rolling(period, center=True).mean()
    if period % 2 == 0:
        smooth = smooth.rolling(2).mean().shift(-1)
    position = np.arange(len(known)) % period
    means = (known - smooth).groupby(position).mean()
    return np.asarray(means.fillna(means.mean()).to_numpy()[position])
