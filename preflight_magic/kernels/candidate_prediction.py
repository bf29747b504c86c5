"""What each candidate plan of the comparison predicts, brought back to levels."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from preflight_magic.kernels.arma_parameters import Array, polynomials
from preflight_magic.kernels.plan_evidence import Candidate
from preflight_magic.kernels.prediction import predict, undo_differences
from preflight_magic.kernels.restricted_likelihood import difference, missing_columns, pattern_columns
from preflight_magic.kernels.whiten import NotPositiveDefiniteError

WINDOW = 20.0
"""Odds against the leading plan from which a plan is left out of an average: Occam's window of Madigan and Raftery
(1994), Model selection and accounting for model uncertainty in graphical models using Occam's window, Journal of the
American Statistical Association 89, 1535-1546."""


@dataclass(frozen=True)
class Ahead:
    """Distribution of levels ahead: Student's t about `mean`, scaled by the root of `variance`.

    Attributes
    ----------
    mean, variance : ndarray, shape (steps,)
    degrees : float
        Of freedom.
    """

    mean: Array
    variance: Array
    degrees: float


def within_window(evidence: Sequence[float]) -> tuple[tuple[int, float], ...]:
    """Positions of what the evidence (natural logarithms) does not rule out, with weights that sum to one."""
    best = max(evidence)
    kept = [place for place, one in enumerate(evidence) if one > best - np.log(WINDOW)]
    weights = np.exp([evidence[place] - best for place in kept])
    return tuple(zip(kept, (weights / weights.sum()).tolist(), strict=True))


def predict_candidate(
    candidate: Candidate, levels: Array, period: int, outliers: tuple[int, ...], steps: int
) -> Ahead | None:
    """Predict levels under one candidate plan and its leading ARMA model.

    Parameters
    ----------
    candidate : Candidate
    levels : ndarray, shape (n,)
        After steps on single values, such as a log; NaN where missing, the last one observed.
    period : int
        Seasonal period of the comparison.
    outliers : tuple of int
        Positions that the comparison left out. They are left out here too, and since others may come, their squared
        distance from the line between their neighbours, spread over all values, is added to the variance.
    steps : int

    Returns
    -------
    Ahead or None
        None where too few values are left, or its coefficients lie on the boundary.
    """
    n = len(levels)
    kept = np.asarray(levels, dtype=float).copy()
    kept[list(outliers)] = np.nan
    seen = np.isfinite(kept)
    filled = np.where(seen, kept, np.interp(np.arange(n), np.flatnonzero(seen), kept[seen]))
    apart = [float(levels[place] - filled[place]) ** 2 for place in outliers if np.isfinite(levels[place])]
    columns = _columns(candidate, n + steps, period, missing_columns(kept))
    lags = (period,) * candidate.D + (1,) * candidate.d
    chain = [filled]
    for lag in lags:
        chain.append(difference(chain[-1], lag))
        columns = difference(columns, lag)
    values = chain[-1]
    degrees = len(values) - columns.shape[1] - candidate.order.size
    if degrees < 1:
        return None
    ar, ma = polynomials(candidate.order, candidate.coefficients)
    try:
        found = predict(ar, ma, values, steps, columns=columns, differences=lags)
    except NotPositiveDefiniteError:
        return None
    mean = found.mean
    for level, lag in reversed(list(zip(chain, lags, strict=False))):
        mean = undo_differences(mean, lag, level)
    variance = found.variance(len(values), candidate.order.size, degrees) + sum(apart) / n
    return Ahead(mean, variance, float(degrees))


def _columns(candidate: Candidate, rows: int, period: int, gaps: Array) -> Array:
    """Regressors in levels over past and future, without those that the differences annihilate."""
    parts = [np.vstack([gaps, np.zeros((rows - len(gaps), gaps.shape[1]))])]
    if candidate.d + candidate.D == 0:
        parts.append(np.ones((rows, 1)))
    if candidate.trend:
        parts.append((np.arange(rows) / rows)[:, None])
    if candidate.shift is not None:
        parts.append((np.arange(rows) >= candidate.shift).astype(float)[:, None])
    if candidate.pattern:
        parts.append(pattern_columns(rows, period))
    return np.column_stack(parts)
