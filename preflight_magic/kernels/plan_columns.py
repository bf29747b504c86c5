"""What the steps of a plan mean for a likelihood of what they leave: columns taken out, and the seasonal lag."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from preflight_magic.kernels.restricted_likelihood import difference, line_column, pattern_columns
from preflight_magic.model import Difference, RemovePattern, RemoveShift, RemoveTrend, Stamp, Step

Array = NDArray[np.float64]


_MOST_WORK = 2e7
"""Rows times squared number of columns beyond which they are left out of a likelihood."""


@dataclass(frozen=True)
class LikelihoodColumns:
    """What stands beside the ARMA model in the likelihood of a transformed series.

    Attributes
    ----------
    mean : bool
        A mean is estimated: nothing was removed with a constant, and fewer than two differences were taken.
    nuisance : ndarray, shape (rows, k), or None
        Indicators of the missing values; None where there are none or too many.
    fixed : ndarray, shape (rows, l), or None
        What the Remove steps took out; None where nothing or too much.
    gaps : {"none", "skipped", "filled"}
        What is done with missing values: skipped by the likelihood, or their fills taken for observations.
    """

    mean: bool
    nuisance: Array | None
    fixed: Array | None
    gaps: str


class Stamps(Protocol):
    """An index whose labels compare with a stamp."""

    def __len__(self) -> int: ...

    def __ge__(self, other: Stamp, /) -> NDArray[np.bool_]: ...


def removed_columns(steps: Sequence[Step], index: Stamps, rows: int) -> Array | None:
    """Columns of the Remove steps, differenced as the plan does, with the constant that goes with them.

    Parameters
    ----------
    steps : sequence of Step
    index : pandas.Index, shape (n,)
        Of the series before the plan.
    rows : int
        Values left after the plan.

    Returns
    -------
    ndarray, shape (rows, k), or None
        None without Remove steps. With gaps that the plan left open the rows do not match: then only the constant.
    """
    columns: list[Array] = []
    n = len(index)
    for step in steps:
        match step:
            case RemoveTrend():
                columns.append(line_column(n)[:, None])
            case RemoveShift(at=at):
                columns.append(np.asarray(index >= at, dtype=np.float64)[:, None])
            case RemovePattern(period=period):
                columns.append(pattern_columns(n, period))
            case _:
                pass
    if not columns:
        return None
    stacked = np.column_stack(columns)
    lags = [step.lag for step in steps if isinstance(step, Difference)]
    for lag in lags:
        stacked = difference(stacked, lag)
    if len(lags) < 2:
        stacked = np.column_stack([np.ones(len(stacked)), stacked])
    return stacked if len(stacked) == rows else np.ones((rows, int(len(lags) < 2)))


def likelihood_columns(
    steps: Sequence[Step], index: Stamps, rows: int, nuisance: Array | None = None
) -> LikelihoodColumns:
    """Columns of a transformed series that its likelihood allows for.

    Parameters
    ----------
    steps : sequence of Step
    index : pandas.Index, shape (n,)
        Of the series before the plan.
    rows : int
        Values left after the plan.
    nuisance : ndarray, shape (rows, k), optional
        Indicators of the missing values, differenced as the plan does.

    Returns
    -------
    LikelihoodColumns
    """
    fixed = removed_columns(steps, index, rows)
    mean = fixed is None and sum(isinstance(step, Difference) for step in steps) < 2
    gaps = "none"
    if nuisance is not None and nuisance.shape[1]:
        gaps = "skipped" if rows * nuisance.shape[1] ** 2 <= _MOST_WORK else "filled"
    if fixed is not None and rows * fixed.shape[1] ** 2 > _MOST_WORK:
        fixed = None
    return LikelihoodColumns(mean, nuisance if gaps == "skipped" else None, fixed, gaps)


def seasonal_lag(steps: Sequence[Step]) -> int:
    """Lag of the seasonal step of a plan, 1 without one."""
    for step in steps:
        match step:
            case Difference(lag=lag) if lag > 1:
                return lag
            case RemovePattern(period=period):
                return period
            case _:
                pass
    return 1
