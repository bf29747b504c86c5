"""What the Remove steps take out: trend, shifts and patterns, estimated together by one least squares."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import pandas as pd

from preflight_magic.model import CheckError, Difference, RemovePattern, RemoveShift, RemoveTrend, Stamp, Step
from preflight_magic.plan.words import called
from preflight_magic.stamps import stamp_text

Array = npt.NDArray[np.float64]


@dataclass(frozen=True)
class Regressors:
    """Columns of the least squares that remain after differencing; false when there is none."""

    constant: bool = False
    trend: bool = False
    shifts: tuple[Stamp, ...] = ()
    patterns: tuple[int, ...] = ()

    def __bool__(self) -> bool:
        return self.constant or self.trend or bool(self.shifts) or bool(self.patterns)


def lags_of(steps: tuple[Step, ...]) -> tuple[int, ...]:
    """Lags of the differences, in their order."""
    return tuple(int(step.lag) for step in steps if isinstance(step, Difference))


def regressors(steps: tuple[Step, ...]) -> Regressors:
    """Columns that the Remove steps call for.

    With no difference or one a constant is among them, so that what remains has mean zero; with two or more it would
    extrapolate a quadratic. One difference turns a line into that constant, two into nothing, and a difference at a
    multiple of the period turns a pattern into nothing.
    """
    if not any(isinstance(step, RemoveTrend | RemoveShift | RemovePattern) for step in steps):
        return Regressors()
    lags = lags_of(steps)
    return Regressors(
        constant=len(lags) <= 1,
        trend=RemoveTrend() in steps and not lags,
        shifts=tuple(step.at for step in steps if isinstance(step, RemoveShift)),
        patterns=tuple(
            step.period for step in steps if isinstance(step, RemovePattern) and all(lag % step.period for lag in lags)
        ),
    )


def fixed_part(steps: tuple[Step, ...], known: pd.Series, given: pd.Series) -> Array:
    """Fitted trend, shifts and patterns at every row of `known`.

    Parameters
    ----------
    steps : tuple of Step
    known : Series, shape (n,)
        The history after point steps and differences, on the whole time axis: NaN where nothing is known.
    given : Series
        Names the series in errors.

    Returns
    -------
    ndarray, shape (n,)
        Zero where there is nothing to remove, NaN in the first rows where differencing loses them.

    Raises
    ------
    CheckError
        If the history has fewer values than there are numbers to estimate.
    """
    columns = regressors(steps)
    if not columns:
        return np.zeros(len(known))
    X = _design(columns, lags_of(steps), known.index, given)
    y = known.to_numpy()
    rows = np.isfinite(y) & np.isfinite(X).all(axis=1)
    if rows.sum() < X.shape[1]:
        raise CheckError(
            f"{called(given)} has {rows.sum()} values left in its history to estimate {X.shape[1]} numbers of mean, "
            "trend, shift and pattern from; give a longer history or leave a Remove step out."
        )
    # A shift outside the history has a column of zeros there, and no effect.
    X = X[:, np.abs(X[rows]).sum(axis=0) > 0]
    effects = np.linalg.lstsq(X[rows], y[rows], rcond=None)[0]
    return np.asarray(X @ effects)


def _design(columns: Regressors, lags: tuple[int, ...], index: pd.Index, given: pd.Series) -> Array:
    """Regressors on the time axis, differenced like the series; contrasts are whole numbers, so zeros stay exact."""
    n = len(index)
    t = np.arange(n)
    parts: list[Array] = []
    if columns.trend:
        parts.append((t / n)[:, None])
    parts.extend(_since(index, at, given)[:, None].astype("float64") for at in columns.shifts)
    for period in columns.patterns:
        position = t % period
        own = (position[:, None] == np.arange(period - 1)).astype("float64")
        parts.append(own - (position == period - 1)[:, None])
    X = np.hstack(parts) if parts else np.empty((n, 0))
    for lag in lags:
        X = np.vstack([np.full((min(lag, n), X.shape[1]), np.nan), X[lag:] - X[:-lag]])
    return np.hstack([np.ones((n, 1)), X]) if columns.constant else X


def _since(index: pd.Index, at: Stamp, given: pd.Series) -> npt.NDArray[np.bool_]:
    try:
        return np.asarray(index >= at, dtype=bool)
    except (TypeError, ValueError):
        raise CheckError(
            f"{called(given)} has an index of {index.dtype} values, which the shift from {stamp_text(at)} "
            f"({type(at).__name__}) does not fit; give the stamp in the kind of the index."
        ) from None
